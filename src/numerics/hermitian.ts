// What are the eigenvalues and eigenvectors of a Hermitian matrix?

import type { ComplexArray } from './complex.ts';
import { hessenbergForm } from './hessenberg.ts';
import { checkSquare } from './lu.ts';

/** Real eigenvalues, increasing, and orthonormal eigenvectors as columns (n × n, column-major interleaved). */
export interface HermitianPairs {
  readonly values: Float64Array;
  readonly vectors: ComplexArray;
  readonly converged: boolean;
}

/**
 * Eigenpairs of the Hermitian n × n matrix A (column-major interleaved; only its Hermitian part (A + Aᴴ)/2 counts).
 * Householder reduction, then implicit QL on the real tridiagonal matrix. Residual ‖A V − V Λ‖_F
 * below 5e-15 √n ‖A‖_F, ‖Vᴴ V − 1‖_F below 5e-15 n (held by the tests to n = 100); n = 200 in about 0.5 s.
 *
 * Source: J. H. Wilkinson, C. Reinsch, Handbook for Automatic Computation II: Linear Algebra (1971), II/3 and II/4.
 */
export function hermitianEigen(A: ComplexArray, n: number): HermitianPairs {
  checkSquare('hermitianEigen', A, n);
  const { H, Q } = hessenbergForm(hermitianPart(A, n), n);
  const d = new Float64Array(n);
  const e = new Float64Array(n); // e[i] couples i and i+1
  // Subdiagonals are turned real by a phase on each column of Q: h_{i+1,i} = |h| e^{iφ}.
  let ur = 1;
  let ui = 0;
  for (let i = 0; i < n; i++) {
    d[i] = H[2 * (i + n * i)];
    if (i > 0) {
      const hr = H[2 * (i + n * (i - 1))];
      const hi = H[2 * (i + n * (i - 1)) + 1];
      const size = Math.hypot(hr, hi);
      e[i - 1] = size;
      if (size > 0) [ur, ui] = [(ur * hr - ui * hi) / size, (ur * hi + ui * hr) / size];
      for (let r = 2 * n * i; r < 2 * n * (i + 1); r += 2) {
        const qr = Q[r];
        const qi = Q[r + 1];
        Q[r] = qr * ur - qi * ui;
        Q[r + 1] = qr * ui + qi * ur;
      }
    }
  }
  const converged = diagonaliseTridiagonal(d, e, Q, n);
  return sorted(d, Q, n, converged);
}

function hermitianPart(A: ComplexArray, n: number): ComplexArray {
  const h = new Float64Array(2 * n * n);
  for (let j = 0; j < n; j++) {
    for (let i = 0; i < n; i++) {
      h[2 * (i + n * j)] = (A[2 * (i + n * j)] + A[2 * (j + n * i)]) / 2;
      h[2 * (i + n * j) + 1] = (A[2 * (i + n * j) + 1] - A[2 * (j + n * i) + 1]) / 2;
    }
  }
  return h;
}

/**
 * Turns d (diagonal) of a real symmetric tridiagonal matrix, e[i] coupling i and i+1 (e as long as d), into its
 * eigenvalues in no order; Q, `rows` rows and as many columns as d, is multiplied by the eigenvectors from the right.
 * rows = 0: values only. Returns whether it converged.
 */
export function diagonaliseTridiagonal(d: Float64Array, e: Float64Array, Q: ComplexArray, rows: number): boolean {
  const n = d.length;
  for (let l = 0; l < n; l++) {
    for (let turn = 0; ; turn++) {
      let m = l;
      while (m < n - 1 && Math.abs(e[m]) > Number.EPSILON * (Math.abs(d[m]) + Math.abs(d[m + 1]))) m++;
      if (m === l) break;
      if (turn === 60) return false;
      let g = (d[l + 1] - d[l]) / (2 * e[l]);
      let r = Math.hypot(g, 1);
      g = d[m] - d[l] + e[l] / (g + (g < 0 ? -r : r));
      let s = 1;
      let c = 1;
      let p = 0;
      let i = m - 1;
      for (; i >= l; i--) {
        const f = s * e[i];
        const b = c * e[i];
        r = Math.hypot(f, g);
        e[i + 1] = r;
        if (r === 0) {
          // A rotation has split the matrix: start again.
          d[i + 1] -= p;
          e[m] = 0;
          break;
        }
        s = f / r;
        c = g / r;
        g = d[i + 1] - p;
        r = (d[i] - g) * s + 2 * c * b;
        p = s * r;
        d[i + 1] = g + p;
        g = c * r - b;
        rotateColumns(Q, 2 * rows * i, 2 * rows, c, s);
      }
      if (r === 0 && i >= l) continue;
      d[l] -= p;
      e[l] = g;
      e[m] = 0;
    }
  }
  return true;
}

/** Columns i, i+1 ← (c x − s y, s x + c y); `length` doubles a column, the first at `at`. */
function rotateColumns(Q: ComplexArray, at: number, length: number, c: number, s: number): void {
  for (let k = at, end = at + length; k < end; k++) {
    const x = Q[k];
    const y = Q[k + length];
    Q[k] = c * x - s * y;
    Q[k + length] = s * x + c * y;
  }
}

function sorted(d: Float64Array, Q: ComplexArray, n: number, converged: boolean): HermitianPairs {
  const order = Array.from({ length: n }, (_, i) => i).sort((a, b) => d[a] - d[b]);
  const values = Float64Array.from(order, (i) => d[i]);
  const vectors = new Float64Array(2 * n * n);
  order.forEach((from, to) => vectors.set(Q.subarray(2 * n * from, 2 * n * (from + 1)), 2 * n * to));
  return { values, vectors, converged };
}
