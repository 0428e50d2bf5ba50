// Small dense matrices to test with: random ones, products, distances.

import type { ComplexArray } from '../../src/numerics/complex.ts';
import { randomStream } from '../../src/numerics/random.ts';

/** rows × columns, entries uniform in the square [−1, 1]². */
export function randomMatrix(rows: number, columns: number, seed: number): ComplexArray {
  const stream = randomStream(seed);
  return new Float64Array(2 * rows * columns).map(() => 2 * stream.uniform() - 1);
}

/** A B, or Aᴴ B when `adjoint`; A is m × n (n × m), B n × p. */
export function product(
  A: ComplexArray,
  B: ComplexArray,
  m: number,
  n: number,
  p: number,
  adjoint = false,
): ComplexArray {
  const C = new Float64Array(2 * m * p);
  for (let j = 0; j < p; j++) {
    for (let k = 0; k < n; k++) {
      const br = B[2 * (k + n * j)];
      const bi = B[2 * (k + n * j) + 1];
      for (let i = 0; i < m; i++) {
        const at = adjoint ? 2 * (k + n * i) : 2 * (i + m * k);
        const ar = A[at];
        const ai = adjoint ? -A[at + 1] : A[at + 1];
        C[2 * (i + m * j)] += ar * br - ai * bi;
        C[2 * (i + m * j) + 1] += ar * bi + ai * br;
      }
    }
  }
  return C;
}

/** Frobenius norm of A − B, or of A alone. */
export function distance(A: ArrayLike<number>, B?: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < A.length; i++) sum += (A[i] - (B ? B[i] : 0)) ** 2;
  return Math.sqrt(sum);
}

export function identity(n: number): ComplexArray {
  const I = new Float64Array(2 * n * n);
  for (let i = 0; i < n; i++) I[2 * (i + n * i)] = 1;
  return I;
}

/** Columns of V times the complex numbers d. */
export function scaleColumns(V: ComplexArray, d: ComplexArray, rows: number): ComplexArray {
  return V.map((_, i) => {
    const c = Math.floor(i / 2 / rows);
    const at = i - (i & 1);
    return i & 1 ? V[at] * d[2 * c + 1] + V[at + 1] * d[2 * c] : V[at] * d[2 * c] - V[at + 1] * d[2 * c + 1];
  });
}
