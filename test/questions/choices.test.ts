// Do all choices of inputs tell what each one tells alone, and is one of them trimmed to the real axis?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { modulus, subtract } from '../../src/numerics/complex.ts';
import { findChoices } from '../../src/questions/choices.ts';
import { findMatches } from '../../src/questions/match.ts';

/** Four guides about a round hall with two rods; `loss` is Im ε of one. */
const crossing = (knobs: { readonly trim?: number; readonly loss?: number } = {}) =>
  readDevice(
    `wavewell: 1
polarization: Ez
band: { wavenumber: [4.2, 5.4] }
knobs: { trim: 1, loss: 0 }
materials: { rod: { permittivity: [6, loss] }, other: { permittivity: 4 } }
enclosure: { spaces: [ { disk: { center: [0, 0], radius: 0.9 } } ] }
bodies:
  - { material: rod, disk: { center: [0.15, 0.1], radius: 0.25 } }
  - { material: other, disk: { center: [-0.4, 0.3], radius: 0.12 } }
guides:
  - { name: e, from: [0.6, 0], angle: 0, width: 1, length: 0.5 }
  - { name: n, from: [0, 0.6], angle: 90, width: 1, length: 0.5 }
  - { name: w, from: [-0.6, 0], angle: 180, width: 1, length: 0.5 }
  - { name: s, from: [0, -0.6], angle: 270, width: trim, length: 0.5 }`,
    'test.yaml',
    { knobs: { ...knobs } },
  );

describe.each([0, 0.05])('a crossing of four guides, Im ε = %d', (loss) => {
  const device = crossing({ loss });
  const { choices, channels, covered } = findChoices(device, { digits: 4, qMin: 5 });

  test('2⁴ − 2 choices, nearest to the axis first', () => {
    expect(choices).toHaveLength(14);
    expect(new Set(choices.map((c) => c.inputs.join())).size).toBe(14);
    expect(covered).toBe(true);
    const far = choices.map(({ modes }) => (modes.length > 0 ? Math.abs(modes[0].k.im) / modes[0].k.re : Infinity));
    expect(far).toEqual([...far].sort((a, b) => a - b));
    expect(choices.filter(({ modes }) => modes.length > 0).length).toBeGreaterThan(6);
  });

  test('each as its own search by contours and full solves tells', () => {
    for (const { inputs, modes } of choices.slice(0, 2)) {
      const names = channels.filter((_, c) => inputs[c]);
      const alone = findMatches(device, { inputs: names, digits: 4, qMin: 5 }).modes.filter((m) => !m.trapped);
      expect(alone).toHaveLength(modes.length);
      for (const mode of modes) {
        const [near] = alone.map((m) => modulus(subtract(m.k, mode.k))).sort((a, b) => a - b);
        expect(near).toBeLessThan(3 * mode.kError + 1e-8);
      }
    }
  });

  test('inputs and outputs exchanged: conjugates without loss, not with', () => {
    for (const { inputs, modes } of choices.filter((c) => c.modes.length > 0).slice(0, 6)) {
      const other = choices.find((c) => c.inputs.every((into, i) => into !== inputs[i]))!;
      const { k } = modes[0];
      const apart = Math.min(Infinity, ...other.modes.map((m) => Math.hypot(m.k.re - k.re, m.k.im + k.im)));
      if (loss === 0) expect(apart).toBeLessThan(1e-9);
      else expect(apart).toBeGreaterThan(1e-4);
    }
  });
});

test('more channels than a table holds', () => {
  const open = readDevice(
    `wavewell: 1
polarization: Ez
band: { wavenumber: [4, 5] }
materials: { glass: { index: 2 } }
bodies: [ { material: glass, disk: { center: [0, 0], radius: 1 } } ]`,
    'test.yaml',
  );
  expect(() => findChoices(open)).toThrow(/expected 2 to 8/);
});
