// Are bases orthonormal, ranks right, and fits the closest there are?

import { describe, expect, it } from 'vitest';
import { leastSquares, qrOrthonormalise } from '../../src/numerics/qr.ts';
import { distance, identity, product, randomMatrix } from './dense.ts';

describe('orthonormal bases', () => {
  it('are orthonormal to rounding and span the columns', () => {
    for (const [m, n] of [
      [1, 1],
      [5, 5],
      [40, 12],
      [200, 60],
    ] as const) {
      const A = randomMatrix(m, n, m);
      const { rank, basis, kept } = qrOrthonormalise(A, m, n);
      expect(rank).toBe(n);
      expect([...kept]).toEqual(Array.from({ length: n }, (_, i) => i));
      expect(distance(product(basis, basis, n, m, n, true), identity(n))).toBeLessThan(1e-15 * n + 1e-15);
      const back = product(basis, product(basis, A, n, m, n, true), m, n, n);
      expect(distance(back, A)).toBeLessThan(1e-14 * distance(A));
    }
  });

  it('stay orthonormal for nearly dependent columns and drop dependent ones', () => {
    const m = 30;
    const A = randomMatrix(m, 6, 1);
    const noise = randomMatrix(m, 1, 2);
    for (let i = 0; i < 2 * m; i++) {
      A[2 * m + i] = A[i] + 1e-9 * noise[i]; // nearly column 0
      A[4 * m + i] = 0; // column 2
      A[8 * m + i] = 3 * A[i] - A[6 * m + i]; // column 4 depends on 0 and 3
    }
    const { rank, basis, kept } = qrOrthonormalise(A, m, 6);
    expect(rank).toBe(4);
    expect([...kept]).toEqual([0, 1, 3, 5]);
    expect(distance(product(basis, basis, 4, m, 4, true), identity(4))).toBeLessThan(5e-15);
    expect(qrOrthonormalise(A, m, 6, 1e-6).rank).toBe(3);
    expect(qrOrthonormalise(randomMatrix(3, 7, 3), 3, 7).rank).toBe(3);
    expect(qrOrthonormalise(new Float64Array(0), 0, 0).rank).toBe(0);
  });
});

describe('least squares', () => {
  it('the remainder is orthogonal to the columns; its norm is reported', () => {
    const [m, n, k] = [40, 9, 3];
    const A = randomMatrix(m, n, 4);
    const b = randomMatrix(m, k, 5);
    const { solution, residuals, rank } = leastSquares(A, m, n, b, k);
    expect(rank).toBe(n);
    const remainder = product(A, solution, m, n, k).map((v, i) => b[i] - v);
    expect(distance(product(A, remainder, n, m, k, true))).toBeLessThan(1e-13);
    for (let c = 0; c < k; c++) {
      expect(residuals[c]).toBeCloseTo(distance(remainder.subarray(2 * m * c, 2 * m * (c + 1))), 12);
    }
  });

  it('square systems are solved, dependent columns get a basic solution, wide systems are met', () => {
    const A = randomMatrix(6, 6, 6);
    const x = randomMatrix(6, 1, 7);
    expect(distance(leastSquares(A, 6, 6, product(A, x, 6, 6, 1)).solution, x)).toBeLessThan(1e-12);
    A.copyWithin(12, 0, 12); // column 1 = column 0
    const b = product(A, x, 6, 6, 1);
    const fit = leastSquares(A, 6, 6, b);
    expect(fit.rank).toBe(5);
    expect(distance(product(A, fit.solution, 6, 6, 1), b)).toBeLessThan(1e-13);
    const wide = randomMatrix(3, 8, 8);
    const target = randomMatrix(3, 1, 9);
    expect(distance(product(wide, leastSquares(wide, 3, 8, target).solution, 3, 8, 1), target)).toBeLessThan(1e-13);
    expect(leastSquares(new Float64Array(8), 2, 2, Float64Array.of(3, 0, 0, 4)).residuals[0]).toBeCloseTo(5, 14);
  });
});
