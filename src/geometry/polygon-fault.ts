// Is a polygon simple, and if not, where does it fail?

import Flatbush from 'flatbush';
import { orient2d } from 'robust-predicates';
import type { Point } from './curves.ts';

/** What is wrong; `first` and `second` number the points, or the sides that start at them. */
export interface PolygonFault {
  readonly kind: 'repeated point' | 'crossing sides' | 'touching sides' | 'no area';
  readonly place: Point;
  readonly first: number;
  readonly second: number;
}

/**
 * The first fault of the closed polygon, or null when its sides meet only at common corners. Decisions are exact (robust
 * predicates); the place of a crossing is rounded.
 */
export function polygonFault(points: readonly Point[]): PolygonFault | null {
  const n = points.length;
  const repeated = repeatedPoint(points);
  if (repeated !== null) return repeated;
  const first = points[0];
  if (n < 3 || points.every((p) => orientation(first, points[1], p) === 0))
    return { kind: 'no area', place: first, first: 0, second: n - 1 };
  const index = new Flatbush(n);
  for (let i = 0; i < n; i++) {
    const [p, q] = side(points, i);
    index.add(Math.min(p[0], q[0]), Math.min(p[1], q[1]), Math.max(p[0], q[0]), Math.max(p[1], q[1]));
  }
  index.finish();
  for (let i = 0; i < n; i++) {
    const [p, q] = side(points, i);
    const near = index.search(
      Math.min(p[0], q[0]),
      Math.min(p[1], q[1]),
      Math.max(p[0], q[0]),
      Math.max(p[1], q[1]),
      (j) => j > i,
    );
    for (const j of near.sort((a, b) => a - b)) {
      const fault = j === i + 1 || (i === 0 && j === n - 1) ? foldBack(points, i, j) : meeting(points, i, j);
      if (fault !== null) return fault;
    }
  }
  return null;
}

function repeatedPoint(points: readonly Point[]): PolygonFault | null {
  const seen = new Map<string, number>();
  for (let i = 0; i < points.length; i++) {
    const place = points[i];
    const key = `${place[0] + 0},${place[1] + 0}`;
    const first = seen.get(key);
    if (first !== undefined) return { kind: 'repeated point', place, first, second: i };
    seen.set(key, i);
  }
  return null;
}

/** Neighbouring sides i and j overlap when the path turns straight back at their common corner. */
function foldBack(points: readonly Point[], i: number, j: number): PolygonFault | null {
  const n = points.length;
  const corner = points[j === i + 1 ? j : i];
  const before = points[j === i + 1 ? i : j];
  const after = points[((j === i + 1 ? j : i) + 1) % n];
  if (orientation(before, corner, after) !== 0) return null;
  const along = (before[0] - corner[0]) * (after[0] - corner[0]) + (before[1] - corner[1]) * (after[1] - corner[1]);
  return along > 0 ? { kind: 'touching sides', place: corner, first: i, second: j } : null;
}

/** Two sides without a common corner must not meet at all. */
function meeting(points: readonly Point[], i: number, j: number): PolygonFault | null {
  const [a, b] = side(points, i);
  const [c, d] = side(points, j);
  const toC = orientation(a, b, c);
  const toD = orientation(a, b, d);
  const toA = orientation(c, d, a);
  const toB = orientation(c, d, b);
  if (toC * toD < 0 && toA * toB < 0) {
    const cross = (p: Point, q: Point): number => p[0] * q[1] - p[1] * q[0];
    const u: Point = [b[0] - a[0], b[1] - a[1]];
    const v: Point = [d[0] - c[0], d[1] - c[1]];
    const t = cross([c[0] - a[0], c[1] - a[1]], v) / cross(u, v);
    return { kind: 'crossing sides', place: [a[0] + t * u[0], a[1] + t * u[1]], first: i, second: j };
  }
  const touch =
    toC === 0 && between(a, b, c)
      ? c
      : toD === 0 && between(a, b, d)
        ? d
        : toA === 0 && between(c, d, a)
          ? a
          : toB === 0 && between(c, d, b)
            ? b
            : null;
  return touch === null ? null : { kind: 'touching sides', place: touch, first: i, second: j };
}

const side = (points: readonly Point[], i: number): [Point, Point] => [points[i], points[(i + 1) % points.length]];

const orientation = (p: Point, q: Point, r: Point): number => Math.sign(orient2d(p[0], p[1], q[0], q[1], r[0], r[1]));

/** Whether a point known to be collinear lies within the box of the side. */
const between = (a: Point, b: Point, p: Point): boolean =>
  Math.min(a[0], b[0]) <= p[0] &&
  p[0] <= Math.max(a[0], b[0]) &&
  Math.min(a[1], b[1]) <= p[1] &&
  p[1] <= Math.max(a[1], b[1]);
