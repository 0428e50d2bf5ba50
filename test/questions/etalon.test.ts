// Are etalons between walls what transfer matrices make them: thresholds, critical coupling, exceptional points?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { complex, divide, modulus, subtract } from '../../src/numerics/complex.ts';
import type { Polarization } from '../../src/numerics/conventions.ts';
import { findKnobMatches } from '../../src/questions/knob-match.ts';
import { findModes } from '../../src/questions/modes.ts';
import { findScattering } from '../../src/questions/scatter.ts';

/** A layer of index n + i m t, t the knob. */
interface Layer {
  readonly n: number;
  readonly m: number;
  readonly length: number;
}

const WIDTH = 0.3;

/** Layers from x = 0 on in a guide whose wave varies along it only; a mirror at the right, or a guide, or walls all round. */
function stack(
  polarization: Polarization,
  layers: readonly Layer[],
  band: readonly [number, number],
  t: number,
  ends: 'guides' | 'mirror' | 'box',
) {
  const total = layers.reduce((sum, l) => sum + l.length, 0);
  // the side walls leave the field free: magnetic for Ez, electric for Hz
  const free = polarization === 'Ez' ? 'magnetic' : 'electric';
  let x = 0;
  const bodies = layers.map((l, i) => {
    x += l.length;
    return `  - { material: m${i}, rectangle: { center: [${x - l.length / 2}, 0], size: [${l.length}, ${WIDTH}] } }`;
  });
  const guides = [
    `  - { name: left, from: [0, 0], angle: 180, width: ${WIDTH}, wall: ${free} wall }`,
    `  - { name: right, from: [${total}, 0], angle: 0, width: ${WIDTH}, wall: ${free} wall }`,
  ];
  return readDevice(
    `wavewell: 1
polarization: ${polarization}
band: { wavenumber: [${band.join(', ')}] }
knobs: { t: ${t} }
materials:
${layers.map(({ n, m }, i) => `  m${i}: { permittivity: ["${n}^2 - (${m}*t)^2", "2*${n}*${m}*t"], gain: true }`).join('\n')}
enclosure: { wall: ${free} wall, spaces: [ { rectangle: { center: [${total / 2}, 0], size: [${total}, ${WIDTH}] } } ] }
bodies:
${bodies.join('\n')}
${ends === 'box' ? '' : `guides:\n${guides.slice(0, ends === 'mirror' ? 1 : 2).join('\n')}`}`,
    'test.yaml',
  );
}

// mpmath, 40 digits: exp(2inkL)((n − 1)/(n + 1))² = 1 for real k and Im n
describe.each([
  ['Ez', 2, 6.339484360547579, 0.17127309484020264, 0.8154217299459107],
  ['Hz', 2, 6.339484360547579, 0.17127309484020264, 0.8154217299459107],
  ['Ez', 3.5, 4.49461023386356, 0.1305664860525946, 0.6390532008577454],
] as const)('%s, a slab of index %d + it', (polarization, n, k, t, oneBeam) => {
  const at = (value: number) => stack(polarization, [{ n, m: 1, length: 1 }], [k - 0.3, k + 0.3], value, 'guides');
  const range = (sign: number): [number, number] => {
    const ends = [0.8 * sign * t, 1.15 * sign * t];
    return [Math.min(...ends), Math.max(...ends)];
  };

  test('lases and absorbs at the same k, t opposite', () => {
    for (const [inputs, sign] of [
      [[], -1],
      [['left', 'right'], 1],
    ] as const) {
      const matches = findKnobMatches(at, { inputs, range: range(sign), digits: 10, qMin: 2 });
      expect(matches).toHaveLength(1);
      expect(Math.abs(matches[0].k - k)).toBeLessThan(1e-9);
      expect(Math.abs(matches[0].level - sign * t)).toBeLessThan(1e-9);
      if (sign > 0) expect(matches[0].forward.ownMesh.reflected).toBeLessThan(1e-16);
    }
  });

  test('one beam alone leaves half of what the other eigenvalue does not absorb', () => {
    const { absorbed } = findScattering(at(t), [complex(k)], { digits: 10 }).points[0];
    expect(Math.abs(absorbed[0] - oneBeam)).toBeLessThan(1e-9);
    expect(Math.abs(absorbed[1] - oneBeam)).toBeLessThan(1e-9);
    const n2 = { re: n * n - t * t, im: 2 * n * t };
    const other = modulus(divide(subtract(n2, complex(1)), { re: n2.re + 1, im: n2.im }));
    expect(Math.abs(absorbed[0] - (1 - other ** 2 / 2))).toBeLessThan(1e-9);
  });

  test('two beams: the relative phase rolls the absorption between the two eigenvalues', () => {
    const { matrix } = findScattering(at(t), [complex(k)], { digits: 10 }).points[0];
    const [r, u] = [complex(matrix[0], matrix[1]), complex(matrix[2], matrix[3])];
    const even = modulus({ re: r.re + u.re, im: r.im + u.im }) ** 2;
    const odd = modulus(subtract(r, u)) ** 2;
    // one of the two is the absorbed one, the other |(n² − 1)/(n² + 1)|
    expect(Math.min(even, odd)).toBeLessThan(1e-17);
    expect(Math.abs(Math.max(even, odd) - 2 * (1 - oneBeam))).toBeLessThan(1e-9);
    for (let phase = 0; phase < 6.3; phase += 0.7) {
      // absorbed of (1, e^{iφ})/√2 by the full S-matrix, against 1 − |λ_e|² cos²(φ/2) − |λ_o|² sin²(φ/2)
      const b = { re: Math.cos(phase), im: Math.sin(phase) };
      let out = 0;
      for (let i = 0; i < 2; i++) {
        const [x, y] = [i, i + 2].map((e) => complex(matrix[2 * e], matrix[2 * e + 1]));
        out += ((x.re + y.re * b.re - y.im * b.im) ** 2 + (x.im + y.re * b.im + y.im * b.re) ** 2) / 2;
      }
      const formula = even * Math.cos(phase / 2) ** 2 + odd * Math.sin(phase / 2) ** 2;
      expect(Math.abs(out - formula)).toBeLessThan(1e-9);
    }
  });
});

// mpmath, 40 digits: layers over a mirror, zero of r; mirrors that leave u free
test.each([
  ['Ez', [{ n: 2, m: 1, length: 1 }], 4.731512034364811, 0.11547360555327002],
  ['Hz', [{ n: 2, m: 1, length: 1 }], 5.514246104438392, 0.0992212309140601],
  [
    'Hz',
    [
      { n: 3.5, m: 0, length: 0.11 },
      { n: 1, m: 0, length: 0.3 },
      { n: 1.5, m: 1, length: 1 },
    ],
    3.4306174810133427,
    0.0190413895024913,
  ],
] as const)('critical coupling over a mirror, %s %j', (polarization, layers, k, t) => {
  const at = (value: number) => stack(polarization, layers, [k - 0.2, k + 0.2], value, 'mirror');
  const matches = findKnobMatches(at, { inputs: ['left'], range: [0.7 * t, 1.2 * t], digits: 10, qMin: 2 });
  expect(matches).toHaveLength(1);
  expect(Math.abs(matches[0].k - k)).toBeLessThan(1e-9);
  expect(Math.abs(matches[0].level - t)).toBeLessThan(1e-9);
  expect(matches[0].forward.ownMesh.reflected).toBeLessThan(1e-16);
  expect(Math.abs(matches[0].forward.ownMesh.absorbed - 1)).toBeLessThan(1e-9);
});

/** Gain and loss in balance: n − it on the left, n + it on the right. */
const balanced = (polarization: Polarization, n: number, band: readonly [number, number], ends: 'guides' | 'box') => {
  const halves = [
    { n, m: -1, length: 0.5 },
    { n, m: 1, length: 0.5 },
  ];
  return (t: number) => stack(polarization, halves, band, t, ends);
};

// mpmath, 40 digits: pole (and zero) functions of the balanced etalon at real k
test.each([
  ['Ez', 2, 7.222440171718442, 0.385774593384649],
  ['Hz', 2, 7.222440171718442, 0.385774593384649],
  ['Ez', 3.5, 5.880416521688081, 0.48104569304411915],
] as const)('balanced etalon, %s, n = %d: pole and zero meet on the real axis', (polarization, n, k, t) => {
  const at = balanced(polarization, n, [k - 0.15, k + 0.15], 'guides');
  const [pole, zero] = ([[], ['left', 'right']] as const).map((inputs) =>
    findKnobMatches(at, { inputs, range: [0.97 * t, 1.02 * t], digits: 10, qMin: 2 }),
  );
  for (const matches of [pole, zero]) {
    expect(matches).toHaveLength(1);
    expect(Math.abs(matches[0].k - k)).toBeLessThan(1e-9);
    expect(Math.abs(matches[0].level - t)).toBeLessThan(1e-9);
  }
});

// mpmath, 40 digits: |(r_L − r_R)/2t| = 1
test.each([
  ['Ez', 2, 5, 0.41962893691021796],
  ['Hz', 3.5, 4, 0.6183539712583577],
] as const)('balanced etalon, %s, n = %d, k = %d: eigenvalues of S meet', (polarization, n, k, t) => {
  const at = balanced(polarization, n, [k, 1.01 * k], 'guides');
  // (λ₁ − λ₂)² = (r_L − r_R)² + 4t² vanishes linearly with the knob: real up to the phase of t²
  const apart = (value: number): number => {
    const { matrix } = findScattering(at(value), [complex(k)], { digits: 9 }).points[0];
    const entry = (i: number) => complex(matrix[2 * i], matrix[2 * i + 1]);
    return modulus(divide(subtract(entry(0), entry(3)), entry(1))) / 2 - 1;
  };
  let [a, b] = [t - 0.01, t + 0.004];
  let [fa, fb] = [apart(a), apart(b)];
  for (let step = 0; step < 6 && Math.abs(b - a) > 1e-11; step++) {
    const next = b - (fb * (b - a)) / (fb - fa);
    [a, fa] = [b, fb];
    [b, fb] = [next, apart(next)];
  }
  expect(Math.abs(b / t - 1)).toBeLessThan(1e-7);
});

// mpmath, 60 digits: f = df/dk = 0 of the closed box
test('balanced box: the exceptional point of two modes', () => {
  const [t, k] = [0.5287361883460164, 3.793216493897902];
  const at = balanced('Ez', 2, [3.3, 4.3], 'box');
  const knots = [0.5, 0.507, 0.513, 0.518, 0.522];
  const pairs = knots.map((value) => {
    const ks = findModes(at(value), { digits: 9 }).modes.map((m) => m.k);
    expect(ks).toHaveLength(2);
    const [x, y] = ks;
    const gap = subtract(x, y);
    return { squared: gap.re * gap.re - gap.im * gap.im, mean: (x.re + y.re) / 2 };
  });
  // (k₁ − k₂)² and the mean are smooth through the point: the knob as a function of the former, by Neville's rule
  const root = neville(pairs.map((p) => p.squared), knots, 0); // prettier-ignore
  expect(Math.abs(root / t - 1)).toBeLessThan(1e-6);
  expect(Math.abs(neville(knots, pairs.map((p) => p.mean), root) / k - 1)).toBeLessThan(1e-6); // prettier-ignore
});

/** The polynomial through (x_i, y_i) at a point. */
function neville(x: readonly number[], y: readonly number[], at: number): number {
  const p = [...y];
  for (let width = 1; width < x.length; width++)
    for (let i = 0; i + width < x.length; i++)
      p[i] = ((at - x[i + width]) * p[i] + (x[i] - at) * p[i + 1]) / (x[i] - x[i + width]);
  return p[0];
}
