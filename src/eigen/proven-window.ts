// Which eigenvalues lie in a window, with a proof that none is missing?

import { add, type Complex, modulus, multiply, scale, subtract } from '../numerics/complex.ts';
import { type Contour, doubleContour, judge, type LogDeterminant, sampleContour, type Verdict } from './count.ts';
import { modesNear, squareDistance } from './krylov.ts';
import type { EigenProblem } from './problem.ts';
import { type EigenGroup, gather, rayleighGroups } from './rayleigh.ts';
import { modesInWindow, ownGroups, type Tile, type Wedge, wedgeHolds, type WindowRequest } from './window.ts';

export interface ProvenRequest extends WindowRequest {
  /** Of a problem with the same eigenvalues but for a little: an open boundary of another kind, say. */
  readonly logDeterminant: LogDeterminant;
  /** Absolute distance within which eigenvalues form one group. */
  readonly groupWidth: number;
  /** Eigenvalues of this problem that the other does not have. */
  readonly isForeign: (group: EigenGroup) => boolean;
  /** The first search; `modesInWindow` if absent. */
  readonly find?: typeof modesInWindow;
  /** Most points of a contour. */
  readonly mostPoints?: number;
  /** Doubles the points once more when a contour is settled. */
  readonly doubled?: boolean;
}

/** What the count knows of the discs of a window. */
export interface WindowProof {
  readonly contours: readonly Contour[];
  /** Every member seen anywhere, and where the count places those that no search has seen. */
  readonly known: readonly Complex[];
  /** Points of all contours: factorizations spent on the count. */
  readonly points: number;
  /** Searches that a mismatch has started. */
  readonly searchedAgain: number;
}

export interface ProvenWindow {
  readonly tiles: readonly Tile[];
  /** Every tile's search came to its end. */
  readonly covered: boolean;
  readonly proof: WindowProof;
}

/** What the contours say of a list of eigenvalues. */
export interface CountVerdict {
  readonly proven: boolean;
  /** Places of eigenvalues that are not in the list. */
  readonly missing: readonly Complex[];
  /** Eigenvalues that the list has too many, all contours together. */
  readonly surplus: number;
  /** Worst over the contours. */
  readonly deviation: number;
  readonly points: number;
}

const FIRST_POINTS = 16;
const MOST_POINTS = 128;

/** Times that a mismatch may start another search. */
const MOST_ROUNDS = 4;

/** Candidates beyond this many radii do not matter: the fit takes them. */
const FAR = 4;

/** A contour may be this much wider than its tile needs, to keep clear of eigenvalues. */
const WIDEST = 1.25;

/**
 * `modesInWindow`, then a count in the disc of every tile by the other problem's determinant. Where it finds more, the
 * tile is searched again about the place with as many columns as there are modes, and counted again with the same
 * factorizations. Tiles added so stand behind the others.
 */
export function provenWindow(problem: EigenProblem, request: ProvenRequest): ProvenWindow {
  const { logDeterminant, wedge } = request;
  const found = (request.find ?? modesInWindow)(problem, request);
  const tiles = [...found.tiles];
  const groups = tiles.map((t) => groupsOf(problem, request, t));
  const extra: Complex[] = [];
  let known = members(tiles, groups, request);
  let searchedAgain = 0;

  const first = found.tiles.map((tile) => {
    let contour = sampleContour(logDeterminant, circleOf(tile, known), FIRST_POINTS, START);
    for (let round = 0; ;) {
      const list = [...known, ...extra];
      const verdict = resolved(contour, list);
      if (verdict.proven) break;
      if (!verdict.settled && contour.logs.length < (request.mostPoints ?? MOST_POINTS)) {
        contour = doubleContour(logDeterminant, contour);
        continue;
      }
      if (verdict.missing <= 0 || round++ >= MOST_ROUNDS) break;
      const places = verdict.settled ? verdict.places : [];
      const outside = places.filter((k) => !nearWedge(wedge, k));
      const inside = places.filter((k) => nearWedge(wedge, k));
      if (places.length > 0 && inside.length === 0) {
        extra.push(...outside);
        continue;
      }
      for (const again of searchAgain(problem, request, tile, inside, known, verdict.missing, round)) {
        tiles.push(again);
        groups.push(groupsOf(problem, request, again));
        searchedAgain++;
      }
      known = members(tiles, groups, request);
    }
    return request.doubled ? doubleContour(logDeterminant, contour) : contour;
  });
  // a circle drawn before all was known may run through a cluster: such a one is drawn anew
  let spent = 0;
  const contours = first.map((contour, i) => {
    const list = [...known, ...extra];
    if (resolved(contour, list).proven) return contour;
    spent += contour.logs.length;
    let again = sampleContour(logDeterminant, circleOf(found.tiles[i], list, Infinity), FIRST_POINTS, START);
    while (!resolved(again, list).proven && again.logs.length < (request.mostPoints ?? MOST_POINTS))
      again = doubleContour(logDeterminant, again);
    return again;
  });
  const points = spent + contours.reduce((sum, c) => sum + c.logs.length, 0);
  const proof = { contours, known: [...known, ...extra], points, searchedAgain };
  return { tiles, covered: found.covered, proof };
}

/** Angle of the first point: on no symmetry of a window. */
const START = 0.1;

/** Judges a list, one eigenvalue a member, those outside the contours included, with the factorizations of a proof. */
export function judgeAll(proof: WindowProof, list: readonly Complex[]): CountVerdict {
  const missing: Complex[] = [];
  let surplus = 0;
  let deviation = 0;
  let proven = true;
  for (const contour of proof.contours) {
    const verdict = resolved(contour, list);
    proven &&= verdict.proven;
    deviation = Math.max(deviation, verdict.deviation);
    surplus += Math.max(0, -verdict.missing);
    // discs overlap: what two of them miss is one
    const others = missing.length;
    for (const k of verdict.places) {
      if (!missing.slice(0, others).some((m) => modulus(subtract(m, k)) < SAME_PLACE * modulus(k))) missing.push(k);
    }
  }
  return { proven, missing, surplus, deviation, points: proof.points };
}

/** Places from two contours closer than this share of |k| are one. */
const SAME_PLACE = 0.01;

/**
 * A verdict that says besides whether the contour is settled: with the missing ones put in their places nothing is left.
 * Its deviation is then the one with them.
 */
function resolved(contour: Contour, list: readonly Complex[]): Verdict & { readonly settled: boolean } {
  const near = list.filter((k) => squareDistanceTo(contour.circle.center, k) < FAR * contour.circle.radius);
  const verdict = judge(contour, near);
  if (verdict.missing <= 0 || verdict.places.length === 0) return { ...verdict, settled: verdict.proven };
  const whole = judge(contour, [...near, ...verdict.places]);
  return { ...verdict, deviation: whole.deviation, settled: whole.proven };
}

const squareDistanceTo = (center: Complex, k: Complex): number => modulus(subtract(multiply(k, k), center));

function groupsOf(problem: EigenProblem, request: ProvenRequest, tile: Tile): EigenGroup[] {
  if (tile.ks.length === 0) return [];
  return rayleighGroups(problem, tile.shift, request.level, tile.vectors, tile.ks.length, request.groupWidth, false);
}

/** One number a member of every group that any tile has seen, in its disc or beyond. */
function members(
  tiles: readonly Tile[],
  groups: readonly (readonly EigenGroup[])[],
  request: ProvenRequest,
): Complex[] {
  return ownGroups(tiles, groups, request.groupWidth, Infinity)
    .map((o) => o.group)
    .filter((group) => !request.isForeign(group))
    .flatMap(({ k, multiplicity }) => Array.from({ length: multiplicity }, () => k));
}

/** Low k are served badly by the layer and lie by the branch point: a wider contour keeps this share from zero. */
const CLEAR_OF_ZERO = 0.8;

/** A gap of this share of the radius is enough. */
const CLEAR = 0.06;

/**
 * The circle that holds the tile's part of the window and keeps farthest, relative to its radius, from what is known. It
 * does not go beyond what the search has seen to the end.
 */
function circleOf(tile: Tile, known: readonly Complex[], seen = seenBy(tile)): { center: Complex; radius: number } {
  const { shift, radius } = tile;
  const center = multiply(shift, shift);
  const widest = Math.max(radius, Math.min(WIDEST * radius, 0.99 * seen, CLEAR_OF_ZERO * modulus(center)));
  const distances = known.map((k) => squareDistance(k, shift));
  let best = radius;
  let gap = -1;
  for (let i = 0; i <= 24; i++) {
    const r = radius * (widest / radius) ** (i / 24);
    const own = Math.min(...distances.map((d) => Math.abs(Math.log(d / r))));
    if (own > gap) {
      gap = own;
      best = r;
    }
    if (gap >= CLEAR) break;
  }
  return { center, radius: best };
}

const seenBy = ({ ks, shift, radius }: Tile): number =>
  ks.reduce((most, k) => Math.max(most, squareDistance(k, shift)), radius);

/** Places closer to the window than this share of |k| count as in it. */
const EDGE = 0.01;

const nearWedge = ({ kMin, kMax, low, high }: Wedge, k: Complex): boolean =>
  wedgeHolds({ kMin: kMin * (1 - EDGE), kMax: kMax * (1 + EDGE), low: low + EDGE, high: high + EDGE }, k);

/** Missing modes closer than this share of |k| are searched together. */
const TOGETHER = 0.02;

/** Most columns a search may start with. */
const WIDEST_BLOCK = 96;

/**
 * Searches with other seeds and more columns: about each cluster of missing places, with a column for every mode there
 * and some more; or the whole tile where there are no places.
 */
function searchAgain(
  problem: EigenProblem,
  request: ProvenRequest,
  tile: Tile,
  places: readonly Complex[],
  known: readonly Complex[],
  missing: number,
  round: number,
): Tile[] {
  const look = (shift: Complex, radius: number, wanted: number): Tile => {
    const block = Math.min(WIDEST_BLOCK, wanted + 2 + 2 * round);
    const { ks, vectors } = modesNear(problem, {
      shift,
      level: request.level,
      radius,
      block,
      largestDimension: Math.max(40 + 5 * request.perTile, 14 * block),
      tolerance: request.tolerance,
      seed: request.seed + 7919 * round,
    });
    return { shift, radius, ks, vectors };
  };
  if (places.length === 0) return [look(tile.shift, tile.radius, 3 + missing)];
  return gather(places, TOGETHER * modulus(tile.shift)).map((indices) => {
    const cluster = indices.map((i) => places[i]);
    const middle = scale(
      cluster.reduce((a, b) => add(a, b)),
      1 / cluster.length,
    );
    // beside the cluster: a shift on an eigenvalue would blind the solver to all others
    const shift = scale(middle, 1 + 3e-3);
    const reach = Math.max(...cluster.map((k) => squareDistance(k, shift)));
    const radius = 2 * Math.max(reach, 4e-3 * modulus(multiply(shift, shift)));
    const beside = known.filter((k) => squareDistance(k, shift) <= radius).length;
    return look(shift, radius, beside + cluster.length);
  });
}
