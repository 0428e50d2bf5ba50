// Does a device with guides have the modes that it should, waves below cutoff included?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { findModes } from '../../src/questions/modes.ts';
import { CASE_TIMEOUT, expectKept } from '../validate/expect.ts';

describe('a slab across a guide: leaking modes, and trapped ones below the cutoff of their family', () => {
  test.each(['Ez', 'Hz'])('%s', (polarization) => expectKept(`modes of a slab in a guide ${polarization} digits 8`), CASE_TIMEOUT); // prettier-ignore
});

const cross = (more: string) =>
  readDevice(
    `wavewell: 1
polarization: Ez
band: { wavenumber: [3.6, 4.8] }
materials: { glass: { index: 2 } }
guides:
  - { name: east, from: [1, 0], angle: 0, width: 0.9 }
  - { name: north, from: [0, 1], angle: 90, width: 0.9 }
  - { name: west, from: [-1, 0], angle: 180, width: 0.9 }
  - { name: south, from: [0, -1], angle: 270, width: 0.9 }
enclosure: { spaces: [ { rectangle: { center: [0, 0], size: [2, 2] } } ] }
bodies: [ { material: glass, disk: { center: [0, 0], radius: 0.5 } } ]
${more}`,
    'cross.yaml',
  );

test(
  'a cross with fourfold symmetry: pairs count twice, and each half finds one of them',
  () => {
    const whole = findModes(cross(''), { digits: 4, qMin: 3 });
    const pairs = whole.modes.filter((m) => m.multiplicity === 2);
    expect(pairs.length).toBeGreaterThan(0);
    expect(whole.covered).toBe(true);
    const halves = (['even', 'odd'] as const).map((field) =>
      findModes(cross(`symmetry: [ { y: 0, field: ${field} } ]`), { digits: 4, qMin: 3 }),
    );
    for (const pair of pairs) {
      for (const half of halves) {
        const own = half.modes.find((m) => Math.hypot(m.k.re - pair.k.re, m.k.im - pair.k.im) < 1e-3)!;
        expect(own.multiplicity).toBe(1);
        expect(Math.hypot(own.k.re - pair.k.re, own.k.im - pair.k.im)).toBeLessThan(3 * (own.kError + pair.kError));
      }
      // two vectors, not twice the same
      const [a, b] = pair.vectors;
      const dot = (x: Float64Array, y: Float64Array): number => {
        let [re, im] = [0, 0];
        for (let i = 0; i < x.length; i += 2) {
          re += x[i] * y[i] + x[i + 1] * y[i + 1];
          im += x[i] * y[i + 1] - x[i + 1] * y[i];
        }
        return Math.hypot(re, im);
      };
      expect(dot(a, b) ** 2).toBeLessThan(0.9 * dot(a, a) * dot(b, b));
    }
    const members = (of: typeof whole): number => of.modes.reduce((sum, m) => sum + m.multiplicity, 0);
    expect(members(halves[0]) + members(halves[1])).toBe(members(whole));
  },
  CASE_TIMEOUT,
);

test(
  'zeros of a lossless device are the conjugates of its poles',
  () => {
    const poles = findModes(cross(''), { digits: 4, qMin: 3 });
    const zeros = findModes(cross(''), { digits: 4, qMin: 3, assignment: 'zeros' });
    expect(zeros.modes.length).toBe(poles.modes.length);
    poles.modes.forEach(({ k }) => {
      const off = Math.min(...zeros.modes.map((z) => Math.hypot(z.k.re - k.re, z.k.im + k.im)));
      expect(off).toBeLessThan(1e-10);
    });
  },
  CASE_TIMEOUT,
);
