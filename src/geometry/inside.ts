// Does a point lie inside a shape?

import { orient2d } from 'robust-predicates';
import { pointAt } from './curves.ts';
import type { ArcPiece, Outline, Point, Shape } from './curves.ts';

/**
 * Whether an odd number of outlines (counted with their winding parity) surround the point. Lines are decided by exact
 * predicates, arcs by their implicit equation; consecutive pieces share their end points bit for bit, so no ray slips through
 * a joint. On the boundary itself, within rounding, either answer may come.
 */
export function containsPoint(shape: Shape, point: Point): boolean {
  let inside = false;
  for (const outline of shape) if (outlineContains(outline, point)) inside = !inside;
  return inside;
}

/** Parity of crossings of the outline with the ray from the point to x = +∞. */
export function outlineContains(outline: Outline, point: Point): boolean {
  let inside = false;
  let from = pointAt(outline[0], 0);
  for (let i = 0; i < outline.length; i++) {
    const piece = outline[i];
    const to = pointAt(outline[(i + 1) % outline.length], 0);
    const crossed = piece.kind === 'line' ? lineCrosses(from, to, point) : arcCrosses(piece, from, to, point);
    if (crossed) inside = !inside;
    from = to;
  }
  return inside;
}

function lineCrosses(from: Point, to: Point, point: Point): boolean {
  if (from[1] > point[1] === to[1] > point[1]) return false;
  return liesLeftOf(from, to, point);
}

/** Whether the point lies on the −x side of a segment that spans its y. */
function liesLeftOf(from: Point, to: Point, point: Point): boolean {
  // orient2d of robust-predicates is positive when the three points turn clockwise (y up).
  const turn = -orient2d(from[0], from[1], to[0], to[1], point[0], point[1]);
  return to[1] > from[1] ? turn > 0 : turn < 0;
}

/** The arc is cut where its tangent is horizontal; each part is monotonic in y and crosses the ray at most once. */
function arcCrosses(arc: ArcPiece, from: Point, to: Point, point: Point): boolean {
  const [rx, ry] = arc.radii;
  // y(t) = cy + A cos t + B sin t has its extremes at atan2(B, A) + jπ.
  const extreme = Math.atan2(ry * Math.cos(arc.tilt), rx * Math.sin(arc.tilt));
  const low = Math.min(arc.start, arc.start + arc.sweep);
  const high = Math.max(arc.start, arc.start + arc.sweep);
  const cuts: number[] = [];
  for (let j = Math.floor((low - extreme) / Math.PI) + 1; extreme + j * Math.PI < high; j++)
    cuts.push(extreme + j * Math.PI);
  if (arc.sweep < 0) cuts.reverse();
  let crossed = false;
  let a = from;
  for (const t of cuts) {
    const b = pointAt(arc, (t - arc.start) / arc.sweep);
    if (monotoneCrosses(arc, a, b, point)) crossed = !crossed;
    a = b;
  }
  if (monotoneCrosses(arc, a, to, point)) crossed = !crossed;
  return crossed;
}

function monotoneCrosses(arc: ArcPiece, from: Point, to: Point, point: Point): boolean {
  if (from[1] > point[1] === to[1] > point[1]) return false;
  const left = liesLeftOf(from, to, point);
  // The arc bulges to the right of travel when it runs counterclockwise: to +x when it also runs up.
  const bulgesRight = arc.sweep > 0 === to[1] > from[1];
  if (left === bulgesRight) return left;
  // Between chord and arc, if inside the ellipse: then the arc is on the other side than the chord.
  return insideEllipse(arc, point) ? bulgesRight : left;
}

function insideEllipse(arc: ArcPiece, point: Point): boolean {
  const x = point[0] - arc.center[0];
  const y = point[1] - arc.center[1];
  const c = Math.cos(arc.tilt);
  const s = Math.sin(arc.tilt);
  return Math.hypot((c * x + s * y) / arc.radii[0], (c * y - s * x) / arc.radii[1]) < 1;
}
