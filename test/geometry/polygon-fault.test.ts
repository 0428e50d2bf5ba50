// Are simple polygons taken and all others refused, with the place?

import fc from 'fast-check';
import { expect, test } from 'vitest';
import type { Point } from '../../src/geometry/curves.ts';
import { polygonFault } from '../../src/geometry/polygon-fault.ts';

test.each<[string, Point[], string, Point, number, number]>([
  [
    'bow tie',
    [
      [0, 0],
      [2, 2],
      [2, 0],
      [0, 2],
    ],
    'crossing sides',
    [1, 1],
    0,
    2,
  ],
  [
    'repeated neighbour',
    [
      [0, 0],
      [1, 0],
      [1, 0],
      [0, 1],
    ],
    'repeated point',
    [1, 0],
    1,
    2,
  ],
  [
    'closed by hand',
    [
      [0, 0],
      [1, 0],
      [0, 1],
      [0, 0],
    ],
    'repeated point',
    [0, 0],
    0,
    3,
  ],
  [
    'minus zero',
    [
      [0, 0],
      [1, 0],
      [0, 1],
      [-0, 0],
    ],
    'repeated point',
    [0, 0],
    0,
    3,
  ],
  [
    'corner on a side',
    [
      [0, 0],
      [4, 0],
      [4, 2],
      [2, 0],
      [0, 2],
    ],
    'touching sides',
    [2, 0],
    0,
    2,
  ],
  [
    'spike',
    [
      [0, 0],
      [2, 0],
      [1, 0],
      [1, 1],
    ],
    'touching sides',
    [2, 0],
    0,
    1,
  ],
  [
    'spike at the start',
    [
      [2, 0],
      [1, 0],
      [1, 1],
      [0, 0],
    ],
    'touching sides',
    [2, 0],
    0,
    3,
  ],
  [
    'sides that overlap',
    [
      [0, 0],
      [3, 0],
      [3, 1],
      [2, 1],
      [2, 0],
      [1, 0],
      [1, 1],
      [0, 1],
    ],
    'touching sides',
    [2, 0],
    0,
    3,
  ],
  [
    'on a line',
    [
      [0, 0],
      [1, 1],
      [3, 3],
    ],
    'no area',
    [0, 0],
    0,
    2,
  ],
  [
    'two points',
    [
      [0, 0],
      [1, 1],
    ],
    'no area',
    [0, 0],
    0,
    1,
  ],
])('%s', (_, points, kind, place, first, second) => {
  const fault = polygonFault(points);
  expect(fault).toMatchObject({ kind, first, second });
  expect(fault!.place[0]).toBeCloseTo(place[0], 12);
  expect(fault!.place[1]).toBeCloseTo(place[1], 12);
});

test('straight corners and stars are simple', () => {
  expect(
    polygonFault([
      [0, 0],
      [1, 0],
      [2, 0],
      [2, 2],
    ]),
  ).toBeNull();
  const star = Array.from({ length: 2000 }, (_, i): Point => {
    const [r, t] = [i % 2 === 0 ? 1 : 0.2, (2 * Math.PI * i) / 2000];
    return [r * Math.cos(t), r * Math.sin(t)];
  });
  expect(polygonFault(star)).toBeNull();
});

test('agrees with a plain comparison of all sides', () => {
  const whole = fc.integer({ min: 0, max: 6 });
  fc.assert(
    fc.property(fc.array(fc.tuple(whole, whole), { minLength: 3, maxLength: 7 }), (points) => {
      expect(polygonFault(points) === null).toBe(isSimple(points));
    }),
    { numRuns: 500 },
  );
});

/** Whole coordinates: every product is exact. */
function isSimple(points: readonly Point[]): boolean {
  const n = points.length;
  const turn = (p: Point, q: Point, r: Point): number =>
    Math.sign((q[0] - p[0]) * (r[1] - p[1]) - (q[1] - p[1]) * (r[0] - p[0]));
  const on = (p: Point, q: Point, r: Point): boolean =>
    turn(p, q, r) === 0 && (r[0] - p[0]) * (r[0] - q[0]) + (r[1] - p[1]) * (r[1] - q[1]) <= 0;
  for (let i = 0; i < n; i++)
    for (let j = i + 1; j < n; j++) {
      const [a, b, c, d] = [points[i], points[(i + 1) % n], points[j], points[(j + 1) % n]];
      if (a[0] === c[0] && a[1] === c[1]) return false;
      if (j === i + 1) {
        if (on(a, b, d) || on(c, d, a)) return false;
      } else if (i === 0 && j === n - 1) {
        if (on(a, b, c) || on(c, d, b)) return false;
      } else {
        if (on(a, b, c) || on(a, b, d) || on(c, d, a) || on(c, d, b)) return false;
        if (turn(a, b, c) !== turn(a, b, d) && turn(c, d, a) !== turn(c, d, b)) return false;
      }
    }
  return true;
}
