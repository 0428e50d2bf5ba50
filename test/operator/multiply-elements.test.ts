// Do the compiled products and assembly say the same as the plain ones?

import { describe, expect, it } from 'vitest';
import { assembleElements } from '../../src/elements/element-matrices.ts';
import { buildSpace } from '../../src/elements/space.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { multiplyElementsInto, multiplyPlainInto } from '../../src/operator/multiply-elements.ts';
import { setWeight, zeroWeights } from '../../src/operator/region-weights.ts';
import { type DenseKernels, makeDenseKernels } from '../../src/sparse/kernels/dense-kernels.ts';
import { body, ellipse, planFor } from '../mesh/sample-bodies.ts';
import { randomNumbers } from '../sparse/matrices.ts';

const bodies = [body('core', ellipse([0.1, 0.2], 1.2, 0.7, 0.5))];
const mesh = meshDevice(bodies, planFor(bodies));
const turned = (x: number, y: number, out: Float64Array): void => {
  out.set([1 + x * x, 0.3, 0.1, 0.2 * y, 1, -0.4, 1, 0.7 * x]);
};

describe.skipIf(makeDenseKernels(16) === undefined)('products of element matrices', () => {
  // One order a triangle too: rows then come in fours, and fewer.
  const mixed = Int32Array.from(mesh.regions, (_, t) => 2 + (t % 4));
  for (const [name, orders] of [
    ['order 1', 1],
    ['order 4', 4],
    ['order 7', 7],
    ['mixed orders', mixed],
  ] as const) {
    const space = buildSpace(mesh, orders);
    const elements = assembleElements(space, turned);
    const n = space.unknowns;

    it(`agree with the twin to 1e-14: ${name}`, () => {
      expect(elements.store).toBeDefined();
      for (const [parts, direction] of [
        ['both', 'outgoing'],
        ['both', 'incoming'],
        ['stiffness', 'outgoing'],
        ['mass', 'incoming'],
      ] as const) {
        const weights = zeroWeights(1);
        for (let region = -2; region < 1; region++) {
          if (parts !== 'mass') setWeight(weights.stiffness, region, { re: 1 + region, im: 0.2 });
          if (parts !== 'stiffness') setWeight(weights.mass, region, { re: -3, im: region });
        }
        for (const columns of [0, 1, 2, 3, 5, 8, 9, 17]) {
          const x = randomNumbers(2 * n * columns, 3);
          const args = [space, elements, direction, weights, x, columns] as const;
          const a = multiplyElementsInto(new Float64Array(2 * n * columns).fill(NaN), ...args);
          const b = multiplyPlainInto(new Float64Array(2 * n * columns), ...args);
          let top = 1e-300;
          let worst = 0;
          for (let i = 0; i < a.length; i++) {
            top = Math.max(top, Math.abs(b[i]));
            worst = Math.max(worst, Number.isNaN(a[i]) ? Infinity : Math.abs(a[i] - b[i]));
          }
          expect(worst / top).toBeLessThan(1e-14);
        }
      }
    });
  }
});

describe.skipIf(makeDenseKernels(16) === undefined)('sums over points', () => {
  it('agree with plain ones to 1e-14', () => {
    for (const [rows, nd] of [
      [2, 1],
      [4, 3],
      [10, 4],
      [6, 7],
      [50, 21],
    ]) {
      const kernels = makeDenseKernels(2 * rows * nd + nd * nd + 8) as DenseKernels;
      const { numbers: m, base } = kernels;
      const values = randomNumbers(2 * rows * nd, 6);
      m.set(values, base);
      const out = base + 2 * rows * nd;
      kernels.gram(out, base, base + rows * nd, rows, nd);
      for (let j = 0; j < nd; j++) {
        for (let i = 0; i <= j; i++) {
          let sum = 0;
          for (let s = 0; s < rows; s++) sum += values[i * rows + s] * values[(nd + j) * rows + s];
          expect(Math.abs(m[out + i + j * nd] - sum)).toBeLessThan(1e-14 * rows);
        }
      }
    }
  });
});
