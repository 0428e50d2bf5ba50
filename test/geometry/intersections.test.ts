// Are the meetings of two pieces all there, and exact?

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { ArcPiece, CurvePiece, LinePiece, Point } from '../../src/geometry/curves.ts';
import { pointAt } from '../../src/geometry/curves.ts';
import { closestApproach, meetings } from '../../src/geometry/intersections.ts';
import { boxOf, curvatureAt, lengthOf, partOf, velocityAt } from '../../src/geometry/pieces.ts';

const arc = (center: Point, rx: number, ry: number, start: number, sweep: number, tilt = 0): ArcPiece => ({
  kind: 'arc',
  center,
  radii: [rx, ry],
  tilt,
  start,
  sweep,
});
const line = (from: Point, to: Point): LinePiece => ({ kind: 'line', from, to });
/** Four quarters of an ellipse. */
const quarters = (center: Point, rx: number, ry: number, tilt = 0): ArcPiece[] =>
  [0, 1, 2, 3].map((i) => arc(center, rx, ry, (i * Math.PI) / 2, Math.PI / 2, tilt));
const tolerance = 1e-10;

/** Distinct meeting points of two sets of pieces. */
function distinct(a: readonly CurvePiece[], b: readonly CurvePiece[]): Point[] {
  const points: Point[] = [];
  for (const p of a)
    for (const q of b)
      for (const { s, t, point } of meetings(p, q, tolerance)) {
        const [on, other] = [pointAt(p, s), pointAt(q, t)];
        expect(Math.hypot(on[0] - other[0], on[1] - other[1])).toBeLessThan(2 * tolerance);
        if (!points.some(([x, y]) => Math.hypot(x - point[0], y - point[1]) < 1e-8)) points.push(point);
      }
  return points;
}

describe('counts', () => {
  test('circles: two, one, none', () => {
    const one = quarters([0, 0], 1, 1);
    expect(distinct(one, quarters([1.2, 0.3], 1, 1))).toHaveLength(2);
    expect(distinct(one, quarters([2, 0], 1, 1))).toHaveLength(1);
    expect(distinct(one, quarters([0.5, 0], 0.5, 0.5))).toHaveLength(1);
    expect(distinct(one, quarters([2 + 1e-9, 0], 1, 1))).toHaveLength(0);
    expect(distinct(one, quarters([0, 0], 0.5, 0.5))).toHaveLength(0);
    expect(distinct(one, quarters([1.6, 1.2], 1, 1))).toHaveLength(1);
  });

  test('ellipses: four, three (one of them a touch), two touches', () => {
    const flat = quarters([0, 0], 2, 1);
    expect(distinct(flat, quarters([0, 0], 1, 2))).toHaveLength(4);
    expect(distinct(flat, quarters([0.5, 0], 1.5, 1.4))).toHaveLength(3);
    expect(distinct(flat, quarters([0, 0], 1, 1))).toHaveLength(2);
    expect(distinct(flat, quarters([0, 0], 2, 1, Math.PI / 3))).toHaveLength(4);
  });

  test('lines: crossing, ending on each other, apart, overlapping', () => {
    expect(meetings(line([0, 0], [1, 1]), line([0, 1], [1, 0]), tolerance)).toHaveLength(1);
    expect(distinct([line([0, 0], [2, 0])], [line([1, 0], [1, 1])])).toEqual([[1, 0]]);
    expect(meetings(line([0, 0], [1, 0]), line([2, -1], [2, 1]), tolerance)).toHaveLength(0);
    expect(distinct([line([0, 0], [2, 0])], [line([3, 0], [1, 0])])).toHaveLength(2);
  });

  test('line and arc: crossing, tangent in the middle, tangent at the common end', () => {
    const circle = quarters([0, 0], 1, 1);
    expect(distinct(circle, [line([-2, 0.3], [2, 0.1])])).toHaveLength(2);
    expect(distinct(circle, [line([-2, 1], [2, 1])])).toHaveLength(1);
    expect(distinct(circle, [line([0.6, 1.6], [1.6, 0.6])])).toHaveLength(0);
    // A rounded corner: the side ends where the arc begins, along its tangent.
    const corner = arc([0, 0], 1, 1, 0, Math.PI / 2);
    expect(distinct([corner], [line([1, -2], [1, 0])])).toEqual([[1, 0]]);
    expect(distinct([arc([0, 0], 1, 1, 0.7, 1)], [line([Math.cos(0.7) + Math.sin(0.7), Math.sin(0.7) - Math.cos(0.7)], [Math.cos(0.7), Math.sin(0.7)])])).toHaveLength(1); // prettier-ignore
  });

  test('arcs of one circle meet in their ends only', () => {
    expect(distinct([arc([0, 0], 1, 1, 0, 1)], [arc([0, 0], 1, 1, 0.5, 1)])).toHaveLength(2);
    expect(distinct([arc([0, 0], 1, 1, 0, 1)], [arc([0, 0], 1, 1, 2, 1)])).toHaveLength(0);
    // The same ellipse described with its axes exchanged.
    expect(distinct([arc([0, 0], 2, 1, 0, 1)], [arc([0, 0], 1, 2, -Math.PI / 2, 1, Math.PI / 2)])).toHaveLength(2);
  });
});

test('crossings of random circles: the closed form', () => {
  const number = fc.integer({ min: -1000, max: 1000 }).map((i) => i / 500);
  fc.assert(
    fc.property(number, number, fc.integer({ min: 100, max: 1500 }), (x, y, r) => {
      const radius = r / 700;
      const d = Math.hypot(x, y);
      fc.pre(d > 0.01 && Math.abs(d - 1 - radius) > 1e-6 && Math.abs(d - Math.abs(1 - radius)) > 1e-6);
      const found = distinct(quarters([0, 0], 1, 1), quarters([x, y], radius, radius));
      const along = (d * d + 1 - radius * radius) / (2 * d);
      const across = Math.sqrt(1 - along * along);
      expect(found).toHaveLength(along * along < 1 ? 2 : 0);
      for (const [u, v] of found) {
        expect(Math.abs((u * x + v * y) / d - along)).toBeLessThan(1e-10);
        expect(Math.abs(Math.abs(u * y - v * x) / d - across)).toBeLessThan(1e-8);
      }
    }),
    { numRuns: 200, seed: 4 },
  );
});

test('scaled by 1e±9, the same meetings', () => {
  for (const scale of [1e-9, 1e9]) {
    const a = arc([0, 0], scale, scale, 0, 1.5);
    const b = line([0, 0.5 * scale], [2 * scale, 0.5 * scale]);
    const found = meetings(a, b, tolerance * scale);
    expect(found).toHaveLength(1);
    expect(Math.abs(found[0].point[0] / (scale * Math.sqrt(0.75)) - 1)).toBeLessThan(1e-14);
  }
});

test('closest approach of two disks', () => {
  const near = closestApproach(arc([0, 0], 1, 1, -0.5, 1), arc([2 + 1e-7, 0.0], 1, 1, Math.PI - 0.5, 1))!;
  expect(Math.abs(near.gap / 1e-7 - 1)).toBeLessThan(1e-6);
  expect(Math.abs(near.point[0] - 1 - 5e-8)).toBeLessThan(1e-12);
});

test('box, length, curvature and parts of an arc', () => {
  const piece = arc([1, 2], 3, 0.5, 0.2, 4, 0.7);
  const [x0, y0, x1, y1] = boxOf(piece);
  let [left, right, low, high] = [Infinity, -Infinity, Infinity, -Infinity];
  for (let i = 0; i <= 20000; i++) {
    const [x, y] = pointAt(piece, i / 20000);
    [left, right, low, high] = [Math.min(left, x), Math.max(right, x), Math.min(low, y), Math.max(high, y)];
  }
  [x0 - left, x1 - right, y0 - low, y1 - high].forEach((d) => expect(Math.abs(d)).toBeLessThan(1e-7));
  expect(lengthOf(arc([0, 0], 2, 2, 0, Math.PI))).toBeCloseTo(2 * Math.PI, 14);
  // Perimeter of an ellipse 4 a E(e), a = 1, b = 0.5: 4.844224110273838 (mpmath, 30 digits: 4*ellipe(0.75)).
  expect(Math.abs(lengthOf(arc([0, 0], 1, 0.5, 0, 2 * Math.PI)) / 4.844224110273838 - 1)).toBeLessThan(1e-7);
  expect(curvatureAt(arc([0, 0], 2, 2, 0, -1), 0.3)).toBeCloseTo(-0.5, 14);
  const part = partOf(piece, 0.75, 0.25);
  expect(pointAt(part, 0)).toEqual(pointAt(piece, 0.75));
  expect(velocityAt(part, 0)[0]).toBeCloseTo(-velocityAt(piece, 0.75)[0] / 2, 12);
});
