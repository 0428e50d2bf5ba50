// Does the bounding circle hold every curve, and is it the smallest?

import fc from 'fast-check';
import { expect, test } from 'vitest';
import { boundingCircle } from '../../src/geometry/bounding-circle.ts';
import { pointAt } from '../../src/geometry/curves.ts';
import type { Point, Shape } from '../../src/geometry/curves.ts';
import { disk, ellipse, moved, polygon, rectangle, regularPolygon } from '../../src/geometry/shapes.ts';

test.each<[string, Shape[], Point, number]>([
  ['disk', [disk([1, 2], 3)], [1, 2], 3],
  ['disk at the origin', [disk([0, 0], 1)], [0, 0], 1],
  ['two disks', [disk([0, 0], 1), disk([5, 0], 2)], [3, 0], 4],
  ['disk in a disk', [disk([0, 0], 3), disk([1, 0], 1)], [0, 0], 3],
  ['ellipse', [ellipse([1, 1], [3, 2], 0.7)], [1, 1], 3],
  ['square', [rectangle([0, 0], [2, 2], 0.2, 0)], [0, 0], Math.SQRT2],
  ['stadium', [rectangle([0, 0], [6, 2], 0, 1)], [0, 0], 3],
  ['triangle', [regularPolygon([0, 0], 2, 3, 0.1)], [0, 0], 2],
  [
    'obtuse triangle',
    [
      polygon([
        [-2, 0],
        [2, 0],
        [0, 0.5],
      ]),
    ],
    [0, 0],
    2,
  ],
  [
    'three disks',
    [0, 1, 2].map((i) => disk([2 * Math.cos((2 * Math.PI * i) / 3), 2 * Math.sin((2 * Math.PI * i) / 3)], 1)),
    [0, 0],
    3,
  ],
])('%s', (_, shapes, center, radius) => {
  for (const scale of [1, 1e-9, 1e9]) {
    const circle = boundingCircle(
      shapes.map((shape) => shape.map((outline) => outline.map((piece) => scaled(piece, scale)))),
    );
    expect(circle.radius / scale).toBeCloseTo(radius, 9);
    expect(circle.center[0] / scale).toBeCloseTo(center[0], 9);
    expect(circle.center[1] / scale).toBeCloseTo(center[1], 9);
  }
});

test('a symmetric device keeps its exact center', () => {
  expect(boundingCircle([disk([0, 0], 0.3)]).center).toEqual([0, 0]);
  expect(boundingCircle([regularPolygon([0, 0], 0.7, 5, 0.3)]).center).toEqual([0, 0]);
  expect(boundingCircle([disk([-1.7, 0], 0.3), disk([1.7, 0], 0.3)]).center).toEqual([0, 0]);
});

test('no curve leaves it, and each point of its rim is needed', () => {
  const number = fc.double({ min: 0.1, max: 3, noNaN: true });
  const one = fc
    .tuple(number, number, number, number, number)
    .map(([x, y, a, b, t]) => moved(ellipse([0, 0], [a, b], t), [4 * x, 4 * y]));
  fc.assert(
    fc.property(fc.array(one, { minLength: 1, maxLength: 6 }), (shapes) => {
      const { center, radius } = boundingCircle(shapes);
      const samples = shapes.flat(2).flatMap((piece) => Array.from({ length: 129 }, (_, i) => pointAt(piece, i / 128)));
      const reach = samples.map(([x, y]) => Math.hypot(x - center[0], y - center[1]));
      expect(Math.max(...reach)).toBeLessThanOrEqual(radius * (1 + 1e-13));
      // Smallest: no half of the rim is free of touching points (within the spacing of the samples).
      const rim = samples
        .filter((_, i) => reach[i] > radius * (1 - 1e-3))
        .map(([x, y]) => Math.atan2(y - center[1], x - center[0]))
        .sort((a, b) => a - b);
      const gaps = rim.map((a, i) => (i + 1 < rim.length ? rim[i + 1] : rim[0] + 2 * Math.PI) - a);
      expect(Math.max(...gaps)).toBeLessThan(Math.PI + 0.1);
    }),
    { numRuns: 60 },
  );
});

test('no shape is refused', () => {
  expect(() => boundingCircle([])).toThrow('one shape or more');
});

function scaled(piece: Shape[number][number], scale: number): Shape[number][number] {
  const p = ([x, y]: Point): Point => [x * scale, y * scale];
  if (piece.kind === 'line') return { kind: 'line', from: p(piece.from), to: p(piece.to) };
  return { ...piece, center: p(piece.center), radii: p(piece.radii) };
}
