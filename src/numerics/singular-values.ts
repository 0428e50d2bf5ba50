// What are the singular values and vectors of a small dense complex matrix?

import type { ComplexArray } from './complex.ts';
import { checkMatrix } from './lu.ts';

/** A = U diag(values) Vᴴ with r = min(rows, columns) terms. */
export interface SingularForm {
  /** Decreasing, length r. */
  readonly values: Float64Array;
  /** rows × r, column-major interleaved; orthonormal columns (zero where the singular value is 0). */
  readonly left: ComplexArray;
  /** columns × r, orthonormal columns (those of a wide matrix: zero where the singular value is 0). */
  readonly right: ComplexArray;
  readonly converged: boolean;
}

/** Singular values of the rows × columns matrix A, decreasing. */
export const singularValues = (A: ComplexArray, rows: number, columns: number): Float64Array =>
  singularForm(A, rows, columns).values;

/**
 * Singular values and vectors by one-sided Jacobi rotations: small singular values keep their relative accuracy
 * when the matrix is only badly scaled by columns, and always error ≤ about 1e-15 n ‖A‖.
 *
 * Source: M. R. Hestenes, J. SIAM 6, 51 (1958); J. Demmel, K. Veselić, SIAM J. Matrix Anal. 13, 1204 (1992).
 */
export function singularForm(A: ComplexArray, rows: number, columns: number): SingularForm {
  checkMatrix('singularForm', A, rows, columns);
  if (rows < columns) {
    const { values, left, right, converged } = singularForm(adjoint(A, rows, columns), columns, rows);
    return { values, left: right, right: left, converged };
  }
  const n = columns;
  // Scaled to largest entry 1: squares stay in range.
  let peak = 0;
  for (let i = 0; i < 2 * rows * n; i++) peak = Math.max(peak, Math.abs(A[i]));
  const w = new Float64Array(2 * rows * n);
  for (let i = 0; i < w.length; i++) w[i] = peak === 0 ? 0 : A[i] / peak;
  const v = new Float64Array(2 * n * n);
  for (let i = 0; i < n; i++) v[2 * (i + n * i)] = 1;

  let converged = n < 2;
  for (let turn = 0; turn < 60 && !converged; turn++) converged = !jacobiSweep(w, v, rows, n);

  // Rounded rotations change lengths a little, those of w = A v and of v alike: their quotient is free of it.
  const lengths = Float64Array.from({ length: n }, (_, j) => columnNorm(v, n, j));
  const sizes = Float64Array.from({ length: n }, (_, j) => columnNorm(w, rows, j));
  const norms = sizes.map((size, j) => size / lengths[j]);
  const order = Array.from({ length: n }, (_, j) => j).sort((a, b) => norms[b] - norms[a]);
  const values = Float64Array.from(order, (j) => norms[j] * peak);
  const left = new Float64Array(2 * rows * n);
  const right = new Float64Array(2 * n * n);
  order.forEach((from, to) => {
    for (let i = 0; i < 2 * n; i++) right[2 * n * to + i] = v[2 * n * from + i] / lengths[from];
    if (sizes[from] === 0) return;
    for (let i = 0; i < 2 * rows; i++) left[2 * rows * to + i] = w[2 * rows * from + i] / sizes[from];
  });
  return { values, left, right, converged };
}

/** Makes every pair of columns orthogonal once; true when something beyond rounding was rotated. */
function jacobiSweep(w: ComplexArray, v: ComplexArray, rows: number, n: number): boolean {
  let rotated = false;
  const tolerance = 2 * Number.EPSILON * Math.sqrt(rows); // what a dot product of unit columns can resolve
  for (let p = 0; p < n - 1; p++) {
    for (let q = p + 1; q < n; q++) {
      const pc = 2 * rows * p;
      const qc = 2 * rows * q;
      let alpha = 0;
      let beta = 0;
      let gr = 0; // wpᴴ wq
      let gi = 0;
      for (let i = 0; i < 2 * rows; i += 2) {
        const pr = w[pc + i];
        const pi = w[pc + i + 1];
        const qr = w[qc + i];
        const qi = w[qc + i + 1];
        alpha += pr * pr + pi * pi;
        beta += qr * qr + qi * qi;
        gr += pr * qr + pi * qi;
        gi += pr * qi - pi * qr;
      }
      const g = Math.hypot(gr, gi);
      const size = Math.sqrt(alpha) * Math.sqrt(beta);
      if (g <= 0.25 * Number.EPSILON * size) continue;
      // Whatever can be rotated is; only what exceeds rounding asks for another sweep.
      if (g > tolerance * size) rotated = true;
      const zeta = (beta - alpha) / (2 * g);
      const t = (zeta < 0 ? -1 : 1) / (Math.abs(zeta) + Math.hypot(1, zeta));
      const c = 1 / Math.hypot(1, t);
      const s = c * t;
      const ur = gr / g;
      const ui = gi / g;
      rotate(w, pc, qc, 2 * rows, c, s, ur, ui);
      rotate(v, 2 * n * p, 2 * n * q, 2 * n, c, s, ur, ui);
    }
  }
  return rotated;
}

/** x ← c x − s ū y, y ← s x + c ū y: the phase ū = conj(xᴴy)/|xᴴy| goes into y. */
function rotate(
  a: ComplexArray,
  x: number,
  y: number,
  length: number,
  c: number,
  s: number,
  ur: number,
  ui: number,
): void {
  for (let i = 0; i < length; i += 2) {
    const xr = a[x + i];
    const xi = a[x + i + 1];
    const yr = a[y + i] * ur + a[y + i + 1] * ui;
    const yi = a[y + i + 1] * ur - a[y + i] * ui;
    a[x + i] = c * xr - s * yr;
    a[x + i + 1] = c * xi - s * yi;
    a[y + i] = s * xr + c * yr;
    a[y + i + 1] = s * xi + c * yi;
  }
}

function columnNorm(w: ComplexArray, rows: number, j: number): number {
  let peak = 0;
  for (let i = 2 * rows * j; i < 2 * rows * (j + 1); i++) peak = Math.max(peak, Math.abs(w[i]));
  if (peak === 0) return 0;
  let sum = 0;
  for (let i = 2 * rows * j; i < 2 * rows * (j + 1); i++) sum += (w[i] / peak) ** 2;
  return peak * Math.sqrt(sum);
}

function adjoint(A: ComplexArray, rows: number, columns: number): ComplexArray {
  const result = new Float64Array(2 * rows * columns);
  for (let j = 0; j < columns; j++) {
    for (let i = 0; i < rows; i++) {
      result[2 * (j + columns * i)] = A[2 * (i + rows * j)];
      result[2 * (j + columns * i) + 1] = -A[2 * (i + rows * j) + 1];
    }
  }
  return result;
}
