// Are closed cavities right to the digits, whatever the wall?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { findModes } from '../../src/questions/modes.ts';

const HEAD = 'wavewell: 1\n';
const device = (text: string) => readDevice(HEAD + text, 'test.yaml');
const box = (more: string, polarization = 'Ez') =>
  device(`polarization: ${polarization}
band: { wavenumber: [2, 8] }
enclosure: { spaces: [ { rectangle: { center: [0.5, 0.35], size: [1, 0.7] } } ] }
${more}`);

describe('perfect walls', () => {
  test('a rectangle: π√((m/a)² + (n/b)²) for an electric wall, both polarizations', () => {
    const k = (m: number, n: number): number => Math.PI * Math.hypot(m, n / 0.7);
    const zero = findModes(box('bodies: []'), { digits: 8 });
    expect(zero.modes.map((m) => m.k.re)).toHaveLength(2);
    expect(zero.complete).toMatchObject({ found: 2, counted: 2, proven: true });
    for (const [i, exact] of [k(1, 1), k(2, 1)].entries()) {
      expect(Math.abs(zero.modes[i].k.re - exact)).toBeLessThan(1e-8);
      expect(Math.abs(zero.modes[i].k.re - exact)).toBeLessThan(3 * zero.modes[i].kError + 1e-12);
    }
    const free = findModes(box('bodies: []', 'Hz'), { digits: 8 });
    for (const [i, exact] of [k(1, 0), k(0, 1), k(1, 1), k(2, 0), k(2, 1)].entries())
      expect(Math.abs(free.modes[i].k.re - exact)).toBeLessThan(1e-8);
  });

  // Zeros of J_m and J′_m: Abramowitz & Stegun (1964), table 9.5, recomputed with mpmath to 20 digits.
  test.each([
    ['Ez', 'electric wall', [2.4048255576958, 3.8317059702075, 5.1356223018407, 5.5200781102863]],
    ['Hz', 'electric wall', [3.0542369282271, 3.8317059702075, 4.2011889412105, 5.317553126084]],
    ['Ez', 'magnetic wall', [3.0542369282271, 3.8317059702075, 4.2011889412105, 5.317553126084]],
  ])('a disk, %s, %s', (polarization, wall, exact) => {
    const answer = findModes(
      device(`polarization: ${polarization}
band: { wavenumber: [2, 5.6] }
bodies: []
enclosure: { wall: ${wall}, spaces: [ { disk: { center: [0, 0], radius: 1 } } ] }`),
      { digits: 10 },
    );
    exact.forEach((k, i) => expect(Math.abs(answer.modes[i].k.re - k)).toBeLessThan(1e-10));
  });

  test('a sheet down the middle halves the box', () => {
    const halves = findModes(box('bodies: []\nsheets: [ { points: [[0.5, 0], [0.5, 0.7]] } ]'), { digits: 7 });
    const k = Math.PI * Math.hypot(2, 1 / 0.7);
    expect(halves.modes.map((m) => m.multiplicity)).toEqual([2]);
    expect(Math.abs(halves.modes[0].k.re - k)).toBeLessThan(1e-7);
  });

  test('a sheet to half the height in Hz: lower modes only, and the same by symmetry from one half', () => {
    const sheet = 'sheets: [ { points: [[0.5, 0], [0.5, 0.35]] } ]';
    const whole = findModes(box(`bodies: []\n${sheet}`, 'Hz'), { digits: 4 });
    const half = (field: string) =>
      findModes(box(`bodies: []\n${sheet}\nsymmetry: [ { x: 0.5, field: ${field} } ]`, 'Hz'), { digits: 4 });
    const parts = [...half('even').modes, ...half('odd').modes].sort((a, b) => a.k.re - b.k.re);
    expect(parts).toHaveLength(whole.modes.length);
    parts.forEach((m, i) => {
      // two meshes: within the sum of the errors
      expect(Math.abs(m.k.re - whole.modes[i].k.re)).toBeLessThan(m.kError + whole.modes[i].kError);
      expect(m.label).toMatch(/^(even|odd) in x$/);
    });
  });
});

describe('losses', () => {
  test.each([1e-4, 0.01, 0.5])('Q of a box full of a material of tan δ = %f', (tan) => {
    const answer = findModes(
      box(`materials: { filling: { permittivity: 4, loss_tangent: ${tan} } }
bodies: [ { material: filling, rectangle: { center: [0.5, 0.35], size: [1, 0.7] } } ]`),
      { digits: 10, qMin: 1 },
    );
    // textbook: k = k₀/√ε, so that Q = (1 + √(1 + tan²δ))/(2 tan δ) for every mode
    const exact = (1 + Math.sqrt(1 + tan * tan)) / (2 * tan);
    expect(answer.modes.length).toBeGreaterThan(5);
    for (const mode of answer.modes) expect(Math.abs(mode.q / exact - 1)).toBeLessThan(1e-8);
  });

  // J_m(ka) = −iζ J′_m(ka) in Ez, J′_m(ka) = iζ J_m(ka) in Hz, ζ = (1 − i)√(k/(2σμ₀c)); mpmath, 25 digits, secant.
  test.each([
    ['Ez', [0.23991759209348, -0.00056494018306925], 1],
    ['Ez', [0.38245744951178, -0.00071310291159395], 2],
    ['Hz', [0.18341720021889, -0.00069805279524983], 2],
    ['Hz', [0.30430901656972, -0.0011125652711003], 2],
  ])('a round resonator of a poor metal, %s', (polarization, [re, im], multiplicity) => {
    const answer = findModes(
      device(`length: mm
polarization: ${polarization}
band: { wavenumber: [0.15, 0.4] }
materials: { tin: { conductivity: 1e4 } }
bodies: []
enclosure: { wall: tin, spaces: [ { disk: { center: [0, 0], radius: 10 } } ] }`),
      { digits: 8 },
    );
    const mode = answer.modes.find((m) => Math.abs(m.k.re - re) < 1e-4 && m.multiplicity === multiplicity)!;
    expect(Math.hypot(mode.k.re - re, mode.k.im - im)).toBeLessThan(1e-11);
  });
});

describe('symmetry lines', () => {
  test('a quarter of a disk has the modes of its parities', () => {
    const answer = findModes(
      device(`polarization: Ez
band: { wavenumber: [2, 7.1] }
bodies: []
enclosure: { spaces: [ { disk: { center: [0, 0], radius: 1 } } ] }
symmetry: [ { x: 0, field: odd }, { y: 0, field: even } ]`),
      { digits: 9 },
    );
    // cos mφ with odd m: j₁,₁, j₃,₁, j₁,₂ (Abramowitz & Stegun, table 9.5)
    [3.8317059702075, 6.380161895924, 7.0155866698156].forEach((k, i) =>
      expect(Math.abs(answer.modes[i].k.re - k)).toBeLessThan(1e-9),
    );
    expect(answer.modes).toHaveLength(3);
  });

  test('half of an open disk holds one of each pair', () => {
    const text = `polarization: Ez
band: { wavenumber: [2.9, 3.7] }
materials: { glass: { index: 2 } }
bodies: [ { material: glass, disk: { center: [0, 0], radius: 1 } } ]`;
    const half = findModes(device(`${text}\nsymmetry: [ { y: 0, field: odd } ]`), { digits: 6 });
    // m = 5 and 4, mpmath, secant on the exact transcendental equation
    const exact = [3.61247887601, -0.0528871786083];
    const mode = half.modes.find((m) => Math.abs(m.k.re - exact[0]) < 0.01)!;
    expect(mode.multiplicity).toBe(1);
    expect(Math.hypot(mode.k.re - exact[0], mode.k.im - exact[1])).toBeLessThan(4e-6);
  });
});

// mpmath, 50 digits: secant on the exact transcendental equation, perfect electric core of radius 0.3 in ε = 4, radius 1.
test.each([
  ['Ez', [3.613280754005566, -0.053048304513402485]],
  ['Hz', [4.008499290233865, -0.10879901627705357]],
])('a metal core in open space, %s, m = 5', (polarization, [re, im]) => {
  const answer = findModes(
    device(`polarization: ${polarization}
band: { wavenumber: [3.5, 4.1] }
materials: { glass: { index: 2 } }
bodies:
  - { material: glass, disk: { center: [0, 0], radius: 1 } }
  - { material: electric wall, disk: { center: [0, 0], radius: 0.3 } }`),
    { digits: 7 },
  );
  const mode = answer.modes.find((m) => m.label === 'm = 5')!;
  expect(Math.hypot(mode.k.re - re, mode.k.im - im)).toBeLessThan(4e-7);
});
