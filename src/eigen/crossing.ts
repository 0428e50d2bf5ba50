// At which real k and real level does a mode lie on the real axis?

import { complex, type ComplexArray, modulus } from '../numerics/complex.ts';
import { inverseStep, residualStep } from './improve.ts';
import type { EigenProblem } from './problem.ts';
import { type EigenGroup, projectPieces, type Projection, rayleighGroups } from './rayleigh.ts';

export interface Crossing {
  readonly k: number;
  readonly level: number;
  /** The group on the axis, with its vectors and slope dk/d(level) there. */
  readonly group: EigenGroup;
  readonly converged: boolean;
  /** Factorizations spent. */
  readonly steps: number;
  /** Last change of k and of the level. */
  readonly change: { readonly k: number; readonly level: number };
}

export interface CrossingRequest {
  readonly k: number;
  readonly level: number;
  /** size × columns: a space that holds the crossing mode and its close neighbours. */
  readonly space: ComplexArray;
  readonly columns: number;
  /** Absolute distance within which modes count as one group. */
  readonly groupWidth: number;
  /** Members of the group that is followed: near the border of `groupWidth` it decides. */
  readonly multiplicity?: number;
  readonly largestSteps?: number;
}

/** Rounding of k by the block Rayleigh functional, relative; measured 1e-15 to 8e-15 (the latter at orders above 12). */
export const ROUNDING = 1e-14;

/**
 * Newton on Im k(level) = 0 with the block Rayleigh functional, A(k, level) factored once an outer step: the vectors
 * gain all their digits in two or three. The level moves by −Im κ / Im κ′, then k by Re(κ + κ′ δ).
 */
export function findCrossing(problem: EigenProblem, request: CrossingRequest): Crossing | null {
  const { columns } = request;
  let { k, level, space } = request;
  // with neighbours in the space, plain inverse iteration would turn all columns into the mode next to the shift
  const improve = columns > (request.multiplicity ?? columns) ? residualStep : inverseStep;
  let last: Crossing | null = null;
  const limit = request.largestSteps ?? 10;
  for (let step = 1; step <= limit; step++) {
    const inverse = problem.factorize(complex(k, 0), level);
    for (let i = 0; i < 2; i++) space = improve(problem, inverse, complex(k), level, space, columns);
    inverse.release();
    const before = { k, level };
    const projection = projectPieces(problem, space, columns);
    let group: EigenGroup | null = null;
    for (let inner = 0; inner < 6; inner++) {
      group = groupAt(problem, request, k, level, space, projection);
      if (!group || group.slope.im === 0) return last;
      const move = -group.k.im / group.slope.im;
      level += move;
      k = group.k.re + group.slope.re * move;
      if (!Number.isFinite(k) || !Number.isFinite(level) || k <= 0) return last;
      if (Math.abs(move) <= 1e-15 * Math.abs(level)) break;
    }
    const change = { k: Math.abs(k - before.k), level: Math.abs(level - before.level) };
    // the level can be known no better than the rounding of Im k allows
    const rounding = (ROUNDING * k) / Math.abs(group!.slope.im);
    const converged = change.k <= 1e-12 * k && change.level <= Math.max(1e-11 * Math.abs(level), rounding);
    last = { k, level, group: group!, converged, steps: step, change };
    if (converged) return last;
  }
  return last;
}

/** Factors on the width, tried in turn until the nearest group has the members wanted. */
const WIDTHS = [1, 4, 1 / 4, 16, 1 / 16];

function groupAt(
  problem: EigenProblem,
  { columns, groupWidth, multiplicity }: CrossingRequest,
  k: number,
  level: number,
  space: ComplexArray,
  projection: Projection | undefined,
): EigenGroup | null {
  let first: EigenGroup | null = null;
  for (const factor of WIDTHS) {
    const width = factor * groupWidth;
    const group = nearest(rayleighGroups(problem, complex(k), level, space, columns, width, true, projection), k);
    if (!group) return first;
    if (multiplicity === undefined || group.multiplicity === multiplicity) return group;
    first ??= group;
  }
  return first;
}

function nearest(groups: readonly EigenGroup[], k: number): EigenGroup | null {
  let best: EigenGroup | null = null;
  for (const group of groups) {
    if (!best || modulus({ re: group.k.re - k, im: group.k.im }) < modulus({ re: best.k.re - k, im: best.k.im })) {
      best = group;
    }
  }
  return best;
}
