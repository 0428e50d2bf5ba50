// Are the eigenvalues of a projected cluster right, grouped right, and quadratic in the error of its vectors?

import { describe, expect, test } from 'vitest';
import { gather, rayleighGroups } from '../../src/eigen/rayleigh.ts';
import { complex } from '../../src/numerics/complex.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { farModes, firstVectors, smallMode, smallProblem } from './small-problem.ts';

const modes = [
  { k: complex(4, -0.04), weight: 1 },
  { k: complex(4.00001, -0.04), weight: 0.6 },
  { k: complex(4.1, -0.02), weight: 0.5 },
  ...farModes(6),
];
const n = modes.length;

test('groups: means, spreads, multiplicities', () => {
  const groups = rayleighGroups(smallProblem(modes), complex(4.05, 0), 0, firstVectors(n, 3), 3, 1e-4);
  expect(groups.map((g) => g.multiplicity).sort()).toEqual([1, 2]);
  const pair = groups.find((g) => g.multiplicity === 2)!;
  expect(pair.k.re).toBeCloseTo(4.000005, 10);
  expect(pair.spread).toBeCloseTo(5e-6, 12);
  const single = groups.find((g) => g.multiplicity === 1)!;
  expect(single.k.re).toBeCloseTo(4.1, 12);
  expect(single.k.im).toBeCloseTo(-0.02, 12);
  // dk/dD = i w k / 2 at D = 0, of the pair the mean
  expect(single.slope.im).toBeCloseTo((0.5 * 4.1) / 2, 10);
  expect(pair.slope.im).toBeCloseTo((0.8 * 4.000005) / 2, 5);
});

test('at a level the eigenvalues are those of the formula, and slopes their difference quotients', () => {
  const problem = smallProblem(modes);
  const at = (level: number) => rayleighGroups(problem, complex(4.1, 0), level, firstVectors(n, 3), 3, 1e-9);
  const h = 1e-5;
  for (const mode of modes.slice(0, 3)) {
    const k = smallMode(mode, 0.03);
    const group = at(0.03).find((g) => Math.hypot(g.k.re - k.re, g.k.im - k.im) < 1e-10);
    expect(group).toBeDefined();
    const [a, b] = [smallMode(mode, 0.03 - h), smallMode(mode, 0.03 + h)];
    expect(group!.slope.re).toBeCloseTo((b.re - a.re) / (2 * h), 7);
    expect(group!.slope.im).toBeCloseTo((b.im - a.im) / (2 * h), 7);
  }
});

test('the error is the square of that of the vectors', () => {
  const random = randomStream(5);
  const noise = Float64Array.from({ length: 6 * n }, () => random.normal());
  const error = (size: number): number => {
    const U = firstVectors(n, 3).map((v, i) => v + size * noise[i]);
    const groups = rayleighGroups(smallProblem(modes), complex(4.05, 0), 0, U, 3, 1e-9);
    return Math.min(...groups.map((g) => Math.hypot(g.k.re - 4.1, g.k.im + 0.02)));
  };
  expect(error(1e-3) / error(1e-4)).toBeGreaterThan(80);
  expect(error(1e-3) / error(1e-4)).toBeLessThan(120);
});

test('vectors that are not finite give no groups instead of an exception', () => {
  const U = firstVectors(n, 2);
  U[3] = NaN;
  expect(rayleighGroups(smallProblem(modes), complex(4), 0, U, 2, 1e-4)).toEqual([]);
});

describe('gather', () => {
  test.each([
    [[], []],
    [[1], [[0]]],
    // a chain: neighbours within the tolerance, the ends not
    [
      [0, 0.9, 1.8, 4],
      [[0, 1, 2], [3]],
    ],
    [
      [5, 0, 5.5, 0.2],
      [
        [0, 2],
        [1, 3],
      ],
    ],
  ])('%j', (values, groups) => {
    expect(
      gather(
        values.map((v) => complex(v)),
        1,
      ),
    ).toEqual(groups);
  });
});
