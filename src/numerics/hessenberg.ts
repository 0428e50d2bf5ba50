// What does a matrix look like after a unitary similarity to upper Hessenberg form?

import type { ComplexArray } from './complex.ts';

/** A = Q H Qᴴ, Q unitary, H zero below the first subdiagonal; both n × n, column-major interleaved. */
export interface HessenbergForm {
  readonly H: ComplexArray;
  readonly Q: ComplexArray;
}

/**
 * Householder reduction of a copy of A; a Hermitian A comes out tridiagonal up to rounding.
 * Source: G. H. Golub, C. F. Van Loan, Matrix Computations, 4th ed. (2013), algorithm 7.4.2, with Hermitian reflectors
 * I − β v vᴴ, v = x + e^{i arg x₁}‖x‖e₁.
 */
export function hessenbergForm(A: ComplexArray, n: number): HessenbergForm {
  const H = A.slice(0, 2 * n * n);
  const betas = new Float64Array(Math.max(n, 1));
  const reflectors = new Float64Array(2 * n * n); // column k holds v_k in rows k+1 … n−1
  const work = new Float64Array(2 * n);
  for (let k = 0; k + 2 < n; k++) {
    const column = 2 * n * k;
    const v = reflectors.subarray(column, column + 2 * n);
    const beta = makeReflector(H, column, v, k + 1, n);
    betas[k] = beta;
    if (beta === 0) continue;
    for (let j = k + 1; j < n; j++) reflectColumn(H, 2 * n * j, v, beta, k + 1, n);
    reflectFromRight(H, n, v, beta, k + 1, work);
  }
  // Q = P_0 P_1 … built backward, so that each step touches the growing lower right block only.
  const Q = new Float64Array(2 * n * n);
  for (let i = 0; i < n; i++) Q[2 * (i + n * i)] = 1;
  for (let k = n - 3; k >= 0; k--) {
    if (betas[k] === 0) continue;
    const v = reflectors.subarray(2 * n * k, 2 * n * (k + 1));
    for (let j = k + 1; j < n; j++) reflectColumn(Q, 2 * n * j, v, betas[k], k + 1, n);
  }
  return { H, Q };
}

/**
 * The reflector that folds rows [first, n) of the column at offset `column` of `a` onto row `first`: writes v, replaces
 * the column by the result, returns β (0: nothing to do).
 */
export function makeReflector(a: ComplexArray, column: number, v: ComplexArray, first: number, n: number): number {
  let scale = 0;
  for (let i = column + 2 * (first + 1); i < column + 2 * n; i++) scale = Math.max(scale, Math.abs(a[i]));
  if (scale === 0) return 0;
  const hr = a[column + 2 * first];
  const hi = a[column + 2 * first + 1];
  scale = Math.max(scale, Math.abs(hr), Math.abs(hi));
  let tail = 0;
  for (let i = 2 * (first + 1); i < 2 * n; i++) {
    const value = a[column + i] / scale;
    v[i] = value;
    tail += value * value;
    a[column + i] = 0;
  }
  const pr = hr / scale;
  const pi = hi / scale;
  const head = Math.hypot(pr, pi);
  const length = Math.sqrt(head * head + tail);
  const ur = head === 0 ? 1 : pr / head;
  const ui = head === 0 ? 0 : pi / head;
  v[2 * first] = pr + ur * length;
  v[2 * first + 1] = pi + ui * length;
  a[column + 2 * first] = -ur * length * scale;
  a[column + 2 * first + 1] = -ui * length * scale;
  return 1 / (length * (length + head)); // 2 / ‖v‖²
}

/** Column at offset `column` of `a` ← (I − β v vᴴ) column, rows [first, n). */
export function reflectColumn(
  a: ComplexArray,
  column: number,
  v: ComplexArray,
  beta: number,
  first: number,
  n: number,
): void {
  let sr = 0;
  let si = 0;
  for (let i = 2 * first; i < 2 * n; i += 2) {
    const vr = v[i];
    const vi = v[i + 1];
    const xr = a[column + i];
    const xi = a[column + i + 1];
    sr += vr * xr + vi * xi;
    si += vr * xi - vi * xr;
  }
  sr *= beta;
  si *= beta;
  for (let i = 2 * first; i < 2 * n; i += 2) {
    const vr = v[i];
    const vi = v[i + 1];
    a[column + i] -= sr * vr - si * vi;
    a[column + i + 1] -= sr * vi + si * vr;
  }
}

/** a ← a (I − β v vᴴ), all n rows, columns [first, n). */
function reflectFromRight(
  a: ComplexArray,
  n: number,
  v: ComplexArray,
  beta: number,
  first: number,
  work: ComplexArray,
): void {
  work.fill(0);
  for (let j = first; j < n; j++) {
    const vr = v[2 * j];
    const vi = v[2 * j + 1];
    const column = 2 * n * j;
    for (let i = 0; i < 2 * n; i += 2) {
      const xr = a[column + i];
      const xi = a[column + i + 1];
      work[i] += xr * vr - xi * vi;
      work[i + 1] += xr * vi + xi * vr;
    }
  }
  for (let j = first; j < n; j++) {
    const vr = beta * v[2 * j];
    const vi = -beta * v[2 * j + 1];
    const column = 2 * n * j;
    for (let i = 0; i < 2 * n; i += 2) {
      const wr = work[i];
      const wi = work[i + 1];
      a[column + i] -= wr * vr - wi * vi;
      a[column + i + 1] -= wr * vi + wi * vr;
    }
  }
}
