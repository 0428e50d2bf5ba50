// Are the eigenpairs of general complex matrices right?

import { describe, expect, it } from 'vitest';
import type { ComplexArray } from '../../src/numerics/complex.ts';
import { eigenGeneral, eigenGeneralised, schurForm } from '../../src/numerics/eigenvalues.ts';
import { luFactor, luSolve } from '../../src/numerics/lu.ts';
import { distance, identity, product, randomMatrix, scaleColumns } from './dense.ts';

describe('eigenpairs', () => {
  it('A V = V Λ to 1e-14 ‖A‖, unit vectors, trace and determinant kept', () => {
    for (const n of [1, 2, 3, 10, 40, 120]) {
      const A = randomMatrix(n, n, n);
      const { values, vectors, convergence } = eigenGeneral(A, n);
      expect(convergence.converged).toBe(true);
      expect(largestResidual(A, values, vectors, n)).toBeLessThan(1e-14 * distance(A));
      const gap = [0, 0];
      let logDeterminant = 0;
      for (let k = 0; k < n; k++) {
        expect(distance(vectors.subarray(2 * n * k, 2 * n * (k + 1)))).toBeCloseTo(1, 13);
        gap[0] += A[2 * (k + n * k)] - values[2 * k];
        gap[1] += A[2 * (k + n * k) + 1] - values[2 * k + 1];
        logDeterminant += Math.log(Math.hypot(values[2 * k], values[2 * k + 1]));
      }
      expect(Math.hypot(gap[0], gap[1])).toBeLessThan(1e-14 * n * distance(A));
      expect(logDeterminant).toBeCloseTo(luFactor(A, n).logDeterminant.re, 9);
    }
  });

  it('Schur form: Z unitary, Z T Zᴴ = A, T triangular', () => {
    const n = 30;
    const A = randomMatrix(n, n, 4);
    const { T, Z } = schurForm(A, n);
    expect(distance(product(Z, Z, n, n, n, true), identity(n))).toBeLessThan(5e-14);
    expect(distance(product(A, Z, n, n, n), product(Z, T, n, n, n))).toBeLessThan(1e-14 * distance(A));
    for (let j = 0; j < n; j++) for (let i = j + 1; i < n; i++) expect(T[2 * (i + n * j)]).toBe(0);
  });

  it('finds a prescribed spectrum X D X⁻¹', () => {
    const n = 12;
    const X = randomMatrix(n, n, 5);
    const D = new Float64Array(2 * n).map((_, i) => (i & 1 ? -0.1 * i : 1 + (i >> 1)));
    const A = rightDivide(scaleColumns(X, D, n), X, n);
    const { values } = eigenGeneral(A, n);
    const found = Array.from({ length: n }, (_, k) => [values[2 * k], values[2 * k + 1]]).sort((a, b) => a[0] - b[0]);
    found.forEach(([re, im], k) => expect(Math.hypot(re - D[2 * k], im - D[2 * k + 1])).toBeLessThan(1e-11));
  });

  it('degenerate matrices: zero, identity, cyclic shift, Jordan block, companion, scales of 1e±100', () => {
    expect([...eigenGeneral(new Float64Array(18), 3).values]).toEqual([0, 0, 0, 0, 0, 0]);
    expect([...eigenGeneral(identity(3), 3).values]).toEqual([1, 0, 1, 0, 1, 0]);
    expect(eigenGeneral(new Float64Array(0), 0).values).toHaveLength(0);
    const n = 8;
    const shift = new Float64Array(2 * n * n); // eigenvalues: the roots of unity; QR without an exceptional shift stalls
    for (let i = 0; i < n; i++) shift[2 * (((i + 1) % n) + n * i)] = 1;
    const cyclic = eigenGeneral(shift, n);
    expect(cyclic.convergence.converged).toBe(true);
    for (let k = 0; k < n; k++) expect(Math.hypot(cyclic.values[2 * k], cyclic.values[2 * k + 1])).toBeCloseTo(1, 14);
    expect(largestResidual(shift, cyclic.values, cyclic.vectors, n)).toBeLessThan(1e-14);
    const jordan = new Float64Array(2 * n * n);
    for (let i = 0; i < n; i++) {
      jordan[2 * (i + n * i)] = 2;
      if (i > 0) jordan[2 * (i - 1 + n * i)] = 1;
    }
    const block = eigenGeneral(jordan, n);
    expect(largestResidual(jordan, block.values, block.vectors, n)).toBeLessThan(1e-14);
    for (const factor of [1e-100, 1e100]) {
      const A = randomMatrix(n, n, 6).map((v) => v * factor);
      const { values, vectors } = eigenGeneral(A, n);
      expect(largestResidual(A, values, vectors, n) / factor).toBeLessThan(1e-13);
    }
  });

  it('refuses a short array and numbers that are not finite', () => {
    expect(() => eigenGeneral(new Float64Array(6), 2)).toThrow(/6 numbers/);
    expect(() => eigenGeneral(Float64Array.of(Infinity, 0), 1)).toThrow(/finite/);
  });
});

describe('generalised eigenpairs', () => {
  it('A v = λ B v', () => {
    const n = 25;
    const A = randomMatrix(n, n, 7);
    const B = randomMatrix(n, n, 8);
    const { values, vectors, reciprocalCondition } = eigenGeneralised(A, B, n);
    expect(reciprocalCondition).toBeGreaterThan(1e-5);
    const left = product(A, vectors, n, n, n);
    const right = scaleColumns(product(B, vectors, n, n, n), values, n);
    for (let k = 0; k < n; k++) {
      const size = distance(A) + Math.hypot(values[2 * k], values[2 * k + 1]) * distance(B);
      const column = [2 * n * k, 2 * n * (k + 1)] as const;
      expect(distance(left.subarray(...column), right.subarray(...column))).toBeLessThan(1e-13 * size);
    }
  });

  it('a singular B is reported, not thrown', () => {
    const answer = eigenGeneralised(identity(2), new Float64Array(8), 2);
    expect(answer.reciprocalCondition).toBe(0);
    expect(answer.convergence.converged).toBe(false);
  });
});

/** ‖A v − λ v‖ at its largest. */
function largestResidual(A: ComplexArray, values: ComplexArray, vectors: ComplexArray, n: number): number {
  const AV = product(A, vectors, n, n, n);
  const VD = scaleColumns(vectors, values, n);
  let worst = 0;
  for (let k = 0; k < n; k++) {
    const column = [2 * n * k, 2 * n * (k + 1)] as const;
    worst = Math.max(worst, distance(AV.subarray(...column), VD.subarray(...column)));
  }
  return worst;
}

/** Y X⁻¹ through (X⁻ᵀ Yᵀ)ᵀ. */
function rightDivide(Y: ComplexArray, X: ComplexArray, n: number): ComplexArray {
  const inverse = luSolve(luFactor(X, n), identity(n), n);
  return product(Y, inverse, n, n, n);
}
