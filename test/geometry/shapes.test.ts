// Do shapes have the area, the closure and the inside that geometry gives them?

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { areaOf, signedArea } from '../../src/geometry/area.ts';
import { pointAt } from '../../src/geometry/curves.ts';
import type { Point, Shape } from '../../src/geometry/curves.ts';
import { distanceToShape } from '../../src/geometry/distance.ts';
import { containsPoint } from '../../src/geometry/inside.ts';
import { disk, ellipse, moved, polygon, rectangle, regularPolygon, ring, turned } from '../../src/geometry/shapes.ts';

const L: Point[] = [
  [0, 0],
  [3, 0],
  [3, 1],
  [1, 1],
  [1, 2],
  [0, 2],
];

/** Name, shape, exact area, and whether a point is inside. */
const cases: [string, Shape, number, (p: Point) => boolean][] = [
  ['disk', disk([1, 2], 3), 9 * Math.PI, ([x, y]) => Math.hypot(x - 1, y - 2) < 3],
  ['ring', ring([1, 2], 3, 2), 5 * Math.PI, ([x, y]) => Math.abs(Math.hypot(x - 1, y - 2) - 2.5) < 0.5],
  [
    'ellipse',
    ellipse([1, 2], [3, 1], 0.5),
    3 * Math.PI,
    ([x, y]) => {
      const [c, s] = [Math.cos(0.5), Math.sin(0.5)];
      return Math.hypot((c * (x - 1) + s * (y - 2)) / 3, c * (y - 2) - s * (x - 1)) < 1;
    },
  ],
  ['rectangle', rectangle([1, 2], [4, 2], 0, 0), 8, ([x, y]) => Math.abs(x - 1) < 2 && Math.abs(y - 2) < 1],
  [
    'rounded rectangle',
    rectangle([1, 2], [4, 2], 0, 0.5),
    8 - 1 + Math.PI / 4,
    ([x, y]) => {
      const [u, v] = [Math.abs(x - 1), Math.abs(y - 2)];
      return u < 2 && v < 1 && (u < 1.5 || v < 0.5 || Math.hypot(u - 1.5, v - 0.5) < 0.5);
    },
  ],
  [
    'stadium',
    rectangle([1, 2], [4, 2], 0, 1),
    4 + Math.PI,
    ([x, y]) => Math.hypot(Math.max(Math.abs(x - 1) - 1, 0), y - 2) < 1,
  ],
  ['rectangle rounded to a disk', rectangle([1, 2], [2, 2], 0.3, 1), Math.PI, ([x, y]) => Math.hypot(x - 1, y - 2) < 1],
  ['L', polygon(L), 4, ([x, y]) => x > 0 && y > 0 && ((x < 3 && y < 1) || (x < 1 && y < 2))],
  [
    'hexagon',
    regularPolygon([1, 2], 2, 6, 0),
    6 * Math.sqrt(3),
    ([x, y]) => Math.abs(y - 2) < Math.sqrt(3) && Math.abs(x - 1) + Math.abs(y - 2) / Math.sqrt(3) < 2,
  ],
];

describe.each(cases)('%s', (_, shape, area, isInside) => {
  test('has its area, moved, turned and scaled by position', () => {
    expect(areaOf(shape) / area).toBeCloseTo(1, 14);
    expect(areaOf(turned(shape, 1.1, [7, 8])) / area).toBeCloseTo(1, 13);
    expect(areaOf(moved(shape, [1e4, -1e4])) / area).toBeCloseTo(1, 10);
  });

  test('is closed: each piece begins where the last one ends', () => {
    for (const outline of shape)
      outline.forEach((piece, i) => {
        const [x, y] = pointAt(piece, 1);
        const [u, v] = pointAt(outline[(i + 1) % outline.length], 0);
        expect(Math.hypot(x - u, y - v)).toBeLessThan(1e-14);
      });
  });

  test('outer outlines run counterclockwise, holes clockwise', () => {
    shape.forEach((outline, i) => expect(Math.sign(signedArea(outline))).toBe(i === 0 ? 1 : -1));
  });

  test('holds its points and no others', () => {
    const coordinate = fc.double({ min: -4, max: 6, noNaN: true });
    fc.assert(
      fc.property(coordinate, coordinate, (x, y) => {
        if (distanceToShape(shape, [x, y]) < 1e-9) return;
        expect(containsPoint(shape, [x, y])).toBe(isInside([x, y]));
      }),
    );
  });

  test('rays through corners and joints decide rightly', () => {
    for (const outline of shape)
      for (const piece of outline) {
        const y = pointAt(piece, 0)[1];
        for (let x = -5; x < 8; x += 0.173)
          if (distanceToShape(shape, [x, y]) > 1e-9) expect(containsPoint(shape, [x, y])).toBe(isInside([x, y]));
      }
  });

  test('the two sides of each piece differ', () => {
    for (const outline of shape)
      for (const piece of outline)
        for (const s of [0.13, 0.5, 0.91]) {
          const [x, y] = pointAt(piece, s);
          const [u, v] = pointAt(piece, s + 1e-6);
          const n = Math.hypot(u - x, v - y);
          const side = (d: number): boolean => containsPoint(shape, [x - (d * (v - y)) / n, y + (d * (u - x)) / n]);
          expect([side(1e-7), side(-1e-7)]).toEqual([true, false]);
        }
  });
});

test('an outline in an outline is a hole whatever its sense, and one in a hole is not', () => {
  const nested = [3, 2, 1].map((r) => disk([0, 0], r)[0]);
  expect(areaOf(nested)).toBeCloseTo((9 - 4 + 1) * Math.PI, 12);
  expect([0.5, 1.5, 2.5, 3.5].map((x) => containsPoint(nested, [x, 0]))).toEqual([true, false, true, false]);
});

test('polygons of either sense are counterclockwise', () => {
  expect(signedArea(polygon([...L].reverse())[0])).toBe(4);
});

test('distance', () => {
  expect(distanceToShape(disk([0, 0], 2), [0.5, 0])).toBeCloseTo(1.5, 14);
  expect(distanceToShape(ring([0, 0], 3, 1), [1.25, 0])).toBeCloseTo(0.25, 14);
  expect(distanceToShape(polygon(L), [2, 2])).toBeCloseTo(1, 14);
  expect(distanceToShape(polygon(L), [4, -1])).toBeCloseTo(Math.SQRT2, 14);
  // Center of an ellipse: the smaller semi-axis; on the longer axis beyond the center of curvature: along the axis.
  expect(distanceToShape(ellipse([0, 0], [3, 1], 0.4), [0, 0])).toBeCloseTo(1, 12);
  expect(distanceToShape(ellipse([0, 0], [3, 1], 0), [2.9, 0])).toBeCloseTo(0.1, 12);
});

test('impossible numbers are refused', () => {
  expect(() => disk([0, 0], 0)).toThrow('above 0');
  expect(() => disk([0, 0], NaN)).toThrow('above 0');
  expect(() => ring([0, 0], 1, 1)).toThrow('inner < outer');
  expect(() => rectangle([0, 0], [1, 1], 0, 0.6)).toThrow('corner radius');
  expect(() => polygon([])).toThrow('three points');
  expect(() => regularPolygon([0, 0], 1, 2.5, 0)).toThrow('three sides');
});
