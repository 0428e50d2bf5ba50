// Does the direct solver solve?

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { analyse } from '../../src/sparse/analyse.ts';
import type { ElementFill, ElementPattern } from '../../src/sparse/pattern.ts';
import { denseMatrix, largestResidual, randomMatrix, randomNumbers } from './matrices.ts';

describe('analyse and factorize', () => {
  it('solves random patterns', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 60 }), fc.integer(), (unknowns, seed) => {
        const { pattern, fill } = randomMatrix(unknowns, seed);
        const factorization = analyse(pattern).factorize(fill);
        const columns = 3;
        const b = randomNumbers(2 * unknowns * columns, seed + 1);
        const x = factorization.solveInto(new Float64Array(b.length), b, columns);
        expect(largestResidual(denseMatrix(pattern, fill), unknowns, x, b, columns)).toBeLessThan(1e-11);
        expect(factorization.report.perturbedPivots).toBe(0);
      }),
      { numRuns: 200, seed: 7 },
    );
  });

  it('takes fixed unknowns, doubled unknowns and the empty pattern', () => {
    const pattern: ElementPattern = {
      unknowns: 2,
      starts: Int32Array.of(0, 4),
      list: Int32Array.of(0, -1, 1, 0),
      centroids: Float64Array.of(0, 0),
    };
    const a = randomMatrix(4, 3, 1).fill;
    const x = analyse(pattern)
      .factorize(a)
      .solveInto(new Float64Array(4), Float64Array.of(1, 2, 3, 4), 1);
    expect(largestResidual(denseMatrix(pattern, a), 2, x, Float64Array.of(1, 2, 3, 4), 1)).toBeLessThan(1e-12);

    const none: ElementPattern = {
      unknowns: 0,
      starts: Int32Array.of(0),
      list: new Int32Array(0),
      centroids: new Float64Array(0),
    };
    const empty = analyse(none).factorize(() => undefined);
    expect(empty.solveInto(new Float64Array(0), new Float64Array(0), 1)).toHaveLength(0);
    expect(empty.logDeterminant).toEqual({ re: 0, im: 0 });
  });

  it('refuses an unknown of no element', () => {
    const pattern = {
      unknowns: 2,
      starts: Int32Array.of(0, 1),
      list: Int32Array.of(1),
      centroids: Float64Array.of(0, 0),
    };
    expect(() => analyse(pattern)).toThrow('unknown 0 belongs to no element');
  });

  it('gives the determinant', () => {
    // [[0, 2i], [2i, 0]]: determinant 4; a pair pivot.
    const pattern = {
      unknowns: 2,
      starts: Int32Array.of(0, 2),
      list: Int32Array.of(0, 1),
      centroids: Float64Array.of(0, 0),
    };
    const fill: ElementFill = (_, into) => into.set([0, 0, 0, 2, 0, 2, 0, 0]);
    const { logDeterminant } = analyse(pattern).factorize(fill);
    expect(logDeterminant.re).toBeCloseTo(Math.log(4), 14);
    expect(logDeterminant.im).toBeCloseTo(0, 14);
  });
});
