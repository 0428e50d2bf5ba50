// Which modes lie in a window, and how far may each be off?

import { embed } from '../elements/space.ts';
import { inverseStep } from '../eigen/improve.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import { modesInWindow, ownGroups, type Tile, type Wedge, wedgeHolds } from '../eigen/window.ts';
import type { LayerPlan } from '../boundary/stretched-layer.ts';
import { type Complex, modulus, subtract } from '../numerics/complex.ts';
import type { DeviceFamily } from '../operator/device-family.ts';
import { checkLayer, LAYER_MODE_SENSITIVITY, type LayerCheck } from './layer-check.ts';
import { HIGHEST_ORDER } from './resolution.ts';

/** Where the error of a number comes from, absolute, 1/length unit. */
export interface ErrorParts {
  readonly discretization: number;
  readonly boundary: number;
  readonly algebra: number;
}

export interface FoundMode {
  readonly group: EigenGroup;
  readonly error: ErrorParts;
  readonly layer: LayerCheck;
}

export interface ModeSearch {
  readonly modes: readonly FoundMode[];
  /** What was seen in the window and not taken, with the reason. */
  readonly dropped: readonly { readonly k: Complex; readonly reason: string }[];
  /** False when some part of the window could not be searched to the end. */
  readonly covered: boolean;
  /** Order that the modes are given at; their errors come from one order more. */
  readonly order: number;
  /** True when every error is below the digits asked for. */
  readonly reached: boolean;
}

export interface ModeSearchRequest {
  readonly wedge: Wedge;
  readonly level: number;
  readonly digits: number;
  readonly startOrder: number;
  readonly layer: LayerPlan;
  readonly expected: (a: number, b: number) => number;
  readonly progress?: (stage: string, done: number) => void;
}

/** Modes of one tile seek; more make longer recurrences, fewer more factorizations. */
const MODES_PER_TILE = 18;

/** Relative residual at which a Krylov pair counts as found; block Rayleigh squares it. */
const KRYLOV_TOLERANCE = 1e-9;

const SEED = 20260;

/** Sum of the parts. */
export const totalError = (error: ErrorParts): number => error.discretization + error.boundary + error.algebra;

/** Absolute distance at which modes count as one group: what the discretisation may split a degenerate pair by. */
export const groupWidth = (digits: number, k: number): number => 10 * 10 ** -digits * k;

/**
 * Searches at the starting order, then climbs: all vectors of a tile are embedded in the next order and improved
 * there by two steps of inverse iteration as one space; the difference is the error of the lower order. Stops when
 * every mode has the digits, or at the highest order.
 */
export function climbModes(family: (order: number) => DeviceFamily, request: ModeSearchRequest): ModeSearch {
  const { wedge, level, digits, layer, progress } = request;
  const width = groupWidth(digits, wedge.kMax);
  let order = request.startOrder;
  let here = family(order);
  const found = modesInWindow(here, {
    wedge,
    level,
    expected: request.expected,
    perTile: MODES_PER_TILE,
    tolerance: KRYLOV_TOLERANCE,
    seed: SEED,
    progress: (done) => progress?.('searching', done),
  });
  let tiles: readonly Tile[] = found.tiles;
  let groups = tiles.map((t) => rayleighGroups(here, t.shift, level, t.vectors, t.ks.length, width));
  for (;;) {
    const up = family(order + 1);
    const higher = tiles.map((tile, i) => {
      progress?.(`order ${order + 1}`, i / tiles.length);
      return lift(here, up, tile, level);
    });
    const groupsUp = higher.map((t) => rayleighGroups(up, t.shift, level, t.vectors, t.ks.length, width));
    const owned = ownGroups(tiles, groups, width).filter((o) => wedgeHolds(wedge, o.group.k));
    const errors = owned.map((o) => discretization(o.group, groupsUp[o.tile]!));
    const reached = owned.every((o, i) => errors[i]! <= 10 ** -digits * modulus(o.group.k));
    if (reached || order + 1 >= HIGHEST_ORDER) {
      const modes: FoundMode[] = [];
      const dropped: { k: Complex; reason: string }[] = [];
      for (const [i, o] of owned.entries()) {
        const { k, vectors, multiplicity } = o.group;
        const check = checkLayer(here, layer, k, level, vectors, multiplicity);
        if (check.sensitivity > LAYER_MODE_SENSITIVITY) {
          dropped.push({ k, reason: `moves with the layer's angle (|dk/dθ|/|k| = ${check.sensitivity.toExponential(1)})` });
          continue;
        }
        modes.push({ group: o.group, layer: check, error: errorParts(o.group, errors[i]!, check, layer) });
      }
      return { modes, dropped, covered: found.covered, order, reached };
    }
    order++;
    here = up;
    tiles = higher;
    groups = groupsUp;
  }
}

/** The tile's space in the next order, improved there. */
function lift(from: DeviceFamily, to: DeviceFamily, tile: Tile, level: number): Tile {
  const columns = tile.ks.length;
  const inverse = to.factorize(tile.shift, level);
  let vectors = embed(to.operator.space, from.operator.space, tile.vectors, columns);
  for (let i = 0; i < 2; i++) vectors = inverseStep(to, inverse, tile.shift, level, vectors, columns);
  return { ...tile, inverse, vectors };
}

/** Distance to the same group one order higher; a group that has split there counts by its farthest part. */
function discretization(group: EigenGroup, higher: readonly EigenGroup[]): number {
  const near = [...higher].sort((a, b) => modulus(subtract(a.k, group.k)) - modulus(subtract(b.k, group.k)));
  let count = 0;
  let error = group.spread;
  for (const g of near) {
    if (count >= group.multiplicity) break;
    error = Math.max(error, modulus(subtract(g.k, group.k)));
    count += g.multiplicity;
  }
  return count >= group.multiplicity ? error : Infinity;
}

/**
 * Boundary: |dk/d ln L| / (2|k|L) estimates what the end of the layer sends back (dk/dθ = i dk/d ln L since only
 * L e^{iθ} matters). Algebra: rounding of the Rayleigh quotient, measured 1e-15 to 5e-15 of |k|.
 */
function errorParts(group: EigenGroup, discretizationError: number, check: LayerCheck, layer: LayerPlan): ErrorParts {
  const k = modulus(group.k);
  const length = layer.endRadius - layer.rimRadius;
  return {
    discretization: discretizationError,
    boundary: (check.sensitivity * k) / (2 * k * length),
    algebra: 1e-14 * k,
  };
}
