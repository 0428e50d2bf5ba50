// Which eigenvalues lie in a window of the complex k plane?

import { complex, type Complex, type ComplexArray } from '../numerics/complex.ts';
import { modesNear, squareDistance } from './krylov.ts';
import type { EigenProblem } from './problem.ts';
import { type EigenGroup, gather } from './rayleigh.ts';

/** k with Re in [kMin, kMax] and Im between −low·Re and +high·Re. */
export interface Wedge {
  readonly kMin: number;
  readonly kMax: number;
  readonly low: number;
  readonly high: number;
}

export const wedgeHolds = (wedge: Wedge, k: Complex): boolean =>
  k.re >= wedge.kMin && k.re <= wedge.kMax && k.im >= -wedge.low * k.re && k.im <= wedge.high * k.re;

export interface WindowRequest {
  readonly wedge: Wedge;
  readonly level: number;
  /** Expected number of eigenvalues with real k in [a, b]: sets the size of the tiles. */
  readonly expected: (a: number, b: number) => number;
  /** Largest number of modes expected in a tile's disc. */
  readonly perTile: number;
  readonly tolerance: number;
  readonly seed: number;
  /** Called after each tile with the share of the window that is done; throws to stop. */
  readonly progress?: (done: number) => void;
}

/** A disc of the window and all eigenpairs seen in it. */
export interface Tile {
  readonly shift: Complex;
  /** In k²: |k² − shift²| ≤ radius is covered. */
  readonly radius: number;
  /** Converged pairs, some beyond the disc, nearest to the shift first. */
  readonly ks: readonly Complex[];
  /** size × ks.length. */
  readonly vectors: ComplexArray;
}

export interface WindowAnswer {
  readonly tiles: readonly Tile[];
  /** False when some tile could not be covered. */
  readonly covered: boolean;
}

/**
 * Covers the wedge with discs about shifts and finds everything in each by block Arnoldi. The wedge is cut along its
 * longer side until a disc is expected to hold few modes, and again where a disc could not be covered. Discs overlap:
 * `ownGroups` tells which tile answers for which mode.
 */
export function modesInWindow(problem: EigenProblem, request: WindowRequest): WindowAnswer {
  const { wedge, expected, perTile } = request;
  const tiles: Tile[] = [];
  let covered = true;
  let tries = 0;
  const visit = (part: Wedge, depth: number, failures: number): void => {
    const shift = tileShift(part);
    const radius = tileRadius(part, shift) * 1.02;
    const center = shift.re * shift.re - shift.im * shift.im;
    const count = expected(Math.sqrt(Math.max(0, center - radius)), Math.sqrt(center + radius));
    const crowded = count > perTile && radius > 0.02 * center;
    if (depth < 10 && (crowded || radius > LARGEST_SHARE * distanceToCut(shift))) {
      for (const half of cut(part)) visit(half, depth + 1, failures);
      return;
    }
    const nearby = modesNear(problem, {
      shift,
      level: request.level,
      radius,
      block: BLOCK,
      largestDimension: 40 + 5 * perTile,
      tolerance: request.tolerance,
      seed: request.seed + tries++,
    });
    if (!nearby.covered && nearby.dimension < problem.size && failures < MOST_FAILURES) {
      for (const half of cut(part)) visit(half, depth + 1, failures + 1);
      return;
    }
    covered &&= nearby.covered || nearby.dimension >= problem.size;
    tiles.push({ shift, radius, ks: nearby.ks, vectors: nearby.vectors });
    request.progress?.((part.kMax - wedge.kMin) / (wedge.kMax - wedge.kMin));
  };
  visit(wedge, 0, 0);
  return { tiles, covered };
}

/** Largest radius of a disc as a share of its distance to the cut: a contour about it must stay where Re k > 0. */
const LARGEST_SHARE = 0.95;

/** How far the shift is, in k², from the negative real axis, where k = √(k²) jumps. */
function distanceToCut(shift: Complex): number {
  const re = shift.re * shift.re - shift.im * shift.im;
  const im = 2 * shift.re * shift.im;
  return re > 0 ? Math.hypot(re, im) : Math.abs(im);
}

/** Times a tile may be cut because its disc could not be covered. */
const MOST_FAILURES = 4;

/** Columns that Arnoldi starts with: exact pairs and a third by accident are seen at once. */
const BLOCK = 3;

/** A group of modes and the tile it was taken from. */
export interface OwnedGroup {
  readonly group: EigenGroup;
  readonly tile: number;
}

/**
 * One row for every group seen by any tile: where discs overlap, the tile that saw the highest multiplicity answers,
 * and among equals the one whose shift is nearest. `width` is the absolute distance within which groups are the same;
 * groups farther from their shift than `within` radii are left out.
 */
export function ownGroups(
  tiles: readonly Tile[],
  groups: readonly (readonly EigenGroup[])[],
  width: number,
  within = 1.05,
): OwnedGroup[] {
  const all = groups.flatMap((list, tile) =>
    list
      .filter((g) => squareDistance(g.k, tiles[tile].shift) <= within * tiles[tile].radius)
      .map((group) => ({ group, tile })),
  );
  const same = gather(
    all.map((g) => g.group.k),
    width,
  );
  return same
    .flatMap((indices) => {
      const members = indices.map((i) => all[i]);
      const count = (tile: number): number =>
        members.reduce((sum, g) => sum + (g.tile === tile ? g.group.multiplicity : 0), 0);
      const distance = (g: OwnedGroup): number => squareDistance(g.group.k, tiles[g.tile].shift);
      const best = members.reduce((a, b) => {
        const more = count(b.tile) - count(a.tile);
        return more > 0 || (more === 0 && distance(b) < distance(a)) ? b : a;
      });
      return members.filter((g) => g.tile === best.tile);
    })
    .sort((a, b) => a.group.k.re - b.group.k.re);
}

/** Two halves of a wedge, cut along its longer side. */
function cut(part: Wedge): Wedge[] {
  const { kMin, kMax, low, high } = part;
  if (kMax - kMin >= ((low + high) * (kMin + kMax)) / 2) {
    const middle = (kMin + kMax) / 2;
    return [
      { ...part, kMax: middle },
      { ...part, kMin: middle },
    ];
  }
  const middle = (high - low) / 2;
  return [
    { ...part, low: -middle },
    { ...part, high: middle },
  ];
}

/** Middle of the tile; nudged so that a symmetric window does not put it on an eigenvalue. */
function tileShift({ kMin, kMax, low, high }: Wedge): Complex {
  const re = (kMin + kMax) / 2;
  const im = ((high - low) * re) / 2;
  return complex(re * 1.0007, im === 0 ? 1e-4 * re : im);
}

function tileRadius({ kMin, kMax, low, high }: Wedge, shift: Complex): number {
  let radius = 0;
  for (const re of [kMin, kMax]) {
    for (const slope of [-low, high]) {
      radius = Math.max(radius, squareDistance(complex(re, slope * re), shift));
    }
  }
  return radius;
}
