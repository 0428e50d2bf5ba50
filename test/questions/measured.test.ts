// Do best drives, least reflections and zeros of a measured S-matrix agree with what it was made of?

import { expect, test } from 'vitest';
import { analyseMeasured } from '../../src/questions/measured.ts';
import type { MeasuredScattering } from '../../src/results/touchstone.ts';

/**
 * One resonance in two ports: S = 1 − i d dᵀ/(f − f₀ + i(γ + |d|²/2)), |d|² = leak into the ports, γ the loss; zero of det S at
 * f₀ + i(|d|²/2 − γ) (temporal coupled-mode theory).
 */
function resonance(d: readonly [number, number], loss: number, n = 101): MeasuredScattering {
  const leak = d[0] ** 2 + d[1] ** 2;
  const hertz = Float64Array.from({ length: n }, (_, i) => 9 + (2 * i) / (n - 1));
  const matrices = new Float64Array(8 * n);
  hertz.forEach((f, at) => {
    const [x, y] = [f - 10, loss + leak / 2];
    const size = x * x + y * y;
    for (let j = 0; j < 2; j++)
      for (let i = 0; i < 2; i++) {
        const e = 8 * at + 2 * (i + 2 * j);
        matrices[e] = (i === j ? 1 : 0) - (d[i] * d[j] * y) / size;
        matrices[e + 1] = (-d[i] * d[j] * x) / size;
      }
  });
  return { ports: 2, hertz, matrices };
}

test('critical coupling: all is absorbed on the drive d, and the zero lies on the axis', () => {
  const { points, bestAt, zeros, poles, gain, reciprocity, fit } = analyseMeasured(resonance([0.4, 0.3], 0.125));
  expect(points[bestAt].hertz).toBeCloseTo(10, 12);
  expect(points[bestAt].best).toBeCloseTo(1, 12);
  expect(points[bestAt].worst).toBeCloseTo(0, 12);
  expect([...points[bestAt].bestDrive].map((v) => Math.round(v * 1e9) / 1e9 + 0)).toEqual([0.8, 0, 0.6, 0]);
  // one beam alone: |d₁|²/|d|² of the power enters the mode
  expect(points[bestAt].single[0]).toBeCloseTo(0.64 * (1 - 0) * 1, 12);
  expect(zeros[0].hertz.re).toBeCloseTo(10, 8);
  expect(Math.abs(zeros[0].hertz.im)).toBeLessThan(1e-8);
  expect(zeros[0].error).toBeLessThan(1e-8);
  expect(poles[0].hertz.im).toBeCloseTo(-0.25, 8);
  expect(gain).toBeLessThan(1 + 1e-12);
  expect(reciprocity).toBe(0);
  expect(fit.between).toBeLessThan(1e-9);
});

test('from one port: its own reflection zero', () => {
  const { points, reflectionAt, zeros } = analyseMeasured(resonance([0.5, 0.3], 0.08), { inputs: [0] });
  // S₁₁ = 0 at f₀ with d₁² = γ + |d|²/2
  expect(points[reflectionAt].reflection).toBeCloseTo(0, 10);
  expect(zeros[0].hertz.re).toBeCloseTo(10, 8);
  expect(Math.abs(zeros[0].hertz.im)).toBeLessThan(1e-8);
});

test('less loss than leak: the zero lies above the axis, more: below', () => {
  expect(analyseMeasured(resonance([0.4, 0.3], 0.05)).zeros[0].hertz.im).toBeCloseTo(0.075, 8);
  expect(analyseMeasured(resonance([0.4, 0.3], 0.2)).zeros[0].hertz.im).toBeCloseTo(-0.075, 8);
});

test('wrong ports are refused', () => {
  expect(() => analyseMeasured(resonance([1, 1], 1), { inputs: [2] })).toThrow(/ports from 1 to 2/);
  expect(() => analyseMeasured(resonance([1, 1], 1), { inputs: [0, 0] })).toThrow(/different/);
});
