// Is the S-matrix of the projected model that of the full solve, within the error it certifies, from few factorizations?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import type { ComplexArray } from '../../src/numerics/complex.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { certifiedError } from '../../src/projected/certified-error.ts';
import { solveDense } from '../../src/projected/dense-model.ts';
import { modelSolver } from '../../src/projected/pole-residue.ts';
import { qOf } from '../../src/projected/sharp-poles.ts';
import { findSpectrum, type SpectrumAnswer } from '../../src/questions/spectrum.ts';

const open = (material: string, bodies: string, band = '[1.5, 3]') =>
  readDevice(
    `wavewell: 1
polarization: Ez
band: { wavenumber: ${band} }
materials: { glass: ${material} }
bodies:
${bodies}`,
    'test.yaml',
  );

const PAIR = `  - { material: glass, disk: { center: [-0.7, 0], radius: 0.5 } }
  - { material: glass, rectangle: { center: [0.6, 0.2], size: [0.8, 0.6] } }`;

const evenly = (from: number, to: number, n: number): number[] =>
  Array.from({ length: n }, (_, i) => from + ((to - from) * i) / (n - 1));

function largest(a: ComplexArray, b: ComplexArray): number {
  let worst = 0;
  for (let i = 0; i < a.length; i += 2) worst = Math.max(worst, Math.hypot(a[i] - b[i], a[i + 1] - b[i + 1]));
  return worst;
}

/** Largest true error and largest ratio of true to certified error at the given k. */
function against(answer: SpectrumAnswer, ks: readonly number[]): { worst: number; ratio: number } {
  const closed = answer.openings.closed(answer.order, 'loss');
  const solver = modelSolver(answer.model);
  let [worst, ratio] = [0, 0];
  for (const k of ks) {
    const { S, estimate } = solver.at(k, { estimate: true });
    const error = largest(S, closed.scatter({ re: k, im: 0 }, 0).matrix);
    worst = Math.max(worst, error);
    ratio = Math.max(ratio, error / certifiedError(answer.model, k, estimate!));
  }
  return { worst, ratio };
}

const random = (from: number, to: number, n: number): number[] => {
  const stream = randomStream(5);
  return Array.from({ length: n }, () => from + (to - from) * stream.uniform());
};

describe.each([
  ['lossless', '{ index: 2 }'],
  ['lossy', '{ permittivity: [4, 0.1] }'],
])('an octave of two %s bodies', (name, material) => {
  const answer = findSpectrum(open(material, PAIR), evenly(1.5, 3, 201), { multipoles: 6 });

  test('takes at most 25 factorizations and certifies 1e-6 everywhere', () => {
    const { order, witnesses, snapshots } = answer.factorizations;
    expect(order + witnesses + snapshots).toBeLessThanOrEqual(25);
    for (const { modelError } of answer.points) expect(modelError).toBeLessThan(1e-6);
    expect(answer.reached).toBe(true);
  });

  test('is within three times the certified error at random points', () => {
    const { worst, ratio } = against(answer, random(1.5, 3, 12));
    expect(worst).toBeLessThan(1e-6);
    expect(ratio).toBeLessThan(3);
  });

  test('is reciprocal to 1e-12', () => {
    for (const { reciprocity } of answer.points) expect(reciprocity).toBeLessThan(1e-12);
  });

  test('gives the same by one dense solve, with slope and estimate', () => {
    const solver = modelSolver(answer.model, 3);
    for (const k of [1.5, 2.01, 2.9]) {
      const fast = solver.at(k, { slope: true, estimate: true });
      const dense = solveDense(answer.model, { re: k, im: 0 }, { slope: true, estimate: true });
      expect(largest(fast.S, dense.S)).toBeLessThan(1e-11);
      expect(largest(fast.slope!, dense.slope!)).toBeLessThan(1e-9);
      expect(Math.abs(fast.estimate! - dense.estimate!)).toBeLessThan(1e-4 * dense.estimate! + 1e-15);
    }
  });

  test('its slope is that of differences', () => {
    const solver = modelSolver(answer.model);
    const h = 1e-4;
    const at = (k: number): ComplexArray => solver.at(k).S;
    const [a, b, c, d] = [2.2 - 2 * h, 2.2 - h, 2.2 + h, 2.2 + 2 * h].map(at);
    const slope = a.map((v, i) => (v - 8 * b[i] + 8 * c[i] - d[i]) / (12 * h));
    expect(largest(solver.at(2.2, { slope: true }).slope!, slope)).toBeLessThan(1e-8);
  });

  test('absorption and delay follow from S', () => {
    for (const { absorbed, best, worst, delay } of answer.points) {
      if (name === 'lossless') expect([best, worst]).toEqual([0, 0]);
      else for (const a of absorbed) expect(a).toSatisfy((v: number) => v < best + 1e-12 && v > worst - 1e-12);
      expect(Number.isFinite(delay)).toBe(true);
    }
  });
});

test('real materials keep S unitary to 1e-12 when all that radiates has a channel', () => {
  const answer = findSpectrum(open('{ index: 2 }', PAIR), evenly(1.5, 3, 61), { multipoles: 16 });
  for (const { unitarity } of answer.points) expect(unitarity!).toBeLessThan(1e-12);
});

test('the delay of free space is that of the reference: empty channels have none', () => {
  const device = open('{ permittivity: 1 }', '  - { material: glass, disk: { center: [0, 0], radius: 0.5 } }');
  const { points } = findSpectrum(device, evenly(1.5, 3, 31), { multipoles: 3 });
  // S is right to 1e-5
  for (const { delay } of points) expect(Math.abs(delay)).toBeLessThan(1e-5);
});

test('a resonance narrower than the steps is found, gets its own snapshot, and points at equal steps of phase', () => {
  const device = open(
    '{ index: 3 }',
    '  - { material: glass, disk: { center: [0.2, 0.1], radius: 1 } }',
    '[3.6, 3.72]',
  );
  const answer = findSpectrum(device, evenly(3.6, 3.72, 25), { multipoles: 14, digits: 4 });
  expect(answer.poles.length).toBeGreaterThan(0);
  for (const { k } of answer.poles) {
    const half = Math.abs(k.im);
    const near = answer.points.filter((p) => Math.abs(p.k - k.re) < half);
    if (qOf(k) > 1000) expect(near.length).toBeGreaterThan(8);
    const { worst, ratio } = against(
      answer,
      random(-6, 6, 6).map((x) => k.re + x * half),
    );
    expect(worst).toBeLessThan(1e-5);
    expect(ratio).toBeLessThan(3);
  }
  // delay at the peak of a single resonance: 4 over its width
  const sharpest = [...answer.poles].sort((a, b) => qOf(b.k) - qOf(a.k))[0];
  const peak = Math.max(...answer.points.map((p) => p.delay));
  expect(peak * Math.abs(sharpest.k.im)).toBeGreaterThan(1.9);
});

test('guides: the model knows cutoffs of the waves that do not propagate, and the smallest singular value between inputs', () => {
  const device = readDevice(
    `wavewell: 1
length: mm
polarization: Ez
band: { frequency: [8.2, 12.4], unit: GHz }
guides:
  - { name: in, from: [0, 0], angle: 180, size: WR-90 }
  - { name: out, from: [0, 0], angle: 0, size: WR-90 }
bodies: [ { material: electric wall, disk: { center: [0, 2], radius: 1 } } ]`,
    'test.yaml',
  );
  const { kMin, kMax } = device.band;
  const answer = findSpectrum(device, evenly(kMin, kMax, 101), { inputs: ['in.0'] });
  const { worst, ratio } = against(answer, random(kMin, kMax, 10));
  expect(worst).toBeLessThan(1e-6);
  expect(ratio).toBeLessThan(3);
  for (const { smallest, matrix, unitarity } of answer.points) {
    expect(smallest!).toBeCloseTo(Math.hypot(matrix[0], matrix[1]), 12);
    expect(unitarity!).toBeLessThan(1e-12);
  }
});

test('a cutoff inside the band: certified on both sides, and its slope is that of differences', () => {
  const device = readDevice(
    `wavewell: 1
length: mm
polarization: Ez
band: { frequency: [11, 15], unit: GHz }
guides:
  - { name: in, from: [0, 0], angle: 180, size: WR-90, modes: 2 }
  - { name: out, from: [0, 0], angle: 0, size: WR-90, modes: 2 }
bodies: [ { material: electric wall, disk: { center: [0, 2], radius: 1 } } ]`,
    'test.yaml',
  );
  const { kMin, kMax } = device.band;
  const cutoff = (2 * Math.PI) / 22.86;
  const answer = findSpectrum(device, evenly(kMin, kMax, 41));
  const near = [-1e-3, -1e-5, 1e-5, 1e-3].map((x) => cutoff * (1 + x));
  const { worst, ratio } = against(answer, [...random(kMin, kMax, 6), ...near]);
  expect(worst).toBeLessThan(1e-6);
  expect(ratio).toBeLessThan(3);
  const solver = modelSolver(answer.model);
  const [k, h] = [near[3], 1e-6];
  const slope = solver.at(k, { slope: true }).slope!;
  const [up, down] = [solver.at(k + h).S, solver.at(k - h).S];
  expect(
    largest(
      slope,
      up.map((v, i) => (v - down[i]) / (2 * h)),
    ),
  ).toBeLessThan(1e-3);
});

test('metal of finite conductivity goes by dense solves, since its impedance is not affine in k²', () => {
  const device = readDevice(
    `wavewell: 1
length: mm
polarization: Ez
band: { frequency: [8.2, 12.4], unit: GHz }
materials: { brass: { conductivity: 1.5e7 } }
guides:
  - { name: in, from: [0, 0], angle: 180, size: WR-90 }
  - { name: out, from: [0, 0], angle: 0, size: WR-90 }
bodies: [ { material: brass, disk: { center: [0, 2], radius: 1 } } ]`,
    'test.yaml',
  );
  const { kMin, kMax } = device.band;
  const answer = findSpectrum(device, evenly(kMin, kMax, 31));
  const { worst, ratio } = against(answer, random(kMin, kMax, 5));
  expect(worst).toBeLessThan(1e-6);
  expect(ratio).toBeLessThan(3);
  expect(Math.max(...answer.points.map((p) => p.best))).toBeGreaterThan(1e-4);
});

test('magnetic polarization with loss', () => {
  const device = readDevice(
    `wavewell: 1
polarization: Hz
band: { wavenumber: [1, 2] }
materials: { glass: { permittivity: [5, 0.2] } }
bodies: [ { material: glass, disk: { center: [0, 0], radius: 0.8 } }, { material: glass, disk: { center: [1.6, 0.4], radius: 0.5 } } ]`,
    'test.yaml',
  );
  const answer = findSpectrum(device, evenly(1, 2, 51), { multipoles: 8 });
  const { worst, ratio } = against(answer, random(1, 2, 8));
  expect(worst).toBeLessThan(1e-6);
  expect(ratio).toBeLessThan(3);
});

test('lossy pairs of equal poles of the inside, whose fields come in any mixture, spoil nothing', () => {
  const device = open(
    '{ permittivity: [4, 0.2] }',
    '  - { material: glass, disk: { center: [0, 0], radius: 0.8 } }',
    '[1.3, 2.1]',
  );
  const { model } = findSpectrum(device, evenly(1.3, 2.1, 31), { multipoles: 5, digits: 4 });
  for (const pieces of [1, 4]) {
    const solver = modelSolver(model, pieces);
    for (const k of [1.3, 1.55, 1.81, 2.07])
      expect(largest(solver.at(k).S, solveDense(model, { re: k, im: 0 }).S)).toBeLessThan(1e-11);
  }
  expect(model.rounding).toBeLessThan(1e-9);
});

test('bad input is refused at the door', () => {
  const device = open('{ index: 2 }', PAIR);
  expect(() => findSpectrum(device, [2])).toThrow(/two or more/);
  expect(() => findSpectrum(device, [2, 3], { inputs: ['left.0'], multipoles: 1 })).toThrow(/left\.0.*open\.cos0/);
});
