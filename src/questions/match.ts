// At which k, and with how much loss or which dimension, do chosen channels send nothing back?

import { DEFAULT_DIGITS, HIGHEST_ORDER, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { embed } from '../elements/space.ts';
import { searchWedge } from '../eigen/contour-window.ts';
import { type Complex, complex, type ComplexArray, modulus, subtract } from '../numerics/complex.ts';
import type { Assignment, ClosedOpenings } from '../operator/closed-openings.ts';
import type { LevelSense } from '../operator/device-family.ts';
import { crossClosed, refineClosed } from './closed-newton.ts';
import { driveOf, type DrivenPowers, drivenPowers, normaliseInputs } from './driven.ts';
import type { Progress } from './progress.ts';
import { expectedModes } from './mode-count.ts';
import type { Scope } from './prepare.ts';
import { type PreparedOpenings, prepareOpenings } from './prepare-openings.ts';

export interface MatchRequest {
  /** Names of channels ("left.0") or of guides (all their channels) through which waves come in, and none goes out. */
  readonly inputs: readonly string[];
  readonly digits?: number;
  /** Sense of the level of pumped bodies; loss if absent. */
  readonly sense?: LevelSense;
  /** Largest level looked at; a quarter of the largest |ε| of the pumped bodies if absent. */
  readonly levelMax?: number;
  /** Lowest Q = Re k / 2|Im k| of the complex spectrum; if absent what the largest level can bring to the axis, or 10. */
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

/** A reflectionless mode at real k. */
export interface RealMatch {
  readonly k: number;
  readonly kError: number;
  /** Loss or pump level, or the value of the knob. */
  readonly level: number;
  readonly levelError: number;
  /** Incoming amplitudes, one a channel (zero where none comes in), Σ|a|² = 1, the largest real and positive. */
  readonly drive: ComplexArray;
  readonly forward: { readonly sameMesh: DrivenPowers; readonly ownMesh: DrivenPowers };
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
  const levelMax = request.levelMax ?? defaultMost(device);
  const scope = scopeOf(device, levelMax, request.qMin);
  const { slope } = scope;
  progress?.('meshing', 0);
  const openings = prepareOpenings(device, scope, resolution);
  const inputs = inputsOf(openings, request.inputs);
  const assignment = assignmentOf(openings, inputs);
  const order = resolution.order + 1;
  const { ks, covered } = searchBand(device, request.inputs, sense, scope, progress);
  const modes: ReflectionlessMode[] = [];
  for (const [i, near] of ks.entries()) {
    progress?.('polishing', i / ks.length);
    const mode = polishMode(openings, sense, assignment, inputs, near, order);
    if (!mode || !(mode.k.re >= scope.kMin && mode.k.re <= scope.kMax)) continue;
    if (Math.abs(mode.k.im) > slope * mode.k.re) continue;
    if (!modes.some((m) => modulus(subtract(m.k, mode.k)) <= 10 * (m.kError + mode.kError) + 1e-9 * kMax))
      modes.push(mode);
  }
  modes.sort((a, b) => a.k.re - b.k.re);
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
    return found ? [found] : [];
  });
  matches.sort((a, b) => a.level - b.level);
  return {
    channels: openings.channels.map((c) => c.name),
    inputs,
    modes: modes.filter(({ k }) => k.re >= kMin && k.re <= kMax),
    matches: matches.filter(({ k }) => k >= kMin && k <= kMax),
    covered,
    order,
    digits,
    openings,
  };
}

/**
 * The search works on a mesh for so few digits and at so low an order: k to about 1e-4, corners included, for a tenth of
 * the time. Candidates are polished on the mesh wanted.
 */
const SEARCH_DIGITS = 2;
const SEARCH_ORDER = 5;
/** Triangles of the independent mesh, as a share of the rule. */
export const OWN_MESH = 0.8;
const SEED = 4711;

/**
 * The band and Q asked for. Where the level decides, all modes that it can bring to the axis, |δk|/k ≈ D w / 2|ε|, and a
 * little beyond the ends of the band.
 */
function scopeOf(device: Device, levelMax: number, qMin: number | undefined): Scope {
  const { kMin, kMax } = device.band;
  const reach = Math.max(
    0,
    ...device.bodies.map((b) => (b.pumpWeight > 0 ? (levelMax * b.pumpWeight) / (2 * modulus(b.permittivity)) : 0)),
  );
  if (reach === 0 || qMin !== undefined) return { kMin, kMax, slope: 1 / (2 * (qMin ?? 10)) };
  const slope = Math.min(1, 1.3 * reach + 0.01);
  const margin = Math.min(0.3 * slope, 0.25);
  return { kMin: kMin * (1 - margin), kMax: kMax * (1 + margin), slope };
}

/** Which channels are inputs. */
export function inputsOf({ channels, openings }: PreparedOpenings, names: readonly string[]): readonly boolean[] {
  const known = new Set([...channels.map((c) => c.name), ...openings.map((o) => o.name)]);
  for (const name of names)
    if (!known.has(name))
      throw new RangeError(`the input came as ${name}; expected some of ${[...known].slice(0, 30).join(', ')}`);
  return channels.map((c) => names.includes(c.name) || names.includes(openings[c.opening].name));
}

export function assignmentOf({ channels }: PreparedOpenings, inputs: readonly boolean[]): Assignment {
  const into = new Set(channels.flatMap((c, i) => (inputs[i] ? [`${c.opening} ${c.index}`] : [])));
  return (opening, index) => (into.has(`${opening} ${index}`) ? 'incoming' : 'outgoing');
}

/** Candidates in the scope, found on a coarse mesh at low order; windows end where a wave of an opening begins to carry power. */
export function searchBand(
  device: Device,
  names: readonly string[],
  sense: LevelSense,
  { kMin, kMax, slope }: Scope,
  progress?: Progress,
): { readonly ks: readonly Complex[]; readonly covered: boolean } {
  const prepared = prepareOpenings(device, { kMin, kMax, slope }, resolutionFor(SEARCH_DIGITS));
  const assignment = assignmentOf(prepared, inputsOf(prepared, names));
  const closed = prepared.closed(SEARCH_ORDER, sense);
  return searchWedge(
    { size: closed.family.size, factorize: (k, from) => closed.factorize(k, 0, assignment, from) },
    {
      kMin,
      kMax,
      slope,
      branchPoints: closed.branchPoints,
      expected: expectedModes(device),
      seed: SEED,
      progress: (done) => progress?.('searching', done),
    },
  );
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
    last = refineClosed(closed, 0, assignment, last?.k ?? near, start);
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
export function remaining(values: readonly Complex[]): number {
  const [a, b, c] = values.slice(-3);
  const before = modulus(subtract(b, a));
  const step = modulus(subtract(c, b));
  const r = Math.min(0.9, step / Math.max(before, 1e-300));
  return step * Math.max(1, r / (1 - r));
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
    const at = crossClosed(closed, assignment, start);
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

/** A quarter of the largest |ε| among the pumped bodies, by weight. */
const defaultMost = (device: Device): number =>
  Math.max(0, ...device.bodies.map((b) => (b.pumpWeight > 0 ? modulus(b.permittivity) / 4 / b.pumpWeight : 0)));
