// Are singular values and vectors right, small ones too?

import { describe, expect, it } from 'vitest';
import { singularForm, singularValues } from '../../src/numerics/singular-values.ts';
import { qrOrthonormalise } from '../../src/numerics/qr.ts';
import { distance, identity, product, randomMatrix, scaleColumns } from './dense.ts';

describe('singular values', () => {
  it('A = U Σ Vᴴ with orthonormal U, V, tall, square and wide', () => {
    for (const [m, n] of [
      [1, 1],
      [6, 6],
      [30, 9],
      [9, 30],
      [60, 60],
    ] as const) {
      const A = randomMatrix(m, n, m + n);
      const r = Math.min(m, n);
      const { values, left, right, converged } = singularForm(A, m, n);
      expect(converged).toBe(true);
      const sigma = new Float64Array(2 * r).map((_, i) => (i & 1 ? 0 : values[i >> 1]));
      expect(distance(product(left, left, r, m, r, true), identity(r))).toBeLessThan(1e-15 * r);
      expect(distance(product(right, right, r, n, r, true), identity(r))).toBeLessThan(1e-15 * r);
      expect(distance(product(A, right, m, n, r), scaleColumns(left, sigma, m))).toBeLessThan(1e-14 * distance(A));
      for (let k = 1; k < r; k++) expect(values[k]).toBeLessThanOrEqual(values[k - 1]);
      expect(distance(values)).toBeCloseTo(distance(A), 12);
    }
  });

  it('finds prescribed values down to 1e-12 of the largest', () => {
    const n = 13;
    const U = qrOrthonormalise(randomMatrix(20, n, 1), 20, n).basis;
    const V = qrOrthonormalise(randomMatrix(n, n, 2), n, n).basis;
    const sigma = new Float64Array(2 * n).map((_, i) => (i & 1 ? 0 : 10 ** -(i >> 1)));
    const VH = new Float64Array(2 * n * n).map((_, i) => {
      const [r, c] = [(i >> 1) % n, Math.floor((i >> 1) / n)];
      return (i & 1 ? -1 : 1) * V[2 * (c + n * r) + (i & 1)];
    });
    const values = singularValues(product(scaleColumns(U, sigma, 20), VH, 20, n, n), 20, n);
    for (let k = 0; k < n; k++) expect(Math.abs(values[k] - 10 ** -k)).toBeLessThan(3e-15);
  });

  it('columns scaled over 300 decades keep relative accuracy; zero, rank-one and empty matrices', () => {
    const A = identity(3);
    A[0] = 1e-150;
    A[8] = 1e150;
    expect([...singularValues(A, 3, 3)].map((v) => Math.log10(v))).toEqual([150, 0, -150]);
    expect([...singularValues(new Float64Array(12), 3, 2)]).toEqual([0, 0]);
    const twin = randomMatrix(8, 2, 3);
    twin.copyWithin(16, 0, 16);
    expect(singularValues(twin, 8, 2)[1]).toBeLessThan(1e-15);
    expect(singularForm(new Float64Array(0), 0, 0).values).toHaveLength(0);
    expect(() => singularValues(new Float64Array(3), 1, 2)).toThrow(/3 numbers/);
  });
});
