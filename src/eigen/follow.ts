// Where do modes go as the level rises, and which of them reach the real axis?

import { add, type Complex, type ComplexArray, modulus, scale, subtract } from '../numerics/complex.ts';
import { adjointProduct } from './columns.ts';
import { type Crossing, findCrossing } from './crossing.ts';
import { inverseStep, residualStep } from './improve.ts';
import type { EigenProblem } from './problem.ts';
import { gather, type EigenGroup, projectPieces, type Projection, rayleighGroups } from './rayleigh.ts';

/** The way of one group of modes, from level 0 to the axis or to the end of the range. */
export interface ModePath {
  readonly multiplicity: number;
  readonly levels: readonly number[];
  readonly ks: readonly Complex[];
  readonly crossing: Crossing | null;
  /** Why it was not followed further. */
  readonly ended: 'crossed' | 'range' | 'lost';
}

export interface FollowRequest {
  readonly k: Complex;
  /** size × columns: the cluster's vectors at level 0. */
  readonly vectors: ComplexArray;
  readonly columns: number;
  readonly levelMax: number;
  /** Relative to |k|: members closer than this are one group (degenerate). */
  readonly groupWidth: number;
  /** Relative to |k|: members closer than this are iterated together. */
  readonly clusterWidth: number;
  readonly progress?: () => void;
}

/** Longest path, in accepted steps. */
const LONGEST_PATH = 80;

/**
 * Follows a cluster by steps in the level: predicted along dk/d(level), corrected by block inverse iteration, halved
 * when the prediction was off. Groups that drift apart are followed apart, each with the way of the whole behind it;
 * those that stay closer than the group width for long are joined. A group whose Im k changes sign is polished to its
 * crossing.
 */
export function followCluster(problem: EigenProblem, request: FollowRequest): ModePath[] {
  const width = request.groupWidth * modulus(request.k);
  const groups = rayleighGroups(problem, request.k, 0, request.vectors, request.columns, width);
  const out: ModePath[] = [];
  const open: Strand[][] = [groups.map((g) => ({ group: g, levels: [0], ks: [g.k] }))];
  while (open.length > 0) {
    const bundle = open.pop()!;
    if (bundle.length > 0) open.push(...followBundle(problem, request, bundle, out));
    request.progress?.();
  }
  return out;
}

interface Strand {
  readonly group: EigenGroup;
  readonly levels: readonly number[];
  readonly ks: readonly Complex[];
}

/** Takes one step with a bundle of strands at the same level; returns the bundles that go on. */
function followBundle(
  problem: EigenProblem,
  request: FollowRequest,
  bundle: readonly Strand[],
  out: ModePath[],
): Strand[][] {
  const level = bundle[0].levels[bundle[0].levels.length - 1];
  const lead = Math.min(...bundle.map((s) => levelOfAxis(s, level)));
  const room = request.levelMax - level;
  const steps = bundle[0].levels.length;
  // straight to the axis when it is within reach of a good prediction, else half the way
  let step = Math.min(steps === 1 ? (lead - level) / 2 : lead - level, room);
  if (steps > 1) step = Math.min(step, 4 * (level - bundle[0].levels[steps - 2]));
  if (!(room > 1e-9 * request.levelMax) || steps > LONGEST_PATH || !(lead - level < 1e3 * request.levelMax)) {
    for (const s of bundle) out.push(finish(s, null, steps > LONGEST_PATH ? 'lost' : 'range'));
    return [];
  }
  for (let attempt = 0; attempt < 14; attempt++, step /= 2) {
    const moved = correct(problem, request, bundle, level + step, step, attempt >= TRIES_APART);
    if (!moved) continue;
    const going: Strand[] = [];
    const met: Crossing[] = [];
    for (const strand of moved) {
      const crossed = crossingOf(problem, request, moved, strand);
      if (crossed === 'not yet') {
        going.push(strand);
        continue;
      }
      const { multiplicity } = strand.group;
      if (crossed && met.some((other) => isSame(problem, other, crossed))) {
        // a wider group that an earlier strand has brought in holds this one too; else two ended on one mode
        if (crossed.group.multiplicity <= multiplicity) out.push(finish(strand, null, 'lost'));
        continue;
      }
      if (crossed) met.push(crossed);
      if (crossed && crossed.level <= request.levelMax * (1 + 1e-12)) {
        out.push(finish(closeAt(strand, crossed), crossed, 'crossed'));
        const missing = multiplicity - crossed.group.multiplicity;
        if (missing > 0) out.push({ ...finish(strand, null, 'lost'), multiplicity: missing });
      } else out.push(finish(strand, null, crossed ? 'range' : 'lost'));
    }
    const parts = gather(
      going.map((s) => s.group.k),
      request.clusterWidth * modulus(request.k),
    );
    return parts.map((part) => part.map((i) => going[i]));
  }
  for (const s of bundle) out.push(finish(s, null, 'lost'));
  return [];
}

/** Steps that are halved before strands that have come closer than the group width are joined. */
const TRIES_APART = 3;

/** Whether two crossings are of one mode: the same place, and one vector in the other's space. */
function isSame(problem: EigenProblem, a: Crossing, b: Crossing): boolean {
  if (Math.abs(a.k - b.k) > 1e-6 * a.k || Math.abs(a.level - b.level) > 1e-4 * Math.abs(a.level)) return false;
  if (a.group.multiplicity !== b.group.multiplicity) return false;
  if (a.group.multiplicity > 1) return true;
  const [re, im] = adjointProduct(a.group.vectors, 1, b.group.vectors, 1, problem.size);
  return Math.hypot(re, im) > 0.99;
}

/** Level at which the tangent meets the axis; Infinity when it leads away. */
function levelOfAxis(strand: Strand, level: number): number {
  const { k, slope } = strand.group;
  const move = -k.im / slope.im;
  return move > 0 ? level + move : Infinity;
}

/** The bundle at the new level, or null when the step was too long. */
function correct(
  problem: EigenProblem,
  request: FollowRequest,
  bundle: readonly Strand[],
  level: number,
  step: number,
  mayJoin: boolean,
): Strand[] | null {
  const n = problem.size;
  const columns = bundle.reduce((sum, s) => sum + s.group.multiplicity, 0);
  const predicted = bundle.map((s) => predict(s, step));
  const middle = scale(
    predicted.reduce((a, b) => add(a, b)),
    1 / bundle.length,
  );
  if (middle.re <= 0) return null;
  let U: ComplexArray = new Float64Array(2 * n * columns);
  let at = 0;
  for (const s of bundle) {
    U.set(s.group.vectors, at);
    at += s.group.vectors.length;
  }
  const inverse = problem.factorize(middle, level);
  const width = request.groupWidth * modulus(request.k);
  // plain inverse iteration would turn all strands into the one that the middle happens to meet
  const improve = bundle.length > 1 ? residualStep : inverseStep;
  let groups: EigenGroup[] = [];
  let projection: Projection | undefined;
  for (let pass = 0; pass < 6; pass++) {
    U = improve(problem, inverse, middle, level, U, columns);
    projection = projectPieces(problem, U, columns);
    const next = rayleighGroups(problem, middle, level, U, columns, width, false, projection);
    if (next.length === 0) break;
    const change = drift(groups, next);
    groups = next;
    if (change <= 1e-7 * modulus(middle)) break;
  }
  inverse.release();

  // what has come closer than the width is looked at with a finer one before it is joined
  let joined: Strand[] | null = null;
  for (const finer of [1, 1 / 4]) {
    groups = rayleighGroups(problem, middle, level, U, columns, finer * width, true, projection);
    const moved = matchStrands(bundle, predicted, groups, level, width);
    if (moved && moved.joins === 0) return moved.strands;
    joined ??= moved && moved.strands;
  }
  return mayJoin ? joined : null;
}

/**
 * The groups at the new level as continuations of the strands: one for one, one strand splitting into several groups,
 * or several strands joining in one group. Null where counts or places do not fit.
 */
function matchStrands(
  bundle: readonly Strand[],
  predicted: readonly Complex[],
  groups: readonly EigenGroup[],
  level: number,
  width: number,
): { readonly strands: Strand[]; readonly joins: number } | null {
  const strands: Strand[] = [];
  let joins = 0;
  const goOn = (from: Strand, group: EigenGroup): void => {
    strands.push({ group, levels: [...from.levels, level], ks: [...from.ks, group.k] });
  };
  for (const part of partsOf(predicted, groups)) {
    const from = part.strands.map((i) => bundle[i]);
    const to = part.groups.map((i) => groups[i]);
    const count = from.reduce((sum, s) => sum + s.group.multiplicity, 0);
    if (count !== to.reduce((sum, g) => sum + g.multiplicity, 0)) return null;
    const fits = (group: EigenGroup, i: number, slack: number): boolean => {
      const way = modulus(subtract(predicted[i], bundle[i].group.k));
      return modulus(subtract(group.k, predicted[i])) <= 0.25 * way + 1e-6 * modulus(predicted[i]) + slack;
    };
    if (from.length === 1) {
      // members that part now were within the width of their mean before
      const slack = to.length > 1 ? 2 * width : 0;
      if (!to.every((group) => fits(group, part.strands[0], slack))) return null;
      for (const group of to) goOn(from[0], group);
    } else if (to.length === 1) {
      if (!part.strands.every((i) => fits(to[0], i, width))) return null;
      goOn(meanOf(from), to[0]);
      joins++;
    } else {
      // all were predicted with about the same error: their means coincide
      const off = subtract(meanK(to), meanK(part.strands.map((i) => ({ ...bundle[i].group, k: predicted[i] }))));
      const free = new Set(to);
      for (const i of part.strands) {
        const own = [...free].filter((g) => g.multiplicity === bundle[i].group.multiplicity);
        const place = add(predicted[i], off);
        const group = own.sort((a, b) => distance(a.k, place) - distance(b.k, place))[0];
        if (!group || !fits(group, i, 0)) return null;
        free.delete(group);
        goOn(bundle[i], group);
      }
    }
  }
  return { strands, joins };
}

/** Strands and groups that are linked by being nearest to each other, either way. */
function partsOf(
  predicted: readonly Complex[],
  groups: readonly EigenGroup[],
): { readonly strands: number[]; readonly groups: number[] }[] {
  const ks = groups.map((g) => g.k);
  const label = predicted.map((_, i) => i);
  const owner = ks.map((k) => nearestOf(predicted, k));
  for (const [i, p] of predicted.entries()) {
    const a = label[i];
    const b = label[owner[nearestOf(ks, p)]];
    for (let j = 0; j < label.length; j++) if (label[j] === a) label[j] = b;
  }
  return [...new Set(label)].map((l) => ({
    strands: label.flatMap((x, i) => (x === l ? [i] : [])),
    groups: owner.flatMap((o, g) => (label[o] === l ? [g] : [])),
  }));
}

function nearestOf(places: readonly Complex[], k: Complex): number {
  let best = 0;
  places.forEach((p, i) => {
    if (distance(p, k) < distance(places[best], k)) best = i;
  });
  return best;
}

const distance = (a: Complex, b: Complex): number => modulus(subtract(a, b));

const meanK = (groups: readonly Pick<EigenGroup, 'k' | 'multiplicity'>[]): Complex =>
  scale(
    groups.map((g) => scale(g.k, g.multiplicity)).reduce((a, b) => add(a, b)),
    1 / groups.reduce((sum, g) => sum + g.multiplicity, 0),
  );

/** Strands of one bundle share their levels: the mean of their ways, by members. */
function meanOf(strands: readonly Strand[]): Strand {
  const [first] = strands;
  const ks = first.ks.map((_, i) => meanK(strands.map((s) => ({ ...s.group, k: s.ks[i] }))));
  return { group: first.group, levels: first.levels, ks };
}

/** Next k: the cubic through the last two points and slopes would do; a tangent plus half its change suffices. */
function predict(strand: Strand, step: number): Complex {
  const { k, slope } = strand.group;
  const tangent = add(k, scale(slope, step));
  const m = strand.levels.length;
  if (m < 2) return tangent;
  const before = strand.levels[m - 1] - strand.levels[m - 2];
  const chord = scale(subtract(strand.ks[m - 1], strand.ks[m - 2]), 1 / before);
  // slope changes from the chord's middle to here by slope − chord over before/2
  return add(tangent, scale(subtract(slope, chord), (step * step) / before));
}

function drift(old: readonly EigenGroup[], next: readonly EigenGroup[]): number {
  if (old.length !== next.length) return Infinity;
  let worst = 0;
  for (const g of next) worst = Math.max(worst, Math.min(...old.map((o) => modulus(subtract(o.k, g.k)))));
  return worst;
}

/** The crossing of a strand that has met the axis; 'not yet' when it has not; null when it could not be polished. */
function crossingOf(
  problem: EigenProblem,
  request: FollowRequest,
  bundle: readonly Strand[],
  strand: Strand,
): Crossing | null | 'not yet' {
  const { k } = strand.group;
  const start = strand.ks[0];
  const met = Math.sign(k.im) !== Math.sign(start.im) || Math.abs(k.im) < 0.02 * Math.abs(start.im);
  if (!met) return 'not yet';
  const level = strand.levels[strand.levels.length - 1];
  const move = -k.im / strand.group.slope.im;
  const columns = bundle.reduce((sum, s) => sum + s.group.multiplicity, 0);
  const space = new Float64Array(2 * problem.size * columns);
  let at = 0;
  for (const s of bundle) {
    space.set(s.group.vectors, at);
    at += s.group.vectors.length;
  }
  const found = findCrossing(problem, {
    k: k.re + strand.group.slope.re * move,
    level: level + move,
    space,
    columns,
    groupWidth: request.groupWidth * modulus(request.k),
    multiplicity: strand.group.multiplicity,
  });
  return found && found.converged && found.level > 0 ? found : null;
}

function closeAt(strand: Strand, crossing: Crossing): Strand {
  const keep = strand.levels.map((l) => l < crossing.level);
  return {
    group: crossing.group,
    levels: [...strand.levels.filter((_, i) => keep[i]), crossing.level],
    ks: [...strand.ks.filter((_, i) => keep[i]), { re: crossing.k, im: 0 }],
  };
}

const finish = (strand: Strand, crossing: Crossing | null, ended: ModePath['ended']): ModePath => ({
  multiplicity: strand.group.multiplicity,
  levels: strand.levels,
  ks: strand.ks,
  crossing,
  ended,
});
