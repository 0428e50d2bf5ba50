// Where does a device resonate? Poles, or zeros, in a window of complex k.

import { countedSearch, isCountable } from '../accuracy/completeness.ts';
import { climbModes, type FoundMode, groupWidth, totalError } from '../accuracy/mode-ladder.ts';
import { returnedToMode } from '../accuracy/layer-return.ts';
import { DEFAULT_DIGITS, startResolution } from '../accuracy/resolution.ts';
import { metals } from '../device/metals.ts';
import { type Device, isWalled } from '../device/model.ts';
import type { Wedge } from '../eigen/window.ts';
import type { Complex, ComplexArray } from '../numerics/complex.ts';
import { farField } from '../scattering/amplitudes.ts';
import { multipoleOrder, type Multipoles } from '../scattering/contrast.ts';
import { rimMultipoles } from '../scattering/rim-waves.ts';
import { modeLabel } from './label.ts';
import { findGuideModes } from './guide-modes.ts';
import {
  type Assignment,
  DEFAULT_Q_MIN,
  HIGHEST_Q,
  type Mode,
  type ModesAnswer,
  type ModesRequest,
  parityLabels,
} from './mode-answer.ts';
import type { Progress } from './progress.ts';
import { expectedModes } from './mode-count.ts';
import { groundOf, type Prepared, prepare, spaceOf } from './prepare.ts';

export { DEFAULT_Q_MIN };
export type { Assignment, Mode, ModesAnswer, ModesRequest, Progress };

/**
 * All poles (zeros) with real part in the device's band and Q ≥ qMin, each with its error.
 *
 * @throws RangeError for digits outside 2 … 11 or a qMin below 0.5.
 * @example
 * const answer = findModes(readDevice(text, 'disk.yaml'), { digits: 8 });
 * for (const mode of answer.modes) print(mode.k.re, mode.kError, mode.q);
 */
export function findModes(device: Device, request: ModesRequest = {}): ModesAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const qMin = request.qMin ?? DEFAULT_Q_MIN;
  const assignment = request.assignment ?? 'poles';
  if (!(qMin >= 0.5)) throw new RangeError(`the lowest Q came as ${qMin}; expected 0.5 or more`);
  if ((device.guides ?? []).length > 0) return findGuideModes(device, request);
  const resolution = startResolution(digits);
  const { kMin, kMax } = device.band;
  const wedge = wedgeFor(device, assignment, kMin, kMax, 1 / (2 * qMin), 10 ** -digits);
  request.progress?.('meshing', 0);
  const start = prepare(device, { kMin, kMax, slope: 1 / (2 * qMin) }, resolution);
  const direction = assignment === 'poles' ? 'outgoing' : 'incoming';
  const counted = isCountable(device) ? countedSearch(device, start.layer, groupWidth(digits, kMax) / kMax) : null;
  const search = climbModes(groundOf(start, direction, 'gain'), {
    wedge,
    level: 0,
    digits,
    layer: start.layer,
    expected: expectedModes(device),
    ...(counted ? { prove: (family, window, found) => counted.search(family, { ...window, find: () => found }) } : {}),
    ...(request.progress ? { progress: request.progress } : {}),
    ...(request.limits ? { limits: request.limits } : {}),
    ...(request.strategy ? { strategy: request.strategy } : {}),
  });
  const { prepared, order } = search.ground.prepared(search.orders);
  const modes = search.modes.map((found, i) => {
    request.progress?.('far fields', i / search.modes.length);
    return describeMode(prepared, order, found, assignment);
  });
  return {
    modes,
    assignment,
    dropped: search.dropped,
    covered: search.covered,
    complete:
      counted?.judge(
        wedge,
        search.modes.map((m) => m.group),
      ) ?? null,
    reached: search.reached,
    stopped: search.stopped,
    digits,
    qMin,
    order,
    prepared,
  };
}

/**
 * Poles of passive devices lie below the axis; zeros lie on either side of it as soon as there is loss. `sliver` is what
 * the discretisation may lift a mode of very high Q across the axis by, relative.
 */
export function wedgeFor(
  device: Device,
  assignment: Assignment,
  kMin: number,
  kMax: number,
  slope: number,
  sliver = 1e-9,
): Wedge {
  const gain = device.bodies.some((b) => b.permittivity.im < 0 || b.permeability.im < 0);
  const loss = metals(device).length > 0 || device.bodies.some((b) => b.permittivity.im > 0 || b.permeability.im > 0);
  return assignment === 'poles'
    ? { kMin, kMax, low: slope, high: gain ? slope : sliver }
    : { kMin, kMax, low: loss ? slope : sliver, high: slope };
}

function describeMode(prepared: Prepared, order: number, found: FoundMode, assignment: Assignment): Mode {
  const { group, layer } = found;
  const { k, vectors, multiplicity } = group;
  const n = vectors.length / (2 * multiplicity);
  const members = Array.from({ length: multiplicity }, (_, i) => vectors.slice(2 * n * i, 2 * n * (i + 1)));
  const all = outsideOf(prepared, order, k, assignment, members);
  const error = all
    ? { ...found.error, boundary: 2 * Math.abs(k.im) * returnedToMode(prepared.layer, k, all) }
    : found.error;
  const kError = totalError(error);
  const width = Math.max(Math.abs(k.im), k.re / (2 * HIGHEST_Q));
  return {
    k,
    error,
    kError,
    q: k.re / (2 * width),
    qError: (k.re / (2 * width)) * Math.min(1, kError / width),
    multiplicity,
    label: [...(all ? [modeLabel(all)] : []), ...parityLabels(prepared.device)]
      .filter((text) => text !== '')
      .join(', '),
    layerShare: layer.share,
    layerSensitivity: layer.sensitivity,
    vectors: members,
    multipoles: all?.[0] ?? new Float64Array(0),
    farField: all ? farField(all[0]) : new Float64Array(0),
  };
}

/** Multipoles of all members outside an open device; null where walls or symmetry lines leave no full rim. */
function outsideOf(
  prepared: Prepared,
  order: number,
  k: Complex,
  assignment: Assignment,
  members: readonly ComplexArray[],
): readonly Multipoles[] | null {
  const { device, bodyRadius } = prepared;
  if (isWalled(device) || device.symmetry) return null;
  const M = multipoleOrder(device, bodyRadius, Math.hypot(k.re, k.im));
  return rimMultipoles(device, spaceOf(prepared, order), k, assignment === 'poles' ? 1 : 2, M, members);
}
