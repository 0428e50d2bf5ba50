// Are the two modes of a slightly dented disk told apart, though they lie within the group width?

import { expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { findModes } from '../../src/questions/modes.ts';
import { findThresholds } from '../../src/questions/threshold.ts';

/** Half axes 1 ± DENT: the m = 1 pair splits in first order, here by less than the 1e-4 that five digits gather. */
const DENT = 5e-5;

const dented = readDevice(
  JSON.stringify({
    wavewell: 1,
    polarization: 'Hz',
    band: { wavenumber: [1.1, 1.125] },
    materials: { glass: { index: 3.3 } },
    bodies: [{ name: 'disk', material: 'glass', ellipse: { center: [0.3, -0.2], radii: [1 + DENT, 1 - DENT] } }],
    pump: { bodies: { disk: 1 } },
  }),
  'dented.json',
);

test('two resonances of multiplicity 1, both to the digits asked for, at an order that is not the last', () => {
  const answer = findModes(dented, { qMin: 3 });
  const m1 = answer.modes.filter((m) => m.label === 'm = 1');
  expect(m1.map((m) => m.multiplicity)).toEqual([1, 1]);
  expect(answer.reached).toBe(true);
  expect(answer.order).toBeLessThan(10);
  const split = Math.abs(m1[0].k.re - m1[1].k.re) / m1[0].k.re;
  expect(split).toBeGreaterThan(1e-5);
  expect(split).toBeLessThan(1e-4);
});

test('two thresholds, each with its own pump', () => {
  const answer = findThresholds(dented);
  const m1 = answer.crossings.filter((c) => c.label === 'm = 1');
  expect(m1.map((m) => m.multiplicity)).toEqual([1, 1]);
  expect(m1.every((m) => m.reached)).toBe(true);
  for (const mode of m1) expect(mode.levelError).toBeLessThan(1e-5 * mode.level);
  expect(answer.others.filter((p) => p.ended === 'lost')).toEqual([]);
});
