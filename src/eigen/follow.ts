// Where do modes go as the level rises, and which of them reach the real axis?

import { add, type Complex, type ComplexArray, modulus, scale, subtract } from '../numerics/complex.ts';
import { type Crossing, findCrossing } from './crossing.ts';
import { inverseStep } from './improve.ts';
import type { EigenProblem } from './problem.ts';
import { gather, type EigenGroup, rayleighGroups } from './rayleigh.ts';

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
 * when the prediction was off or the new vectors do not continue the old ones. Groups that drift apart are followed
 * apart. A group whose Im k changes sign is polished to its crossing.
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
    for (const s of bundle) out.push(finish(s, null, 'range'));
    return [];
  }
  for (let attempt = 0; attempt < 14; attempt++, step /= 2) {
    const moved = correct(problem, request, bundle, level + step, step);
    if (!moved) continue;
    const going: Strand[] = [];
    for (const strand of moved) {
      const crossed = crossingOf(problem, request, moved, strand);
      if (crossed === 'not yet') going.push(strand);
      else if (crossed && crossed.level <= request.levelMax * (1 + 1e-12)) {
        out.push(finish(closeAt(strand, crossed), crossed, 'crossed'));
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
  let groups: EigenGroup[] = [];
  for (let pass = 0; pass < 6; pass++) {
    U = inverseStep(problem, inverse, middle, level, U, columns);
    const next = rayleighGroups(problem, middle, level, U, columns, width, false);
    if (next.length === 0) break;
    const change = drift(groups, next);
    groups = next;
    if (change <= 1e-7 * modulus(middle)) break;
  }
  inverse.release();
  groups = rayleighGroups(problem, middle, level, U, columns, width);

  // each strand takes the group nearest to its prediction, once
  const used = new Set<EigenGroup>();
  const moved: Strand[] = [];
  for (const [i, strand] of bundle.entries()) {
    const fits = groups.filter((g) => !used.has(g) && g.multiplicity === strand.group.multiplicity);
    if (fits.length === 0) return null;
    const group = fits.reduce((a, b) =>
      modulus(subtract(a.k, predicted[i])) <= modulus(subtract(b.k, predicted[i])) ? a : b,
    );
    const miss = modulus(subtract(group.k, predicted[i]));
    const way = modulus(subtract(predicted[i], strand.group.k));
    if (miss > 0.25 * way + 1e-6 * modulus(middle)) return null;
    used.add(group);
    moved.push({ group, levels: [...strand.levels, level], ks: [...strand.ks, group.k] });
  }
  return moved;
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
