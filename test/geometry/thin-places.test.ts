// Are places too thin for a mesh found, and touching or crossing boundaries left alone?

import { describe, expect, test } from 'vitest';
import type { Shape } from '../../src/geometry/curves.ts';
import { disk, ellipse, moved, polygon, rectangle, regularPolygon, ring, turned } from '../../src/geometry/shapes.ts';
import { thinPlaces } from '../../src/geometry/thin-places.ts';

const find = (...shapes: Shape[]) => thinPlaces(shapes, 1e-11, 1e-6);
const G = 1e-8;

describe('gaps', () => {
  const cases: [string, Shape, Shape][] = [
    ['disk beside disk', disk([0, 0], 1), disk([2 + G, 0], 1)],
    ['disk beside disk, askew', disk([0, 0], 1), disk([(1.5 + G) * Math.cos(0.3), (1.5 + G) * Math.sin(0.3)], 0.5)],
    ['disk within disk', disk([0, 0], 1), disk([0.5 - G, 0], 0.5)],
    ['disk within disk, concentric', disk([0, 0], 1), disk([0, 0], 1 - G)],
    ['disk beside rectangle', disk([0, 0], 1), rectangle([2 + G, 0], [2, 1], 0, 0)],
    ['disk beside corner', disk([0, 0], 1), rectangle([1 + Math.SQRT2 + G, 0], [2, 2], Math.PI / 4, 0)],
    ['rectangle beside rectangle', rectangle([0, 0], [2, 2], 0, 0), rectangle([2 + G, 0.3], [2, 2], 0, 0)],
    [
      'rectangle beside rectangle, both turned',
      rectangle([0, 0], [2, 2], 0.7, 0),
      turned(rectangle([2 + G, 0.3], [2, 2], 0, 0), 0.7, [0, 0]),
    ],
    ['corner beside corner', rectangle([0, 0], [2, 2], 0, 0), rectangle([2 + G, 2 + G], [2, 2], 0, 0)],
    ['rounded beside rounded', rectangle([0, 0], [2, 2], 0, 0.5), rectangle([2 + G, 0.3], [2, 2], 0, 0.7)],
    ['ellipse beside ellipse', ellipse([0, 0], [2, 1], 0), ellipse([3 + G, 0], [1, 2], 0)],
    [
      'ellipse beside ellipse, askew',
      turned(ellipse([0, 0], [2, 1], 0), 0.4, [0, 0]),
      turned(ellipse([3 + G, 0], [1, 2], 0), 0.4, [0, 0]),
    ],
    ['ellipse beside disk', ellipse([0, 0], [2, 1], 0), disk([0, 1.5 + G], 0.5)],
    ['ellipse beside line', ellipse([0, 0], [2, 1], 0), rectangle([0, 2 + G], [5, 2], 0, 0)],
  ];
  test.each(cases)('%s', (_, a, b) => {
    const places = find(a, b);
    expect(places).toHaveLength(1);
    expect(places[0]).toMatchObject({ first: 0, second: 1 });
    expect(places[0].width / G).toBeGreaterThan(0.99);
    expect(places[0].width / G).toBeLessThan(1.5);
  });

  test.each(cases)('%s: none at all when wide, and none when covered', (_, a, b) => {
    expect(thinPlaces([a, b], 1e-11, G / 2)).toEqual([]);
    expect(find(a, b, disk([0, 0], 20))).toEqual([]);
  });
});

test('walls, sides and roundings of one shape', () => {
  expect(find(ring([0, 0], 1, 1 - G))[0].width / G).toBeCloseTo(1, 6);
  expect(find(rectangle([0, 0], [1, G], 0.3, 0))[0].width / G).toBeCloseTo(1, 6);
  expect(find(rectangle([0, 0], [1, 1], 0.3, G))[0].width / G).toBeCloseTo(1, 6);
  expect(find(ellipse([0, 0], [1, G], 0.3))[0].width / G).toBeCloseTo(1, 6);
  const neck = polygon([
    [0, 0],
    [1, 1 - G / 2],
    [2, 0],
    [2, 2],
    [1, 1 + G / 2],
    [0, 2],
  ]);
  expect(find(neck)[0].width / G).toBeCloseTo(1, 6);
});

test('shapes by themselves, touching, overlapping and crossing are left alone', () => {
  const all = [
    disk([0, 0], 1),
    ring([0, 0], 1, 0.5),
    ellipse([0, 0], [2, 1], 0.3),
    rectangle([0, 0], [2, 1], 0.3, 0),
    rectangle([0, 0], [2, 1], 0.3, 0.2),
    rectangle([0, 0], [2, 1], 0.3, 0.5),
    rectangle([0, 0], [1, 1], 0.3, 0.5),
    regularPolygon([0, 0], 1, 7, 0.1),
  ];
  for (const a of all) {
    expect(find(a)).toEqual([]);
    expect(find(a, a)).toEqual([]);
    for (const b of all) for (const x of [0.1, 0.77, 1.3, 3.9]) expect(find(a, moved(b, [x, 0.13]))).toEqual([]);
  }
  expect(find(disk([0, 0], 1), disk([2, 0], 1))).toEqual([]);
  expect(find(disk([0, 0], 0.1), disk([0.3, 0], 0.1 + 0.1))).toEqual([]);
  expect(find(disk([1, 2], 3), ellipse([1, 2], [3, 2], Math.PI / 2))).toEqual([]);
  expect(find(ellipse([0, 0], [2, 1], 0), ellipse([3, 0], [1, 2], 0))).toEqual([]);
  expect(find(rectangle([0, 0], [2, 2], 0, 0), rectangle([2, 0.3], [2, 2], 0, 0))).toEqual([]);
});
