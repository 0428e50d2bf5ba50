// Are S-parameters of guides those of mode matching and multipole sums, and do they keep power and reciprocity?

import { describe, expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { findScattering, type ScatterAnswer } from '../../src/questions/scatter.ts';
import { GUIDE_VALUES } from '../checks/guide-values.ts';

const TWO_GUIDES = `guides:
  - { name: in, from: [0, 0], angle: 180, size: WR-90 }
  - { name: out, from: [0, 0], angle: 0, size: WR-90 }`;

const device = (body: string, guides = TWO_GUIDES) =>
  readDevice(
    `wavewell: 1
length: mm
polarization: Ez
band: { frequency: [8.2, 12.4], unit: GHz }
${guides}
${body}`,
    'test.yaml',
  );

const kOf = (gigahertz: number) => ({ re: (2 * Math.PI * gigahertz) / 299.792458, im: 0 });

const window = (opening: number): string => `bodies: []
sheets:
  - { points: [[0, ${opening / 2}], [0, 11.43]] }
  - { points: [[0, ${-opening / 2}], [0, -11.43]] }`;

const thick = (opening: number, thickness: number): string => {
  const height = (22.86 - opening) / 2;
  const y = (22.86 + opening) / 4;
  return `bodies:
  - { material: electric wall, rectangle: { center: [${thickness / 2}, ${y}], size: [${thickness}, ${height}] } }
  - { material: electric wall, rectangle: { center: [${thickness / 2}, ${-y}], size: [${thickness}, ${height}] } }`;
};

const behind = (thickness: number): string => TWO_GUIDES.replace(/WR-90 }$/, `WR-90, reference: ${thickness} }`);

const post = (radius: number, material = 'electric wall'): string =>
  `bodies: [ { material: ${material}, disk: { center: [0, 0], radius: ${radius} } } ]`;

const DEVICES: Readonly<Record<string, () => ReturnType<typeof device>>> = {
  'window_d11.43': () => device(window(11.43)),
  'window_d6.858': () => device(window(6.858)),
  'window_d16.002': () => device(window(16.002)),
  'thick_d11.43_t2': () => device(thick(11.43, 2), behind(2)),
  'thick_d9.144_t1': () => device(thick(9.144, 1), behind(1)),
  'step_d19.431': () => device('bodies: []', TWO_GUIDES.replace(/size: WR-90 }$/, 'width: 19.431 }')),
  'flush_step_d19.431': () =>
    device(
      'bodies: []',
      TWO_GUIDES.replace(/from: \[0, 0\], angle: 0, size: WR-90 }$/, 'from: [0, -1.7145], angle: 0, width: 19.431 }'),
    ),
  pec_r1: () => device(post(1)),
  'pec_r2.5': () => device(post(2.5)),
  'pec_r0.2': () => device(post(0.2)),
  dielectric_r3_eps6: () => device(`materials: { rod: { permittivity: 6 } }\n${post(3, 'rod')}`),
  'lossy_r3_eps6+0.5i': () => device(`materials: { rod: { permittivity: [6, 0.5] } }\n${post(3, 'rod')}`),
};

/** Engineers' values belong to exp(+jωt): conjugate. The checks' are exp(−iωt). */
function largestError(
  answer: ScatterAnswer,
  points: readonly { S11: readonly number[]; S21: readonly number[] }[],
): number {
  let worst = 0;
  answer.points.forEach(({ matrix }, i) => {
    const { S11, S21 } = points[i];
    worst = Math.max(worst, Math.hypot(matrix[0] - S11[0], matrix[1] - S11[1]));
    worst = Math.max(worst, Math.hypot(matrix[2] - S21[0], matrix[3] - S21[1]));
  });
  return worst;
}

describe.each(Object.keys(DEVICES))('%s in WR-90', (name) => {
  const points = GUIDE_VALUES[name];
  const answer = findScattering(
    DEVICES[name](),
    points.map((p) => kOf(p.f)),
  );

  test('agrees with the checks to 1e-4 at the default digits, and to three times its own estimate', () => {
    const error = largestError(answer, points);
    expect(error).toBeLessThan(1e-5);
    expect(error).toBeLessThan(3 * Math.max(...answer.points.map((p) => p.error)));
  });

  test('keeps power to 1e-10 and reciprocity to 1e-12', () => {
    for (const { unitarity, reciprocity, balance } of answer.points) {
      if (!name.startsWith('lossy')) expect(unitarity!).toBeLessThan(1e-10);
      expect(balance).toBeLessThan(1e-10);
      expect(reciprocity).toBeLessThan(1e-12);
    }
  });
});

test.each(['window_d11.43', 'thick_d11.43_t2', 'pec_r1'])('%s to 1e-6 with seven digits', (name) => {
  const [first, , middle] = GUIDE_VALUES[name];
  const answer = findScattering(DEVICES[name](), [kOf(first.f), kOf(middle.f)], { digits: 7 });
  expect(largestError(answer, [first, middle])).toBeLessThan(1e-6);
});

// Marcuvitz, Waveguide Handbook (1951), sec. 5.11 (formulas from memory); numbers of a Nyström spectral solution, power
// balance 1e-15: centred and offset solid posts of diameter 0.1 a at 10 GHz, exp(+jωt).
test.each([
  [0, [-0.86667711, 0.28390087], [0.12769696, 0.38982632]],
  [5.715, [-0.20989482, 0.38071953], [0.78864245, 0.43478717]],
])('a post of diameter a/10 at y = %f mm', (y, S11, S21) => {
  // the offset is measured from the wall: x₀ = a/4
  const center = y === 0 ? 0 : y - 11.43;
  const answer = findScattering(
    device(`bodies: [ { material: electric wall, disk: { center: [0, ${center}], radius: 1.143 } } ]`),
    [kOf(10)],
    { digits: 7 },
  );
  const { matrix } = answer.points[0];
  const error = Math.max(
    Math.hypot(matrix[0] - S11[0], matrix[1] + S11[1]),
    Math.hypot(matrix[2] - S21[0], matrix[3] + S21[1]),
  );
  expect(error).toBeLessThan(1e-6);
});

// Marcuvitz sec. 5.2 (from memory); numbers of a Galerkin solution with edge basis, error below 1e-8; exp(+jωt).
test('thin windows of the handbook in WR-28 at 33 GHz', () => {
  const ka = readDevice(
    `wavewell: 1
length: mm
polarization: Ez
band: { frequency: [26.5, 40], unit: GHz }
guides:
  - { name: in, from: [0, 0], angle: 180, size: WR-28 }
  - { name: out, from: [0, 0], angle: 0, size: R320 }
bodies: []
sheets: [ { points: [[0, 1.778], [0, 3.556]] }, { points: [[0, -1.778], [0, -3.556]] } ]`,
    'test.yaml',
  );
  const { matrix } = findScattering(ka, [kOf(33)]).points[0];
  expect(Math.hypot(matrix[2] - 0.6497479, matrix[3] + 0.47704881)).toBeLessThan(1e-5);
});

// Symmetric H-plane steps, edge-exponent basis, checked by mode matching with 400 modes; exp(+jωt).
test.each([
  [0.8, 10, [0.1179579, 0.0685985], [0.9889697, 0.057611]],
  [0.9, 10, [0.0455631, 0.0168104], [0.9987097, 0.0148438]],
  [0.8, 9, [0.2249956, 0.1018855], [0.9658404, 0.078413]],
])('a symmetric step to %f of the width at %f GHz', (ratio, f, S11, S21) => {
  const guides = TWO_GUIDES.replace(/size: WR-90 }$/, `width: ${22.86 * ratio} }`);
  const { matrix } = findScattering(device('bodies: []', guides), [kOf(f)]).points[0];
  expect(Math.hypot(matrix[0] - S11[0], matrix[1] + S11[1])).toBeLessThan(1e-5);
  expect(Math.hypot(matrix[2] - S21[0], matrix[3] + S21[1])).toBeLessThan(1e-5);
});

describe('laws', () => {
  test('an empty guide passes its wave with the phase of its length, whatever its direction', () => {
    const turned = device(
      'bodies: []',
      `guides:
  - { name: in, from: [1, 2], angle: 217, size: WR-90, reference: 3 }
  - { name: out, from: [1, 2], angle: 37, size: WR-90, reference: 4 }`,
    );
    const k = kOf(10);
    const { matrix } = findScattering(turned, [k], { digits: 8 }).points[0];
    const beta = Math.sqrt(k.re ** 2 - (Math.PI / 22.86) ** 2);
    expect(Math.hypot(matrix[0], matrix[1])).toBeLessThan(1e-8);
    expect(Math.hypot(matrix[2] - Math.cos(7 * beta), matrix[3] - Math.sin(7 * beta))).toBeLessThan(1e-8);
  });

  test('several modes: unitary as a whole, and the smooth junction does not care where the guides are cut', () => {
    const wide = (length: number) =>
      device(
        post(4),
        `guides:
  - { name: in, from: [0, 0], angle: 180, width: 40, length: ${length} }
  - { name: out, from: [0, 0], angle: 0, width: 40, length: ${length} }`,
      );
    const [a, b] = [12, 30].map((length) => findScattering(wide(length), [kOf(12)], { digits: 7 }));
    expect(a.channels.map((c) => c.name)).toEqual(['in.0', 'in.1', 'in.2', 'out.0', 'out.1', 'out.2']);
    expect(a.points[0].unitarity!).toBeLessThan(1e-10);
    a.points[0].matrix.forEach((v, i) => expect(Math.abs(v - b.points[0].matrix[i])).toBeLessThan(3e-7));
  });

  test('a parallel-plate guide carries its wave without cutoff', () => {
    const plates = readDevice(
      `wavewell: 1
polarization: Hz
band: { wavenumber: [0.5, 1] }
guides:
  - { name: in, from: [0, 0], angle: 180, width: 1 }
  - { name: out, from: [0, 0], angle: 0, width: 1 }
bodies: []`,
      'test.yaml',
    );
    const answer = findScattering(plates, [{ re: 0.7, im: 0 }]);
    expect(answer.channels).toHaveLength(2);
    expect(Math.hypot(answer.points[0].matrix[2] - 1, answer.points[0].matrix[3])).toBeLessThan(1e-6);
  });

  test('halves by symmetry rebuild the whole: S₁₁ ± S₂₁', () => {
    const half = (field: string) =>
      findScattering(device(`${post(2)}\nsymmetry: [ { x: 0, field: ${field} } ]`), [kOf(10)], { digits: 6 }).points[0];
    const axis = findScattering(device(`${post(2)}\nsymmetry: [ { y: 0, field: even } ]`), [kOf(10)], { digits: 6 });
    const whole = findScattering(device(post(2)), [kOf(10)], { digits: 6 }).points[0].matrix;
    // of the two guides only "out" is kept
    const last = (m: Float64Array): [number, number] => [m[m.length - 2], m[m.length - 1]];
    const [even, odd] = [half('even'), half('odd')].map((p) => last(p.matrix));
    expect(Math.hypot((even[0] + odd[0]) / 2 - whole[0], (even[1] + odd[1]) / 2 - whole[1])).toBeLessThan(2e-6);
    expect(Math.hypot((even[0] - odd[0]) / 2 - whole[2], (even[1] - odd[1]) / 2 - whole[3])).toBeLessThan(2e-6);
    axis.points[0].matrix.forEach((v, i) => expect(Math.abs(v - whole[i])).toBeLessThan(2e-6));
  });

  test('S at complex k continues that on the axis: S(k̄)* S(k) = 1 without loss', () => {
    const above = findScattering(device(post(2)), [{ re: kOf(10).re, im: 0.004 }], { digits: 7 }).points[0].matrix;
    const below = findScattering(device(post(2)), [{ re: kOf(10).re, im: -0.004 }], { digits: 7 }).points[0].matrix;
    for (const [i, j, value] of [
      [0, 0, 1],
      [0, 1, 0],
      [1, 1, 1],
    ]) {
      let re = -value;
      let im = 0;
      for (let l = 0; l < 2; l++) {
        const [x, y] = [2 * (l + 2 * i), 2 * (l + 2 * j)];
        re += above[x] * below[y] + above[x + 1] * below[y + 1];
        im += above[x] * below[y + 1] - above[x + 1] * below[y];
      }
      expect(Math.hypot(re, im)).toBeLessThan(1e-10);
    }
  });
});
