// Which small made-up run do the tests of exports and figures share?

import type { DriveTerm, RunArray, RunRecord } from '../../src/results/format.ts';
import type { FieldSampler, RunView } from '../../src/results/run-view.ts';

/** Radius of the disk, of the rim, and the wave inside: u = J₃-like × e^{iφ·order} with a tail outside. */
const RADIUS = 1;
const RIM = 1.5;
const ORDER = 4;

/** A smooth field with the features of a whispering mode; not a solution, which no test here needs. */
export function exampleField(x: number, y: number): [re: number, im: number] {
  const r = Math.hypot(x, y);
  const phi = Math.atan2(y, x);
  const radial = r < RADIUS ? r ** ORDER * Math.cos(1.1 * (r - 0.75)) : Math.cos(0.275) * Math.exp(-3 * (r - RADIUS));
  return [2 * radial * Math.cos(ORDER * phi), 2 * radial * Math.sin(ORDER * phi)];
}

/** Body at a point: 1 a post (which covers), 0 the disk, -1 background. */
export function exampleBody(x: number, y: number): number {
  if (Math.hypot(x - 1.22, y - 0.1) < 0.12) return 1;
  return Math.hypot(x, y) < RADIUS ? 0 : -1;
}

export const exampleSampler: FieldSampler = (_id, x, y) => {
  if (Math.hypot(x, y) > RIM) return null;
  const [re, im] = exampleField(x, y);
  return { re, im, body: exampleBody(x, y) };
};

export const exampleDrive: readonly DriveTerm[] = [
  { m: -2, amplitude: [0.6, 0] },
  { m: 0, amplitude: [0, 0] },
  { m: 3, amplitude: [0, -0.8] },
];

/** A run of `absorb` on a pumped disk beside a post: polar display grid, one mode path, one crossing. */
export function exampleRun(names: { readonly disk?: string } = {}): RunView {
  const disk = names.disk ?? 'disk';
  const rings = 30;
  const sectors = 96;
  const points: number[] = [0, 0];
  const triangles: number[] = [];
  // Ring 20 lies on the disk's edge, so that no triangle crosses it.
  for (let i = 1; i <= rings; i++) {
    for (let j = 0; j < sectors; j++) {
      const r = (RIM * i) / rings;
      const phi = (2 * Math.PI * j) / sectors;
      points.push(r * Math.cos(phi), r * Math.sin(phi));
      const at = (ring: number, sector: number): number => 1 + (ring - 1) * sectors + (sector % sectors);
      if (i === 1) triangles.push(0, at(1, j), at(1, j + 1));
      else triangles.push(at(i - 1, j), at(i, j), at(i, j + 1), at(i - 1, j), at(i, j + 1), at(i - 1, j + 1));
    }
  }
  const regions = Int32Array.from({ length: triangles.length / 3 }, (_, t) => {
    const corners = [0, 1, 2].map((c) => triangles[3 * t + c]);
    const mean = (k: number): number => corners.reduce((s, p) => s + points[2 * p + k], 0) / 3;
    return exampleBody(mean(0), mean(1));
  });
  const values: number[] = [];
  for (let i = 0; i < points.length; i += 2) values.push(...exampleField(points[i], points[i + 1]));
  let peak = 0;
  for (let i = 0; i < values.length; i += 2) peak = Math.max(peak, Math.hypot(values[i], values[i + 1]));

  const circle = (x: number, y: number, r: number): Float64Array =>
    Float64Array.from({ length: 2 * 128 }, (_, i) => {
      const phi = (2 * Math.PI * Math.floor(i / 2)) / 128;
      return i % 2 === 0 ? x + r * Math.cos(phi) : y + r * Math.sin(phi);
    });
  const levels = Float64Array.from({ length: 9 }, (_, i) => 0.005 * i);
  const path = (sign: number, from: number): Float64Array =>
    Float64Array.from({ length: 18 }, (_, i) => {
      const s = Math.floor(i / 2) / 8;
      return i % 2 === 0 ? from + 0.01 * s * s : sign * 0.06 * (1 - s);
    });
  const arrays: Record<string, RunArray> = {
    points: Float64Array.from(points),
    triangles: Uint32Array.from(triangles),
    regions,
    'show-1': Float32Array.from(values, (v) => v / peak),
    'outline-0': circle(0, 0, RADIUS),
    'outline-1': circle(1.22, 0.1, 0.12),
    levels,
    'pole-path': path(-1, 4.2),
    'zero-path': path(1, 4.2),
  };
  const record: RunRecord = {
    format: 'wavewell-run',
    version: 1,
    program: { name: 'wavewell', version: '0.1.0', node: '20.0.0' },
    command: 'absorb',
    options: {},
    when: null,
    device: {
      file: 'example.yaml',
      title: 'Disk beside a post',
      lengthUnit: 'um',
      metres: 1e-6,
      polarization: 'Ez',
      band: { quantity: 'wavenumber', limits: [3.9, 4.4], unit: '1/um', kMin: 3.9, kMax: 4.4 },
      background: { material: 'vacuum', permittivity: 1 },
      bodies: [
        { name: disk, group: disk, material: 'core', permittivity: [4, 0], pumpWeight: 1, outlines: ['outline-0'] },
        {
          name: 'post',
          group: 'post',
          material: 'glass',
          permittivity: [2.1, 0],
          pumpWeight: 0,
          outlines: ['outline-1'],
        },
      ],
    },
    sentence: 'Absorbs everything first at 1.4924 um ± 0.0002 with 38.2 /cm in disk.',
    cautions: [],
    answer: {
      modes: [
        {
          k: [4.2, -0.06],
          kError: 1e-6,
          q: 35,
          qError: 1e-3,
          wavelength: 1.4959965017094254,
          frequency: 200.4,
          lifetime: 0.0278,
          assignment: 'poles',
          multiplicity: 2,
          label: 'm = 4',
          layerShare: 1e-9,
        },
      ],
      crossings: [
        {
          k: 4.21,
          kError: 1e-6,
          wavelength: 1.4924,
          frequency: 200.88,
          multiplicity: 2,
          label: '=4+1',
          loss: 0.04,
          lossError: 2e-6,
          bodies: [
            {
              name: disk,
              permittivity: [4, 0.04],
              units: { level: 0.04, imIndex: 0.01, perCentimetre: 842, decibelPerCentimetre: 3656.8 },
            },
          ],
          from: [4.2, 0.06],
          drive: exampleDrive,
          forward: {
            incoming: 1,
            outgoing: 3e-12,
            absorbed: 1,
            balance: -2e-11,
            ownMesh: { incoming: 1, outgoing: 4e-9, absorbed: 1, balance: 1e-10 },
          },
        },
      ],
    },
    marks: [
      mark('pole-1', 'pole', [4.2, -0.06], { parameter: 'D', levels: 'levels', ks: 'pole-path' }),
      mark('zero-1', 'zero', [4.2, 0.06], { parameter: 'D', levels: 'levels', ks: 'zero-path' }),
      mark('pole-2', 'pole', [4.33, -0.012], null),
    ],
    fields: [
      {
        id: 'twin',
        label: 'absorbed wave at 4.2100',
        kind: 'absorbing',
        k: [4.21, 0],
        level: 0.04,
        coefficients: 'none',
        display: 'show-1',
        scale: peak,
        drive: exampleDrive,
        farField: null,
      },
      {
        id: 'mode',
        label: 'mode at 4.2000',
        kind: 'mode',
        k: [4.2, -0.06],
        level: null,
        coefficients: 'none',
        display: 'show-1',
        scale: peak,
        drive: null,
        farField: null,
      },
    ],
    display: { points: 'points', triangles: 'triangles', regions: 'regions', tolerance: 1e-3 },
    mesh: {
      order: 4,
      center: [0, 0],
      rimRadius: RIM,
      endRadius: 3,
      curveOrder: 4,
      arrays: {
        vertices: 'none',
        triangles: 'none',
        regions: 'none',
        edges: 'none',
        triangleEdges: 'none',
        edgeTriangles: 'none',
        edgeCurve: 'none',
        curves: 'none',
      },
    },
    arrays: {},
  };
  return {
    record,
    array(name) {
      const found = arrays[name];
      if (!found) throw new Error(`no array ${name}`);
      return found;
    },
  };
}

type Mark = RunRecord['marks'][number];

function mark(id: string, kind: Mark['kind'], k: Mark['k'], path: Mark['path']): Mark {
  const crossing = path && { k: 4.21, kError: 1e-6, level: 0.04, levelError: 2e-6, field: 'twin' };
  return { id, kind, k, kError: 1e-6, q: 35, multiplicity: 2, label: 'm = 4', field: 'mode', path, crossing };
}
