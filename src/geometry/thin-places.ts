// Where do boundaries come so close that no mesh fits between them?

import Flatbush from 'flatbush';
import { pointAt } from './curves.ts';
import type { ArcPiece, CurvePiece, Point, Shape } from './curves.ts';
import { perpendiculars } from './distance.ts';
import { containsPoint } from './inside.ts';
import { boxOf, lengthOf, partOf, velocityAt } from './pieces.ts';

/** A gap, an overlap, a wall or a side thinner than allowed. */
export interface ThinPlace {
  /** Indices of the shapes whose boundaries meet there, the earlier first; alike for a place within one shape. */
  readonly first: number;
  readonly second: number;
  readonly width: number;
  readonly place: Point;
}

interface Atom {
  readonly shape: number;
  readonly outline: number;
  readonly index: number;
  readonly piece: CurvePiece;
  readonly box: readonly [number, number, number, number];
  /** Ends that are corners; smooth joints of an outline are not. */
  readonly corners: readonly Point[];
}

/**
 * Places where two boundaries run at a distance above `touch` and below `limit`, one a pair of shapes, and single pieces shorter
 * or more sharply bent than that. Boundaries nearer than `touch` count as touching. Places covered by a later shape are left out.
 * Candidates are the distances of corners and the common perpendiculars of two pieces.
 */
export function thinPlaces(shapes: readonly Shape[], touch: number, limit: number): ThinPlace[] {
  const atoms = atomsOf(shapes);
  const found = new Map<string, ThinPlace>();
  const offer = (first: number, second: number, width: number, place: Point): void => {
    if (!(width > touch && width < limit)) return;
    const key = `${first} ${second}`;
    if ((found.get(key)?.width ?? Infinity) <= width || isCovered(shapes, first, place)) return;
    found.set(key, { first, second, width, place });
  };
  const index = new Flatbush(Math.max(1, atoms.length));
  for (const { box } of atoms) index.add(...box);
  if (atoms.length === 0) index.add(0, 0, 0, 0);
  index.finish();
  atoms.forEach((a, i) => {
    const size = a.piece.kind === 'line' ? lengthOf(a.piece) : Math.min(...a.piece.radii);
    offer(a.shape, a.shape, size, pointAt(a.piece, 0.5));
    const [x0, y0, x1, y1] = a.box;
    for (const j of index.search(x0 - limit, y0 - limit, x1 + limit, y1 + limit, (other) => other > i)) {
      const b = atoms[j];
      if (areNeighbours(a, b, shapes)) continue;
      nearPairs(a, b, limit, (p, q) => offer(a.shape, b.shape, Math.hypot(p[0] - q[0], p[1] - q[1]), middle(p, q)));
    }
  });
  return [...found.values()];
}

function atomsOf(shapes: readonly Shape[]): Atom[] {
  return shapes.flatMap((shape, s) =>
    shape.flatMap((outline, o) =>
      outline.map((piece, index): Atom => {
        const before = outline[(index + outline.length - 1) % outline.length];
        const after = outline[(index + 1) % outline.length];
        const corners: Point[] = [];
        if (!isSmooth(before, piece)) corners.push(pointAt(piece, 0));
        if (!isSmooth(piece, after)) corners.push(pointAt(piece, 1));
        return { shape: s, outline: o, index, piece, box: boxOf(piece), corners };
      }),
    ),
  );
}

/** Whether the next piece goes on in the same direction, within 1e-6 radians. */
function isSmooth(piece: CurvePiece, next: CurvePiece): boolean {
  const u = velocityAt(piece, 1);
  const v = velocityAt(next, 0);
  const cross = u[0] * v[1] - u[1] * v[0];
  return u[0] * v[0] + u[1] * v[1] > 0 && Math.abs(cross) < 1e-6 * Math.hypot(...u) * Math.hypot(...v);
}

function areNeighbours(a: Atom, b: Atom, shapes: readonly Shape[]): boolean {
  if (a.shape !== b.shape || a.outline !== b.outline) return false;
  const n = shapes[a.shape][a.outline].length;
  return (a.index + 1) % n === b.index || (b.index + 1) % n === a.index;
}

const middle = (p: Point, q: Point): Point => [(p[0] + q[0]) / 2, (p[1] + q[1]) / 2];

/** Whether a later shape than `first` covers the place, so that the earlier boundary is not seen there. */
const isCovered = (shapes: readonly Shape[], first: number, place: Point): boolean => {
  for (let i = first + 1; i < shapes.length; i++) if (containsPoint(shapes[i], place)) return true;
  return false;
};

/** Calls `take` with pairs of points of the two pieces, one of which is the nearest of its surroundings. */
function nearPairs(a: Atom, b: Atom, limit: number, take: (p: Point, q: Point) => void): void {
  for (const p of a.corners) for (const q of feet(b.piece, p)) take(p, q);
  for (const q of b.corners) for (const p of feet(a.piece, q)) take(p, q);
  // Corner against corner: each corner also belongs to a neighbour, whose feet may miss it.
  for (const p of a.corners) for (const q of b.corners) take(p, q);
  if (a.piece.kind === 'line' && b.piece.kind === 'line') return;
  const arc = (a.piece.kind === 'arc' ? a.piece : b.piece) as ArcPiece;
  const other = arc === a.piece ? b.piece : a.piece;
  if (isCircle(arc) && (other.kind === 'line' || isCircle(other))) perpendicularPairs(arc, other, take);
  else if (!isSameEllipse(arc, other)) stationaryPairs(arc, other, limit, take);
}

/** Two arcs of one ellipse are thin only where it is, which its radii tell. */
const isSameEllipse = (a: ArcPiece, b: CurvePiece): boolean =>
  b.kind === 'arc' &&
  a.tilt === b.tilt &&
  [0, 1].every((i) => a.center[i] === b.center[i] && a.radii[i] === b.radii[i]);

const isCircle = (arc: ArcPiece): boolean => arc.radii[0] === arc.radii[1];

/** Points of the piece straight across from a point. */
function feet(piece: CurvePiece, point: Point): Point[] {
  if (piece.kind === 'line') {
    const u: Point = [piece.to[0] - piece.from[0], piece.to[1] - piece.from[1]];
    const s = ((point[0] - piece.from[0]) * u[0] + (point[1] - piece.from[1]) * u[1]) / (u[0] * u[0] + u[1] * u[1]);
    return within(s) ? [pointAt(piece, s)] : [];
  }
  return perpendiculars(piece, point).flatMap((t) => {
    const s = (t - piece.start) / piece.sweep;
    const turn = (2 * Math.PI) / Math.abs(piece.sweep);
    return within(s) ? [pointAt(piece, s)] : within(s - turn) ? [pointAt(piece, s - turn)] : [];
  });
}

const within = (s: number): boolean => s > -1e-9 && s < 1 + 1e-9;

/** Common perpendiculars of a circular arc with a line or another circular arc: they pass through the center. */
function perpendicularPairs(arc: ArcPiece, other: CurvePiece, take: (p: Point, q: Point) => void): void {
  for (const q of feet(other, arc.center)) for (const p of feet(arc, q)) take(p, q);
  if (other.kind !== 'arc') return;
  for (const p of feet(arc, other.center)) for (const q of feet(other, p)) take(p, q);
  // Concentric arcs run side by side: any common direction will do, the middle or an end of either.
  for (const s of [0, 0.5, 1]) {
    const p = pointAt(arc, s);
    const q = pointAt(other, s);
    if (Math.hypot(arc.center[0] - other.center[0], arc.center[1] - other.center[1]) > 1e-9 * arc.radii[0]) return;
    for (const foot of feet(other, p)) take(p, foot);
    for (const foot of feet(arc, q)) take(foot, q);
  }
}

/** Ellipses: stationary distances |A(s) − B(t)| by Newton's method, from every pair of small parts that come close. */
function stationaryPairs(a: CurvePiece, b: CurvePiece, limit: number, take: (p: Point, q: Point) => void): void {
  for (const [s, t] of closeParts(a, b, limit)) {
    const end = restingPair(a, b, s, t);
    if (end === null || !within(end[0])) continue;
    // Where curves touch, s and t rest only to half the digits: the foot of one point on the other piece has them all.
    const p = pointAt(a, end[0]);
    for (const q of feet(b, p)) take(p, q);
  }
}

/** Middles of the parts, 1/32 of each piece, whose boxes are nearer than the limit. */
function closeParts(a: CurvePiece, b: CurvePiece, limit: number): [number, number][] {
  let pairs: [number, number][] = [[0, 0]];
  for (let parts = 2; parts <= 32; parts *= 2) {
    const boxes = [a, b].map((piece) =>
      Array.from({ length: parts }, (_, i) => boxOf(partOf(piece, i / parts, (i + 1) / parts))),
    );
    pairs = pairs.flatMap(([i, j]) =>
      [0, 1, 2, 3]
        .map((n): [number, number] => [2 * i + (n & 1), 2 * j + (n >> 1)])
        .filter(([u, v]) => boxesMeet(boxes[0][u], boxes[1][v], limit)),
    );
  }
  return pairs.map(([i, j]) => [(i + 0.5) / 32, (j + 0.5) / 32]);
}

const boxesMeet = (p: readonly number[], q: readonly number[], limit: number): boolean =>
  p[0] - limit <= q[2] && q[0] - limit <= p[2] && p[1] - limit <= q[3] && q[1] - limit <= p[3];

/**
 * Newton's method on d = A(s) − B(t): d·A′ = 0 and d·B′ = 0. At a crossing it ends with d = 0, at a thin place with the common
 * perpendicular; where the curves are nearly parallel it starts slowly. Null when it does not come to rest.
 */
function restingPair(a: CurvePiece, b: CurvePiece, s: number, t: number): [number, number] | null {
  for (let step = 0; step < 100; step++) {
    const p = pointAt(a, s);
    const q = pointAt(b, t);
    const d: Point = [p[0] - q[0], p[1] - q[1]];
    const u = velocityAt(a, s);
    const v = velocityAt(b, t);
    const f = dot(d, u);
    const g = -dot(d, v);
    const ff = dot(u, u) + dot(d, accelerationAt(a, p));
    const gg = dot(v, v) - dot(d, accelerationAt(b, q));
    const fg = -dot(u, v);
    const det = ff * gg - fg * fg;
    const ds = (fg * g - gg * f) / det;
    const dt = (fg * f - ff * g) / det;
    if (!(Math.abs(ds) < 0.5 && Math.abs(dt) < 0.5)) return null;
    s += ds;
    t += dt;
    if (Math.abs(ds) + Math.abs(dt) < 1e-13) return [s, t];
  }
  return null;
}

const dot = (p: Point, q: Point): number => p[0] * q[0] + p[1] * q[1];

/** Second derivative of the point of a piece: an arc goes about its center. */
function accelerationAt(piece: CurvePiece, p: Point): Point {
  if (piece.kind === 'line') return [0, 0];
  const w = -(piece.sweep ** 2);
  return [w * (p[0] - piece.center[0]), w * (p[1] - piece.center[1])];
}
