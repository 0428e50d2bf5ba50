// What does a run look like whose fields are known in closed form?

import type { LoadedRun } from '../../src/results/store.ts';
import type { DriveTerm, Pair, RunArray, RunField, RunMark, RunRecord } from '../../src/results/format.ts';

/** A field written as Σ over m of cₘ Jₘ(nkr) e^{imφ} inside the disk and its continuation outside. */
interface ClosedField {
  readonly id: string;
  readonly label: string;
  readonly kind: RunField['kind'];
  readonly k: number;
  readonly level: number | null;
  readonly terms: readonly DriveTerm[];
}

export interface SyntheticRun {
  readonly record: Omit<RunRecord, 'arrays' | 'files'>;
  readonly arrays: Record<string, RunArray>;
  /** Value at a point, in the scale of `coefficients`; the sampler that a real run's coefficients would give. */
  readonly fieldSampler: (
    run: LoadedRun,
  ) => (fieldId: string, x: number, y: number) => { re: number; im: number; body: number } | null;
}

const CENTER: Pair = [0.4, -0.2];
const RADIUS = 1;
const INDEX = 2.2;
const CORE = 0.3;
const RIM = 2;
/** The factor between stored coefficients and displayed values (largest = 1). */
const SCALE = 3.25;

/**
 * A disk with a passive core that is only drawn, as a command would store it.
 * @param command decides what the marks are: poles, poles that cross with pump, or zeros that cross with loss.
 * @param rings, sectors: size of the polar display mesh.
 */
export function syntheticRun(
  command: 'modes' | 'threshold' | 'absorb',
  { rings = 40, sectors = 120, many = 9 } = {},
): SyntheticRun {
  const marks: RunMark[] = [];
  const arrays: Record<string, RunArray> = {};
  const closed: ClosedField[] = [];
  for (let i = 0; i < many; i++) addMark(command, i, marks, arrays, closed);
  const kinds = command === 'modes' ? 2 : 1;
  const grid = polarGrid(rings, sectors, [CORE, RADIUS], RIM);
  arrays['display.points'] = grid.points;
  arrays['display.triangles'] = Uint32Array.from(grid.triangles);
  arrays['display.regions'] = grid.regions;
  const mesh = polarGrid(8, 24, [CORE, RADIUS, RIM], 2.6);
  const meshArrays = { vertices: mesh.points, ...topology(mesh), curves: new Float64Array(0) };
  for (const [name, array] of Object.entries(meshArrays)) arrays[`mesh.${name}`] = array;
  arrays['outline.0'] = circle(RADIUS);
  arrays['outline.1'] = circle(CORE);
  const fields = closed.map((field) => storeField(field, grid.points, mesh.points, arrays));
  const crossings = marks.filter((mark) => mark.crossing !== null);
  const first = crossings[0]?.crossing;
  return {
    record: {
      format: 'wavewell-run',
      version: 1,
      program: { name: 'wavewell', version: '0.1.0', node: 'v20.0.0' },
      command,
      options: { digits: 5 },
      when: '2025-01-01T12:00:00Z',
      device: {
        file: 'device.yaml',
        title: 'Disk with a passive core',
        lengthUnit: 'um',
        metres: 1e-6,
        polarization: 'Ez',
        band: { quantity: 'wavelength', limits: [1.45, 2.1], unit: 'um', kMin: 2.99, kMax: 4.33 },
        background: { material: 'vacuum', permittivity: 1 },
        bodies: [body('resonator', 'glass', 1, 'outline.0'), body('core', 'metal', 0, 'outline.1')],
      },
      sentence: sentenceOf(command, first?.k ?? 0, first?.level ?? 0),
      cautions:
        command === 'modes'
          ? []
          : [
              'Laser radiation can blind: know the class of the source (IEC 60825-1 or the local equivalent) before it is switched on.',
              'What is absorbed heats the absorber: check its limits.',
              'These are predictions of a two-dimensional model. Local rules and the appointed safety officer decide.',
            ],
      answer: answerOf(command, marks, closed),
      marks,
      fields: kinds ? fields : [],
      display: {
        points: 'display.points',
        triangles: 'display.triangles',
        regions: 'display.regions',
        tolerance: 1e-3,
      },
      mesh: {
        order: 1,
        center: CENTER,
        rimRadius: RIM,
        endRadius: 2.6,
        curveOrder: 1,
        arrays: {
          vertices: 'mesh.vertices',
          triangles: 'mesh.triangles',
          regions: 'mesh.regions',
          edges: 'mesh.edges',
          triangleEdges: 'mesh.triangleEdges',
          edgeTriangles: 'mesh.edgeTriangles',
          edgeCurve: 'mesh.edgeCurve',
          curves: 'mesh.curves',
        },
      },
    },
    arrays,
    fieldSampler: () => (fieldId, x, y) => {
      const field = closed.find(({ id }) => id === fieldId);
      if (!field) throw new Error(`no field ${fieldId}`);
      const r = Math.hypot(x - CENTER[0], y - CENTER[1]);
      if (r > RIM) return null;
      const [re, im] = valueAt(field, x, y);
      return { re: re * SCALE, im: im * SCALE, body: regionAt(r) };
    },
  };
}

function addMark(
  command: string,
  i: number,
  marks: RunMark[],
  arrays: Record<string, RunArray>,
  closed: ClosedField[],
): void {
  const m = 3 + ((i * 2) % 7);
  const k0 = 3.02 + 0.145 * i + 0.02 * Math.sin(7 * i);
  const depth = 0.0009 * 6 ** ((i * 0.77) % 2.4);
  const absorbing = command === 'absorb';
  const zero = absorbing || (command === 'modes' && i % 4 === 3);
  const id = `mark${i}`;
  const sign = zero ? 1 : -1;
  const lasing: ClosedField['kind'] = absorbing ? 'absorbing' : 'lasing';
  const field: ClosedField = {
    id: `field${i}`,
    label: `${zero ? 'zero' : 'pole'} at ${k0.toFixed(4)}`,
    kind: 'mode',
    k: k0,
    level: 0,
    terms: termsOf(m, i),
  };
  closed.push(field);
  let path: RunMark['path'] = null;
  let crossing: RunMark['crossing'] = null;
  if (command !== 'modes') {
    const level = 4.2 * depth;
    const shift = 0.012 * Math.cos(i);
    const steps = 9;
    const levels = Float64Array.from({ length: steps }, (_, j) => (level * j * 1.25) / (steps - 1));
    const ks = new Float64Array(2 * steps);
    levels.forEach((at, j) => ks.set([k0 + shift * (at / level) ** 2, sign * depth * (1 - at / level)], 2 * j));
    arrays[`${id}.levels`] = levels;
    arrays[`${id}.ks`] = ks;
    path = { parameter: absorbing ? 'loss' : 'pump', levels: `${id}.levels`, ks: `${id}.ks` };
    const k = k0 + shift;
    crossing = { k, kError: 2e-6, level, levelError: 3e-7, field: `cross${i}` };
    closed.push({ ...field, id: `cross${i}`, kind: lasing, k, level, label: `${lasing} mode at ${k.toFixed(4)}` });
  }
  marks.push({
    id,
    kind: zero ? 'zero' : 'pole',
    k: [k0, sign * depth],
    kError: i === 4 ? 0.012 : 3e-6,
    q: k0 / (2 * depth),
    multiplicity: i % 3 === 1 ? 2 : 1,
    label: `m = ${m}`,
    field: field.id,
    path,
    crossing,
  });
}

/** Mostly one order, as of a slightly deformed disk. */
function termsOf(m: number, seed: number): DriveTerm[] {
  const terms: DriveTerm[] = [];
  for (let j = -m - 2; j <= m + 2; j++) {
    const near = Math.abs(Math.abs(j) - m);
    const size = near === 0 ? 0.66 : 0.16 * Math.exp(-1.1 * near);
    const phase = 0.9 * j + seed;
    terms.push({ m: j, amplitude: [size * Math.cos(phase), size * Math.sin(phase)] });
  }
  const power = terms.reduce((sum, { amplitude: [re, im] }) => sum + re * re + im * im, 0);
  const unit = 1 / Math.sqrt(power);
  return terms.map(({ m: order, amplitude: [re, im] }) => ({ m: order, amplitude: [re * unit, im * unit] }));
}

const radial = new Map<string, readonly [number, number]>();

/** Radial part of one order, continuous at the disk's edge: Jₘ(nkr), then H⁽¹⁾ₘ or H⁽²⁾ₘ(kr). */
function radialPart(m: number, k: number, r: number, incoming: boolean): readonly [number, number] {
  const key = `${m} ${k} ${r} ${incoming}`;
  const known = radial.get(key);
  if (known) return known;
  const edge = besselJ(m, INDEX * k * RADIUS);
  let value: readonly [number, number] = [besselJ(m, INDEX * k * r) / edge, 0];
  if (r > RADIUS) {
    const sign = incoming ? -1 : 1;
    const [a, b] = [besselJ(m, k * r), sign * besselY(m, k * r)];
    const [c, d] = [besselJ(m, k * RADIUS), sign * besselY(m, k * RADIUS)];
    value = [(a * c + b * d) / (c * c + d * d), (b * c - a * d) / (c * c + d * d)];
  }
  radial.set(key, value);
  return value;
}

/** Before scaling; sizes are of order one. */
function valueAt(field: ClosedField, x: number, y: number): [number, number] {
  const r = Math.hypot(x - CENTER[0], y - CENTER[1]);
  const angle = Math.atan2(y - CENTER[1], x - CENTER[0]);
  let [re, im] = [0, 0];
  for (const { m, amplitude } of field.terms) {
    const [a, b] = radialPart(Math.abs(m), field.k, r, field.kind === 'absorbing');
    const [c, s] = [Math.cos(m * angle), Math.sin(m * angle)];
    const [p, q] = [amplitude[0] * c - amplitude[1] * s, amplitude[0] * s + amplitude[1] * c];
    re += a * p - b * q;
    im += a * q + b * p;
  }
  return [re, im];
}

function storeField(
  field: ClosedField,
  points: Float64Array,
  vertices: Float64Array,
  arrays: Record<string, RunArray>,
): RunField {
  const shown = sample(field, points);
  let largest = 0;
  for (let i = 0; i < shown.length; i += 2) largest = Math.max(largest, Math.hypot(shown[i], shown[i + 1]));
  arrays[`${field.id}.display`] = Float32Array.from(shown, (v) => v / largest);
  arrays[`${field.id}.coefficients`] = sample(field, vertices).map((v) => v * SCALE);
  const far = field.kind === 'lasing' ? `${field.id}.far` : null;
  if (far) arrays[far] = farFieldOf(field.terms);
  return {
    id: field.id,
    label: field.label,
    kind: field.kind,
    k: [field.k, 0],
    level: field.level,
    coefficients: `${field.id}.coefficients`,
    display: `${field.id}.display`,
    scale: largest * SCALE,
    drive: field.kind === 'absorbing' ? field.terms : null,
    farField: far,
  };
}

function sample(field: ClosedField, points: Float64Array): Float64Array {
  const out = new Float64Array(points.length);
  for (let i = 0; i < points.length; i += 2) out.set(valueAt(field, points[i], points[i + 1]), i);
  return out;
}

function farFieldOf(terms: readonly DriveTerm[]): Float64Array {
  const out = Float64Array.from({ length: 360 }, (_, degrees) => {
    let [re, im] = [0, 0];
    for (const { m, amplitude } of terms) {
      const angle = (m * degrees * Math.PI) / 180 - (m * Math.PI) / 2;
      re += amplitude[0] * Math.cos(angle) - amplitude[1] * Math.sin(angle);
      im += amplitude[0] * Math.sin(angle) + amplitude[1] * Math.cos(angle);
    }
    return re * re + im * im;
  });
  const mean = out.reduce((sum, v) => sum + v, 0) / 360;
  return out.map((v) => v / mean);
}

function body(name: string, material: string, pumpWeight: number, outline: string): RunRecord['device']['bodies'][0] {
  return { name, group: name, material, permittivity: [INDEX ** 2, 0], pumpWeight, outlines: [outline] };
}

function sentenceOf(command: string, k: number, level: number): string {
  if (command === 'modes')
    return 'Nine resonances between 1.45 and 2.1 µm; the sharpest has Q = 1 678 at 2.0805 µm ± 0.0001.';
  const wavelength = ((2 * Math.PI) / k).toFixed(4);
  const verb = command === 'threshold' ? 'Lases first' : 'Absorbs everything';
  return `${verb} at ${wavelength} µm ± 0.0001 (k = ${k.toFixed(4)} /µm) with D = ${level.toFixed(5)} in resonator; the next needs 12 % more.`;
}

function answerOf(command: string, marks: readonly RunMark[], closed: readonly ClosedField[]): Record<string, unknown> {
  if (command === 'modes') return { modes: marks.map(({ k, kError, q }) => ({ k, kError, q })), cautions: [] };
  const ownMesh = { incoming: 1, outgoing: 4.1e-9, absorbed: 0.9999999959, balance: 3e-11 };
  const crossings = marks.map(({ crossing, multiplicity, label, k }) => ({
    ...crossing,
    multiplicity,
    label,
    from: k,
    wavelength: (2 * Math.PI) / crossing!.k,
    bodies: [
      {
        name: 'resonator',
        permittivity: [INDEX ** 2, command === 'absorb' ? crossing!.level : -crossing!.level],
        units: { level: crossing!.level, imIndex: 0.001, perCentimetre: 38.2, decibelPerCentimetre: 166 },
      },
    ],
    ...(command === 'absorb'
      ? {
          drive: closed.find(({ id }) => id === crossing!.field)!.terms,
          forward: { incoming: 1, outgoing: 3.1e-12, absorbed: 0.9999999999969, balance: 2e-11, ownMesh },
        }
      : { farField: { directionality: 2.7, peakAngle: 41 } }),
  }));
  return { crossings, cautions: [] };
}

const regionAt = (r: number): number => (r < CORE ? 1 : r < RADIUS ? 0 : -1);

interface Grid {
  readonly points: Float64Array;
  readonly triangles: Int32Array;
  readonly regions: Int32Array;
}

/** Rings of quadrilaterals cut in two around a fan; a ring lies on each of the `kept` radii. */
function polarGrid(rings: number, sectors: number, kept: readonly number[], end: number): Grid {
  const radii = Array.from({ length: rings }, (_, i) => ((i + 1) / rings) * end);
  for (const radius of kept) {
    let nearest = 0;
    radii.forEach((r, i) => (nearest = Math.abs(r - radius) < Math.abs(radii[nearest] - radius) ? i : nearest));
    radii[nearest] = radius;
  }
  const points = [CENTER[0], CENTER[1]];
  for (const r of radii)
    for (let j = 0; j < sectors; j++) {
      const angle = (2 * Math.PI * j) / sectors;
      points.push(CENTER[0] + r * Math.cos(angle), CENTER[1] + r * Math.sin(angle));
    }
  const triangles: number[] = [];
  const regions: number[] = [];
  const at = (i: number, j: number): number => 1 + i * sectors + (j % sectors);
  const layered = (r: number): number => (end > RIM && r > RIM ? -2 : regionAt(r));
  radii.forEach((r, i) => {
    const region = layered((r + (i > 0 ? radii[i - 1] : 0)) / 2);
    for (let j = 0; j < sectors; j++) {
      if (i === 0) triangles.push(0, at(0, j), at(0, j + 1));
      else triangles.push(at(i - 1, j), at(i, j), at(i, j + 1), at(i - 1, j), at(i, j + 1), at(i - 1, j + 1));
      regions.push(...(i === 0 ? [region] : [region, region]));
    }
  });
  return {
    points: Float64Array.from(points),
    triangles: Int32Array.from(triangles),
    regions: Int32Array.from(regions),
  };
}

function topology({ triangles, regions }: Grid): Record<string, Int32Array> {
  const known = new Map<string, number>();
  const edges: number[] = [];
  const edgeTriangles: number[] = [];
  const triangleEdges = triangles.map((vertex, index) => {
    const other = triangles[index - (index % 3) + ((index + 1) % 3)];
    const [low, high] = [Math.min(vertex, other), Math.max(vertex, other)];
    const key = `${low} ${high}`;
    const seen = known.get(key);
    const triangle = Math.floor(index / 3);
    if (seen !== undefined) {
      edgeTriangles[2 * seen + 1] = triangle;
      return seen;
    }
    known.set(key, edges.length / 2);
    edges.push(low, high);
    edgeTriangles.push(triangle, -1);
    return edges.length / 2 - 1;
  });
  return {
    triangles,
    regions,
    edges: Int32Array.from(edges),
    triangleEdges,
    edgeTriangles: Int32Array.from(edgeTriangles),
    edgeCurve: new Int32Array(edges.length / 2).fill(-1),
  };
}

function circle(radius: number): Float64Array {
  const out = new Float64Array(2 * 181);
  for (let i = 0; i <= 180; i++) {
    const angle = (i * Math.PI) / 90;
    out.set([CENTER[0] + radius * Math.cos(angle), CENTER[1] + radius * Math.sin(angle)], 2 * i);
  }
  return out;
}

/** Bessel's integral, trapezoidal rule (spectrally accurate for a periodic integrand). */
function besselJ(m: number, x: number): number {
  const n = 96;
  let sum = 0;
  for (let i = 0; i < n; i++) {
    const t = (2 * Math.PI * i) / n;
    sum += Math.cos(m * t - x * Math.sin(t));
  }
  return sum / n;
}

/** Schläfli's integrals, Simpson's rule: good to about 1e-6 for the arguments used here. */
function besselY(m: number, x: number): number {
  const n = 400;
  const simpson = (f: (t: number) => number, end: number): number => {
    let sum = f(0) + f(end);
    for (let i = 1; i < n; i++) sum += (i % 2 ? 4 : 2) * f((end * i) / n);
    return (sum * end) / (3 * n);
  };
  const first = simpson((t) => Math.sin(x * Math.sin(t) - m * t), Math.PI);
  const decay = (t: number): number => (Math.exp(m * t) + (-1) ** m * Math.exp(-m * t)) * Math.exp(-x * Math.sinh(t));
  return (first - simpson(decay, 6)) / Math.PI;
}
