// What does each channel send into every other: the S-matrix, with its proofs?

import { remainingChange } from '../accuracy/remaining-change.ts';
import { DEFAULT_DIGITS, HIGHEST_ORDER, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { type Complex, complex, type ComplexArray, modulus } from '../numerics/complex.ts';
import type { ClosedOpenings } from '../operator/closed-openings.ts';
import type { LevelSense } from '../operator/device-family.ts';
import type { Progress } from './progress.ts';
import { type DeviceChannel, type PreparedOpenings, prepareOpenings } from './prepare-openings.ts';

export interface ScatterRequest {
  readonly digits?: number;
  /** Loss or gain level of the pumped bodies; 0 if absent. */
  readonly level?: number;
  readonly sense?: LevelSense;
  /** Channels of open space: |m| up to this; absent: those that the bodies see. */
  readonly multipoles?: number;
  readonly progress?: Progress;
}

/** S at one k. */
export interface ScatterPoint {
  readonly k: Complex;
  /** n × n column-major interleaved: amplitude out of channel i for unit amplitude into channel j at i + j n. */
  readonly matrix: ComplexArray;
  /** Of the entries: their largest change from the order below, times what the change before it tells to remain. */
  readonly error: number;
  /** Channels that carry power at this k. */
  readonly propagates: readonly boolean[];
  /** At real k: power absorbed (gain counts negative) for unit power into each channel; else 0. */
  readonly absorbed: Float64Array;
  /** At real k: largest |1 − Σ|S_ij|² − absorbed_j| over propagating channels j. */
  readonly balance: number;
  /** At real k: largest |S†S − 1| of the propagating channels where nothing absorbs or amplifies; else null. */
  readonly unitarity: number | null;
  /** Largest |S_ij − S_ji|. */
  readonly reciprocity: number;
}

export interface ScatterAnswer {
  readonly channels: readonly DeviceChannel[];
  readonly points: readonly ScatterPoint[];
  readonly order: number;
  readonly digits: number;
  /** All errors are below the digits asked for. */
  readonly reached: boolean;
  readonly openings: PreparedOpenings;
}

/**
 * S-matrices of a device at the given k, real or complex, between the modes of its guides or the multipoles of open space.
 * The order is raised until two orders agree to the digits (absolute, entries are at most 1 where nothing amplifies).
 *
 * @throws RangeError for a device without openings, or k outside Re k > 0.
 */
export function findScattering(device: Device, ks: readonly Complex[], request: ScatterRequest = {}): ScatterAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const { level = 0, sense = 'loss', multipoles, progress } = request;
  for (const k of ks)
    if (!(k.re > 0 && Number.isFinite(k.im))) throw new RangeError(`k came as ${k.re}, ${k.im}; expected Re k > 0`);
  if (ks.length === 0) throw new RangeError('no k came; expected one or more');
  const resolution = resolutionFor(digits);
  progress?.('meshing', 0);
  const kMin = Math.min(...ks.map((k) => k.re));
  const kMax = Math.max(...ks.map((k) => k.re));
  const openings = prepareOpenings(device, { kMin, kMax, slope: 0.05 }, resolution, 1, multipoles);
  const goal = 10 ** -digits;
  let order = resolution.order;
  let rest = 1;
  // the order is settled at the ends and the middle of the list, then used everywhere
  const probes = [...new Set([0, ks.length >> 1, ks.length - 1])];
  for (; order + 1 < HIGHEST_ORDER; order++) {
    progress?.(`order ${order + 1}`, 0);
    const changes = probes.map((i) => changesAt(openings, order, sense, ks[i], level));
    rest = Math.max(...changes.map(([before, last]) => remainingChange(before, last)));
    if (Math.max(...changes.map(([, last]) => last)) * rest <= goal) break;
  }
  const points = ks.map((k, i) => {
    progress?.('scattering', i / ks.length);
    const point = scatterAt(openings, order + 1, sense, k, level);
    return { ...point, error: rest * point.error + ROUNDING };
  });
  return {
    channels: openings.channels,
    points,
    order: order + 1,
    digits,
    reached: points.every((point) => point.error <= goal),
    openings,
  };
}

/** Change of S from order − 1 to order, and from there to order + 1. */
function changesAt(
  openings: PreparedOpenings,
  order: number,
  sense: LevelSense,
  k: Complex,
  level: number,
): [before: number, last: number] {
  const [low, mid, high] = [order - 1, order, order + 1].map((p) => openings.closed(p, sense).scatter(k, level).matrix);
  return [largestDifference(low, mid), largestDifference(mid, high)];
}

/** Of an entry of S, absolute: measured 1e-15 to 5e-15. */
const ROUNDING = 1e-14;

/** One point at an order, its error by the order below. */
export function scatterAt(
  openings: PreparedOpenings,
  order: number,
  sense: LevelSense,
  k: Complex,
  level: number,
): ScatterPoint {
  const closed = openings.closed(order, sense);
  const { matrix, fields } = closed.scatter(k, level);
  const below = openings.closed(order - 1, sense).scatter(k, level).matrix;
  const n = openings.channels.length;
  const propagates = openings.channels.map((c) => openings.openings[c.opening].propagates(c.index, k.re));
  const real = k.im === 0;
  const absorbed = real ? absorbedPowers(closed, k, level, fields, n) : new Float64Array(n);
  const active = absorbed.some((a) => Math.abs(a) > 0);
  return {
    k,
    matrix,
    error: largestDifference(matrix, below),
    propagates,
    absorbed,
    balance: real ? worstBalance(matrix, absorbed, propagates) : 0,
    unitarity: real && !active ? worstUnitarity(matrix, propagates) : null,
    reciprocity: worstReciprocity(matrix, n),
  };
}

/**
 * Power that the materials and metals take from each driven field: −Im(uᴴAu)/(4p_b) with A without the openings, whose
 * element matrices are real, so that only lossy weights count. For `Ez` this is (k²/4)∫Im ε|u|² and the metal's share.
 */
export function absorbedPowers(
  closed: ClosedOpenings,
  k: Complex,
  level: number,
  fields: ComplexArray,
  columns: number,
): Float64Array {
  const { family } = closed;
  const { operator } = family;
  const all = family.weights(k, level, 'value');
  // real weights take no power; dropping them keeps the sum free of cancellation
  const onlyLoss = (w: ComplexArray): ComplexArray => w.map((v, i) => (i % 2 === 0 ? 0 : v));
  const weights = {
    stiffness: onlyLoss(all.stiffness),
    mass: onlyLoss(all.mass),
    ...(all.surface ? { surface: onlyLoss(all.surface) } : {}),
  };
  const N = operator.space.unknowns;
  const p = all.stiffness[2]; // the background's p, real
  const out = new Float64Array(columns);
  const work = new Float64Array(2 * N);
  for (let c = 0; c < columns; c++) {
    const u = fields.subarray(2 * N * c, 2 * N * (c + 1));
    operator.multiplyInto(work, weights, u, 1);
    let sum = 0;
    for (let i = 0; i < 2 * N; i += 2) sum += u[i] * work[i + 1] - u[i + 1] * work[i];
    out[c] = -sum / (4 * p) + 0;
  }
  return out;
}

function worstBalance(matrix: ComplexArray, absorbed: Float64Array, propagates: readonly boolean[]): number {
  const n = propagates.length;
  let worst = 0;
  for (let j = 0; j < n; j++) {
    if (!propagates[j]) continue;
    let sum = 1 - absorbed[j];
    for (let i = 0; i < n; i++) if (propagates[i]) sum -= power(matrix, i + j * n);
    worst = Math.max(worst, Math.abs(sum));
  }
  return worst;
}

function worstUnitarity(matrix: ComplexArray, propagates: readonly boolean[]): number {
  const n = propagates.length;
  let worst = 0;
  for (let a = 0; a < n; a++)
    for (let b = 0; b < n; b++) {
      if (!propagates[a] || !propagates[b]) continue;
      let re = a === b ? -1 : 0;
      let im = 0;
      for (let i = 0; i < n; i++) {
        if (!propagates[i]) continue;
        const [x, y] = [2 * (i + a * n), 2 * (i + b * n)];
        re += matrix[x] * matrix[y] + matrix[x + 1] * matrix[y + 1];
        im += matrix[x] * matrix[y + 1] - matrix[x + 1] * matrix[y];
      }
      worst = Math.max(worst, Math.hypot(re, im));
    }
  return worst;
}

function worstReciprocity(matrix: ComplexArray, n: number): number {
  let worst = 0;
  for (let j = 0; j < n; j++)
    for (let i = 0; i < j; i++) {
      const [x, y] = [2 * (i + j * n), 2 * (j + i * n)];
      worst = Math.max(worst, Math.hypot(matrix[x] - matrix[y], matrix[x + 1] - matrix[y + 1]));
    }
  return worst;
}

function largestDifference(a: ComplexArray, b: ComplexArray): number {
  let worst = 0;
  for (let i = 0; i < a.length; i += 2) worst = Math.max(worst, modulus(complex(a[i] - b[i], a[i + 1] - b[i + 1])));
  return worst;
}

const power = (m: ComplexArray, i: number): number => m[2 * i] ** 2 + m[2 * i + 1] ** 2;
