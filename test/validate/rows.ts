// How far is an answer from the exact one, and does it keep the bounds?

import { type AbsorbAnswer, findAbsorption } from '../../src/questions/absorb.ts';
import type { CrossingsAnswer } from '../../src/questions/crossings.ts';
import type { AxisMode } from '../../src/questions/polish-crossing.ts';
import { type Assignment, findModes, type ModesAnswer } from '../../src/questions/modes.ts';
import type { Strategy } from '../../src/accuracy/refinement-plan.ts';
import { spaceOf } from '../../src/questions/prepare.ts';
import { findThresholds } from '../../src/questions/threshold.ts';
import type { Device } from '../../src/device/model.ts';
import type { Complex } from '../../src/numerics/complex.ts';

/** One line of the table. `error` must not exceed `bound`; where there is an estimate, not 3 × that either. */
export interface Row {
  readonly what: string;
  readonly exact: string;
  readonly computed: string;
  readonly error: number;
  readonly bound: number;
  /** What the program says of the error; NaN where it says nothing. */
  readonly estimate: number;
}

/** True error over estimate is never above this. */
export const LARGEST_RATIO = 3;

export const ratioOf = (row: Row): number => row.error / row.estimate;

export const keeps = (row: Row): boolean => row.error <= row.bound && !(ratioOf(row) > LARGEST_RATIO);

/** An exact pole. */
export interface ExactMode {
  readonly k: Complex;
  readonly multiplicity: number;
  readonly label: string;
}

export interface ModesCase {
  readonly device: Device;
  readonly exact: readonly ExactMode[];
  readonly digits: number;
  readonly qMin: number;
  /** Relative to |k|; 10^−digits if absent. */
  readonly bound?: number;
  /** Where the list is complete: a computed mode there that is not in the list breaks a bound. */
  readonly complete: (mode: { readonly k: Complex; readonly label: string }) => boolean;
  readonly assignment?: Assignment;
  /** Exact zeros of a device with losses are given as they are, else as conjugates of the poles. */
}

/** Every exact mode found once, with its multiplicity and label, and nothing else where the list is complete. */
export function modeRows(c: ModesCase): Row[] {
  const answer = findModes(c.device, { digits: c.digits, qMin: c.qMin, assignment: c.assignment ?? 'poles' });
  return [...answerRows(answer), ...matchRows(answer, c)];
}

/** The same poles at several digits, each to its promise, and how the number of unknowns grows from the first to the last. */
export function growthRows(c: Omit<ModesCase, 'digits'>, digits: readonly number[], mostGrowth: number): Row[] {
  const unknowns: number[] = [];
  const rows = digits.flatMap((d) => {
    const answer = findModes(c.device, { digits: d, qMin: c.qMin });
    unknowns.push(spaceOf(answer.prepared, answer.order).unknowns);
    const own = [...answerRows(answer), ...matchRows(answer, { ...c, digits: d })];
    return own.map((row) => ({ ...row, what: `digits ${d}: ${row.what}` }));
  });
  const growth = unknowns[unknowns.length - 1] / unknowns[0];
  rows.push({
    what: `unknowns ${unknowns.join(', ')}: last over first`,
    exact: `at most ${mostGrowth}`,
    computed: growth.toPrecision(3),
    error: growth,
    bound: mostGrowth,
    estimate: NaN,
  });
  return rows;
}

/** Two refinements of the same device that share neither mesh nor orders: each pair of modes within the sum of its errors. */
export function agreementRows(
  device: Device,
  request: Pick<ModesCase, 'digits' | 'qMin'>,
  strategies: readonly [Strategy, Strategy],
): Row[] {
  const [one, other] = strategies.map((strategy) => findModes(device, { ...request, strategy }));
  const rows = [...answerRows(one), ...answerRows(other), count('modes, as many', total(one), total(other))];
  for (const mode of one.modes) {
    const same = nearest(other.modes, mode.k);
    if (!same) continue;
    rows.push({
      what: `orders to ${strategies[0].highestOrder} against orders to ${strategies[1].highestOrder}`,
      exact: show(mode.k),
      computed: show(same.k),
      error: distance(mode.k, same.k),
      bound: mode.kError + same.kError,
      estimate: NaN,
    });
  }
  return rows;
}

const total = (answer: ModesAnswer): number => answer.modes.reduce((sum, m) => sum + m.multiplicity, 0);

/** Poles and zeros of a lossless device: both against the exact ones, and conjugate to each other. */
export function conjugateRows(c: ModesCase, conjugateBound: number): Row[] {
  const poles = findModes(c.device, { digits: c.digits, qMin: c.qMin, assignment: 'poles' });
  const zeros = findModes(c.device, { digits: c.digits, qMin: c.qMin, assignment: 'zeros' });
  const flipped = c.exact.map((e) => ({ ...e, k: { re: e.k.re, im: -e.k.im } }));
  const rows = [
    ...answerRows(poles),
    ...matchRows(poles, c),
    ...answerRows(zeros),
    ...matchRows(zeros, { ...c, exact: flipped, assignment: 'zeros' }),
    count('zeros, as many as poles', poles.modes.length, zeros.modes.length),
  ];
  for (const pole of poles.modes) {
    const zero = nearest(zeros.modes, { re: pole.k.re, im: -pole.k.im });
    if (!zero) continue;
    rows.push({
      what: `zero, conjugate of the pole ${pole.label}`,
      exact: show({ re: pole.k.re, im: -pole.k.im }),
      computed: show(zero.k),
      error: distance(zero.k, { re: pole.k.re, im: -pole.k.im }),
      bound: conjugateBound,
      estimate: NaN,
    });
  }
  return rows;
}

function answerRows(answer: ModesAnswer): Row[] {
  return [truth(`${answer.assignment}: window covered`, answer.covered), truth('digits reached', answer.reached)];
}

function matchRows(answer: ModesAnswer, c: ModesCase): Row[] {
  const rows: Row[] = [];
  const kind = c.assignment === 'zeros' ? 'zero' : 'pole';
  const taken = new Set<object>();
  for (const exact of c.exact) {
    const mode = nearest(
      answer.modes.filter((m) => !taken.has(m)),
      exact.k,
    );
    const size = Math.hypot(exact.k.re, exact.k.im);
    const bound = (c.bound ?? 10 ** -c.digits) * size;
    if (!mode || distance(mode.k, exact.k) > 1e-2 * size) {
      rows.push({
        what: `${kind} ${exact.label}`,
        exact: show(exact.k),
        computed: 'missing',
        error: Infinity,
        bound,
        estimate: NaN,
      });
      continue;
    }
    taken.add(mode);
    rows.push({
      what: `${kind} ${exact.label}`,
      exact: show(exact.k),
      computed: show(mode.k),
      error: distance(mode.k, exact.k),
      bound,
      estimate: mode.kError,
    });
    if (mode.multiplicity !== exact.multiplicity)
      rows.push(count(`multiplicity ${exact.label}`, exact.multiplicity, mode.multiplicity));
    if (exact.label !== '' && mode.label !== exact.label) {
      rows.push({ what: 'label', exact: exact.label, computed: `"${mode.label}"`, error: 1, bound: 0, estimate: NaN });
    }
  }
  for (const mode of answer.modes) {
    if (taken.has(mode) || !c.complete(mode)) continue;
    rows.push({
      what: `${kind} ${mode.label}`,
      exact: 'none',
      computed: show(mode.k),
      error: Infinity,
      bound: 0,
      estimate: mode.kError,
    });
  }
  return rows;
}

/** An exact crossing of the real axis. */
export interface ExactCrossing {
  readonly k: number;
  readonly level: number;
  readonly label: string;
  readonly multiplicity: number;
}

export interface CrossingCase {
  /** Its band holds the crossing. */
  readonly device: Device;
  readonly exact: ExactCrossing;
  readonly digits: number;
  readonly levelMax: number;
}

/** Absolute floor of the bound on D. */
const LEVEL_FLOOR = 1e-13;

export function thresholdRows(c: CrossingCase): Row[] {
  const answer = findThresholds(c.device, { digits: c.digits, levelMax: c.levelMax });
  return crossingRows('threshold', answer, c).rows;
}

/** k and loss of the absorbing twin, its forward checks on both meshes, and the power that comes in and stays. */
export function absorptionRows(c: CrossingCase): Row[] {
  const answer = findAbsorption(c.device, { digits: c.digits, levelMax: c.levelMax });
  const { rows, found } = crossingRows('absorption', answer, c);
  if (found) rows.push(...driveRows(found));
  return rows;
}

/** The same for every crossing of an answer. */
export function driveRows(mode: AbsorbAnswer['crossings'][number]): Row[] {
  const rows = [count('drives, one a member', mode.multiplicity, mode.drives.length)];
  for (const { sameMesh, ownMesh } of mode.drives) {
    for (const way of ['channels', 'scattered'] as const) {
      rows.push(
        share(`outgoing, same mesh, ${way}`, sameMesh[way].outgoing, 1e-10, NaN),
        // the amplitude follows the error of k, about 2Q δ/k: the same ratio holds for it
        share(
          `outgoing amplitude, own mesh, ${way}`,
          Math.sqrt(Math.abs(ownMesh[way].outgoing)),
          Infinity,
          Math.sqrt(mode.outgoingExpected),
        ),
        share(`energy balance, same mesh, ${way}`, sameMesh[way].balance, 1e-9, NaN),
        share(`energy balance, own mesh, ${way}`, ownMesh[way].balance, 1e-9, NaN),
      );
    }
  }
  return rows;
}

function crossingRows<M extends AxisMode>(
  what: string,
  answer: Omit<CrossingsAnswer, 'crossings'> & { readonly crossings: readonly M[] },
  { exact, digits }: CrossingCase,
): { rows: Row[]; found: M | null } {
  const rows: Row[] = [truth(`${what}: window covered`, answer.covered)];
  const lost = answer.others.filter((path) => path.ended === 'lost');
  rows.push(count(`${what}: paths lost`, 0, lost.length));
  let found: M | null = null;
  let best = 1e-2;
  for (const mode of answer.crossings) {
    const off = Math.hypot(mode.k / exact.k - 1, mode.level / exact.level - 1);
    if (off < best) [best, found] = [off, mode];
  }
  const name = `${what} ${exact.label}`.trim();
  if (!found) {
    rows.push({
      what: name,
      exact: `k ${exact.k}, D ${exact.level}`,
      computed: 'missing',
      error: Infinity,
      bound: 0,
      estimate: NaN,
    });
    return { rows, found };
  }
  const goal = 10 ** -digits;
  rows.push(
    {
      what: `${name}: k`,
      exact: String(exact.k),
      computed: String(found.k),
      error: Math.abs(found.k - exact.k),
      bound: goal * exact.k,
      estimate: found.kError,
    },
    {
      what: `${name}: D`,
      exact: String(exact.level),
      computed: String(found.level),
      error: Math.abs(found.level - exact.level),
      bound: Math.max(goal * exact.level, LEVEL_FLOOR),
      estimate: found.levelError,
    },
    count(`${name}: multiplicity`, exact.multiplicity, found.multiplicity),
    truth(`${name}: digits reached`, found.reached),
  );
  return { rows, found };
}

function share(what: string, value: number, bound: number, estimate: number): Row {
  return { what, exact: '0', computed: value.toExponential(2), error: Math.abs(value), bound, estimate };
}

function count(what: string, exact: number, computed: number): Row {
  return {
    what,
    exact: String(exact),
    computed: String(computed),
    error: Math.abs(exact - computed),
    bound: 0,
    estimate: NaN,
  };
}

function truth(what: string, holds: boolean): Row {
  return { what, exact: 'yes', computed: holds ? 'yes' : 'no', error: holds ? 0 : 1, bound: 0, estimate: NaN };
}

function nearest<M extends { readonly k: Complex }>(modes: readonly M[], k: Complex): M | null {
  let best: M | null = null;
  for (const mode of modes) if (!best || distance(mode.k, k) < distance(best.k, k)) best = mode;
  return best;
}

const distance = (a: Complex, b: Complex): number => Math.hypot(a.re - b.re, a.im - b.im);

const show = (k: Complex): string => `${k.re} ${k.im < 0 ? '-' : '+'} ${Math.abs(k.im)}i`;
