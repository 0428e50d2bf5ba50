// Which mesh and which orders do the modes of a device ask for, before they are followed?

import type { Limits, Stop } from '../accuracy/memory.ts';
import { climbModes } from '../accuracy/mode-ladder.ts';
import type { EigenGroup } from '../eigen/rayleigh.ts';
import type { Wedge } from '../eigen/window.ts';
import { type Complex, modulus } from '../numerics/complex.ts';
import type { Direction } from '../numerics/conventions.ts';
import type { LevelSense } from '../operator/device-family.ts';
import { expectedModes } from './mode-count.ts';
import type { Progress } from './progress.ts';
import { groundOf, type Prepared } from './prepare.ts';

export interface FitRequest {
  readonly wedge: Wedge;
  readonly digits: number;
  readonly direction: Direction;
  readonly sense: LevelSense;
  /** Which modes count; the others get what they get. */
  readonly wanted: (group: EigenGroup) => boolean;
  readonly limits?: Limits;
  readonly progress?: Progress;
}

export interface Fit {
  readonly prepared: Prepared;
  /** Highest order among the triangles. */
  readonly order: number;
  /** What kept the fit from its goal. */
  readonly stopped: Stop | null;
}

/** Share of the digits that the discretisation may use up: levels and powers hang on differences of k. */
const SHARE_OF_GOAL = 0.1;

/** No goal is nearer to rounding than this, relative. */
const LEAST_GOAL = 1e-12;

/**
 * Refines mesh and orders for the wanted modes at level 0, so that their distance from the axis has the digits: the level
 * that brings a mode there is proportional to it. The same space then serves every level below.
 */
export function fitToModes(start: Prepared, request: FitRequest): Fit {
  const { wedge, digits, direction, sense, wanted, limits, progress } = request;
  // of a mode nearer to the axis than its digits the distance is not known yet
  const distance = (k: Complex): number => Math.max(Math.abs(k.im), 10 ** -digits * modulus(k));
  const goal = (group: EigenGroup): number =>
    wanted(group)
      ? Math.max(SHARE_OF_GOAL * 10 ** -digits * distance(group.k), LEAST_GOAL * modulus(group.k))
      : Infinity;
  const search = climbModes(groundOf(start, direction, sense), {
    wedge,
    level: 0,
    digits,
    layer: start.layer,
    expected: expectedModes(start.device),
    goal,
    neighbours: true,
    ...(limits ? { limits } : {}),
    ...(progress ? { progress } : {}),
  });
  return { ...search.ground.prepared(search.orders), stopped: search.stopped };
}
