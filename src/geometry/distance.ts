// How far is a point from a boundary?

import type { ArcPiece, CurvePiece, Outline, Point, Shape } from './curves.ts';
import { pointAt } from './curves.ts';

/** Distance to the nearest point of any outline: exact for lines and circles, to rounding for ellipses. */
export const distanceToShape = (shape: Shape, point: Point): number =>
  Math.min(...shape.map((outline) => distanceToOutline(outline, point)));

export const distanceToOutline = (outline: Outline, point: Point): number =>
  outline.reduce((least, piece) => Math.min(least, distanceToPiece(piece, point)), Infinity);

export function distanceToPiece(piece: CurvePiece, point: Point): number {
  if (piece.kind === 'line') return distanceToLine(piece.from, piece.to, point);
  const ends = Math.min(distance(pointAt(piece, 0), point), distance(pointAt(piece, 1), point));
  return perpendiculars(piece, point).reduce((least, t) => {
    const s = (t - piece.start) / piece.sweep;
    return s > 0 && s < 1 ? Math.min(least, distance(pointAt(piece, s), point)) : least;
  }, ends);
}

/**
 * Parameters t, within one turn from the arc's lower end on, where the full ellipse of the arc is perpendicular to the direction
 * of the point: its nearest and farthest points among them. A circle has two, an ellipse two or four.
 */
export function perpendiculars(arc: ArcPiece, point: Point): number[] {
  const [a, b] = arc.radii;
  const c = Math.cos(arc.tilt);
  const s = Math.sin(arc.tilt);
  const dx = point[0] - arc.center[0];
  const dy = point[1] - arc.center[1];
  const x = c * dx + s * dy;
  const y = c * dy - s * dx;
  const angles = a === b ? [Math.atan2(y, x), Math.atan2(-y, -x)] : stationaryAngles(a, b, x, y);
  const low = Math.min(arc.start, arc.start + arc.sweep);
  return angles.map((t) => t + Math.ceil((low - t) / (2 * Math.PI)) * 2 * Math.PI);
}

/** Zeros of ½ d|p(t) − (x, y)|²/dt = (b² − a²) sin t cos t + a x sin t − b y cos t, by bisection between samples. */
function stationaryAngles(a: number, b: number, x: number, y: number): number[] {
  const slope = (t: number): number =>
    (b * b - a * a) * Math.sin(t) * Math.cos(t) + a * x * Math.sin(t) - b * y * Math.cos(t);
  const found: number[] = [];
  const samples = 64;
  for (let i = 0; i < samples; i++) {
    // Samples stay clear of the axes, where symmetric points have their zeros.
    let low = (2 * Math.PI * (i + 0.37)) / samples;
    let high = (2 * Math.PI * (i + 1.37)) / samples;
    const rises = slope(low) < 0;
    if (rises === slope(high) < 0) continue;
    for (let step = 0; step < 52; step++) {
      const middle = (low + high) / 2;
      if (slope(middle) < 0 === rises) low = middle;
      else high = middle;
    }
    found.push((low + high) / 2);
  }
  return found;
}

function distanceToLine(from: Point, to: Point, point: Point): number {
  const ux = to[0] - from[0];
  const uy = to[1] - from[1];
  const t = ((point[0] - from[0]) * ux + (point[1] - from[1]) * uy) / (ux * ux + uy * uy);
  if (!(t > 0)) return distance(from, point);
  if (t >= 1) return distance(to, point);
  return Math.hypot(point[0] - from[0] - t * ux, point[1] - from[1] - t * uy);
}

const distance = (p: Point, q: Point): number => Math.hypot(p[0] - q[0], p[1] - q[1]);
