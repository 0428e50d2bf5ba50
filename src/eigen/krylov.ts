// Which eigenvalues lie near a shift?

import {
  type Complex,
  complex,
  type ComplexArray,
  divide,
  modulus,
  multiply,
  squareRoot,
  subtract,
  add,
} from '../numerics/complex.ts';
import { eigenGeneral } from '../numerics/eigenvalues.ts';
import { randomStream } from '../numerics/random.ts';
import { combine, normaliseColumns, orthonormalise, tallMatrices } from './columns.ts';
import type { EigenProblem } from './problem.ts';

export interface NearbyRequest {
  readonly shift: Complex;
  readonly level: number;
  /** Everything with |k² − shift²| ≤ radius is wanted. */
  readonly radius: number;
  /** Columns started with; above the highest multiplicity expected. */
  readonly block: number;
  readonly largestDimension: number;
  /** Relative residual of the inverted problem at which a pair counts as converged. */
  readonly tolerance: number;
  readonly seed: number;
}

export interface Nearby {
  /** Converged pairs, nearest to the shift first. */
  readonly ks: readonly Complex[];
  readonly vectors: ComplexArray;
  /** True when the disc is covered: all Ritz values inside converged, and some beyond it too or nothing new for long. */
  readonly covered: boolean;
  readonly dimension: number;
}

/**
 * Block Arnoldi on (K − σ²M)⁻¹M for a family that is linear in k², A = K − k²M (M = −∂A/∂k / 2k). Right half plane only.
 * Source: Saad, Numerical Methods for Large Eigenvalue Problems (2011), chapters 6 and 8.
 */
export function modesNear(problem: EigenProblem, request: NearbyRequest): Nearby {
  const { shift, level, radius, block, largestDimension, tolerance } = request;
  const n = problem.size;
  const inverse = problem.factorize(shift, level);
  const capacity = Math.min(largestDimension, n) + block;
  const [v, w] = tallMatrices(n, [capacity, block]);
  const h = new Float64Array(2 * capacity * capacity);
  const random = randomStream(request.seed);
  for (let s = 0; s < 2 * n * block; s++) v[s] = random.normal();
  orthonormalise(v.subarray(0, 2 * n * block), block, v, 0, n);
  const minusHalf = divide(complex(-0.5), shift);

  let m = 0;
  let steady = 0;
  let inside = -1;
  let found: Ritz | null = null;
  for (;;) {
    // one block step: w = A(σ)⁻¹ M v_last
    const last = v.subarray(2 * n * m, 2 * n * (m + block));
    problem.multiplyInto(w, shift, level, 'byK', last, block);
    inverse.solveInto(w, w, block);
    for (let s = 0; s < 2 * n * block; s += 2) {
      const a = w[s];
      const b = w[s + 1];
      w[s] = minusHalf.re * a - minusHalf.im * b;
      w[s + 1] = minusHalf.re * b + minusHalf.im * a;
    }
    const { h: hc, r } = orthonormalise(w, block, v, m + block, n);
    for (let j = 0; j < block; j++) {
      for (let i = 0; i < m + block; i++) copy(h, i + (m + j) * capacity, hc, i + j * (m + block));
      for (let i = 0; i < block; i++) copy(h, m + block + i + (m + j) * capacity, r, i + j * block);
    }
    m += block;
    const full = m + block > capacity - block || m + block > n;
    if (!full) v.set(w, 2 * n * m);
    if (full || (m >= 6 * block && m % (2 * block) === 0)) {
      found = ritzPairs(h, m, capacity, block, tolerance, radius);
      steady = found.open || found.inside !== inside ? 0 : steady + 1;
      inside = found.inside;
      if (found.covered || full) break;
      if (steady >= STEADY_CHECKS) {
        found = { ...found, covered: true };
        break;
      }
    }
  }

  const kept = found.converged;
  const y = new Float64Array(2 * m * kept.length);
  kept.forEach((i, j) => y.set(found.vectors.subarray(2 * m * i, 2 * m * (i + 1)), 2 * m * j));
  const vectors = normaliseColumns(combine(v, m, y, kept.length, n), kept.length, n);
  const s2 = multiply(shift, shift);
  const ks = kept.map((i) => squareRoot(add(s2, found.offsets[i])));
  inverse.release();
  return { ks, vectors, covered: found.covered, dimension: m };
}

interface Ritz {
  /** λ − σ² of each Ritz value. */
  readonly offsets: readonly Complex[];
  readonly vectors: ComplexArray;
  /** Indices of the converged ones, nearest first. */
  readonly converged: readonly number[];
  /** Converged values inside the radius, and whether any inside is not. */
  readonly inside: number;
  readonly open: boolean;
  /** All inside converged, and some beyond. */
  readonly covered: boolean;
}

/**
 * Checks in a row (each two blocks apart) with all Ritz values inside converged and none added, after which the disc
 * counts as covered although nothing beyond it has converged: far from everything but the layer's own spectrum.
 */
const STEADY_CHECKS = 4;

function ritzPairs(h: ComplexArray, m: number, lead: number, block: number, tolerance: number, radius: number): Ritz {
  const small = new Float64Array(2 * m * m);
  for (let j = 0; j < m; j++) small.set(h.subarray(2 * j * lead, 2 * (j * lead + m)), 2 * j * m);
  const { values, vectors } = eigenGeneral(small, m);
  const offsets: Complex[] = [];
  const residuals: number[] = [];
  for (let i = 0; i < m; i++) {
    const theta = complex(values[2 * i], values[2 * i + 1]);
    offsets.push(modulus(theta) > 0 ? divide(complex(1), theta) : complex(Infinity));
    // residual of T x = θ x: the subdiagonal block times the last block of y
    let sum = 0;
    for (let a = 0; a < block; a++) {
      let re = 0;
      let im = 0;
      for (let b = 0; b < block; b++) {
        const e = 2 * (m + a + (m - block + b) * lead);
        const yr = vectors[2 * (m - block + b + i * m)];
        const yi = vectors[2 * (m - block + b + i * m) + 1];
        re += h[e] * yr - h[e + 1] * yi;
        im += h[e] * yi + h[e + 1] * yr;
      }
      sum += re * re + im * im;
    }
    residuals.push(Math.sqrt(sum) / modulus(theta));
  }
  const order = offsets.map((_, i) => i).sort((a, b) => modulus(offsets[a]) - modulus(offsets[b]));
  const converged: number[] = [];
  let insideOpen = false;
  let insideDone = 0;
  let beyond = 0;
  for (const i of order) {
    const done = residuals[i] <= tolerance;
    const inside = modulus(offsets[i]) <= radius;
    if (done) converged.push(i);
    if (inside && done) insideDone++;
    if (inside && !done) insideOpen = true;
    if (!inside && done) beyond++;
    if (!inside && !done) break;
  }
  return {
    offsets,
    vectors,
    converged,
    inside: insideDone,
    open: insideOpen,
    covered: !insideOpen && beyond >= Math.min(block, 3),
  };
}

function copy(out: ComplexArray, i: number, from: ComplexArray, j: number): void {
  out[2 * i] = from[2 * j]!;
  out[2 * i + 1] = from[2 * j + 1]!;
}

/** k² of one number minus k² of another: the distance by which discs are measured. */
export const squareDistance = (a: Complex, b: Complex): number => modulus(subtract(multiply(a, a), multiply(b, b)));
