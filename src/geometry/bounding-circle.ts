// Which circle holds all the shapes?

import { pointAt } from './curves.ts';
import type { CurvePiece, Point, Shape } from './curves.ts';
import { perpendiculars } from './distance.ts';

export interface Circle {
  readonly center: Point;
  readonly radius: number;
}

/**
 * The smallest circle around all outlines, its radius too large by less than 1e-10 of itself. The circle of a few support points is
 * enlarged by the farthest point of all curves until none lies outside (cutting planes; the support stays small). The center is
 * rounded to 2⁻³⁶ of the radius, so that a symmetric device keeps its exact center.
 */
export function boundingCircle(shapes: readonly Shape[]): Circle {
  const pieces = shapes.flatMap((shape) => shape.flat());
  if (pieces.length === 0) throw new RangeError('expected one shape or more, got none');
  const support: Point[] = [pointAt(pieces[0], 0)];
  let circle: Circle = { center: support[0], radius: 0 };
  for (let round = 0; round < 200; round++) {
    const far = farthest(pieces, circle.center);
    if (far.distance <= circle.radius * (1 + 1e-12)) break;
    support.push(far.point);
    circle = circleAround(support);
  }
  const step = 2 ** (Math.ceil(Math.log2(Math.max(circle.radius, Number.MIN_VALUE))) - 36);
  const snap = (v: number): number => (step > 0 ? Math.round(v / step) * step : v) + 0;
  const center: Point = [snap(circle.center[0]), snap(circle.center[1])];
  return { center, radius: farthest(pieces, center).distance };
}

/** Farthest point of the pieces from `from`; exact for lines and circles, to rounding for ellipses. */
function farthest(pieces: readonly CurvePiece[], from: Point): { point: Point; distance: number } {
  let point = from;
  let distance = -1;
  const offer = (p: Point): void => {
    const d = Math.hypot(p[0] - from[0], p[1] - from[1]);
    if (d > distance) {
      distance = d;
      point = p;
    }
  };
  for (const piece of pieces) {
    offer(pointAt(piece, 0));
    offer(pointAt(piece, 1));
    if (piece.kind === 'line') continue;
    // Nothing on this arc can beat the best: skip the search.
    const reach = Math.hypot(piece.center[0] - from[0], piece.center[1] - from[1]) + Math.max(...piece.radii);
    if (reach <= distance) continue;
    for (const t of perpendiculars(piece, from)) {
      const s = (t - piece.start) / piece.sweep;
      if (s > 0 && s < 1) offer(pointAt(piece, s));
    }
  }
  return { point, distance };
}

/** Smallest circle around a few points (Welzl's incremental form, in the order given). */
function circleAround(points: readonly Point[]): Circle {
  let circle: Circle = { center: points[0], radius: 0 };
  const outside = (p: Point): boolean =>
    Math.hypot(p[0] - circle.center[0], p[1] - circle.center[1]) > circle.radius * (1 + 1e-14);
  for (let i = 1; i < points.length; i++) {
    if (!outside(points[i])) continue;
    circle = { center: points[i], radius: 0 };
    for (let j = 0; j < i; j++) {
      if (!outside(points[j])) continue;
      circle = circleOnTwo(points[i], points[j]);
      for (let k = 0; k < j; k++) if (outside(points[k])) circle = circleOnThree(points[i], points[j], points[k]);
    }
  }
  return circle;
}

function circleOnTwo(p: Point, q: Point): Circle {
  return {
    center: [p[0] + (q[0] - p[0]) / 2, p[1] + (q[1] - p[1]) / 2],
    radius: Math.hypot(q[0] - p[0], q[1] - p[1]) / 2,
  };
}

/** Circle through three points; when they are collinear, around the two farthest apart. */
function circleOnThree(p: Point, q: Point, r: Point): Circle {
  const bx = q[0] - p[0];
  const by = q[1] - p[1];
  const cx = r[0] - p[0];
  const cy = r[1] - p[1];
  const d = 2 * (bx * cy - by * cx);
  if (d === 0) {
    const pairs = [circleOnTwo(p, q), circleOnTwo(q, r), circleOnTwo(p, r)];
    return pairs.reduce((best, circle) => (circle.radius > best.radius ? circle : best));
  }
  const b2 = bx * bx + by * by;
  const c2 = cx * cx + cy * cy;
  const x = (cy * b2 - by * c2) / d;
  const y = (bx * c2 - cx * b2) / d;
  return { center: [p[0] + x, p[1] + y], radius: Math.hypot(x, y) };
}
