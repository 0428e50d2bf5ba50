// How is a solution freed of the factorization's rounding?

import type { ComplexArray } from '../numerics/complex.ts';
import type { Factorization } from './pattern.ts';

/** What a refined solve returns. */
export interface RefinedSolution {
  /** n × columns. */
  readonly x: ComplexArray;
  /** ‖b − A x‖₂ / ‖b‖₂, one a column (0 for b = 0). Large where A is singular to rounding: see `backwardError`. */
  readonly residual: Float64Array;
  /** ‖b − A x‖₂ / (‖A‖ ‖x‖₂ + ‖b‖₂), one a column; ‖A‖ estimated from below by the products that were formed. */
  readonly backwardError: Float64Array;
  /** Corrections applied. */
  readonly steps: number;
}

export interface RefineChoice {
  /** At most this many corrections. */
  readonly steps?: number;
  /** Columns whose backward error is below this are left alone. */
  readonly tolerance?: number;
}

/** Products A x of `columns` vectors into `out`. */
export type MultiplyInto = (out: ComplexArray, x: ComplexArray, columns: number) => unknown;

const MOST_STEPS = 5;
/** A backward error of a few roundings: no further correction can help. */
const TOLERANCE = 4e-16;

/**
 * Solves A x = b and corrects by x ← x + A⁻¹(b − A x) while that halves the backward error (J. H. Wilkinson's iterative
 * refinement in working precision). Each column keeps its best solution. A need not be well conditioned: at a
 * singular A the solution is large along the null vector, and its backward error small.
 *
 * @param multiplyInto the matrix that was factored, as an operator
 * @param b n × columns, column-major interleaved; not changed
 */
export function solveRefined(
  factorization: Pick<Factorization, 'unknowns' | 'solveInto'>,
  multiplyInto: MultiplyInto,
  b: ComplexArray,
  columns: number,
  { steps: most = MOST_STEPS, tolerance = TOLERANCE }: RefineChoice = {},
): RefinedSolution {
  const n = factorization.unknowns;
  if (b.length < 2 * n * columns) {
    throw new RangeError(`b holds ${b.length} numbers; expected 2 × ${n} unknowns × ${columns} columns`);
  }
  const x = factorization.solveInto(new Float64Array(2 * n * columns), b, columns);
  const r = new Float64Array(2 * n * columns);
  const residual = new Float64Array(columns);
  const backwardError = new Float64Array(columns);
  const sizes = Float64Array.from({ length: columns }, (_, c) => norm(b, n, c));
  let scale = normFromBelow(multiplyInto, n);
  measure(x, residual, backwardError);

  let steps = 0;
  while (steps < most && backwardError.some((e) => e > tolerance)) {
    const trial = factorization.solveInto(new Float64Array(2 * n * columns), r, columns);
    for (let i = 0; i < trial.length; i++) trial[i] += x[i];
    const trialResidual = new Float64Array(columns);
    const trialError = new Float64Array(columns);
    measure(trial, trialResidual, trialError);
    let gained = false;
    for (let c = 0; c < columns; c++) {
      if (!(trialError[c] < backwardError[c])) continue;
      if (trialError[c] < backwardError[c] / 2) gained = true;
      x.set(trial.subarray(2 * n * c, 2 * n * (c + 1)), 2 * n * c);
      residual[c] = trialResidual[c];
      backwardError[c] = trialError[c];
    }
    steps++;
    if (!gained) break;
  }
  return { x, residual, backwardError, steps };

  /** Residuals of y into r, with their two measures. */
  function measure(y: ComplexArray, relative: Float64Array, backward: Float64Array): void {
    multiplyInto(r, y, columns);
    for (let c = 0; c < columns; c++) {
      const length = norm(y, n, c);
      if (length > 0) scale = Math.max(scale, norm(r, n, c) / length);
    }
    for (let i = 0; i < r.length; i++) r[i] = b[i] - r[i];
    for (let c = 0; c < columns; c++) {
      const left = norm(r, n, c);
      relative[c] = left === 0 ? 0 : left / sizes[c];
      backward[c] = left === 0 ? 0 : left / (scale * norm(y, n, c) + sizes[c]);
      if (Number.isNaN(backward[c])) backward[c] = Infinity;
    }
  }
}

/** Two steps of the power method from a fixed vector without structure. */
function normFromBelow(multiplyInto: MultiplyInto, n: number): number {
  let v = Float64Array.from({ length: 2 * n }, (_, i) => Math.sin(1 + i * i));
  let scale = 0;
  for (let step = 0; step < 2; step++) {
    const length = norm(v, n, 0);
    const w = new Float64Array(2 * n);
    multiplyInto(w, v, 1);
    if (length > 0) scale = Math.max(scale, norm(w, n, 0) / length);
    // conj(A) is Aᴴ of a symmetric matrix: multiply by it next by conjugating the vector.
    for (let i = 1; i < 2 * n; i += 2) w[i] = -w[i];
    v = w;
  }
  return scale;
}

function norm(v: ComplexArray, n: number, column: number): number {
  let largest = 0;
  for (let i = 2 * n * column; i < 2 * n * (column + 1); i++) {
    const a = Math.abs(v[i]);
    if (a > largest || Number.isNaN(a)) largest = a;
  }
  if (largest === 0 || !Number.isFinite(largest)) return largest;
  let sum = 0;
  for (let i = 2 * n * column; i < 2 * n * (column + 1); i++) sum += (v[i] / largest) ** 2;
  return largest * Math.sqrt(sum);
}
