// Which eigenvalues lie in a window of the complex k plane?

import { complex, type Complex, type ComplexArray } from '../numerics/complex.ts';
import { modesNear, squareDistance } from './krylov.ts';
import type { EigenProblem, Inverse } from './problem.ts';
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
  /** Modes wanted a tile. */
  readonly perTile: number;
  readonly tolerance: number;
  readonly seed: number;
  /** Called after each tile with the share of the window that is done; throws to stop. */
  readonly progress?: (done: number) => void;
}

/** A disc of the window, all eigenpairs seen in it, and the factorization at its middle, which later steps use again. */
export interface Tile {
  readonly shift: Complex;
  /** In k²: |k² − shift²| ≤ radius is covered. */
  readonly radius: number;
  readonly inverse: Inverse;
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
 * Covers the wedge with discs about shifts and finds everything in each by block Arnoldi. A tile that cannot be covered
 * is halved, up to a depth of 6. Discs overlap: `ownGroups` tells which tile answers for which mode.
 */
export function modesInWindow(problem: EigenProblem, request: WindowRequest): WindowAnswer {
  const { wedge } = request;
  const edges = tileEdges(request);
  const tiles: Tile[] = [];
  let covered = true;
  let tries = 0;
  const visit = (a: number, b: number, depth: number): void => {
    const shift = tileShift(wedge, a, b);
    const radius = tileRadius(wedge, a, b, shift) * 1.02;
    const nearby = modesNear(problem, {
      shift,
      level: request.level,
      radius,
      block: 3,
      largestDimension: 40 + 5 * request.perTile,
      tolerance: request.tolerance,
      seed: request.seed + tries++,
    });
    if (!nearby.covered && nearby.dimension < problem.size && depth < 6) {
      visit(a, (a + b) / 2, depth + 1);
      visit((a + b) / 2, b, depth + 1);
      return;
    }
    covered &&= nearby.covered || nearby.dimension >= problem.size;
    tiles.push({ shift, radius, inverse: nearby.inverse, ks: nearby.ks, vectors: nearby.vectors });
    request.progress?.((b - wedge.kMin) / (wedge.kMax - wedge.kMin));
  };
  for (let i = 0; i + 1 < edges.length; i++) visit(edges[i]!, edges[i + 1]!, 0);
  return { tiles, covered };
}

/** A group of modes and the tile it was taken from. */
export interface OwnedGroup {
  readonly group: EigenGroup;
  readonly tile: number;
}

/**
 * One row for every group seen by any tile: where discs overlap, the tile that saw the highest multiplicity answers,
 * and among equals the one whose shift is nearest. `width` is the absolute distance within which groups are the same.
 */
export function ownGroups(tiles: readonly Tile[], groups: readonly (readonly EigenGroup[])[], width: number): OwnedGroup[] {
  const all = groups.flatMap((list, tile) =>
    list
      .filter((g) => squareDistance(g.k, tiles[tile]!.shift) <= 1.05 * tiles[tile]!.radius)
      .map((group) => ({ group, tile })),
  );
  const same = gather(
    all.map((g) => g.group.k),
    width,
  );
  return same
    .flatMap((indices) => {
      const members = indices.map((i) => all[i]!);
      const count = (tile: number): number =>
        members.reduce((sum, g) => sum + (g.tile === tile ? g.group.multiplicity : 0), 0);
      const distance = (g: OwnedGroup): number => squareDistance(g.group.k, tiles[g.tile]!.shift);
      const best = members.reduce((a, b) => {
        const more = count(b.tile) - count(a.tile);
        return more > 0 || (more === 0 && distance(b) < distance(a)) ? b : a;
      });
      return members.filter((g) => g.tile === best.tile);
    })
    .sort((a, b) => a.group.k.re - b.group.k.re);
}

/** Tiles of about `perTile` modes each, and no wider than 0.6 of their middle k. */
function tileEdges(request: WindowRequest): number[] {
  const { wedge, expected, perTile } = request;
  const edges = [wedge.kMin];
  while (edges[edges.length - 1]! < wedge.kMax * (1 - 1e-12)) {
    const a = edges[edges.length - 1]!;
    let b = Math.min(wedge.kMax, a * 1.8);
    for (let step = 0; step < 30 && expected(a, b) > perTile; step++) b = a + (b - a) * 0.8;
    edges.push(b > wedge.kMax - 0.3 * (b - a) ? wedge.kMax : b);
  }
  return edges;
}

/** Middle of the tile's bounding box; nudged off the real axis so that the matrix is never singular on it. */
function tileShift(wedge: Wedge, a: number, b: number): Complex {
  const re = (a + b) / 2;
  const im = ((wedge.high - wedge.low) * re) / 2;
  return complex(re * 1.0007, im === 0 ? 1e-4 * re : im);
}

function tileRadius(wedge: Wedge, a: number, b: number, shift: Complex): number {
  let radius = 0;
  for (const re of [a, b]) {
    for (const slope of [-wedge.low, wedge.high]) {
      radius = Math.max(radius, squareDistance(complex(re, slope * re), shift));
    }
  }
  return radius;
}
