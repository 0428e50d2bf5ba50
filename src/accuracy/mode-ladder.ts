// Which modes lie in a window, and how far may each be off?

import { embed } from '../elements/space.ts';
import { residualStep } from '../eigen/improve.ts';
import { settleGroup } from '../eigen/own-shift.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import {
  modesInWindow,
  type OwnedGroup,
  ownGroups,
  type Tile,
  type Wedge,
  wedgeHolds,
  type WindowAnswer,
  type WindowRequest,
} from '../eigen/window.ts';
import { type LayerPlan, returnedAt } from '../boundary/stretched-layer.ts';
import { type Complex, modulus, subtract } from '../numerics/complex.ts';
import type { DeviceFamily } from '../operator/device-family.ts';
import { checkLayer, LAYER_MODE_SENSITIVITY, type LayerCheck } from './layer-check.ts';
import type { Mesh, SizeWish } from '../mesh/mesh.ts';
import { smallestExponent } from './corner-exponent.ts';
import { degreeEnergies } from './degree-energies.ts';
import { type Limits, type Stop, stopBefore } from './memory.ts';
import { type ModePicture, planRefinement, type Strategy } from './refinement-plan.ts';
import { HIGHEST_ORDER } from './resolution.ts';
import { remainingStep } from './remaining-step.ts';

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

/** A mesh of the device, ready for any distribution of orders, and how to get a finer one. */
export interface Ground<G> {
  readonly mesh: Mesh;
  /** A(k, level) with triangle t at order orders[t] + raise. The same array gives the same matrices again. */
  family(orders: Int32Array, raise: 0 | 1): DeviceFamily;
  /** The device meshed anew, with smaller triangles where they are wished for and where they were before. */
  remeshed(wishes: readonly SizeWish[]): G;
  /** The orders of another mesh, place by place. */
  ordersFrom(other: Mesh, orders: Int32Array): Int32Array;
}

export interface ModeSearch<G> {
  readonly modes: readonly FoundMode[];
  /** What was seen in the window and not taken, with the reason. */
  readonly dropped: readonly { readonly k: Complex; readonly reason: string }[];
  /** False when some part of the window could not be searched to the end. */
  readonly covered: boolean;
  /** Mesh and orders that the modes are given on; their errors come from one order more everywhere. */
  readonly ground: G;
  readonly orders: Int32Array;
  /** True when every error is below its goal. */
  readonly reached: boolean;
  /** What kept it from that, null when reached. */
  readonly stopped: Stop | null;
}

export interface ModeSearchRequest {
  readonly wedge: Wedge;
  readonly level: number;
  readonly digits: number;
  readonly layer: LayerPlan;
  readonly expected: (a: number, b: number) => number;
  /** Counts what a search has found, and searches again where the count finds more; for the last mesh. */
  readonly prove?: (problem: DeviceFamily, request: WindowRequest, found: WindowAnswer) => WindowAnswer;
  readonly strategy?: Strategy;
  /** Absolute error allowed for a mode; 10^−digits of |k| if absent. */
  readonly goal?: (group: EigenGroup) => number;
  /** Takes what the tiles hold beyond the wedge, too. */
  readonly neighbours?: boolean;
  readonly limits?: Limits;
  readonly progress?: (stage: string, done: number) => void;
}

/** Modes of one tile seek; more make longer recurrences, fewer more factorizations. */
const MODES_PER_TILE = 22;

/** Relative residual at which a Krylov pair counts as found; block Rayleigh squares it. */
const KRYLOV_TOLERANCE = 1e-9;

const SEED = 20260;

/** Sum of the parts. */
export const totalError = (error: ErrorParts): number => error.discretization + error.boundary + error.algebra;

/**
 * Absolute distance at which modes are treated as one group from the start: what the discretisation may split a
 * degenerate pair by, but never so much that modes of one family merge. Rows that the errors cannot tell apart are
 * joined at the end.
 */
export const groupWidth = (digits: number, k: number): number => Math.min(10 * 10 ** -digits, 1e-4) * k;

/**
 * Searches at a low order, then refines triangle by triangle: the decay of a mode's hierarchical parts says which order
 * each triangle needs and where smaller ones are better (refinement-plan.ts). All vectors of a tile are carried to the
 * new orders and improved there by inverse iteration on its residual as one space, then to one order more everywhere:
 * the step, with the tail that the decay foretells, is the error. A new mesh is searched anew.
 */
export function climbModes<G extends Ground<G>>(start: G, request: ModeSearchRequest): ModeSearch<G> {
  const { wedge, level, digits, progress, limits = {} } = request;
  const strategy = request.strategy ?? DEFAULT_STRATEGY;
  const goalOf = request.goal ?? ((group: EigenGroup): number => 10 ** -digits * modulus(group.k));
  const width = groupWidth(digits, wedge.kMax);
  const groupsAt = (at: DeviceFamily, list: readonly Tile[]): EigenGroup[][] =>
    list.map((t) => rayleighGroups(at, t.shift, level, t.vectors, t.ks.length, width));
  const inWindow = (list: readonly Tile[], of: readonly EigenGroup[][]): OwnedGroup[] =>
    ownGroups(list, of, width).filter((o) => request.neighbours === true || wedgeHolds(wedge, o.group.k));
  const pictures = (family: DeviceFamily, seen: readonly OwnedGroup[]): ModePicture[] =>
    seen
      .filter(({ group }) => goalOf(group) < Infinity)
      .map(({ group }) => ({
        parts: degreeEnergies(family, group.k, level, group.vectors, group.multiplicity),
        goal: goalOf(group),
        outside: 10 ** -digits,
        exponent: smallestExponent(ground.mesh, family.weights(group.k, level, 'value')),
      }));

  let ground = start;
  let orders: Int32Array = new Int32Array(ground.mesh.regions.length).fill(SEARCH_ORDER);
  for (let meshes = 1; ; meshes++) {
    const mayRemesh = meshes < MOST_MESHES;
    // 1 search at a low order
    const searched = orders.map((p) => Math.min(p + 1, SEARCH_ORDER));
    let from = ground.family(searched, 0);
    const window: WindowRequest = {
      wedge: widened(wedge),
      level,
      expected: request.expected,
      perTile: MODES_PER_TILE,
      tolerance: KRYLOV_TOLERANCE,
      seed: SEED,
      progress: (done) => progress?.('searching', done),
    };
    let found = modesInWindow(from, window);
    let tiles: readonly Tile[] = found.tiles;
    let seen = inWindow(tiles, groupsAt(from, tiles));
    let plan = planRefinement(ground.mesh, searched, pictures(from, seen), strategy);
    if (plan.wishes.length > 0 && mayRemesh && !stopBefore(limits, ground.mesh, plan.orders)) {
      progress?.('meshing', 0);
      const finer = ground.remeshed(plan.wishes);
      orders = finer.ordersFrom(ground.mesh, plan.orders);
      ground = finer;
      continue;
    }

    // 2 what the count finds besides
    if (request.prove) {
      found = request.prove(from, window, found);
      tiles = found.tiles;
      seen = inWindow(tiles, groupsAt(from, tiles));
      plan = planRefinement(ground.mesh, searched, pictures(from, seen), strategy);
    }
    let { covered } = found;

    // 3 orders raised (and lowered) until the errors are small enough
    orders = plan.orders;
    for (;;) {
      const here = ground.family(orders, 0);
      const up = ground.family(orders, 1);
      const raised = orders.map((p) => p + 1);
      tiles = liftAll(from, here, tiles, request, width);
      const groups = groupsAt(here, tiles);
      covered &&= seen.every((o) => stillThere(o.group, groups[o.tile]));
      const higher = liftAll(here, up, tiles, request, width);
      const groupsUp = groupsAt(up, higher);
      const owned = inWindow(tiles, groups);
      covered &&= owned.every((o) => stillThere(o.group, groupsUp[o.tile]));
      const goal = 10 ** -digits;
      const rows = owned.flatMap((o) => rowsOf({ here, up, level }, goal, o.group, groupsUp[o.tile]));
      const reached = rows.every((row) => row.error <= goalOf(row.group));
      let stopped: Stop | null = null;
      if (!reached) {
        const seenUp = inWindow(higher, groupsUp);
        plan = planRefinement(ground.mesh, raised, pictures(up, seenUp), strategy);
        // never down: a plan that lowers what the last one raised would go round for ever
        const planned = plan.orders.map((p, t) => Math.max(p, orders[t]));
        const next = planned.some((p, t) => p > orders[t]) ? planned : raised;
        const top = next.reduce((a, b) => Math.max(a, b), 0);
        stopped = stopBefore(limits, ground.mesh, next) ?? (top >= HIGHEST_ORDER ? 'order' : null);
        seen = owned;
        from = up;
        tiles = higher;
        if (!stopped && plan.wishes.length > 0 && mayRemesh) {
          progress?.('meshing', 0);
          const finer = ground.remeshed(plan.wishes);
          orders = finer.ordersFrom(ground.mesh, plan.orders);
          ground = finer;
          break;
        }
        if (!stopped) orders = next;
      }
      if (reached || stopped) {
        return { ...takeRows(here, rows, request), covered, ground, orders, reached, stopped };
      }
    }
  }
}

/** Modes of the device, with what was seen and belongs to the layer. */
function takeRows(
  here: DeviceFamily,
  rows: readonly LadderRow[],
  { layer, level }: ModeSearchRequest,
): Pick<ModeSearch<never>, 'modes' | 'dropped'> {
  const modes: FoundMode[] = [];
  const dropped: { k: Complex; reason: string }[] = [];
  for (const { group: found, error } of rows) {
    const group = here.terms > 2 ? settleGroup(here, level, found) : found;
    const { k, vectors, multiplicity } = group;
    const check = checkLayer(here, layer, k, level, vectors, multiplicity);
    if (check.sensitivity > LAYER_MODE_SENSITIVITY) {
      dropped.push({
        k,
        reason: `moves with the layer's angle (|dk/dθ|/|k| = ${check.sensitivity.toExponential(1)})`,
      });
      continue;
    }
    modes.push({ group, layer: check, error: errorParts(group, error, layer) });
  }
  return { modes: joinUnresolved(modes), dropped };
}

/** Order leads where fields are smooth, size at corners. */
export const DEFAULT_STRATEGY: Strategy = { highestOrder: HIGHEST_ORDER - 1, cornerOrder: 4 };

/** Meshes that may be made for one search. */
const MOST_MESHES = 8;

/**
 * Order of the search itself: low, since Krylov works on all unknowns, high enough that every mode shows and none is
 * confused; the tile's space is then improved as a whole in the orders wanted.
 */
const SEARCH_ORDER = 5;

/** The search is coarse: a mode may enter the window as the order rises. */
const widened = ({ kMin, kMax, low, high }: Wedge): Wedge => ({
  kMin: kMin * (1 - 1e-3),
  kMax: kMax * (1 + 1e-3),
  low: low * 1.01,
  high: high * 1.01,
});

function liftAll(
  from: DeviceFamily,
  to: DeviceFamily,
  tiles: readonly Tile[],
  request: ModeSearchRequest,
  width: number,
): Tile[] {
  return tiles.map((tile, i) => {
    request.progress?.(`order ${to.operator.space.order}`, i / tiles.length);
    return lift(from, to, tile, request, width);
  });
}

/** Most steps a lift may take. */
const LIFT_STEPS = 8;

/**
 * The tile's space in another order, improved there as one space until its eigenvalues in the window stand still. By
 * residuals: plain inverse iteration would turn all columns towards the mode nearest to the shift.
 */
function lift(from: DeviceFamily, to: DeviceFamily, tile: Tile, request: ModeSearchRequest, width: number): Tile {
  const { level, digits, wedge } = request;
  const columns = tile.ks.length;
  const inverse = to.factorize(tile.shift, level);
  let vectors = embed(to.operator.space, from.operator.space, tile.vectors, columns);
  let before: EigenGroup[] = [];
  for (let step = 0; step < LIFT_STEPS; step++) {
    vectors = residualStep(to, inverse, tile.shift, level, vectors, columns);
    if (step === 0) continue;
    const groups = rayleighGroups(to, tile.shift, level, vectors, columns, width, false).filter((g) =>
      wedgeHolds(wedge, g.k),
    );
    const still = groups.every((g) =>
      before.some((b) => modulus(subtract(b.k, g.k)) <= 0.01 * 10 ** -digits * modulus(g.k)),
    );
    if (still) break;
    before = groups;
  }
  inverse.release();
  return { ...tile, vectors };
}

/** From the search on no mode moves by more than this share of |k| with the order (measured: 1e-3); farther, it was lost. */
const LARGEST_MOVE = 0.02;

const stillThere = (group: EigenGroup, higher: readonly EigenGroup[]): boolean =>
  discretization(group, higher) <= LARGEST_MOVE * modulus(group.k);

/** Two spaces, the second one order higher everywhere. */
interface Rungs {
  readonly here: DeviceFamily;
  readonly up: DeviceFamily;
  readonly level: number;
}

/** A row of the answer with what the next order says of it. */
interface LadderRow {
  readonly group: EigenGroup;
  readonly error: number;
}

/**
 * One row a group; or one a member, where the members stay apart by more than the goal whatever the order: then they are
 * modes of their own that the group width has caught, such as the pair of a slightly dented disk.
 */
function rowsOf(rungs: Rungs, goal: number, group: EigenGroup, higher: readonly EigenGroup[]): LadderRow[] {
  const { here, up, level } = rungs;
  const whole = { group, error: Math.max(discretization(group, higher), surplusOf(rungs, group, higher)) };
  if (group.multiplicity === 1 || group.spread <= goal * modulus(group.k)) return [whole];
  const same = sameMembers(group, higher);
  const vectors = new Float64Array(same.reduce((sum, g) => sum + g.vectors.length, 0));
  let at = 0;
  for (const g of same) {
    vectors.set(g.vectors, at);
    at += g.vectors.length;
  }
  const count = same.reduce((sum, g) => sum + g.multiplicity, 0);
  if (count !== group.multiplicity) return [whole];
  const [mean] = rayleighGroups(up, group.k, level, vectors, count, Infinity, false);
  if (!mean || Math.abs(mean.spread / group.spread - 1) > 0.2) return [whole];
  if (group.spread < 3 * modulus(subtract(mean.k, group.k))) return [whole];
  const parts = rayleighGroups(here, group.k, level, group.vectors, count, group.spread / 2);
  const partsUp = rayleighGroups(up, group.k, level, vectors, count, group.spread / 2, false);
  return parts.map((part) => ({
    group: part,
    error: Math.max(discretization(part, partsUp), surplusOf(rungs, part, partsUp)),
  }));
}

/** What the orders beyond may still move the group by; where the next order groups its members otherwise, twice the step. */
function surplusOf({ here, up, level }: Rungs, group: EigenGroup, higher: readonly EigenGroup[]): number {
  const same = sameMembers(group, higher);
  if (same.reduce((sum, g) => sum + g.multiplicity, 0) !== group.multiplicity) return 2 * discretization(group, higher);
  const vectors = new Float64Array(same.reduce((sum, g) => sum + g.vectors.length, 0));
  let at = 0;
  for (const g of same) {
    vectors.set(g.vectors, at);
    at += g.vectors.length;
  }
  return remainingStep(here, up, group.k, level, group.vectors, vectors, group.multiplicity);
}

/** The groups one order higher that hold as many members, nearest first. */
function sameMembers(group: EigenGroup, higher: readonly EigenGroup[]): EigenGroup[] {
  const near = [...higher].sort((a, b) => modulus(subtract(a.k, group.k)) - modulus(subtract(b.k, group.k)));
  const out: EigenGroup[] = [];
  let count = 0;
  for (const g of near) {
    if (count >= group.multiplicity) break;
    out.push(g);
    count += g.multiplicity;
  }
  return out;
}

/**
 * Distance to the same group one order higher; a group that has split there counts by its farthest part. Infinity where
 * members are missing there.
 */
function discretization(group: EigenGroup, higher: readonly EigenGroup[]): number {
  const same = sameMembers(group, higher);
  if (same.reduce((sum, g) => sum + g.multiplicity, 0) < group.multiplicity) return Infinity;
  return Math.max(group.spread, ...same.map((g) => modulus(subtract(g.k, group.k))));
}

/** Rows closer than their errors are one row: a cluster of higher multiplicity, its spread part of the error. */
function joinUnresolved(modes: readonly FoundMode[]): FoundMode[] {
  const out: FoundMode[] = [];
  for (const mode of modes) {
    const i = out.findIndex((m) => {
      const distance = modulus(subtract(m.group.k, mode.group.k));
      return distance <= Math.max(totalError(m.error), totalError(mode.error));
    });
    if (i < 0) out.push(mode);
    else out[i] = join(out[i], mode);
  }
  return out;
}

function join(a: FoundMode, b: FoundMode): FoundMode {
  const ma = a.group.multiplicity;
  const mb = b.group.multiplicity;
  const total = ma + mb;
  const mean = (x: Complex, y: Complex): Complex => ({
    re: (ma * x.re + mb * y.re) / total,
    im: (ma * x.im + mb * y.im) / total,
  });
  const k = mean(a.group.k, b.group.k);
  const spread = Math.max(
    modulus(subtract(a.group.k, k)) + a.group.spread,
    modulus(subtract(b.group.k, k)) + b.group.spread,
  );
  const vectors = new Float64Array(a.group.vectors.length + b.group.vectors.length);
  vectors.set(a.group.vectors);
  vectors.set(b.group.vectors, a.group.vectors.length);
  return {
    group: { k, spread, slope: mean(a.group.slope, b.group.slope), multiplicity: total, vectors },
    error: {
      discretization: Math.max(a.error.discretization, b.error.discretization, spread),
      boundary: Math.max(a.error.boundary, b.error.boundary),
      algebra: Math.max(a.error.algebra, b.error.algebra),
    },
    layer: a.layer.sensitivity >= b.layer.sensitivity ? a.layer : b.layer,
  };
}

/**
 * Boundary: what the end of the layer sends back, 2 exp(−2|k| n_b L sin(θ − |arg k|)), moves a pole by about that share
 * of its distance from its zero, 2|Im k|. Algebra: rounding of the Rayleigh quotient, measured 1e-15 to 5e-15 of |k|.
 */
function errorParts(group: EigenGroup, discretizationError: number, layer: LayerPlan): ErrorParts {
  const k = modulus(group.k);
  return {
    // an error as large as the number says that nothing is known
    discretization: Math.min(discretizationError, k),
    boundary: returnedAt(layer, group.k) * 2 * Math.abs(group.k.im),
    algebra: 1e-14 * k,
  };
}
