// Are lasing thresholds those of the exact solutions? A part of `npm run validate`.

import { describe, expect, test } from 'vitest';
import { findThresholds } from '../../src/questions/threshold.ts';
import { diskDevice } from '../validate/devices.ts';
import { CASE_TIMEOUT, expectKept } from '../validate/expect.ts';

describe('against exact values', () => {
  test.each([
    'disk n=2 Ez m=10 k=6.542 threshold',
    'disk n=3.3 Hz m=1 k=1.110 threshold',
    'disk n=3.3 Ez m=10 k=4.024 threshold',
    'disk in background 1.444 Hz m=4 threshold',
    'layered core_shell Ez m=3 pumped 0 threshold',
    'layered metal_core Hz m=3 pumped 1 threshold',
    'cluster five Ez pumped 0 k=2.450 threshold',
  ])('%s', expectKept, CASE_TIMEOUT);
});

test(
  'the path of each mode begins at its pole without pump and ends on the axis',
  () => {
    const answer = findThresholds(diskDevice(2, { polarization: 'Ez', band: [2.9, 3.1] }), { levelMax: 0.6 });
    expect(answer.crossings.length).toBeGreaterThan(0);
    for (const { path, k, level } of answer.crossings) {
      expect(path.levels[0]).toBe(0);
      expect(path.ks[0].im).toBeLessThan(0);
      // the path is of the starting order, the crossing of the last: they agree to the digits asked for
      expect(Math.abs(path.levels.at(-1)! / level - 1)).toBeLessThan(1e-5);
      expect(Math.abs(path.ks.at(-1)!.re / k - 1)).toBeLessThan(1e-5);
      path.levels.forEach((l, i) => i > 0 && expect(l).toBeGreaterThan(path.levels[i - 1]));
    }
    const levels = answer.crossings.map((c) => c.level);
    expect(levels).toEqual([...levels].sort((a, b) => a - b));
  },
  CASE_TIMEOUT,
);

test(
  'a mode sharper than the digits is followed, though the discretisation may lift it across the axis',
  () => {
    const answer = findThresholds(diskDevice(3.3, { polarization: 'Ez', band: [4.68, 4.72] }));
    // mpmath, 50 digits: secant on the exact transcendental equation, m = 12, Q = 9.6e7
    const exact = { k: 4.702361193664866, level: 1.1509522389432554e-7 };
    expect(answer.beyond).toEqual([]);
    const { k, kError, level, levelError, multiplicity } = answer.crossings[0];
    expect(multiplicity).toBe(2);
    expect(Math.abs(k - exact.k)).toBeLessThan(3 * kError);
    expect(Math.abs(level - exact.level)).toBeLessThan(3 * levelError);
    expect(Math.abs(level - exact.level)).toBeLessThan(1e-5 * exact.level);
  },
  CASE_TIMEOUT,
);
