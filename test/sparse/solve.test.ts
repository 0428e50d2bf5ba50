// Do blocks of right-hand sides, of any number of columns, come out as the plain substitution says?

import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Factors } from '../../src/sparse/factors.ts';
import type { FrontKernels } from '../../src/sparse/kernels/kernels.ts';
import { makeTwinKernels } from '../../src/sparse/kernels/twin.ts';
import { loadWasmKernels } from '../../src/sparse/kernels/wasm-kernels.ts';
import { solveFronts } from '../../src/sparse/solve.ts';
import { randomNumbers } from './matrices.ts';

const wasm = loadWasmKernels();
const twin = makeTwinKernels();

/** Factors of a well-conditioned matrix, fronts of [pivots, boundary rows] one after the other; some pivots are pairs. */
function madeUp(shapes: readonly (readonly [number, number])[], seed: number): Factors {
  const count = shapes.length;
  const n = shapes.reduce((sum, [np]) => sum + np, 0);
  const pivotStarts = new Int32Array(count + 1);
  const edgeStarts = new Float64Array(count + 1);
  const panelStarts = new Float64Array(count + 1);
  const edges: number[] = [];
  const order = new Int32Array(n);
  const random = randomNumbers(1000, seed);
  let largestFront = 0;
  shapes.forEach(([np, wanted], f) => {
    const first = pivotStarts[f];
    const later = n - first - np;
    const nb = Math.min(wanted, later);
    pivotStarts[f + 1] = first + np;
    // Rows further up, spread over all that are left, increasing.
    for (let i = 0; i < nb; i++) edges.push(first + np + Math.floor((i * later) / nb));
    edgeStarts[f + 1] = edges.length;
    panelStarts[f + 1] = panelStarts[f] + 2 * np * (np + nb);
    for (let j = 0; j < np; j++) order[first + j] = first + ((j + 1) % np);
    largestFront = Math.max(largestFront, np + nb);
  });
  const inversePivots = randomNumbers(4 * n, seed + 1);
  for (let f = 0; f < count; f++) {
    for (let j = pivotStarts[f]; j < pivotStarts[f + 1]; j++) {
      const pair = j + 1 < pivotStarts[f + 1] && random[j % 1000] > 0.6;
      inversePivots[4 * j] += 2;
      if (pair) {
        inversePivots[4 * j + 4] += 2;
        inversePivots[4 * j + 6] = inversePivots[4 * j + 7] = 0;
        j++;
      } else inversePivots[4 * j + 2] = inversePivots[4 * j + 3] = 0;
    }
  }
  const placeOf = Int32Array.from({ length: n }, (_, u) => (n % 7 === 0 ? n - 1 - u : (7 * u) % n));
  return {
    count,
    placeOf,
    pivotStarts,
    order,
    edgeStarts,
    edges: Int32Array.from(edges),
    panels: randomNumbers(panelStarts[count], seed + 2).map((v) => v / (4 + largestFront)),
    panelStarts,
    inversePivots,
    largestFront,
    perturbedPivots: 0,
  };
}

/** Largest difference of compiled and plain substitution, over the largest number. */
function difference(factors: Factors, columns: number): number {
  const n = factors.placeOf.length;
  const b = randomNumbers(2 * n * columns, 9);
  const x = solveFronts(factors, wasm as FrontKernels, new Float64Array(b.length), b, columns);
  const y = solveFronts(factors, twin, new Float64Array(b.length), b, columns);
  let worst = 0;
  let top = 1e-300;
  for (let i = 0; i < x.length; i++) {
    worst = Math.max(worst, Number.isNaN(x[i]) ? Infinity : Math.abs(x[i] - y[i]));
    top = Math.max(top, Math.abs(y[i]));
  }
  return worst / top;
}

const COLUMNS = [1, 2, 3, 4, 5, 63, 64, 65];

describe.skipIf(wasm === undefined)('blocks of right-hand sides', () => {
  const cases: [string, [number, number][]][] = [
    ['single unknowns', [[1, 0]]],
    ['fronts without pivots or without boundary', [[0, 5], [3, 0], [0, 0], [2, 4], [1, 1], [4, 9], [0, 0]]],
    ['odd and even fronts', Array.from({ length: 60 }, (_, f): [number, number] => [1 + (f % 13), (5 * f) % 23])],
    ['longer than a strip', [[31, 70], [32, 130], [33, 95], [65, 64], [70, 97], [97, 0]]],
    ['larger than a chunk', [[10, 300], [150, 211], [147, 8], [400, 3], [301, 0]]],
  ]; // prettier-ignore
  for (const [name, shapes] of cases) {
    it(`agree with the twin to 1e-14: ${name}`, () => {
      const factors = madeUp(shapes, 3);
      for (const columns of COLUMNS) expect(difference(factors, columns)).toBeLessThan(1e-14);
    });
  }

  it('agree with the twin to 1e-14: random fronts', () => {
    const shape = fc.tuple(fc.integer({ min: 0, max: 40 }), fc.integer({ min: 0, max: 60 }));
    fc.assert(
      fc.property(
        fc.array(shape, { maxLength: 12 }),
        fc.integer({ min: 1, max: 9 }),
        fc.integer(),
        (shapes, c, seed) => {
          expect(difference(madeUp(shapes, seed), c)).toBeLessThan(1e-14);
        },
      ),
      { numRuns: 200, seed: 5 },
    );
  });

  it('give a column the same bytes whatever stands beside it, and in place', () => {
    const factors = madeUp([[5, 11], [40, 60], [150, 211], [147, 0]], 8); // prettier-ignore
    const n = factors.placeOf.length;
    const b = randomNumbers(2 * n * 65, 2);
    const all = solveFronts(factors, wasm as FrontKernels, new Float64Array(b.length), b, 65);
    for (const [from, columns] of [
      [0, 2],
      [3, 5],
      [17, 48],
      [64, 1],
    ]) {
      if (columns === 1) continue; // one alone takes another way
      const part = b.slice(2 * n * from, 2 * n * (from + columns));
      solveFronts(factors, wasm as FrontKernels, part, part, columns);
      expect(Buffer.compare(Buffer.from(part.buffer), Buffer.from(all.slice(2 * n * from, 2 * n * (from + columns)).buffer))).toBe(0); // prettier-ignore
    }
  });
});
