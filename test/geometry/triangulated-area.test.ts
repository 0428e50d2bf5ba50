// Is the area of a polygon with holes that of its triangles?

import earcut, { flatten } from 'earcut';
import { expect, test } from 'vitest';
import { areaOf } from '../../src/geometry/area.ts';
import type { Point, Shape } from '../../src/geometry/curves.ts';
import { containsPoint } from '../../src/geometry/inside.ts';
import { polygon } from '../../src/geometry/shapes.ts';

const star = (radius: number, teeth: number): Point[] =>
  Array.from({ length: 2 * teeth }, (_, i) => {
    const r = i % 2 === 0 ? radius : 0.55 * radius;
    const angle = (Math.PI * i) / teeth;
    return [r * Math.cos(angle), r * Math.sin(angle)] as const;
  });

// earcut 3.2: ear clipping, triangles only from the given corners
test.each([
  [5, 0.3],
  [9, 0.2],
  [40, 0.5],
])('a star of %i teeth with a hole of %f', (teeth, hole) => {
  const outer = star(2, teeth);
  const inner = star(2 * hole, 7);
  const shape: Shape = [...polygon(outer), ...polygon([...inner].reverse())];
  const { vertices, holes, dimensions } = flatten([outer, inner].map((ring) => ring.map(([x, y]) => [x, y])));
  const triangles = earcut(vertices, holes, dimensions);
  let area = 0;
  for (let t = 0; t < triangles.length; t += 3) {
    const [a, b, c] = [triangles[t], triangles[t + 1], triangles[t + 2]].map((i) => [
      vertices[2 * i],
      vertices[2 * i + 1],
    ]);
    const doubled = (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0]);
    area += Math.abs(doubled) / 2;
    if (Math.abs(doubled) > 1e-9) {
      expect(containsPoint(shape, [(a[0] + b[0] + c[0]) / 3, (a[1] + b[1] + c[1]) / 3])).toBe(true);
    }
  }
  expect(Math.abs(areaOf(shape) - area)).toBeLessThan(1e-12 * area);
});
