// Are solutions refined to rounding, on hard matrices too?

import { describe, expect, it } from 'vitest';
import { analyse } from '../../src/sparse/analyse.ts';
import { solveRefined } from '../../src/sparse/refine.ts';
import { layeredSquare, type SquareChoice } from '../bench/layered-square.ts';
import { randomNumbers } from './matrices.ts';

/** A disk of the given permittivity in the middle of the square. */
const disk =
  (re: number, im: number): NonNullable<SquareChoice['epsilon']> =>
  (x, y) =>
    Math.hypot(x - 0.5, y - 0.5) < 0.3 ? [re, im] : [1, 0];

const cases: [string, number, number, SquareChoice][] = [
  ['cubic elements', 16, 3, {}],
  ['order 1', 40, 1, {}],
  ['order 8', 6, 8, {}],
  ['metal, Ez', 12, 4, { epsilon: disk(-20, 1) }],
  ['metal, Hz', 12, 4, { epsilon: disk(-20, 1), polarization: 'Hz' }],
  ['nearly lossless metal, Hz', 12, 4, { epsilon: disk(-20, 1e-9), polarization: 'Hz' }],
  ['critical contrast, Hz', 12, 4, { epsilon: disk(-1, 1e-3), polarization: 'Hz' }],
  ['gain', 12, 4, { epsilon: disk(4, -2) }],
  ['high contrast', 12, 4, { epsilon: disk(400, 10) }],
  ['no wave at all', 12, 4, { k2: [0, 0] }],
];

describe('solveRefined', () => {
  for (const [name, cells, order, choice] of cases) {
    it(`reaches rounding: ${name}`, () => {
      const { pattern, fill, multiplyInto } = layeredSquare(cells, order, choice);
      const factorization = analyse(pattern).factorize(fill);
      const b = randomNumbers(2 * pattern.unknowns * 3, 4);
      const { residual, backwardError, steps } = solveRefined(factorization, multiplyInto, b, 3);
      expect(factorization.report.perturbedPivots).toBe(0);
      expect(Math.max(...backwardError)).toBeLessThan(1e-15);
      expect(Math.max(...residual)).toBeLessThan(1e-13);
      expect(steps).toBeLessThanOrEqual(3);
    });
  }

  it('survives an eigenvalue to the last digit and gives its null vector', () => {
    // Newton on the Rayleigh quotient of K − k² M: k² ← k² + xᵀA x / xᵀM x, x ← A⁻¹ M x.
    const at = (k2: readonly [number, number]) => layeredSquare(10, 5, { k2, epsilon: disk(4, 0) });
    let k2: [number, number] = [180, -8];
    const analysis = analyse(at(k2).pattern);
    const n = at(k2).pattern.unknowns;
    let x = randomNumbers(2 * n, 8);
    const history: number[] = [];
    for (let step = 0; step < 12; step++) {
      const matrix = at(k2);
      const factorization = analysis.factorize(matrix.fill);
      const mx = massTimes(x, k2);
      const solved = solveRefined(factorization, matrix.multiplyInto, mx, 1);
      const size = Math.sqrt(solved.x.reduce((s, v) => s + v * v, 0));
      x = solved.x.map((v) => v / size);
      const ax = matrix.multiplyInto(new Float64Array(2 * n), x, 1);
      const top = bilinear(x, ax);
      const bottom = bilinear(x, massTimes(x, k2));
      const d = bottom[0] ** 2 + bottom[1] ** 2;
      const shift = [(top[0] * bottom[0] + top[1] * bottom[1]) / d, (top[1] * bottom[0] - top[0] * bottom[1]) / d];
      k2 = [k2[0] + shift[0], k2[1] + shift[1]];
      history.push(Math.hypot(shift[0], shift[1]) / Math.hypot(k2[0], k2[1]));
      expect(solved.backwardError[0]).toBeLessThan(1e-15);
      // The residual of the vector itself, against ‖A‖ of order 10.
      const left = Math.sqrt(ax.reduce((s, v) => s + v * v, 0));
      if (step >= 8) expect(left).toBeLessThan(1e-13);
    }
    expect(Math.min(...history)).toBeLessThan(1e-15);

    // At relative distances 1e-12 … 1e-15 the solution grows like 1/distance and keeps its direction.
    for (const distance of [1e-12, 1e-13, 1e-14, 0]) {
      const matrix = at([k2[0] * (1 + distance), k2[1] * (1 + distance)]);
      const factorization = analysis.factorize(matrix.fill);
      const { x: y, backwardError } = solveRefined(factorization, matrix.multiplyInto, randomNumbers(2 * n, 5), 1);
      expect(backwardError[0]).toBeLessThan(1e-15);
      const size = Math.sqrt(y.reduce((s, v) => s + v * v, 0));
      expect(size).toBeGreaterThan(1e8);
      // The cosine of the angle to the null vector.
      let re = 0;
      let im = 0;
      for (let i = 0; i < 2 * n; i += 2) {
        re += (x[i] * y[i] + x[i + 1] * y[i + 1]) / size;
        im += (x[i] * y[i + 1] - x[i + 1] * y[i]) / size;
      }
      expect(Math.hypot(re, im)).toBeGreaterThan(1 - 1e-13);
    }

    function massTimes(v: Float64Array, near: readonly [number, number]): Float64Array {
      const a = at(near).multiplyInto(new Float64Array(2 * n), v, 1);
      const b = at([near[0] - 1, near[1]]).multiplyInto(new Float64Array(2 * n), v, 1);
      return b.map((t, i) => t - a[i]);
    }
  });

  it('leaves the factorization of a singular matrix usable in the other directions', () => {
    // Stiffness alone with nothing fixed: constants are its null space.
    const { pattern, fill, multiplyInto } = layeredSquare(6, 3, { k2: [0, 0], natural: true });
    const factorization = analyse(pattern).factorize(fill);
    const n = pattern.unknowns;
    expect(factorization.report.smallestPivot).toBeLessThan(1e-13 * factorization.report.largestPivot);
    const y = randomNumbers(2 * n, 3);
    const b = multiplyInto(new Float64Array(2 * n), y, 1);
    const { backwardError } = solveRefined(factorization, multiplyInto, b, 1);
    expect(backwardError[0]).toBeLessThan(1e-14);
  });
});

function bilinear(x: Float64Array, y: Float64Array): [number, number] {
  let re = 0;
  let im = 0;
  for (let i = 0; i < x.length; i += 2) {
    re += x[i] * y[i] - x[i + 1] * y[i + 1];
    im += x[i] * y[i + 1] + x[i + 1] * y[i];
  }
  return [re, im];
}
