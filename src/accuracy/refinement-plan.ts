// Which triangles need a higher order, and where are smaller ones wanted?

import { cornerVertices } from '../mesh/corners.ts';
import { BACKGROUND, LAYER, type Mesh, type SizeWish } from '../mesh/mesh.ts';
import type { DegreeEnergies } from './degree-energies.ts';

/** Where order ends and size begins. */
export interface Strategy {
  /** A triangle that would need more is split instead. */
  readonly highestOrder: number;
  /** The same for triangles at corners, where fields are singular and order gains little. */
  readonly cornerOrder: number;
}

/** One mode (or group) as its hierarchical parts show it. */
export interface ModePicture {
  readonly parts: DegreeEnergies;
  /** Error of k that is allowed, absolute. */
  readonly goal: number;
  /** What the field outside may be off by, as a share of its energy. */
  readonly outside: number;
  /** Of the field at its worst corner: corner-exponent.ts. Decay at low degrees alone would promise too much. */
  readonly exponent: number;
}

export interface RefinementPlan {
  /** Order wanted for each triangle of the present mesh. */
  readonly orders: Int32Array;
  /** Smaller triangles wanted; none where orders suffice. */
  readonly wishes: readonly SizeWish[];
}

/**
 * What the plan may leave out, in goals. The functions of lower degree make up for most of what a cut leaves out: measured
 * on disks, clusters and polygons, the error is a thirtieth to a hundredth of that sum.
 */
const AIM = 6;

/** Orders that may be added at once beyond the highest degree seen: farther, decay cannot be foretold. */
const largestRaise = (top: number): number => Math.min(4, top - 1);

/** Degrees that must have been seen before a size is chosen by their decay. */
const LEAST_SEEN = 4;

/** No triangle has less: below, condensed interiors and shared edges leave nothing to save. */
const LOWEST_ORDER = 2;

/**
 * What any field needs on triangles of the full size, a good half wavelength, so that a mode which the search has missed
 * and no indicator knows still shows to two or three digits: more in the bodies than between them.
 */
const FLOOR_IN_BODIES = 4;
const FLOOR_OUTSIDE = 3;

function lowestOrders(mesh: Mesh): Int32Array {
  const { regions } = mesh;
  const sides = Float64Array.from(regions, (_, t) => meanSide(mesh, t));
  const full = new Map<number, number>();
  regions.forEach((r, t) => full.set(r, Math.max(full.get(r) ?? 0, sides[t])));
  return Int32Array.from(regions, (r, t) => {
    const floor = r === LAYER ? LOWEST_ORDER : r === BACKGROUND ? FLOOR_OUTSIDE : FLOOR_IN_BODIES;
    const share = sides[t] / full.get(r)!;
    return Math.max(LOWEST_ORDER, share > 0.5 ? floor : share > 0.2 ? floor - 1 : LOWEST_ORDER);
  });
}

/**
 * Order and size from the decay of each triangle's hierarchical parts s_j (energy of the functions of degree j, in units
 * of k). Order p leaves out Σ_{j>p} s_j; beyond the highest degree seen the parts are continued geometrically. Every
 * triangle may leave the same share of the goal. Those that would need more than the strategy allows get smaller
 * neighbours instead: the size is scaled by (allowed/left)^{1/2α}, where α = order in the interior and, at corners, the
 * exponent of the singularity, from s_j ∝ j^{−4α−1} (I. Babuška, M. Suri, SIAM J. Numer. Anal. 24 (1987) 750), at least 1/2.
 */
export function planRefinement(
  mesh: Mesh,
  highestDegrees: Int32Array,
  pictures: readonly ModePicture[],
  strategy: Strategy,
): RefinementPlan {
  const count = mesh.regions.length;
  const orders = lowestOrders(mesh);
  if (pictures.length === 0) return { orders: highestDegrees.map((p, t) => Math.max(p, orders[t])), wishes: [] };
  const shrink = new Float64Array(count).fill(1);
  const corner = trianglesAtCorners(mesh);
  for (const { parts, goal, outside, exponent: largest } of pictures) {
    const { energies, stride } = parts;
    const layerShare = outside * meanLayerEnergy(mesh, parts);
    for (let t = 0; t < count; t++) {
      const s = energies.subarray(stride * t, stride * (t + 1));
      let allowed = (AIM * goal) / count;
      const region = mesh.regions[t];
      if (region === LAYER || region === BACKGROUND)
        allowed = Math.min(allowed, AIM * Math.max(outside * sum(s), layerShare));
      const top = highestDegrees[t];
      const most = corner[t] >= 0 ? strategy.cornerOrder : strategy.highestOrder;
      const order = orderFor(s, top, allowed);
      orders[t] = Math.max(orders[t], Math.min(order, most, top + largestRaise(top)));
      // so few degrees say too little: raised first
      if (order <= most || most > top + largestRaise(top) || top < Math.min(most, LEAST_SEEN)) continue;
      const exponent = corner[t] >= 0 ? singularExponent(s, top, largest) : most;
      const left = leftOut(s, top, most);
      if (left > WORTH_A_MESH * allowed) shrink[t] = Math.min(shrink[t], (allowed / left) ** (1 / (2 * exponent)));
    }
  }
  return { orders, wishes: wishesFor(mesh, corner, shrink) };
}

/** Ratio of one part to the next, below 0.9: over two degrees, and of the larger of two so that parity does not deceive. */
function decayRatio(s: ArrayLike<number>, top: number): number {
  if (top < 3) return 0.5;
  const ratio =
    top === 3
      ? s[3] / s[2]
      : top === 4
        ? Math.sqrt(s[4] / s[2])
        : Math.sqrt(Math.max(s[top], s[top - 1]) / Math.max(s[top - 2], s[top - 3]));
  return Number.isFinite(ratio) ? Math.min(Math.max(ratio, 1e-3), 0.9) : 0.5;
}

/** Lowest order that leaves out no more than `allowed`. */
function orderFor(s: ArrayLike<number>, top: number, allowed: number): number {
  const ratio = decayRatio(s, top);
  let rest = (Math.max(s[top], s[top - 1] * ratio) * ratio) / (1 - ratio);
  if (rest > allowed) return top + Math.ceil(Math.log(rest / allowed) / -Math.log(ratio));
  let p = top;
  while (p > LOWEST_ORDER && rest + s[p] <= allowed) rest += s[p--];
  return p;
}

/** What an order leaves out. */
function leftOut(s: ArrayLike<number>, top: number, order: number): number {
  const ratio = decayRatio(s, top);
  let rest = (Math.max(s[top], s[top - 1] * ratio) * ratio) / (1 - ratio);
  for (let p = top; p > order; p--) rest += s[p];
  return order > top ? rest * ratio ** (order - top) : rest;
}

/**
 * Ratio of the error of order p to that of order p − 1 on each triangle, p = top: what its parts decay by, or at corners
 * ((p − 1)/p)^{4λ}, the algebraic law.
 */
export function errorRatios(
  mesh: Mesh,
  highestDegrees: Int32Array,
  { energies, stride }: DegreeEnergies,
  exponent: number,
): Float64Array {
  const corner = trianglesAtCorners(mesh);
  return Float64Array.from(corner, (v, t) => {
    const s = energies.subarray(stride * t, stride * (t + 1));
    const top = highestDegrees[t];
    return v < 0 || top < 3 ? decayRatio(s, top) : ((top - 1) / top) ** (4 * singularExponent(s, top, exponent));
  });
}

/** λ of r^λ, from the algebraic decay of the parts; at least 1/2, at most `largest`. */
function singularExponent(s: ArrayLike<number>, top: number, largest: number): number {
  const slope = Math.log(decayRatio(s, top)) / Math.log((top - 1) / top);
  return Math.min(Math.max((slope - 1) / 4, 0.5), largest);
}

/** Smallest factors by which a size may change at one go. */
const LEAST_AT_CORNER = 1 / 64;
const LEAST_ELSEWHERE = 0.35;
/** Triangles that leave out less than so many times their share do not ask for a new mesh. */
const WORTH_A_MESH = 4;
/** Corners go a step farther, so that one new mesh is enough. */
const CORNER_MARGIN = 0.7;
/** A factor nearer to 1 would not change the mesh. */
const LARGEST_FACTOR = 0.7;

/** Wishes are rounded down to powers of this, so that there are few different sizes. */
const SIZE_STEP = Math.SQRT2;

function wishesFor(mesh: Mesh, corner: Int32Array, shrink: Float64Array): SizeWish[] {
  const { vertices, triangles } = mesh;
  const wishes: SizeWish[] = [];
  const atCorner = new Map<number, number>();
  for (let t = 0; t < shrink.length; t++) {
    if (shrink[t] >= 1) continue;
    const side = meanSide(mesh, t);
    const v = corner[t];
    if (v >= 0) {
      const size = side * Math.max(CORNER_MARGIN * shrink[t], LEAST_AT_CORNER);
      atCorner.set(v, Math.min(atCorner.get(v) ?? Infinity, size));
      continue;
    }
    const [a, b, c] = [triangles[3 * t], triangles[3 * t + 1], triangles[3 * t + 2]];
    wishes.push({
      x: (vertices[2 * a] + vertices[2 * b] + vertices[2 * c]) / 3,
      y: (vertices[2 * a + 1] + vertices[2 * b + 1] + vertices[2 * c + 1]) / 3,
      size: rounded(side * Math.min(Math.max(shrink[t], LEAST_ELSEWHERE), LARGEST_FACTOR)),
    });
  }
  for (const [v, size] of atCorner) wishes.push({ x: vertices[2 * v], y: vertices[2 * v + 1], size: rounded(size) });
  return wishes;
}

const rounded = (size: number): number => SIZE_STEP ** Math.floor(Math.log(size) / Math.log(SIZE_STEP));

function meanSide({ vertices, triangles }: Mesh, t: number): number {
  let total = 0;
  for (let i = 0; i < 3; i++) {
    const a = triangles[3 * t + i];
    const b = triangles[3 * t + ((i + 1) % 3)];
    total += Math.hypot(vertices[2 * a] - vertices[2 * b], vertices[2 * a + 1] - vertices[2 * b + 1]);
  }
  return total / 3;
}

/** The corner that a triangle touches, -1 for none. */
function trianglesAtCorners(mesh: Mesh): Int32Array {
  const isCorner = new Uint8Array(mesh.vertices.length / 2);
  for (const v of cornerVertices(mesh)) isCorner[v] = 1;
  const out = new Int32Array(mesh.regions.length).fill(-1);
  for (let i = 0; i < mesh.triangles.length; i++) {
    if (isCorner[mesh.triangles[i]]) out[Math.floor(i / 3)] = mesh.triangles[i];
  }
  return out;
}

/** Mean over the layer's triangles: what lies far below it has decayed. */
function meanLayerEnergy(mesh: Mesh, { energies, stride }: DegreeEnergies): number {
  let total = 0;
  let count = 0;
  for (let t = 0; t < mesh.regions.length; t++) {
    if (mesh.regions[t] !== LAYER) continue;
    count++;
    total += sum(energies.subarray(stride * t, stride * (t + 1)));
  }
  return count > 0 ? total / count : 0;
}

function sum(values: Float64Array): number {
  let total = 0;
  for (let i = 0; i < values.length; i++) total += values[i];
  return total;
}
