// Does a right device file become the device it describes?

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { DeviceError } from '../../src/device/findings.ts';
import { readDevice } from '../../src/device/read.ts';
import type { ReadOptions } from '../../src/device/read.ts';
import { deviceSize } from '../../src/device/size.ts';
import { areaOf } from '../../src/geometry/area.ts';
import { boundingCircle } from '../../src/geometry/bounding-circle.ts';
import { disk, ellipse, polygon, rectangle, regularPolygon, ring } from '../../src/geometry/shapes.ts';

const HEAD = `wavewell: 1
polarization: Ez
band: { wavenumber: [1, 2] }
materials:
  glass: { index: 1.5 }
`;
const read = (text: string, options?: ReadOptions) => readDevice(text, 'a.yaml', options);
const readBodies = (...lines: string[]) => read(`${HEAD}bodies:\n${lines.map((l) => `  - ${l}\n`).join('')}`).bodies;
const centers = (shapes: readonly { shape: Parameters<typeof areaOf>[0] }[]) =>
  shapes.map(({ shape }) => boundingCircle([shape]).center.map((v) => Math.round(v * 1e9) / 1e9 + 0));

test('the sketch of the format', () => {
  const device = read(`wavewell: 1
title: Pumped disk beside a post
length: um
polarization: Hz
band: { wavelength: [1.50, 1.60] }
knobs:
  diameter: 2*radius
  radius: { value: 3.0, range: [2.8, 3.2], tolerance: 0.01 }
  gap: { value: 0.18, tolerance: { sigma: 0.005 } }
materials:
  glass: { index: 1.444 }
  core: { index: [2.85, 0.001] }
  coat: { permittivity: 4, loss_tangent: 0.02, permeability: 1.1 }
background: glass
bodies:
  - { name: resonator, material: core, disk: { center: [0, 0], radius: radius } }
  - { material: coat, disk: { center: [diameter + gap, 0], radius: radius } }
pump: { bodies: { resonator: 0.5 } }
`);
  expect(device).toEqual({
    title: 'Pumped disk beside a post',
    lengthUnit: 'um',
    metres: 1e-6,
    polarization: 'Hz',
    band: {
      quantity: 'wavelength',
      limits: [1.5, 1.6],
      unit: 'um',
      kMin: (2 * Math.PI) / 1.6,
      kMax: (2 * Math.PI) / 1.5,
    },
    knobs: [
      { name: 'diameter', value: 6 },
      { name: 'radius', value: 3, range: [2.8, 3.2], tolerance: { kind: 'limit', value: 0.01 } },
      { name: 'gap', value: 0.18, tolerance: { kind: 'sigma', value: 0.005 } },
    ],
    background: { material: 'glass', permittivity: 1.444 ** 2, permeability: 1 },
    bodies: [
      {
        name: 'resonator',
        group: 'resonator',
        material: 'core',
        permittivity: { re: 2.85 ** 2 - 0.001 ** 2, im: expect.closeTo(2 * 2.85 * 0.001, 15) as number },
        permeability: { re: 1, im: 0 },
        shape: disk([0, 0], 3),
        pumpWeight: 0.5,
      },
      {
        name: 'body2',
        group: 'body2',
        material: 'coat',
        permittivity: { re: 4, im: 0.08 },
        permeability: { re: 1.1, im: 0 },
        shape: disk([6.18, 0], 3),
        pumpWeight: 0,
      },
    ],
  });
});

test('options replace knobs and band, and expressions follow', () => {
  const text = `${HEAD.replace('[1, 2]', '[low, 2*low]')}knobs: { low: 1, twice: 2*low }
bodies:
  - { material: glass, disk: { center: [0, 0], radius: twice } }
`;
  expect(read(text, { knobs: { low: 3 } })).toMatchObject({ band: { kMin: 3, kMax: 6 } });
  expect(read(text, { knobs: { low: 3 } }).bodies[0].shape).toEqual(disk([0, 0], 6));
  expect(read(text, { knobs: { twice: 1 } }).bodies[0].shape).toEqual(disk([0, 0], 1));
  expect(read(text, { band: [1.2, 1.3] }).band).toMatchObject({ limits: [1.2, 1.3], kMin: 1.2, kMax: 1.3 });
});

test.each([
  ['wavelength: [1, 2]', 'mm', Math.PI, 2 * Math.PI, 'mm'],
  ['wavenumber: [1, 2]', 'mm', 1, 2, '1/mm'],
  // k = 2πf/c with c = 299792458 m/s (SI, exact).
  [
    'frequency: [8.2, 12.4], unit: GHz',
    'mm',
    (2e-3 * Math.PI * 8.2e9) / 299792458,
    (2e-3 * Math.PI * 12.4e9) / 299792458,
    'GHz',
  ],
  // λ = 1239.841984 nm / E[eV] (CODATA 2018, h c / e).
  [
    'energy: [0.78, 0.84], unit: eV',
    'um',
    (2 * Math.PI * 0.78) / 1.239841984,
    (2 * Math.PI * 0.84) / 1.239841984,
    'eV',
  ],
])('band %s in %s', (band, length, kMin, kMax, unit) => {
  const device = read(`${HEAD.replace('wavenumber: [1, 2]', band)}length: ${length}
bodies: [ { material: glass, disk: { center: [0, 0], radius: 10 } } ]
`);
  expect(device.band.unit).toBe(unit);
  expect(device.band.kMin / kMin).toBeCloseTo(1, 6);
  expect(device.band.kMax / kMax).toBeCloseTo(1, 6);
});

test('every shape', () => {
  const shapes = readBodies(
    '{ material: glass, disk: { center: [1, 2], radius: 3 } }',
    '{ material: glass, ring: { center: [1, 2], outer: 3, inner: 2 } }',
    '{ material: glass, ellipse: { center: [1, 2], radii: [3, 2], angle: 90 } }',
    '{ material: glass, rectangle: { center: [1, 2], size: [3, 2], angle: 45, corner_radius: 0.5 } }',
    '{ material: glass, polygon: { points: [[0, 0], [0, 1], [2, 0]] } }',
    '{ material: glass, regular_polygon: { center: [1, 2], radius: 3, sides: 6, angle: 30 } }',
  ).map(({ shape }) => shape);
  expect(shapes).toEqual([
    disk([1, 2], 3),
    ring([1, 2], 3, 2),
    ellipse([1, 2], [3, 2], Math.PI / 2),
    rectangle([1, 2], [3, 2], Math.PI / 4, 0.5),
    polygon([
      [0, 0],
      [2, 0],
      [0, 1],
    ]).map((outline) => [outline[1], outline[2], outline[0]]),
    regularPolygon([1, 2], 3, 6, Math.PI / 6),
  ]);
});

describe('arrays', () => {
  test('rows and columns', () => {
    const bodies = readBodies(
      '{ name: post, material: glass, disk: { center: [1, 1], radius: 0.4 }, array: { count: [3, 2], pitch: [2, 5] } }',
    );
    expect(bodies.map(({ name }) => name)).toEqual(['post[0]', 'post[1]', 'post[2]', 'post[3]', 'post[4]', 'post[5]']);
    expect(bodies.every(({ group }) => group === 'post')).toBe(true);
    expect(centers(bodies)).toEqual([
      [1, 1],
      [3, 1],
      [5, 1],
      [1, 6],
      [3, 6],
      [5, 6],
    ]);
  });

  test('a circle of members, turned with it or not', () => {
    const wheel = (turn: string) =>
      readBodies(
        `{ material: glass, rectangle: { center: [0, 0], size: [2, 1] }, array: { around: [1, 0], radius: 5, count: 4, start_angle: 90${turn} } }`,
      );
    expect(centers(wheel(''))).toEqual([
      [1, 5],
      [-4, 0],
      [1, -5],
      [6, 0],
    ]);
    const height = (turn: string): number => {
      const ys = wheel(turn)[0].shape[0].map((piece) => (piece.kind === 'line' ? piece.from[1] : 0));
      return Math.max(...ys) - Math.min(...ys);
    };
    expect(height('')).toBeCloseTo(2, 12);
    expect(height(', turn: false')).toBeCloseTo(1, 12);
  });
});

describe('scatter', () => {
  const line = (seed: number) =>
    `{ name: post, material: glass, disk: { center: [7, 7], radius: 0.2 }, scatter: { inside: { ring: { center: [1, 2], outer: 6, inner: 3 } }, count: 100, seed: ${seed}, minimum_gap: 0.1 } }`;

  test('keeps its distance and its region, and repeats with its seed', () => {
    const bodies = readBodies(line(4));
    expect(bodies).toHaveLength(100);
    const places = bodies.map(({ shape }) => boundingCircle([shape]).center);
    places.forEach(([x, y], i) => {
      const r = Math.hypot(x - 1, y - 2);
      expect(r).toBeGreaterThan(3.2 - 1e-9);
      expect(r).toBeLessThan(5.8 + 1e-9);
      for (const [u, v] of places.slice(0, i)) expect(Math.hypot(x - u, y - v)).toBeGreaterThan(0.5 - 1e-9);
    });
    expect(readBodies(line(4))).toEqual(bodies);
    expect(readBodies(line(5))).not.toEqual(bodies);
  });
});

test('a pump addresses a body, a group, or a member before its group', () => {
  const { bodies } = read(`${HEAD}bodies:
  - { name: a, material: glass, disk: { center: [-9, 0], radius: 1 } }
  - { name: post, material: glass, disk: { center: [0, 0], radius: 1 }, array: { count: [3, 1], pitch: [3, 0] } }
pump: { bodies: { post: 2, "post[1]": 0.5 } }
`);
  expect(bodies.map(({ pumpWeight }) => pumpWeight)).toEqual([0, 2, 0.5, 2]);
});

test('negative permittivity is a metal, in both polarizations', () => {
  const text = `${HEAD}bodies: [ { material: metal, disk: { center: [0, 0], radius: 1 } } ]\n`.replace(
    'glass: { index: 1.5 }',
    'metal: { permittivity: [-9, 0.3] }',
  );
  expect(read(text).bodies[0].permittivity).toEqual({ re: -9, im: 0.3 });
  expect(read(text.replace('Ez', 'Hz')).bodies[0].permittivity).toEqual({ re: -9, im: 0.3 });
});

test('gain is taken when it is marked', () => {
  const text = `${HEAD}bodies: [ { material: glass, disk: { center: [0, 0], radius: 1 } } ]\n`;
  const { bodies } = read(text.replace('{ index: 1.5 }', '{ index: [1.5, -0.1], gain: true }'));
  expect(bodies[0].permittivity.im).toBeCloseTo(-0.3, 14);
});

test('ratio -1 against a background that the body never meets is taken', () => {
  const { bodies } = read(`wavewell: 1
polarization: Hz
band: { wavenumber: [1, 2] }
materials: { metal: { permittivity: -1 }, shell: { permittivity: 4 } }
bodies:
  - { material: shell, disk: { center: [0, 0], radius: 2 } }
  - { material: metal, disk: { center: [0, 0], radius: 1 } }
`);
  expect(bodies).toHaveLength(2);
});

test('touching bodies are no thin gap, whatever the scale', () => {
  for (const scale of [1e-9, 1, 1e9]) {
    const device = read(`wavewell: 1
polarization: Ez
band: { wavelength: [${scale}, ${2 * scale}] }
knobs: { r: ${0.1 * scale} }
materials: { glass: { index: 1.5 } }
bodies:
  - { material: glass, disk: { center: [0, 0], radius: r } }
  - { material: glass, disk: { center: [2*r, 0], radius: r } }
  - { material: glass, disk: { center: [1.2*r + 1.2*r + 1.6*r, 0], radius: r } }
  - { material: glass, rectangle: { center: [0, 1.5*r], size: [2*r, r] } }
  - { material: glass, ellipse: { center: [0, -3*r], radii: [r, 2*r] } }
`);
    expect(device.bodies).toHaveLength(5);
  }
});

test('a device of JSON equals that of YAML', () => {
  const json = JSON.stringify({
    wavewell: 1,
    polarization: 'Ez',
    band: { wavenumber: [1, 2] },
    materials: { glass: { index: 1.5 } },
    bodies: [{ material: 'glass', disk: { center: [0, 0], radius: 1 } }],
  });
  expect(read(json)).toEqual(read(`${HEAD}bodies: [ { material: glass, disk: { center: [0, 0], radius: 1 } } ]\n`));
});

test('byte-order mark and Windows line ends do no harm', () => {
  const text = `\ufeff${HEAD}bodies: [ { material: glass, disk: { center: [0, 0], radius: 0 } } ]\n`.replaceAll(
    '\n',
    '\r\n',
  );
  expect(() => read(text)).toThrow('a.yaml:6:62  bodies[0].disk.radius');
});

test('size: a disk of 10 wavelengths', () => {
  const size = deviceSize(
    read(
      `${HEAD.replace('[1, 2]', `[1, ${2 * Math.PI}]`)}bodies: [ { material: glass, disk: { center: [0, 0], radius: 5 } } ]`,
    ),
  );
  expect(size.wavelengthsAcross).toBeCloseTo(10, 9);
  expect(size.circle.radius).toBeCloseTo(5, 9);
  expect(size.unknowns).toBeGreaterThan(1000);
  expect(size.bytes).toBeGreaterThan(1e6);
});

describe('random files', () => {
  const number = fc.double({ min: 0.1, max: 5, noNaN: true }).map((v) => Number(v.toPrecision(6)));
  const place = fc.tuple(number, number);
  const shape = fc.oneof(
    fc.record({ disk: fc.record({ center: place, radius: number }) }),
    fc.tuple(place, number, number).map(([center, inner, wall]) => ({ ring: { center, inner, outer: inner + wall } })),
    fc.record({ ellipse: fc.record({ center: place, radii: fc.tuple(number, number), angle: number }) }),
    fc.record({ rectangle: fc.record({ center: place, size: fc.tuple(number, number), angle: number }) }),
    fc.record({
      regular_polygon: fc.record({
        center: place,
        radius: number,
        sides: fc.integer({ min: 3, max: 9 }),
        angle: number,
      }),
    }),
  );
  const file = fc.record({
    wavewell: fc.constant(1),
    title: fc.string(),
    length: fc.constantFrom('none', 'nm', 'um', 'mm', 'cm', 'm'),
    polarization: fc.constantFrom('Ez', 'Hz'),
    band: fc.tuple(number, number).map(([a, b]) => ({ wavelength: [a, a + b] })),
    knobs: fc.record({ half: number }),
    materials: fc.record({
      a: fc.record({ index: fc.tuple(number, number) }),
      b: fc.record({ permittivity: number, loss_tangent: number }),
    }),
    bodies: fc.array(
      fc.tuple(shape, fc.constantFrom('a', 'b', 'vacuum')).map(([one, material]) => ({ material, ...one })),
      { minLength: 1, maxLength: 6 },
    ),
    pump: fc.record({ bodies: fc.record({ body1: number }) }),
  });

  test('become devices that hold what they say', () => {
    fc.assert(
      fc.property(file, (input) => {
        let device;
        try {
          device = read(JSON.stringify(input));
        } catch (error) {
          // Chance may put two boundaries very close; nothing else may be refused.
          expect((error as DeviceError).findings.every(({ expected }) => expected.includes('touching'))).toBe(true);
          return;
        }
        expect(device.title).toBe(input.title);
        expect(device.lengthUnit).toBe(input.length);
        expect(device.polarization).toBe(input.polarization);
        expect(device.band.limits).toEqual(input.band.wavelength);
        expect(device.knobs).toEqual([{ name: 'half', value: input.knobs.half }]);
        expect(device.bodies.map(({ material }) => material)).toEqual(input.bodies.map(({ material }) => material));
        expect(device.bodies[0].pumpWeight).toBe(input.pump.bodies.body1);
        // Numbers as expressions say the same.
        const texts = JSON.stringify(input, (key, value: unknown) =>
          typeof value === 'number' && key !== 'wavewell' ? `(${value})` : value,
        );
        expect(read(texts)).toEqual(device);
      }),
      { numRuns: 60 },
    );
  });
});

describe('any text', () => {
  const check = (text: string): void => {
    try {
      read(text);
    } catch (error) {
      expect(error).toBeInstanceOf(DeviceError);
      const { findings } = error as DeviceError;
      expect(findings.length).toBeGreaterThan(0);
      for (const one of findings) {
        expect(one.line).toBeGreaterThan(0);
        expect(one.column).toBeGreaterThan(0);
        for (const part of [one.came, one.expected, one.mend]) expect(part).not.toBe('');
      }
      expect((error as Error).message.split('\n')).toHaveLength(4 * findings.length);
    }
  };

  const SAMPLE = `wavewell: 1
polarization: Ez
band: { frequency: [8, 12], unit: GHz }
length: mm
knobs: { r: { value: 3, range: [1, 5], tolerance: { sigma: 0.1 } } }
materials: { glass: { index: [1.5, 0.1] } }
bodies:
  - { name: a, material: glass, rectangle: { center: [0, 2*r], size: [1, 2], corner_radius: 0.2 } }
  - { name: b, material: glass, disk: { center: [9, 0], radius: 0.2 }, array: { count: [2, 2], pitch: [1, 1] } }
pump: { bodies: { a: 1 } }
`;

  test('gives a device or a DeviceError', () => {
    fc.assert(fc.property(fc.string({ unit: 'binary', maxLength: 60 }), check), { numRuns: 150 });
    const word = fc.constantFrom(
      '- ',
      ': ',
      '? ',
      '\n',
      ' ',
      '[',
      ']',
      '{',
      '}',
      '&a ',
      '*a',
      '!',
      '"',
      "'",
      '|',
      '>',
      '#',
      '%',
      '@',
      '\t',
      '---\n',
      '...\n',
      '<<: ',
      'a',
      '1',
      'wavewell: 1\n',
      'bodies:',
      '__proto__: ',
      '~',
      '\u0000',
    );
    fc.assert(
      fc.property(fc.array(word, { maxLength: 40 }), (words) => check(words.join(''))),
      { numRuns: 300 },
    );
  });

  test('so does a good file with a few characters changed', () => {
    const edit = fc.tuple(
      fc.nat(SAMPLE.length),
      fc.nat(6),
      fc.oneof(
        fc.string({ maxLength: 3 }),
        fc.constantFrom('-', '0', '1e9', '1e-9', '.nan', '{', '}', '[', ']', ':', '*', '\n'),
      ),
    );
    fc.assert(
      fc.property(fc.array(edit, { minLength: 1, maxLength: 3 }), (edits) => {
        let text = SAMPLE;
        for (const [at, length, put] of edits) text = text.slice(0, at) + put + text.slice(at + length);
        check(text);
      }),
      { numRuns: 400 },
    );
  });

  test('so do hostile texts, in bounded time and stack', () => {
    const chain = Array.from({ length: 12 }, (_, i) =>
      i === 0
        ? 'a0: &a0 [1, 1, 1, 1]'
        : `a${i}: &a${i} [${Array(10)
            .fill(`*a${i - 1}`)
            .join(', ')}]`,
    );
    for (const text of [
      '- '.repeat(1e5),
      '? '.repeat(1e5),
      '--- ' + '- '.repeat(1e4),
      '['.repeat(1e5),
      '{"a":'.repeat(1e4),
      Array.from({ length: 1000 }, (_, i) => `${' '.repeat(i)}a:`).join('\n'),
      chain.join('\n'),
      `bodies: ${'['.repeat(100)}${']'.repeat(100)}`,
      Array.from({ length: 3000 }, (_, i) => `k${i}: 1`).join('\n'),
      `${SAMPLE}\nx: ${'9'.repeat(1000)}`,
      SAMPLE.replace('r: {', `${Array.from({ length: 900 }, (_, i) => `q${i}: q${i + 1}`).join(', ')}, q900: r, r: {`),
      SAMPLE.replace(
        'r: {',
        `${Array.from({ length: 2000 }, (_, i) => `q${i}: q${i + 1}`).join(', ')}, q2000: r, r: {`,
      ),
    ])
      check(text);
  });
});
