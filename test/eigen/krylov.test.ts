// Does block Arnoldi find everything in a disc, and once?

import { describe, expect, test } from 'vitest';
import { relativeResidual } from '../../src/eigen/improve.ts';
import { modesNear, squareDistance } from '../../src/eigen/krylov.ts';
import { complex, type Complex } from '../../src/numerics/complex.ts';
import { smallProblem, type SmallMode } from './small-problem.ts';

/** A ladder of modes, the first ones replaced by the given. */
const spectrum = (first: readonly Complex[], count = 150): SmallMode[] =>
  Array.from({ length: count }, (_, i) => ({ k: first[i] ?? complex(6 + 0.15 * i, -0.05 - 0.002 * i), weight: 1 }));

function search(modes: readonly SmallMode[]) {
  const problem = smallProblem(modes);
  const shift = complex(4.05, -0.03);
  const radius = 4;
  const found = modesNear(problem, {
    shift,
    level: 0,
    radius,
    block: 3,
    largestDimension: 120,
    tolerance: 1e-9,
    seed: 3,
  });
  const inside = (k: Complex): boolean => squareDistance(k, shift) <= radius;
  const exact = modes.map((m) => m.k).filter(inside);
  return { problem, found, exact, inside: found.ks.filter(inside) };
}

const byRe = (a: Complex, b: Complex): number => a.re - b.re || a.im - b.im;

describe('all in the disc, none twice', () => {
  test.each([
    ['single modes', [complex(3.8, -0.01), complex(4, -0.2), complex(4.3, -0.001)]],
    ['an exact pair', [complex(4, -0.1), complex(4, -0.1), complex(4.2, -0.02)]],
    ['three alike', [complex(4, -0.1), complex(4, -0.1), complex(4, -0.1), complex(4.2, -0.02)]],
    ['five close ones', [0, 1, 2, 3, 4].map((i) => complex(4 + 1e-5 * i, -0.1))],
    ['none', []],
  ])('%s', (_, ks) => {
    const { problem, found, exact, inside } = search(spectrum(ks));
    expect(found.covered).toBe(true);
    expect(inside.length).toBe(exact.length);
    const want = [...exact].sort(byRe);
    [...inside].sort(byRe).forEach((k, i) => {
      expect(Math.hypot(k.re - want[i].re, k.im - want[i].im)).toBeLessThan(1e-7);
    });
    found.ks.forEach((k, j) => {
      const u = found.vectors.subarray(2 * problem.size * j, 2 * problem.size * (j + 1));
      expect(relativeResidual(problem, k, 0, u, 1)).toBeLessThan(1e-7);
    });
  });

  test('the vectors of an exact pair span two dimensions', () => {
    const { problem, found } = search(spectrum([complex(4, -0.1), complex(4, -0.1)]));
    const n = 2 * problem.size;
    const [a, b] = [found.vectors.subarray(0, n), found.vectors.subarray(n, 2 * n)];
    let re = 0;
    let im = 0;
    for (let i = 0; i < n; i += 2) {
      re += a[i] * b[i] + a[i + 1] * b[i + 1];
      im += a[i] * b[i + 1] - a[i + 1] * b[i];
    }
    expect(Math.hypot(re, im)).toBeLessThan(0.9999);
  });
});

describe('more modes alike than the block is wide: rounding or their splitting brings the rest', () => {
  test.each([
    [6, 0],
    [6, 1e-9],
    [12, 1e-12],
    [16, 1e-7],
  ])('%i, split by %f', (count, split) => {
    const { exact, inside, found } = search(
      spectrum(Array.from({ length: count }, (_, i) => complex(4 + i * split, -0.1))),
    );
    expect(found.covered).toBe(true);
    expect(inside.length).toBe(exact.length);
  });
});
