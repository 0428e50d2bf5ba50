// Are outlines drawn where they can be seen, and is the hatch on what is visible of the active bodies?

import { expect, test } from 'vitest';
import {
  bodiesOfDevice,
  boxAround,
  hatchLines,
  holds,
  visibleOutlines,
  type DrawnBody,
} from '../../src/figures/bodies.ts';
import { circleRing } from '../../src/figures/drawing.ts';
import { ring } from '../../src/geometry/shapes.ts';

const body = (name: string, outlines: readonly ArrayLike<number>[], active = false): DrawnBody => ({
  name,
  group: name,
  material: 'core',
  permittivity: [4, 0],
  active,
  outlines,
});
const circle = (x: number, y: number, r: number): Float64Array =>
  circleRing(x * 1000, y * 1000, r * 1000).map((v) => v / 1000);
const lengthOf = (lines: readonly ArrayLike<number>[]): number => {
  let sum = 0;
  for (const l of lines) for (let i = 2; i < l.length; i += 2) sum += Math.hypot(l[i] - l[i - 2], l[i + 1] - l[i - 1]);
  return sum;
};

test('an outline alone is drawn whole', () => {
  const [lines] = visibleOutlines([body('a', [circle(0, 0, 1)])]);
  expect(lengthOf(lines)).toBeCloseTo(2 * Math.PI, 2);
});

test('of a notched disk the part under the notch is hidden, cut where the circles cross', () => {
  const r = 0.3;
  const [disk, notch] = visibleOutlines([body('disk', [circle(0, 0, 1)]), body('notch', [circle(1, 0, r)])]);
  // The circles meet at the angle φ with 2 sin(φ/2) = r.
  expect(lengthOf(disk)).toBeCloseTo(2 * Math.PI - 4 * Math.asin(r / 2), 3);
  expect(lengthOf(notch)).toBeCloseTo(2 * Math.PI * r, 3);
});

test('a body wholly covered is not drawn', () => {
  const [hidden] = visibleOutlines([body('a', [circle(0, 0, 0.5)]), body('b', [circle(0, 0, 1)])]);
  expect(hidden).toEqual([]);
});

test('hatch length × spacing is the visible active area', () => {
  const spacing = 0.01;
  const shapes = [
    body('disk', [circle(0, 0, 1), circle(0, 0, 0.4)], true),
    body('cover', [circle(0.7, 0, 0.2)]),
    body('passive', [circle(3, 0, 1)]),
  ];
  const area = Math.PI * (1 - 0.16 - 0.04);
  expect(lengthOf(hatchLines(shapes, spacing)) * spacing).toBeCloseTo(area, 2);
  expect(hatchLines([body('a', [], true)], spacing)).toEqual([]);
});

test('shapes of a device become even-odd polylines', () => {
  const [drawn] = bodiesOfDevice({
    bodies: [
      {
        name: 'rim',
        group: 'rim',
        material: 'core',
        permittivity: { re: 4, im: 0 },
        permeability: { re: 1, im: 0 },
        shape: ring([0, 0], 2, 1),
        pumpWeight: 1,
      },
    ],
  });
  expect(drawn.active).toBe(true);
  expect(holds(drawn.outlines, 1.5, 0.1)).toBe(true);
  expect(holds(drawn.outlines, 0.5, 0.1)).toBe(false);
  expect(boxAround(drawn.outlines)?.map((v) => Math.round(v * 100) / 100)).toEqual([-2, -2, 2, 2]);
  expect(boxAround([])).toBeNull();
});
