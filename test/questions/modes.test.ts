// Are poles and zeros those of the exact solutions, all of them, with honest errors? A part of `npm run validate`.

import { describe, expect, test } from 'vitest';
import { findModes } from '../../src/questions/modes.ts';
import { diskDevice } from '../validate/devices.ts';
import { CASE_TIMEOUT, expectKept } from '../validate/expect.ts';

describe('against exact values', () => {
  test.each([
    // 5 digits are the default
    'disk poles n=2 Ez 1-2 digits 5',
    'disk poles n=1.5 Hz 2-2.5 digits 5',
    'disk poles n=3.3 Hz 1-2 digits 5',
    // 8 digits: poles, zeros, and zeros conjugate to poles
    'disk poles zeros n=2 Hz 1-2 digits 8',
    'disk poles in background 1.444 Ez digits 8',
    'layered poles zeros ring Ez 1-2 digits 8',
    'layered poles metal_core Hz 1-2 digits 8',
    // the two-disk splitting; and a tile whose nearest mode lies close to its shift
    'cluster poles pair Ez 2.65-3.35',
    'cluster poles five Hz 1.90-2.50',
  ])('%s', expectKept, CASE_TIMEOUT);
});

describe('laws', () => {
  test('the answer does not depend on the unit of length', () => {
    const one = findModes(diskDevice(2, { polarization: 'Ez', band: [1, 1.3] }), { qMin: 2 });
    const scale = 1e3;
    const other = findModes(diskDevice(2, { polarization: 'Ez', band: [1 / scale, 1.3 / scale] }, scale), { qMin: 2 });
    expect(other.modes.length).toBe(one.modes.length);
    // two meshes that differ by rounding: each answer lies within its own error
    one.modes.forEach((mode, i) => {
      const { k, kError } = other.modes[i];
      const distance = Math.hypot(k.re * scale - mode.k.re, k.im * scale - mode.k.im);
      expect(distance).toBeLessThan(mode.kError + kError * scale);
    });
  });

  test('a mode of Q = 1e8 is not lost when the discretisation lifts it across the axis', () => {
    const answer = findModes(diskDevice(3.3, { polarization: 'Ez', band: [4.68, 4.72] }), { qMin: 1000 });
    // mpmath 50 digits: secant on the exact transcendental equation (test/checks/disk-modes.json)
    const exact = { re: 4.7023611936648635, im: -2.459309577150541e-8 };
    // found by its place: at five digits its label may drown, since so little of it reaches the rim
    expect(answer.modes.map((m) => m.multiplicity)).toEqual([2]);
    const { k, kError } = answer.modes[0];
    const distance = Math.hypot(k.re - exact.re, k.im - exact.im);
    expect(distance).toBeLessThan(1e-5 * exact.re);
    expect(distance).toBeLessThan(3 * kError);
  });

  test('a window without modes is empty, covered and reached', () => {
    const answer = findModes(diskDevice(1.5, { polarization: 'Hz', band: [0.5, 0.6] }), { qMin: 10 });
    expect(answer.modes).toEqual([]);
    expect(answer.covered).toBe(true);
    expect(answer.reached).toBe(true);
  });

  test('digits and Q that make no sense are refused', () => {
    const device = diskDevice(2, { polarization: 'Ez', band: [1, 2] });
    expect(() => findModes(device, { digits: 1 })).toThrow(/digits came as 1/);
    expect(() => findModes(device, { qMin: 0.1 })).toThrow(/lowest Q came as 0.1/);
  });
});
