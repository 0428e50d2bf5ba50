// Are products of tall real matrices those of their definition, at every odd size?

import { expect, test } from 'vitest';
import { addTimes, choleskyFactor, transposeTimes } from '../../src/numerics/real-columns.ts';
import { randomStream } from '../../src/numerics/random.ts';

const random = (n: number, seed: number): Float64Array => {
  const stream = randomStream(seed);
  return Float64Array.from({ length: n }, () => stream.normal());
};

test.each([
  [1, 1, 1],
  [3, 5, 7],
  [4, 2, 600],
  [9, 6, 1025],
  [0, 3, 10],
])('AᵀB and Y + XC with %i and %i columns of %i rows', (p, q, n) => {
  const A = random(n * p, 1);
  const B = random(n * q, 2);
  const product = transposeTimes(A, p, B, q, n);
  for (let j = 0; j < q; j++)
    for (let i = 0; i < p; i++) {
      let sum = 0;
      for (let k = 0; k < n; k++) sum += A[k + i * n] * B[k + j * n];
      expect(product[i + j * p]).toBeCloseTo(sum, 10);
    }
  const Y = Float64Array.from(B);
  addTimes(Y, q, A, p, product, n, -2);
  for (let j = 0; j < q; j++)
    for (const k of [0, n - 1]) {
      let sum = B[k + j * n];
      for (let i = 0; i < p; i++) sum -= 2 * A[k + i * n] * product[i + j * p];
      expect(Y[k + j * n]).toBeCloseTo(sum, 8);
    }
});

test('LLᵀ gives the matrix back; an indefinite one has none', () => {
  const A = random(35, 3);
  const G = transposeTimes(A, 5, A, 5, 7);
  const L = choleskyFactor(G, 5)!;
  for (let j = 0; j < 5; j++)
    for (let i = 0; i < 5; i++) {
      let sum = 0;
      for (let k = 0; k < 5; k++) sum += L[i + 5 * k] * L[j + 5 * k];
      expect(sum).toBeCloseTo(G[i + 5 * j], 12);
    }
  expect(choleskyFactor(Float64Array.of(1, 2, 2, 1), 2)).toBeNull();
});
