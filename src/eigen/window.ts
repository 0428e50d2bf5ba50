// Which eigenvalues lie in a window of the complex k plane?

import { complex, type Complex, modulus, type ComplexArray } from '../numerics/complex.ts';
import { gather } from './rayleigh.ts';
import { modesNear, squareDistance } from './krylov.ts';
import type { EigenCluster, EigenProblem, Inverse } from './problem.ts';

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
  /** Members closer than this (relative to |k|) belong to one cluster. */
  readonly clusterWidth: number;
  readonly seed: number;
  /** Called after each tile with the share of the window that is done; throws to stop. */
  readonly progress?: (done: number) => void;
}

/** A tile of the window with the factorization at its middle, which later steps use again. */
export interface Tile {
  readonly shift: Complex;
  readonly inverse: Inverse;
}

export interface WindowAnswer {
  /** Clusters with at least one member in the wedge. */
  readonly clusters: readonly (EigenCluster & { readonly tile: Tile })[];
  /** False when some tile could not be covered. */
  readonly covered: boolean;
  readonly tiles: number;
}

/**
 * Covers the wedge with discs about shifts and finds everything in each by block Arnoldi. A tile that cannot be covered
 * is halved, up to a depth of 6. Each cluster is taken from the tile that saw the most members of it.
 */
export function modesInWindow(problem: EigenProblem, request: WindowRequest): WindowAnswer {
  const { wedge } = request;
  const edges = tileEdges(request);
  const seen: Seen[] = [];
  let covered = true;
  let tiles = 0;
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
      seed: request.seed + tiles,
    });
    tiles++;
    if (!nearby.covered && nearby.dimension < problem.size && depth < 6) {
      visit(a, (a + b) / 2, depth + 1);
      visit((a + b) / 2, b, depth + 1);
      return;
    }
    covered &&= nearby.covered || nearby.dimension >= problem.size;
    const tile: Tile = { shift, inverse: nearby.inverse };
    nearby.ks.forEach((k, i) => {
      if (squareDistance(k, shift) <= radius * 1.2) seen.push({ k, i, tile, vectors: nearby.vectors });
    });
    request.progress?.((b - wedge.kMin) / (wedge.kMax - wedge.kMin));
  };
  for (let i = 0; i + 1 < edges.length; i++) visit(edges[i]!, edges[i + 1]!, 0);
  return { clusters: mergeTiles(problem.size, seen, request), covered, tiles };
}

interface Seen {
  readonly k: Complex;
  readonly i: number;
  readonly tile: Tile;
  readonly vectors: ComplexArray;
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

function mergeTiles(n: number, seen: readonly Seen[], request: WindowRequest): (EigenCluster & { tile: Tile })[] {
  const scale = request.wedge.kMax;
  const groups = gather(
    seen.map((s) => s.k),
    request.clusterWidth * scale,
  );
  const out: (EigenCluster & { tile: Tile })[] = [];
  for (const group of groups) {
    const byTile = new Map<Tile, Seen[]>();
    for (const i of group) {
      const s = seen[i]!;
      const list = byTile.get(s.tile);
      if (list) list.push(s);
      else byTile.set(s.tile, [s]);
    }
    let best: Seen[] = [];
    for (const list of byTile.values()) {
      const better =
        list.length > best.length ||
        (list.length === best.length &&
          squareDistance(list[0]!.k, list[0]!.tile.shift) < squareDistance(best[0]!.k, best[0]!.tile.shift));
      if (better) best = list;
    }
    if (!best.some((s) => wedgeHolds(request.wedge, s.k))) continue;
    const vectors = new Float64Array(2 * n * best.length);
    best.forEach((s, j) => vectors.set(s.vectors.subarray(2 * n * s.i, 2 * n * (s.i + 1)), 2 * n * j));
    out.push({ ks: best.map((s) => s.k), vectors, tile: best[0]!.tile });
  }
  return out.sort((a, b) => a.ks[0]!.re - b.ks[0]!.re || modulus(a.ks[0]!) - modulus(b.ks[0]!));
}
