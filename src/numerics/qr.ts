// What orthonormal basis spans given complex columns, and which combination of them comes closest to a vector?

import type { ComplexArray } from './complex.ts';
import { makeReflector, reflectColumn } from './hessenberg.ts';
import { checkMatrix } from './lu.ts';

/** An orthonormal basis of the span of given columns. */
export interface OrthonormalBasis {
  readonly rank: number;
  /** rows × rank, column-major interleaved; Qᴴ Q = 1. */
  readonly basis: ComplexArray;
  /** Which of the given columns each basis vector came from, increasing. */
  readonly kept: Int32Array;
}

/**
 * Orthonormal basis of the columns of A (rows × columns, column-major interleaved). A column whose part outside the
 * span of those before it is at most `tolerance` times its own norm is dropped.
 *
 * Modified Gram–Schmidt, each column twice ("twice is enough"); ‖Qᴴ Q − 1‖ stays near 1e-15.
 * Source: L. Giraud, J. Langou, M. Rozložník, J. van den Eshof, Numer. Math. 101, 87 (2005).
 */
export function qrOrthonormalise(A: ComplexArray, rows: number, columns: number, tolerance = 1e-12): OrthonormalBasis {
  checkMatrix('qrOrthonormalise', A, rows, columns);
  const q = new Float64Array(2 * rows * Math.min(rows, columns));
  const v = new Float64Array(2 * rows);
  const kept = new Int32Array(Math.min(rows, columns));
  let rank = 0;
  for (let c = 0; c < columns && rank < rows; c++) {
    v.set(A.subarray(2 * rows * c, 2 * rows * (c + 1)));
    const before = norm(v);
    if (before === 0) continue;
    scaleInPlace(v, 1 / before);
    for (let k = 0; k < rank; k++) removeComponent(v, q, 2 * rows * k);
    const first = norm(v);
    if (first <= tolerance) continue;
    scaleInPlace(v, 1 / first);
    for (let k = 0; k < rank; k++) removeComponent(v, q, 2 * rows * k);
    scaleInPlace(v, 1 / norm(v));
    q.set(v, 2 * rows * rank);
    kept[rank++] = c;
  }
  return { rank, basis: q.slice(0, 2 * rows * rank), kept: kept.slice(0, rank) };
}

/** The answer of `leastSquares`. */
export interface LeastSquaresFit {
  /** n × rightSides, column-major interleaved. */
  readonly solution: ComplexArray;
  /** ‖b − A x‖₂, one a right-hand side. */
  readonly residuals: Float64Array;
  readonly rank: number;
}

/**
 * x that minimises ‖A x − b‖₂ for an m × n matrix A (column-major interleaved) and `rightSides` columns b of m rows.
 * Householder QR with column pivoting; columns beyond the numerical rank (diagonal of R below `tolerance` of the
 * largest) get x = 0: a basic solution, not the shortest one.
 *
 * Source: G. H. Golub, C. F. Van Loan, Matrix Computations, 4th ed. (2013), §5.4–5.5.
 */
export function leastSquares(
  A: ComplexArray,
  m: number,
  n: number,
  b: ComplexArray,
  rightSides = 1,
  tolerance = 1e-13,
): LeastSquaresFit {
  checkMatrix('leastSquares', A, m, n);
  checkMatrix('leastSquares right-hand side', b, m, rightSides);
  const a = A.slice(0, 2 * m * n);
  const y = b.slice(0, 2 * m * rightSides);
  const v = new Float64Array(2 * m);
  const order = Int32Array.from({ length: n }, (_, j) => j);
  const steps = Math.min(m, n);
  let rank = 0;
  let largest = 0;
  for (let k = 0; k < steps; k++) {
    // The column with the largest remainder comes next; remainders are summed afresh, not updated.
    let best = -1;
    let p = k;
    for (let j = k; j < n; j++) {
      const size = norm(a.subarray(2 * (m * j + k), 2 * m * (j + 1)));
      if (size > best) {
        best = size;
        p = j;
      }
    }
    if (k === 0) largest = best;
    if (best <= tolerance * largest) break;
    swapColumns(a, m, order, k, p);
    const beta = makeReflector(a, 2 * m * k, v, k, m);
    if (beta !== 0) {
      for (let j = k + 1; j < n; j++) reflectColumn(a, 2 * m * j, v, beta, k, m);
      for (let j = 0; j < rightSides; j++) reflectColumn(y, 2 * m * j, v, beta, k, m);
    }
    rank++;
  }
  const solution = new Float64Array(2 * n * rightSides);
  const residuals = new Float64Array(rightSides);
  for (let c = 0; c < rightSides; c++) {
    const at = 2 * m * c;
    residuals[c] = norm(y.subarray(at + 2 * rank, at + 2 * m));
    for (let k = rank - 1; k >= 0; k--) {
      const d = 2 * (m * k + k);
      const q = a[d] * a[d] + a[d + 1] * a[d + 1];
      const xr = (y[at + 2 * k] * a[d] + y[at + 2 * k + 1] * a[d + 1]) / q;
      const xi = (y[at + 2 * k + 1] * a[d] - y[at + 2 * k] * a[d + 1]) / q;
      for (let i = 0; i < k; i++) {
        const rr = a[2 * (m * k + i)];
        const ri = a[2 * (m * k + i) + 1];
        y[at + 2 * i] -= xr * rr - xi * ri;
        y[at + 2 * i + 1] -= xr * ri + xi * rr;
      }
      solution[2 * (n * c + order[k])] = xr;
      solution[2 * (n * c + order[k]) + 1] = xi;
    }
  }
  return { solution, residuals, rank };
}

/** Euclidean norm, scaled so that squares neither overflow nor underflow. */
function norm(v: ComplexArray): number {
  let peak = 0;
  for (let i = 0; i < v.length; i++) peak = Math.max(peak, Math.abs(v[i]));
  if (peak === 0) return 0;
  let sum = 0;
  for (let i = 0; i < v.length; i++) {
    const t = v[i] / peak;
    sum += t * t;
  }
  return peak * Math.sqrt(sum);
}

function scaleInPlace(v: ComplexArray, factor: number): void {
  for (let i = 0; i < v.length; i++) v[i] *= factor;
}

/** v ← v − q (qᴴ v), q the unit column at offset `column`. */
function removeComponent(v: ComplexArray, q: ComplexArray, column: number): void {
  let sr = 0;
  let si = 0;
  for (let i = 0; i < v.length; i += 2) {
    const qr = q[column + i];
    const qi = q[column + i + 1];
    sr += qr * v[i] + qi * v[i + 1];
    si += qr * v[i + 1] - qi * v[i];
  }
  for (let i = 0; i < v.length; i += 2) {
    const qr = q[column + i];
    const qi = q[column + i + 1];
    v[i] -= sr * qr - si * qi;
    v[i + 1] -= sr * qi + si * qr;
  }
}

function swapColumns(a: ComplexArray, m: number, order: Int32Array, k: number, p: number): void {
  if (k === p) return;
  for (let i = 0; i < 2 * m; i++) {
    const kept = a[2 * m * k + i];
    a[2 * m * k + i] = a[2 * m * p + i];
    a[2 * m * p + i] = kept;
  }
  const kept = order[k];
  order[k] = order[p];
  order[p] = kept;
}
