// Are eigenpairs of Hermitian matrices real, orthonormal and right?

import { describe, expect, it } from 'vitest';
import { hermitianEigen } from '../../src/numerics/hermitian.ts';
import { distance, identity, product, randomMatrix, scaleColumns } from './dense.ts';

describe('Hermitian eigenpairs', () => {
  it('A V = V Λ, Vᴴ V = 1, values increase', () => {
    for (const n of [1, 2, 3, 20, 100]) {
      const A = hermitian(n, n);
      const { values, vectors, converged } = hermitianEigen(A, n);
      expect(converged).toBe(true);
      const d = new Float64Array(2 * n).map((_, i) => (i & 1 ? 0 : values[i >> 1]));
      expect(distance(product(A, vectors, n, n, n), scaleColumns(vectors, d, n))).toBeLessThan(
        5e-15 * Math.sqrt(n) * distance(A),
      );
      expect(distance(product(vectors, vectors, n, n, n, true), identity(n))).toBeLessThan(5e-15 * n);
      for (let k = 1; k < n; k++) expect(values[k]).toBeGreaterThanOrEqual(values[k - 1]);
    }
  });

  it('second difference matrix: 2 − 2 cos(kπ/(n+1))', () => {
    const n = 30;
    const A = new Float64Array(2 * n * n);
    for (let i = 0; i < n; i++) {
      A[2 * (i + n * i)] = 2;
      // −e^{±i}: a phase a neighbour leaves the spectrum alone
      if (i > 0) {
        A[2 * (i + n * (i - 1))] = A[2 * (i - 1 + n * i)] = -Math.cos(1);
        A[2 * (i + n * (i - 1)) + 1] = -Math.sin(1);
        A[2 * (i - 1 + n * i) + 1] = Math.sin(1);
      }
    }
    const { values } = hermitianEigen(A, n);
    for (let k = 1; k <= n; k++) expect(values[k - 1]).toBeCloseTo(2 - 2 * Math.cos((k * Math.PI) / (n + 1)), 13);
  });

  it('rank one, diagonal, zero and empty matrices', () => {
    const n = 7;
    const v = randomMatrix(n, 1, 3);
    const { values } = hermitianEigen(product(v, adjointOf(v), n, 1, n), n);
    expect(values[n - 1]).toBeCloseTo(distance(v) ** 2, 13);
    for (let k = 0; k < n - 1; k++) expect(Math.abs(values[k])).toBeLessThan(1e-14);
    expect([...hermitianEigen(Float64Array.of(3, 0, 0, 0, 0, 0, -1, 0), 2).values]).toEqual([-1, 3]);
    expect([...hermitianEigen(new Float64Array(8), 2).values]).toEqual([0, 0]);
    expect(hermitianEigen(new Float64Array(0), 0).values).toHaveLength(0);
  });
});

function hermitian(n: number, seed: number): Float64Array {
  const B = randomMatrix(n, n, seed);
  return B.map((_, i) => {
    const [r, c] = [(i >> 1) % n, Math.floor((i >> 1) / n)];
    const other = B[2 * (c + n * r) + (i & 1)];
    return i & 1 ? (B[i] - other) / 2 : (B[i] + other) / 2;
  });
}

/** Column to row. */
const adjointOf = (v: Float64Array): Float64Array => v.map((x, i) => (i & 1 ? -x : x));
