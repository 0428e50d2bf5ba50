// Does LU solve what it factored, and know its determinant and condition?

import { describe, expect, it } from 'vitest';
import { luFactor, luSolve, luSolveAdjointInto, luSolveInto, reciprocalCondition } from '../../src/numerics/lu.ts';
import { distance, identity, product, randomMatrix } from './dense.ts';

describe('LU', () => {
  it('solves A X = B and Aᴴ X = B to a small backward error, in place too', () => {
    for (const n of [1, 2, 3, 17, 60]) {
      const A = randomMatrix(n, n, n);
      const B = randomMatrix(n, 3, n + 1);
      const lu = luFactor(A, n);
      const X = luSolve(lu, B, 3);
      expect(distance(product(A, X, n, n, 3), B)).toBeLessThan(1e-15 * n * distance(A) * distance(X) + 1e-15);
      const Y = B.slice();
      expect(luSolveAdjointInto(Y, lu, Y, 3)).toBe(Y);
      expect(distance(product(A, Y, n, n, 3, true), B)).toBeLessThan(1e-15 * n * distance(A) * distance(Y) + 1e-15);
      const Z = B.slice();
      luSolveInto(Z, lu, Z, 3);
      expect(Z).toEqual(X);
    }
  });

  it('log-determinant: 2 × 2 by hand, and det(AB) = det A det B', () => {
    // (1 + 2i)(3 − i) − (2)(i) = 5 + 3i
    const lu = luFactor(Float64Array.of(1, 2, 2, 0, 0, 1, 3, -1), 2);
    expect(Math.exp(lu.logDeterminant.re)).toBeCloseTo(Math.hypot(5, 3), 13);
    expectSamePhase(lu.logDeterminant.im, Math.atan2(3, 5));
    const n = 20;
    const A = randomMatrix(n, n, 1);
    const B = randomMatrix(n, n, 2);
    const a = luFactor(A, n).logDeterminant;
    const b = luFactor(B, n).logDeterminant;
    const ab = luFactor(product(A, B, n, n, n), n).logDeterminant;
    expect(ab.re).toBeCloseTo(a.re + b.re, 11);
    expectSamePhase(ab.im, a.im + b.im);
  });

  it('reciprocal condition: within a factor 3 of the inverse’s norm, 1 for the identity, tiny or 0 when singular', () => {
    for (const n of [3, 20, 50]) {
      const A = randomMatrix(n, n, 9 + n);
      const lu = luFactor(A, n);
      const inverse = luSolve(lu, identity(n), n);
      const exact = 1 / (lu.norm * luFactor(inverse, n).norm);
      const estimate = reciprocalCondition(lu);
      expect(estimate).toBeGreaterThan(exact * (1 - 1e-10));
      expect(estimate).toBeLessThan(3 * exact);
    }
    expect(reciprocalCondition(luFactor(identity(4), 4))).toBeCloseTo(1, 14);
    const twice = Float64Array.of(1, 1, 2, 0, 1, 1, 2, 0);
    expect(reciprocalCondition(luFactor(twice, 2))).toBe(0);
    expect(luFactor(twice, 2).logDeterminant.re).toBe(-Infinity);
  });

  it('takes the empty matrix, scales of 1e±150, and refuses bad input', () => {
    expect(luFactor(new Float64Array(0), 0).logDeterminant).toEqual({ re: 0, im: 0 });
    for (const factor of [1e-150, 1e150]) {
      const A = randomMatrix(5, 5, 3).map((v) => v * factor);
      const X = luSolve(luFactor(A, 5), A, 5);
      expect(distance(X, identity(5))).toBeLessThan(1e-13);
    }
    expect(() => luFactor(new Float64Array(7), 2)).toThrow(/7 numbers .* expected 8/);
    expect(() => luFactor(Float64Array.of(1, 0, NaN, 0, 0, 0, 1, 0), 2)).toThrow(/\(1, 0\) is NaN/);
    expect(() => luSolve(luFactor(identity(2), 2), new Float64Array(2))).toThrow(/expected 4/);
  });
});

function expectSamePhase(a: number, b: number): void {
  expect(Math.hypot(Math.cos(a) - Math.cos(b), Math.sin(a) - Math.sin(b))).toBeLessThan(1e-12);
}
