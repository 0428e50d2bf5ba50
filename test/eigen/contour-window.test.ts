// Do contours find what lies in a wedge, and does the search end where nothing does?

import { expect, test } from 'vitest';
import { searchWedge } from '../../src/eigen/contour-window.ts';
import {
  add,
  type Complex,
  complex,
  divide,
  modulus,
  multiply,
  squareRoot,
  subtract,
} from '../../src/numerics/complex.ts';
import type { ComplexArray } from '../../src/numerics/complex.ts';

/** A(k) with entries on its diagonal only, between two rotations of neighbours: dense enough for random columns. */
function diagonalProblem(entries: readonly ((k: Complex, from: number) => Complex)[]) {
  let factored = 0;
  return {
    size: entries.length,
    count: () => factored,
    factorize(k: Complex, from: number) {
      factored++;
      const d = entries.map((entry) => entry(k, from));
      return {
        solveInto(out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray {
          for (let i = 0; i < columns * d.length; i++) {
            const v = divide(complex(rhs[2 * i], rhs[2 * i + 1]), d[i % d.length]);
            out[2 * i] = v.re;
            out[2 * i + 1] = v.im;
          }
          return out;
        },
        release() {},
      };
    },
  };
}

const zeroAt = (re: number, im: number) => (k: Complex) => subtract(k, complex(re, im));
const window = { kMin: 2, kMax: 3, slope: 0.2, branchPoints: [], expected: () => 1, seed: 1 };
const holds = (ks: readonly Complex[], z: Complex): boolean => ks.some((k) => modulus(subtract(k, z)) < 1e-8);

test('all in the wedge, those of other places none', () => {
  const inside = [complex(2.1, -0.3), complex(2.5), complex(2.5001, 0.001), complex(2.9, 0.4)];
  const problem = diagonalProblem([...inside.map((z) => zeroAt(z.re, z.im)), zeroAt(5, 1), zeroAt(0.5, 0)]);
  const { ks, covered } = searchWedge(problem, window);
  expect(covered).toBe(true);
  for (const z of inside) expect(holds(ks, z)).toBe(true);
  for (const k of ks) expect(Math.abs(k.re - 2.5)).toBeLessThan(0.6);
});

test('an empty wedge is told by its first contours', () => {
  // what is left of nothing is rounding: it must not be taken for more eigenvalues than columns
  const problem = diagonalProblem(Array.from({ length: 40 }, (_, i) => zeroAt(10 + i, (i % 3) - 1)));
  const { ks, covered, contours } = searchWedge(problem, window);
  expect(covered).toBe(true);
  expect(ks).toHaveLength(0);
  expect(contours).toBeLessThan(5);
});

test('more than the columns can tell: boxes are cut', () => {
  const all = Array.from({ length: 30 }, (_, i) => complex(2 + (i + 0.5) / 30, 0.2 * Math.sin(i)));
  const { ks, covered } = searchWedge(diagonalProblem(all.map((z) => zeroAt(z.re, z.im))), window);
  expect(covered).toBe(true);
  for (const z of all) expect(holds(ks, z)).toBe(true);
});

test('the sheet of the real axis on either side of a branch point', () => {
  // √(k − 2.5) continued from above (from below: i√(2.5 − k)) equals a value that only one sheet has
  const root = (k: Complex, from: number): Complex =>
    from > 2.5 ? squareRoot(subtract(k, complex(2.5))) : multiply(complex(0, 1), squareRoot(subtract(complex(2.5), k)));
  const above = complex(2.8, -0.1);
  const below = complex(2.2, -0.1);
  const problem = diagonalProblem([
    (k, from) => subtract(root(k, from), root(above, 3)),
    (k, from) => subtract(root(k, from), root(below, 2)),
    (k, from) => add(root(k, from), complex(3)),
  ]);
  const { ks, covered } = searchWedge(problem, { ...window, branchPoints: [2.5] });
  expect(holds(ks, above)).toBe(true);
  expect(holds(ks, below)).toBe(true);
  expect(ks).toHaveLength(2);
  // the branch point itself is left out, and told
  expect(covered).toBe(false);
});
