// Is the S-matrix of the free-space multipoles that of the addition theorem?

import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import type { ComplexArray } from '../../src/numerics/complex.ts';
import { findScattering } from '../../src/questions/scatter.ts';

interface Case {
  readonly id: string;
  readonly polarization: string;
  readonly cylinders: readonly { x: number; y: number; radius: number; eps: number | readonly number[] }[];
  readonly k: number;
  readonly S: readonly (readonly (readonly [number, number])[])[];
}
// Graf multipoles (addition theorem), SciPy, double precision, 12 digits
const { cases } = JSON.parse(readFileSync(new URL('../checks/cluster-scattering.json', import.meta.url), 'utf8')) as {
  cases: readonly Case[];
};

describe.each(cases)('$id at k = $k', ({ polarization, cylinders, k, S }) => {
  // a disk of vacuum about the origin puts the rim's center there
  const reach = Math.max(...cylinders.map(({ x, y, radius }) => Math.hypot(x, y) + radius)) + 0.1;
  const device = readDevice(
    `wavewell: 1
polarization: ${polarization}
band: { wavenumber: [${k}, ${k * 1.01}] }
materials:
${cylinders.map(({ eps }, i) => `  m${i}: { permittivity: ${JSON.stringify(eps)} }`).join('\n')}
bodies:
  - { material: vacuum, disk: { center: [0, 0], radius: ${reach} } }
${cylinders.map(({ x, y, radius }, i) => `  - { material: m${i}, disk: { center: [${x}, ${y}], radius: ${radius} } }`).join('\n')}`,
    'test.yaml',
  );
  const answer = findScattering(device, [{ re: k, im: 0 }], { digits: 7 });

  test('agrees within 1e-8', () => {
    const M = (S.length - 1) / 2;
    const names = answer.channels.map((c) => c.name);
    let worst = 0;
    S.forEach((row, i) =>
      row.forEach(([re, im], j) => {
        const [x, y] = inExponentials(answer.points[0].matrix, names, i - M, j - M);
        worst = Math.max(worst, Math.hypot(x - re, y - im));
      }),
    );
    expect(worst).toBeLessThan(1e-8);
  });

  test('keeps power to 1e-10 and reciprocity to 1e-12', () => {
    const [{ unitarity, reciprocity, balance }] = answer.points;
    if (!cylinders.some(({ eps }) => typeof eps !== 'number')) expect(unitarity!).toBeLessThan(1e-10);
    expect(balance).toBeLessThan(1e-10);
    expect(reciprocity).toBeLessThan(1e-12);
  });
});

/** S_{mn} between e^{imφ}: b_m = (b_cos − i b_sin)/√2, and b_{−m} = (−1)^m (b_cos + i b_sin)/√2, for m > 0. */
function inExponentials(matrix: ComplexArray, names: readonly string[], m: number, n: number): [number, number] {
  const parts = (order: number): { at: number; re: number; im: number }[] => {
    const a = Math.abs(order);
    const cos = names.indexOf(`open.cos${a}`);
    if (a === 0) return [{ at: cos, re: 1, im: 0 }];
    const sign = order < 0 && a % 2 === 1 ? -1 : 1;
    return [
      { at: cos, re: sign * Math.SQRT1_2, im: 0 },
      { at: names.indexOf(`open.sin${a}`), re: 0, im: -Math.sign(order) * sign * Math.SQRT1_2 },
    ];
  };
  let re = 0;
  let im = 0;
  for (const out of parts(m))
    for (const into of parts(n)) {
      // the map is unitary: inputs enter by its adjoint
      const fr = out.re * into.re + out.im * into.im;
      const fi = out.im * into.re - out.re * into.im;
      const s = 2 * (out.at + into.at * names.length);
      re += fr * matrix[s] - fi * matrix[s + 1];
      im += fr * matrix[s + 1] + fi * matrix[s];
    }
  return [re, im];
}
