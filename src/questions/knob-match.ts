// At which value of a knob do chosen channels send nothing back at a real k?

import { DEFAULT_DIGITS, HIGHEST_ORDER, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { add, type Complex, complex, modulus, scale, subtract } from '../numerics/complex.ts';
import type { LevelSense } from '../operator/device-family.ts';
import { refineClosed } from './closed-newton.ts';
import { driveOf, drivenPowers } from './driven.ts';
import { drivenModel, searchModel } from './driven-model.ts';
import { assignmentOf, inputsOf, type MatchRequest, OWN_MESH, type RealMatch, remaining } from './match.ts';
import { expectedModes } from './mode-count.ts';
import { prepareOpenings } from './prepare-openings.ts';

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
  const made = new Map<number, ReturnType<typeof at>>();
  const known = (value: number): ReturnType<typeof at> => {
    let here = made.get(value);
    if (!here) {
      if (made.size > 3) made.delete(made.keys().next().value!);
      made.set(value, (here = at(value)));
    }
    return here;
  };
  const step = (range[1] - range[0]) / (SAMPLES - 1);
  const values = Array.from({ length: SAMPLES }, (_, i) => range[0] + step * i);
  const sample = (value: number): Sample => ({
    value,
    ks: candidates(deviceAt(value), request.inputs, sense, 1.5 * slope),
  });
  const samples = values.map((value, i) => {
    progress?.('sampling the knob', i / SAMPLES);
    return sample(value);
  });
  const crossings = samples.slice(1).flatMap((to, i) => crossingsBetween(samples[i], to, sample, 0));
  const solve = (value: number, near: Complex, p: number) => {
    const here = known(value);
    const closed = here.openings.closed(p, sense);
    const found = refineClosed(closed, 0, here.assignment, near, null);
    return found && { ...here, ...found, closed };
  };
  const roughly = (value: number, near: Complex) => {
    const rough = coarsely(deviceAt(value), sense, slope);
    return refineClosed(rough.closed, 0, assignmentOf(rough.openings, inputsOf(rough.openings, request.inputs)), near, null); // prettier-ignore
  };
  const matches: RealMatch[] = [];
  for (const [i, { ends, ks }] of crossings.entries()) {
    progress?.('narrowing', i / crossings.length);
    const coarse = falsePosition(roughly, ends, ks, 10 ** -SAMPLE_DIGITS);
    if (!coarse) continue;
    const roots: { value: number; solved: NonNullable<ReturnType<typeof solve>> }[] = [];
    let guess = { value: coarse.value, k: coarse.solved.k };
    for (const p of [order - 2, order - 1, order]) {
      progress?.(`order ${p}`, i / crossings.length);
      const at = (value: number, near: Complex) => solve(value, near, p);
      const root = [0.02, 0.2, 1].reduce<ReturnType<typeof falsePosition<NonNullable<ReturnType<typeof solve>>>>>(
        (found, width) =>
          found ?? falsePosition(at, around(guess.value, width * step), [guess.k, guess.k], 0.1 * 10 ** -digits),
        null,
      );
      if (!root) break;
      roots.push(root);
      guess = { value: root.value, k: root.solved.k };
    }
    const last = roots.at(-1);
    if (roots.length < 3 || !last) continue;
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
      kError: remaining(roots.map((root) => complex(root.solved.k.re))) + 1e-13 * real.k,
      level: value,
      levelError: remaining(roots.map((root) => complex(root.value))) + 1e-13 * Math.abs(value),
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

/** On a mesh for a few digits. */
function coarsely(device: Device, sense: LevelSense, slope: number) {
  const resolution = resolutionFor(SAMPLE_DIGITS);
  const { kMin, kMax } = device.band;
  const openings = prepareOpenings(device, { kMin, kMax, slope }, resolution);
  return { openings, closed: openings.closed(resolution.order, sense), scope: { kMin, kMax, slope } };
}

/** k of the modes that the inputs drive, to a few digits. */
function candidates(device: Device, names: readonly string[], sense: LevelSense, slope: number): readonly Complex[] {
  const { openings, closed, scope } = coarsely(device, sense, slope);
  const model = drivenModel(closed, 0, scope.kMin, scope.kMax);
  return searchModel(model, closed, [inputsOf(openings, names)], scope, expectedModes(device)).families[0];
}

const SAMPLE_DIGITS = 3;

/** Illinois steps until Im k is rounding; the nearest k of the last step guides the next search. */
function falsePosition<T extends { readonly k: Complex }>(
  solve: (value: number, near: Complex) => T | null,
  bracket: readonly [number, number],
  ks: readonly [Complex, Complex],
  rounding: number,
): { value: number; solved: T } | null {
  const ends = bracket.map((value, i) => {
    const solved = solve(value, ks[i]);
    return solved && { value, solved, weight: solved.k.im };
  });
  if (!ends[0] || !ends[1] || ends[0].weight * ends[1].weight > 0) return null;
  let a = ends[0];
  let b = ends[1];
  const whole = Math.max(modulus(subtract(a.solved.k, b.solved.k)), rounding * a.solved.k.re);
  let best = Math.abs(a.weight) < Math.abs(b.weight) ? a : b;
  for (let step = 0; step < 30; step++) {
    // a jump keeps one end: every third step halves
    const value =
      step % 3 === 2 ? (a.value + b.value) / 2 : (a.value * b.weight - b.value * a.weight) / (b.weight - a.weight);
    const t = (value - a.value) / (b.value - a.value);
    const near = add(scale(a.solved.k, 1 - t), scale(b.solved.k, t));
    const solved = solve(value, near);
    if (!solved) return null;
    const here = { value, solved, weight: solved.k.im };
    if (Math.abs(solved.k.im) <= Math.abs(best.solved.k.im)) best = here;
    if (Math.abs(solved.k.im) <= ROUNDING * solved.k.re || Math.abs(a.value - b.value) <= ROUNDING * Math.abs(value))
      break;
    if (here.weight * b.weight < 0) a = b;
    else a = { ...a, weight: a.weight / 2 };
    b = here;
    // k follows the knob, at worst like a square root beside an exceptional point
    const narrowed = Math.abs((a.value - b.value) / (bracket[1] - bracket[0]));
    if (modulus(subtract(a.solved.k, b.solved.k)) > 3 * Math.sqrt(narrowed) * whole + rounding * solved.k.re)
      return null;
  }
  // two modes on either side of the bracket leave a jump, not a root; a new mesh leaves one below the digits
  const jump = modulus(subtract(a.solved.k, b.solved.k));
  const isRoot =
    Math.abs(best.solved.k.im) <= ROOT * best.solved.k.re ||
    (Math.abs(a.value - b.value) <= 1e-9 * Math.abs(a.value) && jump <= rounding * best.solved.k.re);
  return isRoot ? { value: best.value, solved: best.solved } : null;
}

/** Steps end where Im k, or what the bracket leaves of the knob, is this small: rounding is a tenth of it. */
const ROUNDING = 2e-12;

/** A root of Im k is one when |Im k| falls below this share of Re k. */
const ROOT = 1e-10;

const around = (value: number, by: number): [number, number] => [value - by, value + by];

const apart = (a: Complex, b: Complex): number => modulus(subtract(a, b));

interface Sample {
  readonly value: number;
  readonly ks: readonly Complex[];
}

/** A mode on either side of the axis at two values of the knob. */
interface AxisCrossing {
  readonly ends: readonly [number, number];
  readonly ks: readonly [Complex, Complex];
}

/** Samples are put between others so often at most where modes pass each other. */
const MOST_HALVINGS = 4;
/** A mode belongs to the nearest of the next sample when every other is so many times as far. */
const CLEARLY = 3;

/**
 * Modes of one sample joined to the nearest of the next, each pair that changes sign; where the nearest is not clearly so,
 * or is nearer to another, a sample between the two decides.
 */
function crossingsBetween(
  from: Sample,
  to: Sample,
  sample: (value: number) => Sample,
  halvings: number,
): AxisCrossing[] {
  const found: AxisCrossing[] = [];
  for (const a of from.ks) {
    const [b, other] = byDistance(to.ks, a);
    if (!b || apart(a, b) > 0.1 * modulus(a)) continue;
    const [back] = byDistance(from.ks, b);
    const clear = back === a && (!other || apart(a, other) > CLEARLY * apart(a, b));
    const mayCross = [b, other].some((c) => c && a.im * c.im <= 0);
    if (!clear && mayCross && halvings < MOST_HALVINGS) {
      const middle = sample((from.value + to.value) / 2);
      return [
        ...crossingsBetween(from, middle, sample, halvings + 1),
        ...crossingsBetween(middle, to, sample, halvings + 1),
      ];
    }
    if (a.im * b.im <= 0) found.push({ ends: [from.value, to.value], ks: [a, b] });
  }
  return found;
}

const byDistance = (list: readonly Complex[], k: Complex): Complex[] =>
  [...list].sort((b, c) => apart(b, k) - apart(c, k));
