// Where do boundaries come so close that no mesh fits between them?

import Flatbush from 'flatbush';
import { pointAt } from './curves.ts';
import type { ArcPiece, CurvePiece, Point, Shape } from './curves.ts';
import { perpendiculars } from './distance.ts';
import { containsPoint } from './inside.ts';
import { boxOf, lengthOf, velocityAt } from './pieces.ts';

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
      const b = atoms[j]!;
      if (areNeighbours(a, b, shapes)) continue;
      nearPairs(a, b, (p, q) => offer(a.shape, b.shape, Math.hypot(p[0] - q[0], p[1] - q[1]), middle(p, q)));
    }
  });
  return [...found.values()];
}

function atomsOf(shapes: readonly Shape[]): Atom[] {
  return shapes.flatMap((shape, s) =>
    shape.flatMap((outline, o) =>
      outline.map((piece, index): Atom => {
        const before = outline[(index + outline.length - 1) % outline.length]!;
        const after = outline[(index + 1) % outline.length]!;
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
  const n = shapes[a.shape]![a.outline]!.length;
  return (a.index + 1) % n === b.index || (b.index + 1) % n === a.index;
}

const middle = (p: Point, q: Point): Point => [(p[0] + q[0]) / 2, (p[1] + q[1]) / 2];

/** Whether a later shape than `first` covers the place, so that the earlier boundary is not seen there. */
const isCovered = (shapes: readonly Shape[], first: number, place: Point): boolean => {
  for (let i = first + 1; i < shapes.length; i++) if (containsPoint(shapes[i]!, place)) return true;
  return false;
};

/** Calls `take` with pairs of points of the two pieces, one of which is the nearest of its surroundings. */
function nearPairs(a: Atom, b: Atom, take: (p: Point, q: Point) => void): void {
  for (const p of a.corners) for (const q of feet(b.piece, p)) take(p, q);
  for (const q of b.corners) for (const p of feet(a.piece, q)) take(p, q);
  // Corner against corner: each corner also belongs to a neighbour, whose feet may miss it.
  for (const p of a.corners) for (const q of b.corners) take(p, q);
  if (a.piece.kind === 'line' && b.piece.kind === 'line') return;
  const arc = (a.piece.kind === 'arc' ? a.piece : b.piece) as ArcPiece;
  const other = arc === a.piece ? b.piece : a.piece;
  if (isCircle(arc) && (other.kind === 'line' || isCircle(other))) perpendicularPairs(arc, other, take);
  else alternate(arc, other, take);
}

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

/** Ellipses: go to the nearest point of the other piece in turn, from eight starts, until the pair rests. */
function alternate(arc: ArcPiece, other: CurvePiece, take: (p: Point, q: Point) => void): void {
  for (let start = 0; start < 8; start++) {
    let p = pointAt(arc, (start + 0.5) / 8);
    for (let step = 0; step < 50; step++) {
      const q = nearest(feet(other, p), p);
      const next = q && nearest(feet(arc, q), q);
      if (q === null || next === null) break;
      const shift = Math.hypot(next[0] - p[0], next[1] - p[1]);
      p = next;
      // At a crossing the pair slides into it with steps as long as its distance: that is no thin place.
      if (shift > 1e-3 * Math.hypot(p[0] - q[0], p[1] - q[1])) continue;
      take(p, q);
      break;
    }
  }
}

function nearest(points: readonly Point[], to: Point): Point | null {
  let best: Point | null = null;
  for (const p of points) {
    if (best === null || Math.hypot(p[0] - to[0], p[1] - to[1]) < Math.hypot(best[0] - to[0], best[1] - to[1]))
      best = p;
  }
  return best;
}
