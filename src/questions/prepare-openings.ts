// From a checked device to matrices that end on openings: what scattering starts with.

import type { Resolution } from '../accuracy/resolution.ts';
import { guideEnds } from '../boundary/guide-modes.ts';
import { guideOpening, type Opening, rimOpening } from '../boundary/openings.ts';
import { guideDirection } from '../device/guides.ts';
import { type Device, type Guide, isWalled } from '../device/model.ts';
import { type ChannelPlace, type ClosedOpenings, closeOpenings } from '../operator/closed-openings.ts';
import { FIRST_OPENING } from '../mesh/mesh.ts';
import { deviceFamily, type LevelSense } from '../operator/device-family.ts';
import { openingFunctionals } from '../operator/opening-functionals.ts';
import { multipoleOrder } from '../scattering/contrast.ts';
import { prepare, type Prepared, type Scope } from './prepare.ts';

/** A channel of a device: one wave of one opening. */
export interface DeviceChannel extends ChannelPlace {
  /** "left.0" for mode 0 of the guide left, "open.cos2" for a multipole of open space. */
  readonly name: string;
}

/** A device with openings, ready to be assembled at any order. */
export interface PreparedOpenings {
  readonly prepared: Prepared;
  readonly openings: readonly Opening[];
  readonly channels: readonly DeviceChannel[];
  /** The closed problem of an order, made once for each sense of the level. */
  closed(order: number, sense: LevelSense): ClosedOpenings;
}

/**
 * Meshes the device up to its openings. Channels: of a guide the modes it names, or all that propagate at the top of the
 * scope; of open space the multipoles |m| ≤ `multipoles`, or those that the bodies see there.
 *
 * @throws RangeError for a device without openings.
 */
export function prepareOpenings(
  device: Device,
  scope: Scope,
  resolution: Resolution,
  refine = 1,
  multipoles?: number,
): PreparedOpenings {
  const openings = openingsOf(device);
  if (openings.length === 0) throw new RangeError('the device is closed: expected guides, or open space around it');
  const prepared = prepare(device, scope, resolution, refine, undefined, 'openings');
  const channels = openings.flatMap((opening, o): DeviceChannel[] => {
    const count = channelCount(device, opening, o, prepared, scope, multipoles);
    return Array.from({ length: count }, (_, index) => ({ name: opening.channelName(index), opening: o, index }));
  });
  const made = new Map<string, ClosedOpenings>();
  return {
    prepared,
    openings: openings.map((make) => withRim(make, prepared)),
    channels,
    closed(order, sense) {
      const key = `${order} ${sense}`;
      let closed = made.get(key);
      if (!closed) {
        const operator = prepared.operator(order);
        const functionals = openings.map((opening, o) => {
          const own = channels.filter((c) => c.opening === o).length;
          return openingFunctionals(operator.space, withRim(opening, prepared), own);
        });
        closed = closeOpenings(device, deviceFamily(device, operator, sense), functionals, channels);
        made.set(key, closed);
      }
      return closed;
    },
  };
}

const indexOf = (device: Device): number => Math.sqrt(device.background.permittivity * device.background.permeability);

/** Openings in the order of their tags; the rim's radius is known only with the mesh. */
function openingsOf(device: Device): Opening[] {
  const index = indexOf(device);
  if (isWalled(device))
    return (device.guides ?? []).map((guide, i) =>
      guideOpening({
        name: guide.name,
        tag: FIRST_OPENING + i,
        from: guide.from,
        direction: guideDirection(guide),
        width: guide.width,
        ends: guideEnds(device.polarization, guide.wall),
        length: guide.length,
        reference: guide.reference,
        index,
        parity: axisParity(device, guide),
      }),
    );
  return [rimFor(device, [0, 0], 1)];
}

function rimFor(device: Device, center: readonly [number, number], radius: number): Opening {
  const parity = Object.fromEntries((device.symmetry ?? []).map(({ across, parity: p }) => [across, p]));
  return rimOpening({ tag: FIRST_OPENING, center, radius, index: indexOf(device), parity });
}

const withRim = (opening: Opening, { device, mesh }: Prepared): Opening =>
  isWalled(device) ? opening : rimFor(device, mesh.center, mesh.rimRadius);

/** Parity of the guide's modes when a symmetry line is its axis. */
function axisParity(device: Device, guide: Guide): 'even' | 'odd' | null {
  for (const { across, at, parity } of device.symmetry ?? []) {
    const [dx, dy] = guideDirection(guide);
    const along = across === 'x' ? Math.abs(dx) : Math.abs(dy);
    const offset = Math.abs((across === 'x' ? guide.from[0] : guide.from[1]) - at);
    if (along < 1e-12 && offset < 1e-9 * guide.width) return parity;
  }
  return null;
}

function channelCount(
  device: Device,
  opening: Opening,
  o: number,
  prepared: Prepared,
  scope: Scope,
  multipoles?: number,
): number {
  if (!isWalled(device)) {
    const M = multipoles ?? multipoleOrder(device, prepared.bodyRadius, scope.kMax);
    const last = `${M}`;
    let count = 0;
    while (Number(/\d+$/.exec(opening.channelName(count))![0]) <= Number(last)) count++;
    return count;
  }
  const given = device.guides![o].modes;
  if (given !== null) return given;
  let count = 0;
  while (opening.propagates(count, scope.kMax)) count++;
  return count;
}
