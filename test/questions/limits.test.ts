// What comes of a search that may not use the memory or the time that its digits need?

import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import type { Limits } from '../../src/accuracy/memory.ts';
import { readDevice } from '../../src/device/read.ts';
import { findModes } from '../../src/questions/modes.ts';
import { findThresholds } from '../../src/questions/threshold.ts';

/** mpmath 50 digits: secant on the exact transcendental equation (test/checks/disk-modes.json). */
const { poles } = JSON.parse(readFileSync(new URL('../checks/disk-modes.json', import.meta.url), 'utf8'));
const exact: readonly { re: number; im: number }[] = poles
  .filter((e: { n: number; pol: string }) => e.n === 2 && e.pol === 'Ez')
  .flatMap((e: { k: readonly (readonly [number, number])[] }) => e.k.map(([re, im]) => ({ re, im })));

const disk = readDevice(
  JSON.stringify({
    wavewell: 1,
    polarization: 'Ez',
    band: { wavenumber: [3.6, 4.4] },
    materials: { glass: { index: 2 } },
    bodies: [{ name: 'a', material: 'glass', disk: { center: [0, 0], radius: 1 } }],
    pump: { bodies: { a: 1 } },
  }),
  'disk.json',
);

const limits: readonly (readonly [string, Limits])[] = [
  ['time', { outOfTime: () => true }],
  ['memory', { bytes: 1e6 }],
];

describe.each(limits)('without %s', (name, limit) => {
  test('modes come with the errors that they have, and what stopped them', () => {
    const answer = findModes(disk, { digits: 10, qMin: 20, limits: limit });
    expect(answer.reached).toBe(false);
    expect(answer.stopped).toBe(name);
    expect(answer.modes.length).toBeGreaterThan(1);
    for (const { k, kError } of answer.modes) {
      const off = Math.min(...exact.map((e) => Math.hypot(e.re - k.re, e.im - k.im)));
      expect(off).toBeLessThan(3 * kError);
      expect(kError).toBeLessThan(0.01 * k.re);
    }
    expect(Math.max(...answer.modes.map((m) => m.kError / m.k.re))).toBeGreaterThan(1e-10);
  });

  test('thresholds likewise', () => {
    const short = findThresholds(disk, { digits: 10, levelMax: 0.3, limits: limit });
    const long = findThresholds(disk, { digits: 7, levelMax: 0.3 });
    expect(short.stopped).toBe(name);
    expect(long.stopped).toBe(null);
    expect(short.crossings.length).toBe(long.crossings.length);
    short.crossings.forEach((c, i) => {
      expect(Math.abs(c.k - long.crossings[i].k)).toBeLessThan(3 * c.kError);
      expect(Math.abs(c.level - long.crossings[i].level)).toBeLessThan(3 * c.levelError);
    });
  });
});
