// How large is a shape?

import { pointAt } from './curves.ts';
import type { Outline, Point, Shape } from './curves.ts';
import { outlineContains } from './inside.ts';

/**
 * Area of a shape whose outlines do not cross each other: an outline inside an odd number of others is a hole.
 * Exact but for rounding (Green: A = ½∮ x dy − y dx, in closed form on lines and arcs).
 */
export function areaOf(shape: Shape): number {
  let area = 0;
  shape.forEach((outline, i) => {
    const p = pointAt(outline[0], 0.5);
    const depth = shape.filter((other, j) => j !== i && outlineContains(other, p)).length;
    area += (depth % 2 === 0 ? 1 : -1) * Math.abs(signedArea(outline));
  });
  return area;
}

/** Area enclosed by the outline, positive when it runs counterclockwise. */
export function signedArea(outline: Outline): number {
  const [ox, oy] = pointAt(outline[0], 0);
  // Half the cross product about the first point, so that far-away shapes lose no digits.
  const half = (p: Point, q: Point): number => ((p[0] - ox) * (q[1] - oy) - (q[0] - ox) * (p[1] - oy)) / 2;
  let area = 0;
  for (let i = 0; i < outline.length; i++) {
    const piece = outline[i];
    const from = pointAt(piece, 0);
    const to = pointAt(outline[(i + 1) % outline.length], 0);
    area += half(from, to);
    // Segment between arc and chord: ½ rx ry (sweep − sin sweep), whatever the tilt.
    if (piece.kind === 'arc') area += (piece.radii[0] * piece.radii[1] * segment(piece.sweep)) / 2;
  }
  return area;
}

/** t − sin t without cancellation for small t. */
function segment(t: number): number {
  if (Math.abs(t) > 0.5) return t - Math.sin(t);
  let term = (t * t * t) / 6;
  let sum = 0;
  for (let n = 5; sum + term !== sum; n += 2) {
    sum += term;
    term *= -(t * t) / (n * (n - 1));
  }
  return sum;
}
