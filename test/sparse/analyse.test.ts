// Does the direct solver solve, and say so when it cannot?

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { analyse } from '../../src/sparse/analyse.ts';
import { makeTwinKernels } from '../../src/sparse/kernels/twin.ts';
import { loadWasmKernels } from '../../src/sparse/kernels/wasm-kernels.ts';
import type { FrontKernels } from '../../src/sparse/kernels/kernels.ts';
import type { ElementFill, ElementPattern } from '../../src/sparse/pattern.ts';
import {
  denseLogDeterminant,
  denseMatrix,
  largestResidual,
  randomMatrix,
  randomNumbers,
  type RandomChoice,
} from './matrices.ts';

const wasm = loadWasmKernels();
const twin = makeTwinKernels();
const both: [string, FrontKernels | undefined][] = [
  ['wasm kernels', wasm],
  ['twin kernels', twin],
];

/** Worst backward error of `columns` solutions, and the report. */
function check(kernels: FrontKernels, unknowns: number, seed: number, columns: number, choice: RandomChoice = {}) {
  const { pattern, fill } = randomMatrix(unknowns, seed, choice);
  const factorization = analyse(pattern, { kernels }).factorize(fill);
  const b = randomNumbers(2 * unknowns * columns, seed + 1);
  const x = factorization.solveInto(new Float64Array(b.length), b, columns);
  const a = denseMatrix(pattern, fill);
  return { error: largestResidual(a, unknowns, x, b, columns), factorization, a, pattern, fill };
}

for (const [name, kernels] of both) {
  describe.skipIf(kernels === undefined)(name, () => {
    const k = kernels as FrontKernels;

    it('solve random patterns, with the determinant', () => {
      fc.assert(
        fc.property(
          fc.integer({ min: 1, max: 40 }),
          fc.integer(),
          fc.integer({ min: 1, max: 6 }),
          (n, seed, columns) => {
            const { error, factorization, a } = check(k, n, seed, columns);
            expect(error).toBeLessThan(1e-11);
            expect(factorization.report.perturbedPivots).toBe(0);
            const exact = denseLogDeterminant(a, n);
            expect(Math.abs(factorization.logDeterminant.re - exact.re)).toBeLessThan(1e-9);
            expect(Math.cos(factorization.logDeterminant.im - exact.im)).toBeGreaterThan(1 - 1e-12);
          },
        ),
        { numRuns: 100, seed: 7 },
      );
    });

    it('solve with zero diagonals: pairs, and rows passed on to the parent', () => {
      fc.assert(
        fc.property(fc.integer({ min: 6, max: 60 }), fc.integer(), (n, seed) => {
          const { error, factorization } = check(k, n, seed, 2, { zeroDiagonals: 0.7 });
          // Random zero diagonals leave some matrices singular; then it says so.
          if (factorization.report.perturbedPivots === 0) expect(error).toBeLessThan(1e-8);
        }),
        { numRuns: 100, seed: 3 },
      );
    });

    it('solve saddle points, where no leaf has a pivot of its own', () => {
      // [[0, B], [Bᵀ, 0]] on chains: every diagonal entry is zero.
      const n = 40;
      const list: number[] = [];
      for (let i = 0; i + 1 < n; i++) list.push(i, i + 1);
      const pattern: ElementPattern = {
        unknowns: n,
        starts: Int32Array.from({ length: n }, (_, e) => 2 * e),
        list: Int32Array.from(list),
        centroids: Float64Array.from({ length: 2 * n - 2 }, (_, i) => (i % 2 === 0 ? i : 0)),
      };
      const fill: ElementFill = (e, into) => into.set([0, 0, 1 + e / n, 0.3, 1 + e / n, 0.3, 0, 0]);
      const factorization = analyse(pattern, { kernels: k }).factorize(fill);
      const b = randomNumbers(2 * n, 5);
      const x = factorization.solveInto(new Float64Array(2 * n), b, 1);
      expect(factorization.report.perturbedPivots).toBe(0);
      expect(largestResidual(denseMatrix(pattern, fill), n, x, b, 1)).toBeLessThan(1e-14);
    });

    it('solve with one element that couples very many unknowns', () => {
      for (const hub of [120, 400]) expect(check(k, 400, hub, 5, { hub }).error).toBeLessThan(1e-11);
    });

    it('solve disconnected patterns and scaled ones', () => {
      expect(check(k, 50, 1, 3, { reach: 0 }).error).toBeLessThan(1e-13);
      expect(check(k, 50, 2, 3, { scaleOf: () => 1e9 }).error).toBeLessThan(1e-12);
      expect(check(k, 50, 2, 3, { scaleOf: () => 1e-9 }).error).toBeLessThan(1e-12);
      expect(check(k, 60, 4, 3, { scaleOf: (e) => 10 ** ((e % 9) - 4) }).error).toBeLessThan(1e-12);
    });

    it('solve n = 0, 1, 2', () => {
      const none = { unknowns: 0, starts: Int32Array.of(0), list: new Int32Array(0), centroids: new Float64Array(0) };
      const empty = analyse(none, { kernels: k }).factorize(() => undefined);
      expect(empty.solveInto(new Float64Array(0), new Float64Array(0), 1)).toHaveLength(0);
      expect(empty.logDeterminant.re).toBe(0);
      expect(check(k, 1, 3, 2).error).toBeLessThan(1e-15);
      // [[0, 2i], [2i, 0]]: determinant 4, a pair pivot.
      const pattern = twoByTwo();
      const pair = analyse(pattern, { kernels: k }).factorize((_, into) => into.set([0, 0, 0, 2, 0, 2, 0, 0]));
      expect(pair.logDeterminant.re).toBeCloseTo(Math.log(4), 14);
      expect(pair.logDeterminant.im).toBeCloseTo(0, 14);
      const x = pair.solveInto(new Float64Array(4), Float64Array.of(2, 0, 0, 4), 1);
      expect([...x]).toEqual([2, 0, 0, -1].map((v) => expect.closeTo(v, 14)));
    });

    it('take fixed and doubled unknowns', () => {
      const pattern = {
        unknowns: 2,
        starts: Int32Array.of(0, 4),
        list: Int32Array.of(0, -1, 1, 0),
        centroids: Float64Array.of(0, 0),
      };
      const values = randomNumbers(32, 9);
      const fill: ElementFill = (_, into) => {
        for (let j = 0; j < 4; j++) {
          for (let i = 0; i < 4; i++) {
            const t = 2 * (Math.min(i, j) * 4 + Math.max(i, j));
            into.set([values[t], values[t + 1]], 2 * (i + 4 * j));
          }
        }
      };
      const b = Float64Array.of(1, 2, 3, 4);
      const x = analyse(pattern, { kernels: k }).factorize(fill).solveInto(new Float64Array(4), b, 1);
      expect(largestResidual(denseMatrix(pattern, fill), 2, x, b, 1)).toBeLessThan(1e-14);
    });

    it('report singular matrices', () => {
      for (const n of [1, 7, 60]) {
        const { pattern } = randomMatrix(n, 11);
        const { report } = analyse(pattern, { kernels: k }).factorize((_, into) => into.fill(0));
        expect(report.perturbedPivots).toBe(n);
      }
      const ones = analyse(twoByTwo(), { kernels: k }).factorize((_, into) => into.set([1, 1, 1, 1, 1, 1, 1, 1]));
      expect(ones.report.perturbedPivots).toBe(1);
      expect(ones.report.smallestPivot).toBeLessThan(1e-15);
      // A row of zeros within a larger matrix.
      const { pattern, fill } = randomMatrix(40, 2);
      const blank: ElementFill = (e, into) => {
        fill(e, into);
        const from = pattern.starts[e];
        const nd = pattern.starts[e + 1] - from;
        for (let j = 0; j < nd; j++) {
          for (let i = 0; i < nd; i++) {
            if (pattern.list[from + i] === 17 || pattern.list[from + j] === 17)
              into.fill(0, 2 * (i + j * nd), 2 * (i + j * nd) + 2);
          }
        }
      };
      expect(analyse(pattern, { kernels: k }).factorize(blank).report.perturbedPivots).toBe(1);
      expect(analyse(pattern, { kernels: k }).factorize((_, into) => into.fill(NaN)).report.smallestPivot).toBeNaN();
    });

    it('keep several factorizations at once, and refuse to solve with a released one', () => {
      const { pattern, fill } = randomMatrix(30, 21);
      const analysis = analyse(pattern, { kernels: k });
      const double: ElementFill = (e, into) => {
        fill(e, into);
        for (let i = 0; i < into.length; i++) into[i] *= 2;
      };
      const first = analysis.factorize(fill);
      const second = analysis.factorize(double);
      const b = randomNumbers(60, 1);
      const x = first.solveInto(new Float64Array(60), b, 1);
      const y = second.solveInto(new Float64Array(60), b, 1);
      for (let i = 0; i < 60; i++) expect(2 * y[i]).toBe(x[i]);
      first.release();
      expect(() => first.solveInto(x, b, 1)).toThrow('released');
      const third = analysis.factorize(fill);
      expect([...third.solveInto(new Float64Array(60), b, 1)]).toEqual([...x]);
      expect([...second.solveInto(new Float64Array(60), b, 1)]).toEqual([...y]);
    });
  });
}

describe('the two sets of kernels', () => {
  it.skipIf(wasm === undefined)('agree', () => {
    for (const [n, choice] of [
      [300, {}],
      [200, { hub: 150 }],
    ] as [number, RandomChoice][]) {
      const dominant: RandomChoice = { ...choice, scaleOf: (e) => 1 + (e % 3) };
      const a = check(wasm as FrontKernels, n, 31, 4, dominant);
      const b = check(twin, n, 31, 4, dominant);
      expect(Math.abs(a.factorization.logDeterminant.re - b.factorization.logDeterminant.re)).toBeLessThan(1e-11);
      expect(a.factorization.report.nonzeros).toBe(b.factorization.report.nonzeros);
    }
  });
});

describe('the door', () => {
  it('names what is wrong', () => {
    const centroids = Float64Array.of(0, 0);
    const list = Int32Array.of(1);
    const starts = Int32Array.of(0, 1);
    expect(() => analyse({ unknowns: 2, starts, list, centroids })).toThrow('unknown 0 belongs to no element');
    expect(() => analyse({ unknowns: 1, starts, list, centroids })).toThrow('list[0] is 1; expected -1 or 0 … 0');
    expect(() => analyse({ unknowns: 2, starts: Int32Array.of(0, 2), list, centroids })).toThrow('starts');
    expect(() => analyse({ unknowns: -1, starts, list, centroids })).toThrow('unknowns is -1');
    expect(() => analyse({ unknowns: 2, starts, list, centroids: new Float64Array(3) })).toThrow('centroids');
    const { pattern, fill } = randomMatrix(4, 1);
    const factorization = analyse(pattern).factorize(fill);
    expect(() => factorization.solveInto(new Float64Array(8), new Float64Array(7), 1)).toThrow('rhs holds 7');
    expect(() => factorization.solveInto(new Float64Array(8), new Float64Array(8), -1)).toThrow('columns is -1');
  });
});

function twoByTwo(): ElementPattern {
  return { unknowns: 2, starts: Int32Array.of(0, 2), list: Int32Array.of(0, 1), centroids: Float64Array.of(0, 0) };
}
