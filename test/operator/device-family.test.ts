// Is a device's family the sum of its fixed pieces, and do the derivatives fit?

import { describe, expect, it } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { rayleighGroups } from '../../src/eigen/rayleigh.ts';
import { familyOf, prepare } from '../../src/questions/prepare.ts';
import { resolutionFor } from '../../src/accuracy/resolution.ts';
import { randomNumbers } from '../sparse/matrices.ts';

const text = (polarization: string): string => `
wavewell: 1
length: um
polarization: ${polarization}
band: { wavelength: [1.4, 1.7] }
materials: { glass: { index: 2 }, other: { permittivity: 3, loss_tangent: 0.01 } }
bodies:
  - { name: a, material: glass, disk: { center: [0, 0], radius: 0.5 } }
  - { name: b, material: other, disk: { center: [1.2, 0], radius: 0.4 } }
  - { name: c, material: glass, disk: { center: [0, 1.2], radius: 0.3 } }
pump: { bodies: { a: 1, b: 0.5 } }
`;

describe.each(['Ez', 'Hz'])('the family of a device, %s', (polarization) => {
  const device = readDevice(text(polarization), 'three.yaml');
  const { kMin, kMax } = device.band;
  const prepared = prepare(device, { kMin, kMax, slope: 0.1 }, resolutionFor(2));
  const family = familyOf(prepared, 3, 'outgoing', 'gain');
  const n = family.size;
  const k = { re: 4.1, im: -0.2 };
  const level = 0.37;

  it('is the sum of its pieces, with its derivatives', () => {
    const x = randomNumbers(2 * n * 2, 5);
    const work = new Float64Array(x.length);
    for (const part of ['value', 'byK', 'byLevel'] as const) {
      const whole = family.multiplyInto(new Float64Array(x.length), k, level, part, x, 2);
      const sum = new Float64Array(x.length);
      for (let i = 0; i < family.pieces.count; i++) {
        const c = family.pieces.factor(i, k, level)[part];
        family.pieces.multiplyInto(work, i, x, 2);
        for (let s = 0; s < x.length; s += 2) {
          sum[s] += c.re * work[s] - c.im * work[s + 1];
          sum[s + 1] += c.re * work[s + 1] + c.im * work[s];
        }
      }
      const top = whole.reduce((t, v) => Math.max(t, Math.abs(v)), 0);
      let worst = 0;
      whole.forEach((v, i) => (worst = Math.max(worst, Math.abs(v - sum[i]))));
      expect(top).toBeGreaterThan(0);
      expect(worst / top).toBeLessThan(1e-13);
    }
  });

  it('gives the same Rayleigh values with and without them', () => {
    const { pieces: _, ...plain } = family;
    let U: Float64Array = randomNumbers(2 * n * 3, 7);
    const inverse = family.factorize(k, level);
    for (let step = 0; step < 4; step++) {
      U = family.multiplyInto(new Float64Array(U.length), k, level, 'byK', U, 3);
      inverse.solveInto(U, U, 3);
      const size = Math.max(...U.map(Math.abs));
      U = U.map((v) => v / size);
    }
    const a = rayleighGroups(family, k, level, U, 3, 1e-6);
    const b = rayleighGroups(plain, k, level, U, 3, 1e-6);
    expect(a).toHaveLength(b.length);
    expect(a.length).toBeGreaterThan(0);
    a.forEach((group, i) => {
      expect(Math.hypot(group.k.re - b[i].k.re, group.k.im - b[i].k.im)).toBeLessThan(1e-9);
      const off = Math.hypot(group.slope.re - b[i].slope.re, group.slope.im - b[i].slope.im);
      expect(off).toBeLessThan(1e-7 * Math.hypot(group.slope.re, group.slope.im));
    });
  });
});
