// Do products of tall matrices come out the same wherever the matrices lie?

import { describe, expect, it } from 'vitest';
import { addProduct, adjointProduct, orthonormalise, tallMatrices, transposeProduct } from '../../src/eigen/columns.ts';
import { randomStream } from '../../src/numerics/random.ts';

const random = randomStream(4);
const numbers = (count: number): Float64Array => Float64Array.from({ length: count }, () => random.normal());

function farthest(a: Float64Array, b: Float64Array): number {
  expect(a).toHaveLength(b.length);
  return a.reduce((worst, v, i) => Math.max(worst, Number.isNaN(v) ? Infinity : Math.abs(v - b[i])), 0);
}

describe('products of tall matrices', () => {
  for (const [n, p, q] of [
    [1, 1, 1],
    [5, 2, 3],
    [7, 4, 1],
    [300, 9, 3],
    [513, 6, 4],
    [256, 0, 2],
    [2, 5, 0],
  ]) {
    it(`agree to 1e-14: ${n} rows, ${p} and ${q} columns`, () => {
      const [x, y] = [numbers(2 * n * p), numbers(2 * n * q)];
      const [a, b] = tallMatrices(n, [p, q]);
      a.set(x);
      b.set(y);
      const plain = adjointProduct(x, p, y, q, n);
      expect(farthest(adjointProduct(a, p, b, q, n), plain)).toBeLessThan(1e-14 * (1 + n));
      for (const factor of [1, -1]) {
        addProduct(b, a, p, plain, q, n, factor);
        addProduct(y, x, p, plain, q, n, factor);
        expect(farthest(b, y)).toBeLessThan(1e-14 * (1 + n) * (1 + p));
      }
    });
  }

  // wide enough to pass through the compiled loops in strips, the last one shorter
  it('are the plain sums, conjugated or not', () => {
    const [n, p, q] = [5001, 9, 7];
    const [x, y] = [numbers(2 * n * p), numbers(2 * n * q)];
    for (const [product, sign] of [
      [transposeProduct, 1],
      [adjointProduct, -1],
    ] as const) {
      const sums = new Float64Array(2 * p * q);
      for (let j = 0; j < q; j++) {
        for (let i = 0; i < p; i++) {
          for (let s = 0; s < n; s++) {
            const [a, b] = [x[2 * (i * n + s)], sign * x[2 * (i * n + s) + 1]];
            const [c, d] = [y[2 * (j * n + s)], y[2 * (j * n + s) + 1]];
            sums[2 * (i + j * p)] += a * c - b * d;
            sums[2 * (i + j * p) + 1] += a * d + b * c;
          }
        }
      }
      expect(farthest(product(x, p, y, q, n), sums)).toBeLessThan(1e-14 * n);
    }
  });

  it('make columns orthonormal in either memory', () => {
    const [n, p, q] = [700, 10, 3];
    const [v, w] = tallMatrices(n, [p + q, q]);
    v.set(numbers(2 * n * p));
    const first = v.subarray(0, 2 * n * p);
    orthonormalise(first, p, v, 0, n);
    w.set(numbers(2 * n * q));
    const before = w.slice();
    const { h, r } = orthonormalise(w, q, v, p, n);
    v.set(w, 2 * n * p);
    const gram = adjointProduct(v, p + q, v, p + q, n);
    for (let i = 0; i < p + q; i++) gram[2 * (i + i * (p + q))] -= 1;
    expect(Math.max(...gram.map(Math.abs))).toBeLessThan(1e-14);
    addProduct(before, v.slice(), p, h, q, n, -1);
    addProduct(before, w.slice(), q, r, q, n, -1);
    expect(Math.max(...before.map(Math.abs))).toBeLessThan(1e-13);
  });
});
