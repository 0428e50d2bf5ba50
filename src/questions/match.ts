// At which k, and with how much loss or which dimension, do chosen channels send nothing back?

import { DEFAULT_DIGITS, HIGHEST_ORDER, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { embed } from '../elements/space.ts';
import { searchContour } from '../eigen/contour-search.ts';
import {
  add,
  type Complex,
  complex,
  type ComplexArray,
  divide,
  modulus,
  multiply,
  scale,
  subtract,
} from '../numerics/complex.ts';
import { randomStream } from '../numerics/random.ts';
import type { Assignment, ClosedOpenings } from '../operator/closed-openings.ts';
import type { LevelSense, Part } from '../operator/device-family.ts';
import type { Progress } from './modes.ts';
import { expectedModes } from './mode-count.ts';
import { type PreparedOpenings, prepareOpenings } from './prepare-openings.ts';
import { absorbedPowers } from './scatter.ts';

export interface MatchRequest {
  /** Names of channels ("left.0") or of guides (all their channels) through which waves come in, and none goes out. */
  readonly inputs: readonly string[];
  readonly digits?: number;
  /** Sense of the level of pumped bodies; loss if absent. */
  readonly sense?: LevelSense;
  /** Largest level looked at; a quarter of the largest |ε| of the pumped bodies if absent. */
  readonly levelMax?: number;
  /** Lowest Q = Re k / 2|Im k| of the complex spectrum; 10 if absent. */
  readonly qMin?: number;
  readonly progress?: Progress;
}

/** A k, complex in general, at which the inputs carry waves in only and all other channels out only. */
export interface ReflectionlessMode {
  readonly k: Complex;
  readonly kError: number;
  /** Incoming amplitudes of the inputs and outgoing ones of the others, Σ|incoming|² = 1; one a channel. */
  readonly amplitudes: ComplexArray;
  /** No channel sees it: a resonance that neither takes nor gives power, at its own k whatever the inputs. */
  readonly trapped: boolean;
  /** Coefficients at the answer's order. */
  readonly vector: ComplexArray;
}

/** Powers of a driven solve closed with outgoing waves everywhere, for unit power in. */
export interface MatchPowers {
  /** Out of each channel, inputs among them. */
  readonly out: Float64Array;
  /** Out of the inputs. */
  readonly reflected: number;
  readonly absorbed: number;
  readonly balance: number;
}

/** A reflectionless mode at real k. */
export interface RealMatch {
  readonly k: number;
  readonly kError: number;
  /** Loss or pump level, or the value of the knob. */
  readonly level: number;
  readonly levelError: number;
  /** Incoming amplitudes, one a channel (zero where none comes in), Σ|a|² = 1, the largest real and positive. */
  readonly drive: ComplexArray;
  readonly forward: { readonly sameMesh: MatchPowers; readonly ownMesh: MatchPowers };
  readonly vector: ComplexArray;
  readonly openings: PreparedOpenings;
  readonly order: number;
}

export interface MatchAnswer {
  readonly channels: readonly string[];
  readonly inputs: readonly boolean[];
  readonly modes: readonly ReflectionlessMode[];
  readonly matches: readonly RealMatch[];
  /** The search could tell all that its contours hold. */
  readonly covered: boolean;
  readonly order: number;
  readonly digits: number;
  readonly openings: PreparedOpenings;
}

/**
 * Reflectionless modes of a device for a choice of inputs: complex k in the band and, where bodies are pumped, the loss
 * (or gain) that brings each to the real axis, proven by driven solves. All channels as inputs are coherent absorption
 * (critical coupling when there is one), none is lasing.
 *
 * @throws RangeError for unknown inputs or a device without openings.
 */
export function findMatches(device: Device, request: MatchRequest): MatchAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const { progress } = request;
  const sense = request.sense ?? 'loss';
  const resolution = resolutionFor(digits);
  const { kMin, kMax } = device.band;
  const slope = 1 / (2 * (request.qMin ?? 10));
  progress?.('meshing', 0);
  const scope = { kMin, kMax, slope };
  const openings = prepareOpenings(device, scope, resolution);
  const inputs = inputsOf(openings, request.inputs);
  const assignment = assignmentOf(openings, inputs);
  const order = resolution.order + 1;
  const search = openings.closed(Math.min(order, SEARCH_ORDER), sense);
  const { ks, covered } = searchBand(device, search, assignment, kMin, kMax, slope, progress);
  const modes: ReflectionlessMode[] = [];
  for (const [i, near] of ks.entries()) {
    progress?.('polishing', i / ks.length);
    const mode = polishMode(openings, sense, assignment, inputs, near, order);
    if (!mode || mode.k.re < kMin || mode.k.re > kMax || Math.abs(mode.k.im) > slope * mode.k.re) continue;
    if (!modes.some((m) => modulus(subtract(m.k, mode.k)) <= 10 * (m.kError + mode.kError) + 1e-9 * kMax))
      modes.push(mode);
  }
  modes.sort((a, b) => a.k.re - b.k.re);
  const levelMax = request.levelMax ?? defaultMost(device);
  const active = device.bodies.some((b) => b.pumpWeight > 0);
  const matches = modes.flatMap((mode, i): RealMatch[] => {
    if (mode.trapped) return [];
    progress?.('matching', i / modes.length);
    const own = (): ClosedOpenings =>
      prepareOpenings(device, scope, resolution, OWN_MESH).closed(Math.min(order + 1, HIGHEST_ORDER), sense);
    if (Math.abs(mode.k.im) <= Math.max(3 * mode.kError, 1e-12 * mode.k.re))
      return inputs.includes(true) ? [matchWithoutLevel(openings, own(), sense, inputs, mode, order)] : [];
    if (!active) return [];
    const found = matchByLevel(openings, own, sense, assignment, inputs, mode, order, levelMax);
    return found && found.k >= kMin && found.k <= kMax ? [found] : [];
  });
  matches.sort((a, b) => a.level - b.level);
  return {
    channels: openings.channels.map((c) => c.name),
    inputs,
    modes,
    matches,
    covered,
    order,
    digits,
    openings,
  };
}

/** The search works at a low order: candidates are polished in the order wanted. */
const SEARCH_ORDER = 5;
/** Triangles of the independent mesh, as a share of the rule. */
const OWN_MESH = 0.8;
const SEED = 4711;
/** Points and columns of one contour; columns bound the modes that one contour can tell. */
const POINTS = 28;
const COLUMNS = 16;
/** Smallest aspect of an ellipse, either way. */
const FLATTEST = 0.5;
/** Most modes expected in one contour. */
const PER_CONTOUR = 5;

/** Which channels are inputs. */
export function inputsOf({ channels, openings }: PreparedOpenings, names: readonly string[]): readonly boolean[] {
  const known = new Set([...channels.map((c) => c.name), ...openings.map((o) => o.name)]);
  for (const name of names)
    if (!known.has(name))
      throw new RangeError(`the input came as ${name}; expected some of ${[...known].slice(0, 30).join(', ')}`);
  return channels.map((c) => names.includes(c.name) || names.includes(openings[c.opening].name));
}

function assignmentOf({ channels }: PreparedOpenings, inputs: readonly boolean[]): Assignment {
  const into = new Set(channels.flatMap((c, i) => (inputs[i] ? [`${c.opening} ${c.index}`] : [])));
  return (opening, index) => (into.has(`${opening} ${index}`) ? 'incoming' : 'outgoing');
}

/** Candidates of the whole band: ellipses side by side, each cut again when it holds more than its columns can tell. */
function searchBand(
  device: Device,
  closed: ClosedOpenings,
  assignment: Assignment,
  kMin: number,
  kMax: number,
  slope: number,
  progress?: Progress,
): { ks: Complex[]; covered: boolean } {
  const expected = expectedModes(device);
  const size = closed.family.size;
  const ks: Complex[] = [];
  let covered = true;
  const visit = (low: number, high: number, depth: number): void => {
    if (depth < 8 && expected(low, high) > PER_CONTOUR) {
      visit(low, (low + high) / 2, depth + 1);
      visit((low + high) / 2, high, depth + 1);
      return;
    }
    const middle = (low + high) / 2;
    // flat or slim ellipses would need points by the hundred: their trapezoid error is exp(−points × atanh(aspect))
    const half = ((high - low) / 2) * 1.15;
    const halfHeight = Math.max(1.3 * slope * high, FLATTEST * half);
    const halfWidth = Math.max(half, FLATTEST * halfHeight);
    const answer = searchContour(
      { size, factorize: (k) => closed.factorize(k, 0, assignment) },
      {
        center: complex(middle),
        halfWidth,
        halfHeight,
        points: POINTS,
        columns: Math.min(COLUMNS, size),
        seed: SEED,
      },
    );
    if (!answer.told && depth < 8) {
      visit(low, middle, depth + 1);
      visit(middle, high, depth + 1);
      return;
    }
    covered &&= answer.told;
    ks.push(...answer.ks);
    progress?.('searching', (high - kMin) / (kMax - kMin));
  };
  visit(kMin, kMax, 0);
  return { ks, covered };
}

/** Polished at order − 1 and order: the difference is the error. Null where nothing is found near. */
function polishMode(
  openings: PreparedOpenings,
  sense: LevelSense,
  assignment: Assignment,
  inputs: readonly boolean[],
  near: Complex,
  order: number,
): ReflectionlessMode | null {
  let last: { k: Complex; vector: ComplexArray } | null = null;
  const ks: Complex[] = [];
  for (let p = order - 2; p <= order; p++) {
    const closed = openings.closed(p, sense);
    const start: ComplexArray | null = last
      ? embed(closed.family.operator.space, openings.closed(p - 1, sense).family.operator.space, last.vector)
      : null;
    last = newton(closed, 0, assignment, last?.k ?? near, start);
    if (!last || modulus(subtract(last.k, near)) > 0.05 * modulus(near)) return null;
    ks.push(last.k);
  }
  const { k, vector } = last!;
  const amplitudes = openings.closed(order, sense).amplitudes(k, vector, (c) => (inputs[c] ? 'incoming' : 'outgoing'));
  const trapped =
    amplitudes.reduce((sum, v) => sum + v * v, 0) < TRAPPED * amplitudeScale(openings, order, sense, k, vector);
  if (!trapped) normaliseInputs(amplitudes, inputs, vector);
  return { trapped, k, kError: remaining(ks) + 1e-14 * modulus(k), amplitudes, vector };
}

/** Power in the channels below this share of k²Σ|u|² of the coefficients is rounding: Q above 1e16. */
const TRAPPED = 1e-18;

/** What the amplitudes of a wave that fills the openings would be for this vector: its value there is of the order of u's. */
function amplitudeScale(
  openings: PreparedOpenings,
  order: number,
  sense: LevelSense,
  k: Complex,
  vector: ComplexArray,
): number {
  const closed = openings.closed(order, sense);
  const mass = closed.family.multiplyTermInto(new Float64Array(vector.length), 1, 0, vector, 1);
  let sum = 0;
  for (let i = 0; i < vector.length; i++) sum += vector[i] * mass[i];
  return modulus(k) ** 2 * Math.abs(sum);
}

/** What is left after the last of three values: their last step, times r/(1 − r) where the steps shrink slowly. */
function remaining(values: readonly Complex[]): number {
  const [a, b, c] = values.slice(-3);
  const before = modulus(subtract(b, a));
  const step = modulus(subtract(c, b));
  const r = Math.min(0.9, step / Math.max(before, 1e-300));
  return step * Math.max(1, r / (1 - r));
}

/** Most steps of inverse iteration with the Rayleigh functional: each squares the error, so few are ever taken. */
const MOST_STEPS = 12;

/** k with A(k)u = 0 near a start, by inverse iteration: u ← A⁻¹A_k u, k ← k − uᵀAu/uᵀA_ku. Null without convergence. */
function newton(
  closed: ClosedOpenings,
  level: number,
  assignment: Assignment,
  near: Complex,
  start: ComplexArray | null,
): { k: Complex; vector: ComplexArray } | null {
  const n = closed.family.size;
  let u = start ?? randomVector(n);
  const work = new Float64Array(2 * n);
  let k = near;
  for (let step = 0; step < MOST_STEPS; step++) {
    closed.multiplyInto(work, k, level, 'byK', u, assignment);
    const factor = closed.factorize(k, level, assignment);
    const next = new Float64Array(2 * n);
    factor.solveInto(next, work, 1);
    factor.release();
    u = unit(next);
    const moved = divide(form(closed, k, level, 'value', u, assignment), form(closed, k, level, 'byK', u, assignment));
    if (!Number.isFinite(moved.re + moved.im)) return null;
    k = subtract(k, moved);
    if (!(k.re > 0)) return null;
    if (modulus(moved) <= 1e-13 * modulus(k)) return { k, vector: u };
    if (step > 5 && modulus(moved) <= 1e-11 * modulus(k)) return { k, vector: u };
  }
  return null;
}

/** uᵀAu, uᵀA_ku or uᵀA_Du, not conjugated. */
function form(
  closed: ClosedOpenings,
  k: Complex,
  level: number,
  part: Part,
  u: ComplexArray,
  assignment: Assignment,
): Complex {
  const work = closed.multiplyInto(new Float64Array(u.length), k, level, part, u, assignment);
  let re = 0;
  let im = 0;
  for (let i = 0; i < u.length; i += 2) {
    re += u[i] * work[i] - u[i + 1] * work[i + 1];
    im += u[i] * work[i + 1] + u[i + 1] * work[i];
  }
  return complex(re, im);
}

/** Real k and level from a complex mode: along its tangent to the axis, then Newton in both with inverse iteration. */
function crossByLevel(
  closed: ClosedOpenings,
  assignment: Assignment,
  start: { readonly k: Complex; readonly vector: ComplexArray; readonly level: number },
): { k: number; level: number; vector: ComplexArray } | null {
  const n = closed.family.size;
  let u = start.vector;
  let { level } = start;
  let k = start.k.re;
  let here = start.k;
  const work = new Float64Array(2 * n);
  for (let step = 0; step < 4 * MOST_STEPS; step++) {
    const byK = form(closed, here, level, 'byK', u, assignment);
    const byLevel = form(closed, here, level, 'byLevel', u, assignment);
    const value = form(closed, here, level, 'value', u, assignment);
    // value + byK (δk + here → real) + byLevel δD = 0 with real δk, δD
    const target = subtract(complex(k), here);
    const rest = add(value, multiply(byK, target));
    const det = byK.re * byLevel.im - byK.im * byLevel.re;
    const dk = -(rest.re * byLevel.im - rest.im * byLevel.re) / det;
    const dLevel = -(byK.re * rest.im - byK.im * rest.re) / det;
    if (!Number.isFinite(dk + dLevel)) return null;
    k += dk;
    level += dLevel;
    if (!(k > 0)) return null;
    here = complex(k);
    closed.multiplyInto(work, here, level, 'byK', u, assignment);
    const factor = closed.factorize(here, level, assignment);
    const next = new Float64Array(2 * n);
    factor.solveInto(next, work, 1);
    factor.release();
    u = unit(next);
    if (step > 1 && Math.abs(dk) <= 1e-13 * k && Math.abs(dLevel) <= 1e-12 * Math.abs(level) + 1e-15)
      return { k, level, vector: u };
  }
  return null;
}

/** A mode that lies on the axis as the device is. */
function matchWithoutLevel(
  openings: PreparedOpenings,
  own: ClosedOpenings,
  sense: LevelSense,
  inputs: readonly boolean[],
  { k, kError, vector }: ReflectionlessMode,
  order: number,
): RealMatch {
  const closed = openings.closed(order, sense);
  const at = { k: k.re, level: 0, vector };
  const drive = driveOf(closed, at, inputs);
  return {
    ...at,
    kError,
    levelError: 0,
    drive,
    forward: { sameMesh: drivenPowers(closed, at, drive, inputs), ownMesh: drivenPowers(own, at, drive, inputs) },
    openings,
    order,
  };
}

function matchByLevel(
  openings: PreparedOpenings,
  own: () => ClosedOpenings,
  sense: LevelSense,
  assignment: Assignment,
  inputs: readonly boolean[],
  mode: ReflectionlessMode,
  order: number,
  levelMax: number,
): RealMatch | null {
  const found: { k: number; level: number; vector: ComplexArray }[] = [];
  let start = { k: mode.k, vector: mode.vector, level: 0 };
  for (let p = order; p <= Math.min(order + 2, HIGHEST_ORDER); p++) {
    const closed = openings.closed(p, sense);
    if (p > order)
      start = {
        ...start,
        vector: embed(closed.family.operator.space, openings.closed(p - 1, sense).family.operator.space, start.vector),
      };
    const at = crossByLevel(closed, assignment, start);
    if (!at || at.level < 0 || at.level > levelMax || Math.abs(at.k - mode.k.re) > 0.1 * mode.k.re) return null;
    found.push(at);
    start = { k: complex(at.k), vector: at.vector, level: at.level };
  }
  const last = found.at(-1)!;
  const drive = driveOf(openings.closed(order + found.length - 1, sense), last, inputs);
  const error = (of: (f: (typeof found)[number]) => number): number => remaining(found.map((f) => complex(of(f))));
  return {
    k: last.k,
    kError: error((f) => f.k) + 1e-14 * last.k,
    level: last.level,
    levelError: error((f) => f.level) + 1e-13 * last.level,
    drive,
    forward: {
      sameMesh: drivenPowers(openings.closed(order + found.length - 1, sense), last, drive, inputs),
      ownMesh: drivenPowers(own(), last, drive, inputs),
    },
    vector: last.vector,
    openings,
    order: order + found.length - 1,
  };
}

/** Incoming amplitudes of a reflectionless mode at real k; unit power, largest real. Zero when nothing comes in. */
function driveOf(
  closed: ClosedOpenings,
  at: { readonly k: number; readonly vector: ComplexArray },
  inputs: readonly boolean[],
): ComplexArray {
  const drive = closed.amplitudes(complex(at.k), at.vector, () => 'incoming');
  inputs.forEach((input, i) => {
    if (!input) drive.fill(0, 2 * i, 2 * i + 2);
  });
  normaliseInputs(drive, inputs, null);
  return drive;
}

/** The driven solve with all waves outgoing: what comes back, what passes, what stays. */
export function drivenPowers(
  closed: ClosedOpenings,
  at: { readonly k: number; readonly level: number },
  drive: ComplexArray,
  inputs: readonly boolean[],
): MatchPowers {
  const k = complex(at.k);
  const { matrix, fields } = closed.scatter(k, at.level);
  const n = inputs.length;
  const N = fields.length / (2 * n);
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let re = 0;
    let im = 0;
    for (let j = 0; j < n; j++) {
      const e = 2 * (i + j * n);
      re += matrix[e] * drive[2 * j] - matrix[e + 1] * drive[2 * j + 1];
      im += matrix[e] * drive[2 * j + 1] + matrix[e + 1] * drive[2 * j];
    }
    out[i] = re * re + im * im;
  }
  const field = new Float64Array(2 * N);
  for (let j = 0; j < n; j++)
    for (let g = 0; g < N; g++) {
      const e = 2 * (g + j * N);
      field[2 * g] += fields[e] * drive[2 * j] - fields[e + 1] * drive[2 * j + 1];
      field[2 * g + 1] += fields[e] * drive[2 * j + 1] + fields[e + 1] * drive[2 * j];
    }
  const [absorbed] = absorbedPowers(closed, k, at.level, field, 1);
  const total = drive.reduce((sum, v) => sum + v * v, 0);
  return {
    out,
    reflected: out.reduce((sum, v, i) => (inputs[i] ? sum + v : sum), 0),
    absorbed,
    balance: total - absorbed - out.reduce((a, b) => a + b, 0),
  };
}

/** The field that a drive excites with all waves outgoing. */
export function drivenField(closed: ClosedOpenings, k: number, level: number, drive: ComplexArray): ComplexArray {
  const { fields } = closed.scatter(complex(k), level);
  const n = drive.length / 2;
  const N = fields.length / (2 * n);
  const field = new Float64Array(2 * N);
  for (let j = 0; j < n; j++)
    for (let g = 0; g < N; g++) {
      const e = 2 * (g + j * N);
      field[2 * g] += fields[e] * drive[2 * j] - fields[e + 1] * drive[2 * j + 1];
      field[2 * g + 1] += fields[e] * drive[2 * j + 1] + fields[e + 1] * drive[2 * j];
    }
  return field;
}

export interface MatchKnobRequest extends MatchRequest {
  /** Values of the knob to search between. */
  readonly range: readonly [number, number];
}

/** Values of the knob at which all modes are searched before any is polished. */
const SAMPLES = 7;

/**
 * Reflectionless modes at real k with a number of the device file as parameter: sampled over the range, joined by nearest
 * k, each change of sign of Im k brought to zero by regula falsi (Illinois) on meshes of its own.
 */
export function findKnobMatches(deviceAt: (value: number) => Device, request: MatchKnobRequest): readonly RealMatch[] {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const { range, progress } = request;
  const sense = request.sense ?? 'loss';
  const slope = 1 / (2 * (request.qMin ?? 10));
  const resolution = resolutionFor(digits);
  const order = resolution.order + 1;
  const at = (value: number, refine = 1) => {
    const device = deviceAt(value);
    const { kMin, kMax } = device.band;
    const openings = prepareOpenings(device, { kMin, kMax, slope }, resolution, refine);
    const inputs = inputsOf(openings, request.inputs);
    return { device, openings, inputs, assignment: assignmentOf(openings, inputs), kMin, kMax };
  };
  const values = Array.from({ length: SAMPLES }, (_, i) => range[0] + ((range[1] - range[0]) * i) / (SAMPLES - 1));
  const samples = values.map((value, i) => {
    progress?.('sampling the knob', i / SAMPLES);
    const here = at(value);
    const closed = here.openings.closed(SEARCH_ORDER, sense);
    const { ks } = searchBand(here.device, closed, here.assignment, here.kMin, here.kMax, 1.5 * slope);
    return ks.flatMap((near) => newton(closed, 0, here.assignment, near, null)?.k ?? []);
  });
  const solve = (value: number, near: Complex, p: number) => {
    const here = at(value);
    const closed = here.openings.closed(p, sense);
    const found = newton(closed, 0, here.assignment, near, null);
    return found && { ...here, ...found, closed };
  };
  const matches: RealMatch[] = [];
  for (let i = 0; i + 1 < SAMPLES; i++)
    for (const a of samples[i]) {
      const b = nearest(samples[i + 1], a);
      if (!b || a.im * b.im > 0 || modulus(subtract(a, b)) > 0.1 * modulus(a)) continue;
      progress?.('polishing', i / SAMPLES);
      const roots: { value: number; solved: NonNullable<ReturnType<typeof solve>> }[] = [];
      for (const p of [order - 1, order]) {
        const root = falsePosition((value, near) => solve(value, near, p), [values[i], values[i + 1]], [a, b]);
        if (root) roots.push(root);
      }
      const last = roots.at(-1);
      if (roots.length < 2 || !last) continue;
      const { value, solved } = last;
      const real = { k: solved.k.re, level: 0, vector: solved.vector };
      if (real.k < solved.kMin || real.k > solved.kMax) continue;
      if (
        matches.some(
          (m) => Math.abs(m.k - real.k) < 1e-7 * real.k && Math.abs(m.level - value) < 1e-6 * (range[1] - range[0]),
        )
      )
        continue;
      const drive = driveOf(solved.closed, real, solved.inputs);
      const own = at(value, OWN_MESH).openings.closed(Math.min(order + 1, HIGHEST_ORDER), sense);
      matches.push({
        k: real.k,
        kError: Math.abs(roots[1].solved.k.re - roots[0].solved.k.re) + 1e-13 * real.k,
        level: value,
        levelError: Math.abs(roots[1].value - roots[0].value) + 1e-13 * Math.abs(value),
        drive,
        forward: {
          sameMesh: drivenPowers(solved.closed, real, drive, solved.inputs),
          ownMesh: drivenPowers(own, real, drive, solved.inputs),
        },
        vector: solved.vector,
        openings: solved.openings,
        order,
      });
    }
  return matches.sort((a, b) => a.k - b.k);
}

/** Illinois steps until Im k is rounding; the nearest k of the last step guides the next search. */
function falsePosition<T extends { readonly k: Complex }>(
  solve: (value: number, near: Complex) => T | null,
  bracket: readonly [number, number],
  ks: readonly [Complex, Complex],
): { value: number; solved: T } | null {
  const ends = bracket.map((value, i) => {
    const solved = solve(value, ks[i]);
    return solved && { value, solved, weight: solved.k.im };
  });
  if (!ends[0] || !ends[1] || ends[0].weight * ends[1].weight > 0) return null;
  let a = ends[0];
  let b = ends[1];
  let best = Math.abs(a.weight) < Math.abs(b.weight) ? a : b;
  for (let step = 0; step < 30; step++) {
    const value = (a.value * b.weight - b.value * a.weight) / (b.weight - a.weight);
    const t = (value - a.value) / (b.value - a.value);
    const near = add(scale(a.solved.k, 1 - t), scale(b.solved.k, t));
    const solved = solve(value, near);
    if (!solved) return null;
    const here = { value, solved, weight: solved.k.im };
    if (Math.abs(solved.k.im) <= Math.abs(best.solved.k.im)) best = here;
    if (Math.abs(solved.k.im) <= 1e-13 * solved.k.re || Math.abs(a.value - b.value) <= 1e-12 * Math.abs(value)) break;
    if (here.weight * b.weight < 0) a = b;
    else a = { ...a, weight: a.weight / 2 };
    b = here;
  }
  // two modes on either side of the bracket leave a jump, not a root
  return Math.abs(best.solved.k.im) <= ROOT * best.solved.k.re ? { value: best.value, solved: best.solved } : null;
}

/** A root of Im k is one when |Im k| falls below this share of Re k. */
const ROOT = 1e-10;

function nearest(list: readonly Complex[], k: Complex): Complex | null {
  return list.reduce<Complex | null>(
    (best, other) => (!best || modulus(subtract(other, k)) < modulus(subtract(best, k)) ? other : best),
    null,
  );
}

/** A quarter of the largest |ε| among the pumped bodies, by weight. */
const defaultMost = (device: Device): number =>
  Math.max(0, ...device.bodies.map((b) => (b.pumpWeight > 0 ? modulus(b.permittivity) / 4 / b.pumpWeight : 0)));

/** Scales amplitudes (and the field they belong to) to unit incoming power, the largest input real and positive. */
function normaliseInputs(amplitudes: ComplexArray, inputs: readonly boolean[], vector: ComplexArray | null): void {
  let total = 0;
  let largest = complex(0);
  inputs.forEach((input, i) => {
    if (!input) return;
    const a = complex(amplitudes[2 * i], amplitudes[2 * i + 1]);
    total += modulus(a) ** 2;
    if (modulus(a) > modulus(largest)) largest = a;
  });
  if (!(total > 0)) return;
  const by = divide(complex(1 / Math.sqrt(total)), scale(largest, 1 / modulus(largest)));
  for (const array of vector ? [amplitudes, vector] : [amplitudes])
    for (let i = 0; i < array.length; i += 2) {
      const [re, im] = [array[i], array[i + 1]];
      array[i] = re * by.re - im * by.im;
      array[i + 1] = re * by.im + im * by.re;
    }
}

function unit(u: ComplexArray): ComplexArray {
  const norm = Math.sqrt(u.reduce((sum, v) => sum + v * v, 0));
  return u.map((v) => v / norm);
}

function randomVector(n: number): ComplexArray {
  const random = randomStream(SEED);
  return unit(Float64Array.from({ length: 2 * n }, () => random.normal()));
}
