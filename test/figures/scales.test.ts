// Are ticks round, complete and written with the digits they need?

import fc from 'fast-check';
import { expect, test } from 'vitest';
import { numberText, roundLength, tickText, ticksIn, unitText, withErrorText } from '../../src/figures/scales.ts';

test('ticks lie inside, at even round steps, roughly as many as asked for', () => {
  const ends = fc.tuple(
    fc.double({ min: -1e6, max: 1e6, noNaN: true }),
    fc.double({ min: 1e-6, max: 1e6, noNaN: true }),
  );
  fc.assert(
    fc.property(ends, ([low, span]) => {
      fc.pre(span > 1e-6 * Math.abs(low));
      const ticks = ticksIn(low, low + span, 8);
      expect(ticks.length).toBeGreaterThanOrEqual(4);
      expect(ticks.length).toBeLessThanOrEqual(16);
      for (const t of ticks) expect(t >= low - 1e-6 * span && t <= low + span * (1 + 1e-6)).toBe(true);
    }),
  );
  expect(ticksIn(1, 1, 5)).toEqual([]);
  expect(ticksIn(0, 1, 5)).toHaveLength(6);
});

test('ticks are written alike', () => {
  expect(ticksIn(3.9, 4.15, 5).map((t) => tickText(t, 0.05))).toEqual(['3.90', '3.95', '4.00', '4.05', '4.10', '4.15']);
  expect(tickText(-0.3, 0.1)).toBe('−0.3');
  expect(tickText(1e-18, 0.1)).toBe('0');
  expect(tickText(2e-9, 1e-9)).toBe('2×10⁻⁹');
});

test('a scale bar is 1, 2 or 5 times a power of ten and never longer than its room', () => {
  fc.assert(
    fc.property(fc.double({ min: 1e-9, max: 1e9, noNaN: true }), (room) => {
      const length = roundLength(room);
      expect(length).toBeLessThanOrEqual(room * (1 + 1e-9));
      expect(length).toBeGreaterThan(room * 0.39);
    }),
  );
});

test('numbers and errors', () => {
  expect(numberText(0.000123, 2)).toBe('1.2×10⁻⁴');
  expect(numberText(-1e-8, 2)).toBe('−10⁻⁸');
  expect(numberText(1234.5678, 6)).toBe('1234.57');
  expect(numberText(Infinity, 3)).toBe('∞');
  expect(withErrorText([4.1253123, 0], 0.00123)).toBe('4.1253 ± 0.0012');
  expect(withErrorText([4.1253123, -0.021], 0.00123)).toBe('4.1253 − 0.0210i ± 0.0012');
  expect(withErrorText([4.1253123456789, 0], 3.2e-9)).toBe('4.1253123457 ± 3.2×10⁻⁹');
  expect(withErrorText([4.1253123, 0], 0)).toBe('4.125312');
  expect(unitText('um')).toBe('µm');
  expect(unitText('1/um')).toBe('1/µm');
  expect(unitText('none')).toBe('');
});
