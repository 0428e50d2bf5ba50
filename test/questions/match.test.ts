// Are etalons in a guide matched where the transfer matrix says, and do driven solves prove it?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { add, complex, divide, modulus, subtract } from '../../src/numerics/complex.ts';
import { findMatches } from '../../src/questions/match.ts';
import { findScattering } from '../../src/questions/scatter.ts';
import { layersInGuide, solveReal } from '../checks/transfer-matrix.ts';

const etalon = (polarization: 'Ez' | 'Hz', width: number, band: string, ends = 'both') =>
  readDevice(
    `wavewell: 1
polarization: ${polarization}
band: { wavenumber: ${band} }
materials: { glass: { index: 2 } }
enclosure: { spaces: [ { rectangle: { center: [0.5, 0], size: [1, ${width}] } } ] }
bodies: [ { name: slab, material: glass, rectangle: { center: [0.5, 0], size: [1, ${width}] } } ]
pump: { bodies: { slab: 1 } }
guides:
  - { name: left, from: [0, 0], angle: 180, width: ${width} }
${ends === 'both' ? `  - { name: right, from: [1, 0], angle: 0, width: ${width} }` : ''}`,
    'test.yaml',
  );

describe.each([
  ['Hz', 0.3, 0, '[5.8, 6.8]'],
  ['Ez', 0.8, Math.PI / 0.8, '[5.8, 6.8]'],
] as const)('a slab n = 2 in a guide, %s', (polarization, width, q, band) => {
  const device = etalon(polarization, width, band);
  const at = (k: number, level: number) =>
    layersInGuide(polarization, [{ permittivity: complex(4, level), length: 1 }], q, complex(k));
  const loss = findMatches(device, { inputs: ['left', 'right'], digits: 10, qMin: 1, levelMax: 2 });
  const gain = findMatches(device, { inputs: [], sense: 'gain', digits: 10, qMin: 1, levelMax: 2 });

  test('coherent absorption: r ± t = 0', () => {
    expect(loss.matches.length).toBeGreaterThan(0);
    for (const match of loss.matches) {
      const same = match.drive[0] * match.drive[2] + match.drive[1] * match.drive[3] > 0;
      const eigenvalue = (k: number, level: number) => {
        const { r, t } = at(k, level);
        return same ? add(r, t) : subtract(r, t);
      };
      const [k, level] = solveReal(eigenvalue, match.k, match.level);
      expect(Math.abs(match.k - k)).toBeLessThan(1e-9);
      expect(Math.abs(match.level - level)).toBeLessThan(1e-9);
      expect(match.forward.sameMesh.reflected).toBeLessThan(1e-18);
      expect(match.forward.ownMesh.reflected).toBeLessThan(1e-15);
      expect(Math.abs(match.forward.ownMesh.absorbed - 1)).toBeLessThan(1e-9);
      expect(Math.abs(match.forward.ownMesh.balance)).toBeLessThan(1e-12);
    }
  });

  test('thresholds are the same points with gain', () => {
    expect(gain.matches).toHaveLength(loss.matches.length);
    gain.matches.forEach((match, i) => {
      expect(Math.abs(match.k - loss.matches[i].k)).toBeLessThan(1e-11);
      expect(Math.abs(match.level - loss.matches[i].level)).toBeLessThan(1e-11);
      const inverse = (k: number, level: number) => divide(complex(1), at(k, -level).t);
      const [k, level] = solveReal(inverse, match.k, match.level);
      expect(Math.abs(match.k - k)).toBeLessThan(1e-9);
      expect(Math.abs(match.level - level)).toBeLessThan(1e-9);
    });
  });

  test('one beam at the coherent point loses 1 − |λ|²/2, λ the other eigenvalue; the phase rolls it from all to that of λ', () => {
    const [match] = loss.matches;
    const { matrix, absorbed } = findScattering(device, [complex(match.k)], { digits: 10, level: match.level })
      .points[0];
    const [r, t] = [complex(matrix[0], matrix[1]), complex(matrix[2], matrix[3])];
    const other = Math.max(modulus(add(r, t)), modulus(subtract(r, t)));
    expect(Math.abs(absorbed[0] - (1 - other ** 2 / 2))).toBeLessThan(1e-9);
    for (const phase of [0, 0.7, 2, Math.PI]) {
      const b = { re: Math.cos(phase), im: Math.sin(phase) };
      const out = [0, 1].map((i) => {
        const [x, y] = i === 0 ? [r, t] : [t, r];
        return modulus(add(x, { re: y.re * b.re - y.im * b.im, im: y.re * b.im + y.im * b.re })) ** 2 / 2;
      });
      const even = modulus(add(r, t)) ** 2 * Math.cos(phase / 2) ** 2;
      const odd = modulus(subtract(r, t)) ** 2 * Math.sin(phase / 2) ** 2;
      expect(Math.abs(out[0] + out[1] - even - odd)).toBeLessThan(1e-12);
    }
  });

  test('S agrees with the transfer matrix, at complex k too', () => {
    for (const k of [complex(6), complex(6.3, -0.2)]) {
      const { matrix } = findScattering(device, [k], { digits: 9 }).points[0];
      const { r, t } = layersInGuide(polarization, [{ permittivity: complex(4), length: 1 }], q, k);
      expect(Math.hypot(matrix[0] - r.re, matrix[1] - r.im)).toBeLessThan(1e-9);
      expect(Math.hypot(matrix[2] - t.re, matrix[3] - t.im)).toBeLessThan(1e-9);
    }
  });

  test('without loss one side is matched where the slab is whole half waves', () => {
    const { matches } = findMatches(device, { inputs: ['left'], digits: 10, qMin: 3 });
    const wave = (m: number): number => Math.hypot(m * Math.PI, q) / 2;
    const inBand = [2, 3, 4].map(wave).filter((k) => k > 5.8 && k < 6.8);
    const matched = matches.filter((m) => inBand.some((k) => Math.abs(m.k - k) < 1e-9));
    expect(matched).toHaveLength(inBand.length);
    for (const m of matched) {
      expect(m.level).toBe(0);
      expect(m.forward.ownMesh.reflected).toBeLessThan(1e-16);
      expect(Math.abs(m.forward.ownMesh.out[1] - 1)).toBeLessThan(1e-10);
    }
  });
});

// Layers over a perfect mirror, Newton at 40 digits (passive pole 5.4977… − 0.2746…i): here with Im ε free instead of Im n.
test('critical coupling of a slab over a mirror', () => {
  const device = etalon('Ez', 0.8, '[5.5, 7.5]', 'one');
  const { matches } = findMatches(device, { inputs: ['left'], digits: 10, qMin: 1, levelMax: 2 });
  const q = Math.PI / 0.8;
  expect(matches.length).toBeGreaterThan(0);
  for (const match of matches) {
    // mirror images: the slab doubled, odd about its middle
    const reflected = (k: number, level: number) => {
      const { r, t } = layersInGuide('Ez', [{ permittivity: complex(4, level), length: 2 }], q, complex(k));
      return subtract(r, t);
    };
    const [k, level] = solveReal(reflected, match.k, match.level);
    expect(Math.abs(match.k - k)).toBeLessThan(1e-9);
    expect(Math.abs(match.level - level)).toBeLessThan(1e-9);
    expect(match.forward.ownMesh.reflected).toBeLessThan(1e-15);
  }
});

// mpmath, 32 digits: multipoles with lattice sums, det(1 − tG) = 0; posts of radius 2 at x = ±10 in WR-90, k in rad/mm.
test('the pole of two posts in WR-90: all channels outgoing', () => {
  const device = readDevice(
    `wavewell: 1
length: mm
polarization: Ez
band: { wavenumber: [0.2, 0.225] }
enclosure: { spaces: [ { rectangle: { center: [0, 0], size: [20, 22.86] } } ] }
bodies:
  - { material: electric wall, disk: { center: [-10, 0], radius: 2 } }
  - { material: electric wall, disk: { center: [10, 0], radius: 2 } }
guides:
  - { name: in, from: [-10, 0], angle: 180, size: WR-90 }
  - { name: out, from: [10, 0], angle: 0, size: WR-90 }`,
    'test.yaml',
  );
  const { modes } = findMatches(device, { inputs: [], digits: 8 });
  const pole = modes.filter((m) => !m.trapped);
  expect(pole).toHaveLength(1);
  expect(Math.hypot(pole[0].k.re - 0.212562434268938, pole[0].k.im + 0.0007786150371144381)).toBeLessThan(2e-10);
});
