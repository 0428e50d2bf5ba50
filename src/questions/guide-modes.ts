// Where does a device with guides resonate?

import { stopBefore } from '../accuracy/memory.ts';
import { totalError } from '../accuracy/mode-ladder.ts';
import { remainingChange } from '../accuracy/remaining-change.ts';
import { DEFAULT_DIGITS, HIGHEST_ORDER, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { embed } from '../elements/space.ts';
import { type Complex, type ComplexArray, modulus, subtract } from '../numerics/complex.ts';
import type { Assignment } from '../operator/closed-openings.ts';
import { type ClosedGroup, refineClosedGroup } from './closed-newton.ts';
import { assignmentOf, inputsOf, searchBand } from './match.ts';
import {
  DEFAULT_Q_MIN,
  HIGHEST_Q,
  type Mode,
  type ModesAnswer,
  type ModesRequest,
  parityLabels,
} from './mode-answer.ts';
import { type PreparedOpenings, prepareOpenings } from './prepare-openings.ts';

/**
 * All poles (zeros) with real part in the device's band and Q ≥ qMin of a device whose guides are closed exactly, wave by
 * wave: there is no layer, and waves below their cutoff decay whatever the assignment. Orders rise until k has its digits.
 */
export function findGuideModes(device: Device, request: ModesRequest): ModesAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const qMin = request.qMin ?? DEFAULT_Q_MIN;
  const side = request.assignment ?? 'poles';
  const { progress } = request;
  const { kMin, kMax } = device.band;
  const slope = 1 / (2 * qMin);
  const scope = { kMin, kMax, slope };
  const resolution = resolutionFor(digits);
  progress?.('meshing', 0);
  const openings = prepareOpenings(device, scope, resolution);
  const inputs = side === 'poles' ? [] : openings.openings.map((o) => o.name);
  const assignment = assignmentOf(openings, inputsOf(openings, inputs));
  const { ks, covered } = searchBand(device, inputs, 'loss', scope, progress);

  let order = Math.max(2, resolution.order - 1);
  const first = order;
  let below = new Map<Complex, Climb>();
  for (;;) {
    const found = new Map<Complex, Climb>();
    ks.forEach((near, i) => {
      progress?.(`order ${order}`, i / ks.length);
      const last = below.get(near);
      const group = groupAt(openings, assignment, order, near, last?.group);
      if (group && modulus(subtract(group.k, near)) <= FARTHEST * modulus(near))
        found.set(near, { group, steps: last ? [...last.steps, stepFrom(last.group, group)] : [] });
    });
    const rows = [...found.values()]
      .filter(({ group: { k } }) => k.re >= kMin && k.re <= kMax && Math.abs(k.im) <= slope * k.re)
      .map(({ group, steps }) => ({ group, error: remaining(steps) + group.spread }));
    const reached = rows.every(({ group, error }) => error <= 10 ** -digits * modulus(group.k));
    const { mesh } = openings.prepared;
    const orders = new Int32Array(mesh.regions.length).fill(order);
    const top = order + 1 >= HIGHEST_ORDER ? 'order' : stopBefore(request.limits ?? {}, mesh, orders);
    if ((order >= first + 2 && reached) || top) {
      const modes = distinct(rows).map(({ group, error }) => describe(device, group, error));
      const { prepared } = openings;
      return {
        modes,
        assignment: side,
        dropped: [],
        covered: covered && found.size === ks.length,
        complete: null,
        reached,
        stopped: reached ? null : top,
        digits,
        qMin,
        order,
        prepared,
      };
    }
    below = found;
    order++;
  }
}

/** A candidate of the search moves by no more, relative. */
const FARTHEST = 0.05;

function groupAt(
  openings: PreparedOpenings,
  assignment: Assignment,
  order: number,
  near: Complex,
  below: ClosedGroup | undefined,
): ClosedGroup | null {
  const closed = openings.closed(order, 'loss');
  const spaceAt = (p: number) => openings.closed(p, 'loss').family.operator.space;
  const start: ComplexArray | null = below
    ? embed(spaceAt(order), spaceAt(order - 1), below.vectors.slice(0, below.vectors.length / below.multiplicity))
    : null;
  return refineClosedGroup(closed, 0, assignment, below?.k ?? near, start);
}

/** A group and how far its k moved with each order. */
interface Climb {
  readonly group: ClosedGroup;
  readonly steps: readonly number[];
}

/** Infinite where the group was of another size. */
const stepFrom = (below: ClosedGroup, group: ClosedGroup): number =>
  below.multiplicity === group.multiplicity ? modulus(subtract(below.k, group.k)) : Infinity;

/** Error after the last step; unknown before there are two. */
function remaining(steps: readonly number[]): number {
  if (steps.length < 2) return Infinity;
  const [before, last] = steps.slice(-2);
  return last * remainingChange(before, last);
}

/** Candidates that came to the same group count once. */
function distinct(rows: readonly { readonly group: ClosedGroup; readonly error: number }[]) {
  const out: { readonly group: ClosedGroup; readonly error: number }[] = [];
  for (const row of rows) {
    const same = (o: (typeof out)[0]): boolean =>
      modulus(subtract(o.group.k, row.group.k)) <= SAME * modulus(row.group.k) + 3 * Math.min(o.error, row.error);
    if (!out.some(same)) out.push(row);
  }
  return out.sort((a, b) => a.group.k.re - b.group.k.re);
}

const SAME = 1e-9;

function describe(device: Device, { k, multiplicity, vectors }: ClosedGroup, step: number): Mode {
  const size = modulus(k);
  const error = { discretization: Math.min(step, size), boundary: 0, algebra: 1e-14 * size };
  const kError = totalError(error);
  const width = Math.max(Math.abs(k.im), k.re / (2 * HIGHEST_Q));
  const q = k.re / (2 * width);
  const n = vectors.length / multiplicity;
  return {
    k,
    error,
    kError,
    q,
    qError: q * Math.min(1, kError / width),
    multiplicity,
    label: parityLabels(device).join(', '),
    layerShare: 0,
    layerSensitivity: 0,
    vectors: Array.from({ length: multiplicity }, (_, i) => vectors.slice(n * i, n * (i + 1))),
    multipoles: new Float64Array(0),
    farField: new Float64Array(0),
  };
}
