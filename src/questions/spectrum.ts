// What is the S-matrix on thousands of points, from a few full solves?

import { remainingChange } from '../accuracy/remaining-change.ts';
import { DEFAULT_DIGITS, HIGHEST_ORDER, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { complex, type ComplexArray } from '../numerics/complex.ts';
import { hermitianEigen } from '../numerics/hermitian.ts';
import { singularValues } from '../numerics/singular-values.ts';
import type { ClosedOpenings } from '../operator/closed-openings.ts';
import { certifiedError, residualError, roundingSeen } from '../projected/certified-error.ts';
import { delayTrace } from '../projected/model-waves.ts';
import { type ModelSolver, modelSolver } from '../projected/pole-residue.ts';
import type { ModelPole, ScatteringModel } from '../projected/scattering-model.ts';
import { qOf, sharpPoles } from '../projected/sharp-poles.ts';
import { projectScattering, type ScatteringProjection } from '../scattering/project-scattering.ts';
import type { Progress } from './progress.ts';
import { type DeviceChannel, type PreparedOpenings, prepareOpenings } from './prepare-openings.ts';

export interface SpectrumRequest {
  readonly digits?: number;
  /** Channels of open space: |m| up to this; absent: those that the bodies see. */
  readonly multipoles?: number;
  /** Names of channels: the smallest singular value of S between them is reported. */
  readonly inputs?: readonly string[];
  /** Points added about every resonance that the given points would miss; true if absent. */
  readonly resolve?: boolean;
  readonly progress?: Progress;
}

/** S at one real k. */
export interface SpectrumPoint {
  readonly k: number;
  /** Put in to resolve a sharp resonance. */
  readonly added: boolean;
  /** n × n column-major interleaved, as in `ScatterPoint`. */
  readonly matrix: ComplexArray;
  /** Of the entries: discretisation and model together. */
  readonly error: number;
  /** Of the model alone, against the full solve on the same mesh. */
  readonly modelError: number;
  readonly propagates: readonly boolean[];
  /** Share of unit power into each channel that does not come out. */
  readonly absorbed: Float64Array;
  /** Largest and smallest share absorbed that any drive of the propagating channels can reach. */
  readonly best: number;
  readonly worst: number;
  /** Sum of the delays of all eigenchannels, Re tr(−iS†dS/dk), as a length of vacuum. */
  readonly delay: number;
  /** Smallest singular value of S between the inputs asked for. */
  readonly smallest: number | null;
  readonly unitarity: number | null;
  readonly reciprocity: number;
}

export interface SpectrumAnswer {
  readonly channels: readonly DeviceChannel[];
  readonly points: readonly SpectrumPoint[];
  readonly order: number;
  readonly digits: number;
  /** All errors are below the digits asked for. */
  readonly reached: boolean;
  readonly openings: PreparedOpenings;
  readonly model: ScatteringModel;
  /** Sharp resonances of the model with Q, and what the order below moves them by. */
  readonly poles: readonly (ModelPole & { readonly orderShift: number })[];
  /** Sparse factorizations, by purpose. */
  readonly factorizations: { readonly order: number; readonly witnesses: number; readonly snapshots: number };
  /** Goal of the model's error. */
  readonly goal: number;
}

/** Snapshots that are made at most. */
const MOST_SNAPSHOTS = 40;
/** Places where the error is looked at while the model grows. */
const LOOKS = 61;
/** Sharp resonances gain less from an order than the S between them: measured 1/14 where that gains 1/80. */
const LEAST_REST = 0.1;
/** Resonances with a lower Q are never sharp. */
const LEAST_Q = 100;
/** From this Q on a resonance gets a snapshot of its own. */
const SHARP = 1000;
/** Resonances narrower than this share of k are not resolved. */
const FINEST = 1e-10;
/** Sharp resonances that are resolved at most. */
const MOST_POLES = 60;
/** Parts of the band for the last evaluation. */
const PIECES = 4;

/**
 * S-matrices at the given real k from a projected model. The order is settled as in `findScattering`; its last solves are
 * the first snapshots. Then snapshots join where the estimated error is largest, and one at every sharp resonance, until
 * the estimate is a tenth of the digits' tolerance at every point.
 *
 * @throws RangeError for a device without openings, or fewer than two different k > 0.
 */
export function findSpectrum(device: Device, ks: readonly number[], request: SpectrumRequest = {}): SpectrumAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const { progress, multipoles, inputs, resolve = true } = request;
  const grid = [...new Set(ks)].sort((a, b) => a - b);
  if (grid.length < 2 || !(grid[0] > 0) || !Number.isFinite(grid[grid.length - 1]))
    throw new RangeError(`${grid.length} points from ${grid[0]}; expected two or more different k > 0`);
  const [kMin, kMax] = [grid[0], grid[grid.length - 1]];
  const resolution = resolutionFor(digits);
  progress?.('meshing', 0);
  const openings = prepareOpenings(device, { kMin, kMax, slope: 0.05 }, resolution, 1, multipoles);
  const chosen = inputs ? channelNumbers(openings.channels, inputs) : null;
  const goal = 10 ** -(digits + 1);

  const probes = [kMin, (kMin + kMax) / 2, kMax];
  const settled = settleOrder(openings, probes, resolution.order, 10 ** -digits, progress);
  let { order } = settled;
  let closed = openings.closed(order, 'loss');
  progress?.('projecting', 0);
  const start = (): ScatteringProjection =>
    projectScattering(closed, { kMin, kMax, channels: openings.channels, tolerance: 1e-6 * goal });
  let projection = start();
  let seen: Seen[] = probes.map((k, i) => ({ k, matrix: settled.matrices[i] }));
  probes.forEach((k, i) => projection.add(settled.fields[i], k));
  let poles = growModel(closed, projection, seen, grid, goal, progress);
  let snapshots = projection.model().snapshots.length - probes.length;

  // sharp resonances ask for more than what lies between them
  const moved = (): number =>
    Math.max(
      0,
      ...poles.map((p) => (p.height * settled.rest * projection.orderShift(p.vector, p.k)) / Math.abs(p.k.im)),
    );
  const raise = Math.ceil(Math.log10(moved() * 10 ** digits));
  if (raise > 0 && order + 1 < HIGHEST_ORDER) {
    order = Math.min(HIGHEST_ORDER - 1, order + raise);
    closed = openings.closed(order, 'loss');
    const again = projection.model().snapshots;
    projection = start();
    seen = [];
    again.forEach((k, i) => {
      progress?.(`order ${order}`, i / again.length);
      const { fields, matrix } = closed.scatter(complex(k), 0);
      projection.add(fields, k);
      seen.push({ k, matrix });
    });
    poles = growModel(closed, projection, seen, grid, goal, progress);
    snapshots += projection.model().snapshots.length;
  }

  const step = (kMax - kMin) / (grid.length - 1);
  const places = resolve ? withResonances(grid, poles, step) : grid.map((k) => ({ k, added: false }));
  const model = withRounding(projection.model(), poles, seen);
  const shifted = poles.map((pole) => ({ ...pole, orderShift: projection.orderShift(pole.vector, pole.k) }));
  const { error, rest } = settled;
  const points = evaluate({ model, poles: shifted, places, base: error, rest, chosen, progress });
  return {
    channels: openings.channels,
    points,
    order,
    digits,
    reached: points.every((point) => point.error <= 10 ** -digits),
    openings,
    model,
    poles: shifted,
    factorizations: { order: settled.factorizations, witnesses: order === settled.order ? 1 : 2, snapshots },
    goal,
  };
}

function channelNumbers(channels: readonly DeviceChannel[], names: readonly string[]): number[] {
  return names.map((name) => {
    const i = channels.findIndex((c) => c.name === name);
    if (i < 0) throw new RangeError(`channel ${name}; expected one of ${channels.map((c) => c.name).join(', ')}`);
    return i;
  });
}

interface SettledOrder {
  readonly order: number;
  /** Fields of unit drives at the probes, at that order. */
  readonly fields: readonly ComplexArray[];
  readonly matrices: readonly ComplexArray[];
  /** Largest change from the order below at any probe, times what remains. */
  readonly error: number;
  readonly rest: number;
  readonly factorizations: number;
}

/** Raises the order until two orders agree at the probes; each is solved once. */
function settleOrder(
  openings: PreparedOpenings,
  probes: readonly number[],
  first: number,
  goal: number,
  progress?: Progress,
): SettledOrder {
  let factorizations = 0;
  const solve = (order: number) => {
    progress?.(`order ${order}`, 0);
    factorizations += probes.length;
    return probes.map((k) => openings.closed(order, 'loss').scatter(complex(k), 0));
  };
  let [low, mid] = [solve(first - 1), solve(first)];
  for (let order = first + 1; ; order++) {
    const high = solve(order);
    const changes = probes.map((_, i) => [
      difference(low[i].matrix, mid[i].matrix),
      difference(mid[i].matrix, high[i].matrix),
    ]);
    const rest = Math.max(...changes.map(([before, last]) => remainingChange(before, last)));
    const error = rest * Math.max(...changes.map(([, last]) => last));
    if (error <= goal || order + 1 >= HIGHEST_ORDER)
      return {
        order,
        fields: high.map((h) => h.fields),
        matrices: high.map((h) => h.matrix),
        error,
        rest: Math.max(rest, LEAST_REST),
        factorizations,
      };
    [low, mid] = [mid, high];
  }
}

/** S of a full solve whose fields have joined the basis. */
interface Seen {
  readonly k: number;
  readonly matrix: ComplexArray;
}

/** Model and full solve differ at the snapshots by rounding only. */
function withRounding(model: ScatteringModel, poles: readonly ModelPole[], seen: readonly Seen[]): ScatteringModel {
  const sharp = poles.map(({ k, error }) => ({ k, error }));
  const solver = modelSolver(model);
  const differences = seen.map(({ k, matrix }) => ({ k, difference: difference(solver.at(k).S, matrix) }));
  return { ...model, poles: sharp, rounding: roundingSeen(sharp, differences) };
}

/** Snapshots until the estimate is below the goal wherever it is looked at, sharp resonances included. */
function growModel(
  closed: ClosedOpenings,
  projection: ScatteringProjection,
  seen: Seen[],
  grid: readonly number[],
  goal: number,
  progress?: Progress,
): readonly ModelPole[] {
  const [kMin, kMax] = [grid[0], grid[grid.length - 1]];
  const looks = Array.from({ length: LOOKS }, (_, i) => kMin + ((kMax - kMin) * (i + 0.5)) / LOOKS);
  const qMin = Math.max(LEAST_Q, ((kMin + kMax) / 2) * ((grid.length - 1) / (kMax - kMin)) * 0.25);
  const taken: number[] = Array.from(projection.model().snapshots);
  const take = (k: number, solver: ModelSolver, estimate: number, pole?: ModelPole): void => {
    const mode = pole && closed.multiplyInto(new Float64Array(2 * closed.family.size), complex(k), 0, 'byK', projection.field(pole.vector)); // prettier-ignore
    const { matrix, fields } = closed.scatter(complex(k), 0, mode);
    // what the estimate was worth here, before the snapshot joins
    if (estimate > 1e-9) projection.compare(difference(solver.at(k).S, matrix) / estimate);
    projection.add(fields, k);
    seen.push({ k, matrix });
    // one inverse iteration with the same factorization: channels may hardly drive the mode
    if (mode) projection.addField(mode);
    taken.push(k);
    progress?.(`snapshot ${taken.length}, basis ${projection.size}`, 0);
  };
  for (;;) {
    let solver = modelSolver(projection.model());
    for (;;) {
      const { k, estimate } = worstOf(solver, [], looks);
      if (estimate * solver.model.ratio <= goal || taken.length >= MOST_SNAPSHOTS) break;
      take(k, solver, estimate);
      solver = modelSolver(projection.model());
    }
    const poles = strongestPoles(solver, Math.min(qMin, SHARP), goal);
    const near = poles.flatMap(({ k }) => [-1, -0.5, 0, 0.5, 1].map((x) => k.re + 2 * x * Math.abs(k.im)));
    const inside = near.filter((x) => x >= kMin && x <= kMax);
    const { k, estimate } = worstOf(solver, poles, [...looks, ...inside]);
    const lonely = poles.filter((pole) => qOf(pole.k) >= SHARP && !taken.some((t) => isAt(t, pole)));
    const done = estimate * solver.model.ratio <= goal && lonely.length === 0;
    if (done || taken.length >= MOST_SNAPSHOTS) return poles;
    if (lonely.length === 0) take(k, solver, estimate);
    for (const pole of lonely) {
      // one of a pair has served the other
      if (taken.some((t) => isAt(t, pole))) continue;
      take(pole.k.re, solver, worstOf(solver, poles, [pole.k.re]).estimate, pole);
    }
  }
}

const isAt = (k: number, { k: pole }: ModelPole): boolean =>
  Math.abs(k - pole.re) < Math.max(Math.abs(pole.im), FINEST * pole.re);

/** Those that S shows. */
const strongestPoles = (solver: ModelSolver, qMin: number, goal: number): ModelPole[] =>
  sharpPoles(solver.model, qMin, solver.source)
    .filter((pole) => pole.height > goal)
    .sort((a, b) => qOf(b.k) - qOf(a.k))
    .slice(0, MOST_POLES)
    .sort((a, b) => a.k.re - b.k.re);

function worstOf(
  solver: ModelSolver,
  poles: readonly ModelPole[],
  looks: readonly number[],
): { k: number; estimate: number } {
  let worst = { k: looks[0], estimate: -1 };
  for (const k of looks) {
    const estimate = residualError(poles, k, solver.at(k, { estimate: true }).estimate!);
    if (estimate > worst.estimate) worst = { k, estimate };
  }
  return worst;
}

/** The given points and, about each resonance narrower than four steps, points at equal steps of its phase. */
function withResonances(
  grid: readonly number[],
  poles: readonly ModelPole[],
  step: number,
): { readonly k: number; readonly added: boolean }[] {
  const out = new Map<number, boolean>(grid.map((k) => [k, false]));
  const [kMin, kMax] = [grid[0], grid[grid.length - 1]];
  for (const { k } of poles) {
    const half = Math.abs(k.im);
    if (2 * half > 4 * step || half < FINEST * k.re) continue;
    const offsets: number[] = [];
    for (let i = 1; i < 12; i++) offsets.push(half * Math.tan((i * Math.PI) / 24));
    while (offsets[offsets.length - 1] * 1.6 < 1.5 * step) offsets.push(offsets[offsets.length - 1] * 1.6);
    for (const x of [0, ...offsets, ...offsets.map((o) => -o)]) {
      const at = k.re + x;
      if (at > kMin && at < kMax && !out.has(at)) out.set(at, true);
    }
  }
  return [...out].map(([k, added]) => ({ k, added })).sort((a, b) => a.k - b.k);
}

interface Evaluation {
  readonly model: ScatteringModel;
  readonly poles: readonly (ModelPole & { readonly orderShift: number })[];
  readonly places: readonly { readonly k: number; readonly added: boolean }[];
  /** Error of the order, away from sharp resonances, and what of a last change remains. */
  readonly base: number;
  readonly rest: number;
  readonly chosen: readonly number[] | null;
  readonly progress?: Progress | undefined;
}

function evaluate({ model, poles, places, base, rest, chosen, progress }: Evaluation): SpectrumPoint[] {
  const solver = modelSolver(model, PIECES);
  const n = model.channels.length;
  const active = model.terms.some((t) => t.coefficient.im !== 0);
  const store = new Float64Array(2 * n * n * places.length);
  return places.map(({ k, added }, i) => {
    if (i % 16 === 0) progress?.('evaluating', i / places.length);
    const { S, slope, estimate } = solver.at(k, { slope: true, estimate: true });
    const matrix = store.subarray(2 * n * n * i, 2 * n * n * (i + 1));
    matrix.set(S);
    const propagates = solver.source.propagates(k);
    const modelError = certifiedError(model, k, estimate!);
    // a pole of residue ρ moved by δ changes S by ρδ/|k − k_p|²
    let moved = 0;
    for (const pole of poles)
      moved += (pole.height * Math.abs(pole.k.im) * rest * pole.orderShift) / ((k - pole.k.re) ** 2 + pole.k.im ** 2);
    const product = outgoingPowers(matrix, propagates);
    const { absorbed, best, worst } = absorption(product, propagates, active);
    return {
      k,
      added,
      matrix,
      modelError,
      error: Math.min(2, base + moved + modelError),
      propagates,
      absorbed,
      best,
      worst,
      delay: delayTrace(S, slope!, propagates),
      smallest: chosen ? smallestSingular(matrix, n, chosen) : null,
      unitarity: active ? null : distanceFromUnit(product),
      reciprocity: asymmetry(matrix, n),
    };
  });
}

/** S†S of the propagating channels, m × m interleaved. */
function outgoingPowers(S: ComplexArray, propagates: readonly boolean[]): ComplexArray {
  const n = propagates.length;
  const own = Array.from({ length: n }, (_, i) => i).filter((i) => propagates[i]);
  const m = own.length;
  const out = new Float64Array(2 * m * m);
  for (let b = 0; b < m; b++)
    for (let a = 0; a <= b; a++) {
      let re = 0;
      let im = 0;
      for (const i of own) {
        const x = 2 * (i + own[a] * n);
        const y = 2 * (i + own[b] * n);
        re += S[x] * S[y] + S[x + 1] * S[y + 1];
        im += S[x] * S[y + 1] - S[x + 1] * S[y];
      }
      out[2 * (a + b * m)] = out[2 * (b + a * m)] = re;
      out[2 * (a + b * m) + 1] = im;
      out[2 * (b + a * m) + 1] = -im;
    }
  return out;
}

function absorption(
  product: ComplexArray,
  propagates: readonly boolean[],
  active: boolean,
): { absorbed: Float64Array; best: number; worst: number } {
  const absorbed = new Float64Array(propagates.length);
  if (!active) return { absorbed, best: 0, worst: 0 };
  const m = Math.round(Math.sqrt(product.length / 2));
  let a = 0;
  propagates.forEach((yes, j) => {
    if (yes) absorbed[j] = 1 - product[2 * (a + a++ * m)];
  });
  if (m === 0) return { absorbed, best: 0, worst: 0 };
  const { values } = hermitianEigen(product, m);
  return { absorbed, best: 1 - values[0], worst: 1 - values[m - 1] };
}

function distanceFromUnit(product: ComplexArray): number {
  const m = Math.round(Math.sqrt(product.length / 2));
  let worst = 0;
  for (let b = 0; b < m; b++)
    for (let a = 0; a < m; a++) {
      const re = product[2 * (a + b * m)] - (a === b ? 1 : 0);
      worst = Math.max(worst, Math.hypot(re, product[2 * (a + b * m) + 1]));
    }
  return worst;
}

function smallestSingular(S: ComplexArray, n: number, chosen: readonly number[]): number {
  const m = chosen.length;
  const part = new Float64Array(2 * m * m);
  chosen.forEach((j, b) => {
    chosen.forEach((i, a) => part.set(S.subarray(2 * (i + j * n), 2 * (i + j * n) + 2), 2 * (a + b * m)));
  });
  return singularValues(part, m, m)[m - 1];
}

function asymmetry(S: ComplexArray, n: number): number {
  let worst = 0;
  for (let j = 0; j < n; j++)
    for (let i = 0; i < j; i++) {
      const [x, y] = [2 * (i + j * n), 2 * (j + i * n)];
      worst = Math.max(worst, Math.hypot(S[x] - S[y], S[x + 1] - S[y + 1]));
    }
  return worst;
}

function difference(a: ComplexArray, b: ComplexArray): number {
  let worst = 0;
  for (let i = 0; i < a.length; i += 2) worst = Math.max(worst, Math.hypot(a[i] - b[i], a[i + 1] - b[i + 1]));
  return worst;
}
