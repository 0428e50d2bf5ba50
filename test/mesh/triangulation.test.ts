// Does the constrained Delaunay triangulation keep its promises while points come and go?

import { incircle, orient2d } from 'robust-predicates';
import { expect, test } from 'vitest';
import { Triangulation, nextOf, previousOf } from '../../src/mesh/triangulation.ts';
import { randomStream } from '../../src/numerics/random.ts';

/** All triangles counterclockwise, twins mutual, and Delaunay across every edge that is not constrained. */
function expectDelaunay(t: Triangulation): void {
  const { x, y, start, twin, segment } = t;
  for (let e = 0; e < start.length; e++) {
    const [a, b, c] = [start[e], start[nextOf(e)], start[previousOf(e)]];
    expect(orient2d(x[a], y[a], x[b], y[b], x[c], y[c])).toBeLessThan(0);
    const o = twin[e];
    if (o < 0) continue;
    expect(twin[o]).toBe(e);
    expect(start[o]).toBe(b);
    expect(segment[o]).toBe(segment[e]);
    if (segment[e] >= 0) continue;
    const d = start[previousOf(o)];
    expect(incircle(x[a], y[a], x[b], y[b], x[c], y[c], x[d], y[d])).toBeLessThanOrEqual(0);
  }
  for (let v = 0; v < x.length; v++) expect(start[t.spoke[v]]).toBe(v);
  // V − E + F = 1 without the outer face: triangles = 2 V − 2 − hull.
  expect(t.triangles).toBe(2 * x.length - 2 - 4);
}

test('random points, points on a grid, points on edges', () => {
  const t = new Triangulation(0, 0, 4);
  const random = randomStream(3);
  for (let i = 0; i < 200; i++) t.insert(random.uniform(), random.uniform());
  for (let i = -3; i <= 3; i++) for (let j = -3; j <= 3; j++) t.insert(i / 2, j / 2);
  expect(t.insert(0.5, 0.5)).toBe(t.insert(0.5, 0.5));
  expectDelaunay(t);
});

test('constraints become edges, survive insertions, and refuse to cross', () => {
  const t = new Triangulation(0, 0, 4);
  const random = randomStream(5);
  const a = t.insert(-0.9, -0.8);
  const b = t.insert(0.95, 0.85);
  for (let i = 0; i < 100; i++) t.insert(2 * random.uniform() - 1, 2 * random.uniform() - 1);
  expect(t.constrain(a, b, 7)).toBe(true);
  expect(t.segment[t.findEdge(a, b)]).toBe(7);
  for (let i = 0; i < 100; i++) t.insert(2 * random.uniform() - 1, 2 * random.uniform() - 1);
  expect(t.findEdge(a, b)).toBeGreaterThanOrEqual(0);
  expectDelaunay(t);
  const c = t.insert(-1.2, 1.1);
  const d = t.insert(1.1, -1.15);
  expect(t.constrain(c, d, 8)).toBe(false);
  const e = t.insert(2, 2.5);
  const f = t.insert(3, 3.5);
  t.insert(2.5, 3);
  expect(t.constrain(e, f, 9)).toBe(false);
});

test('moving a vertex restores the Delaunay property', () => {
  const t = new Triangulation(0, 0, 4);
  for (let i = -2; i <= 2; i++) for (let j = -2; j <= 2; j++) t.insert(i + 0.1 * j, j);
  const v = t.insert(0.4, 0.5);
  t.move(v, 0.6, 0.45);
  expectDelaunay(t);
});
