// Are numbers written to what their errors leave standing?

import { describe, expect, test } from 'vitest';
import { errorText, significant, toError, withError } from '../../src/results/number-text.ts';

test.each([
  [5.9705161234, 1e-6, '5.970516 ± 1e-6'],
  [0.00920021, 3e-7, '0.0092002 ± 3e-7'],
  [1523.14, 0.02, '1523.14 ± 0.02'],
  [-2.5, 0.11, '-2.5 ± 0.2'],
  [8123.4, 31, '8123 ± 40'],
  [0, 0.001, '0 ± 0.001'],
  [1.23456789e-9, 1e-12, '1.235e-9 ± 1e-12'],
  [1 / 3, 0, '0.333333333333 ± 0'],
  [2, Infinity, '2.00000000000 ± ?'],
  [NaN, NaN, 'NaN ± 0'],
])('%d ± %d is "%s"', (value, error, text) => {
  expect(withError(value, error)).toBe(text);
});

test('a written error is never smaller than the error, nor twice as large', () => {
  for (let power = -14; power <= 6; power++) {
    for (let digit = 1; digit < 10; digit += 0.37) {
      const error = digit * 10 ** power;
      const read = Number(errorText(error));
      expect(read).toBeGreaterThanOrEqual(error * (1 - 1e-8));
      expect(read).toBeLessThanOrEqual(error * 2);
    }
  }
});

test('a written value is off by less than its error', () => {
  for (let power = -8; power <= 8; power++) {
    for (const value of [1.23456789012345, 9.99999999, 5.5]) {
      for (const share of [1e-2, 3.7e-5, 9.99e-9]) {
        const v = value * 10 ** power;
        expect(Math.abs(Number(toError(v, share * v)) - v)).toBeLessThanOrEqual(share * v);
      }
    }
  }
});

describe('significant figures', () => {
  test.each([
    [0.000123456, 3, '0.000123'],
    [1.23456e-7, 3, '1.23e-7'],
    [123456, 2, '123456'],
    [1.5e9, 2, '1.5e+9'],
    [0, 5, '0'],
    [-Infinity, 3, '-Infinity'],
  ])('%d with %i: %s', (value, figures, text) => {
    expect(significant(value, figures)).toBe(text);
  });
});
