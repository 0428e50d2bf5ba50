// Is the overlay of shapes cut into the right edges with the right sides?

import { expect, test } from 'vitest';
import { arrangeShapes } from '../../src/geometry/arrangement.ts';
import type { Arrangement } from '../../src/geometry/arrangement.ts';
import type { Point, Shape } from '../../src/geometry/curves.ts';
import { pointAt } from '../../src/geometry/curves.ts';
import { GeometryError } from '../../src/geometry/geometry-error.ts';
import { lengthOf } from '../../src/geometry/pieces.ts';

const disk = ([x, y]: Point, r: number): Shape => [
  [{ kind: 'arc', center: [x, y], radii: [r, r], tilt: 0, start: 0, sweep: 2 * Math.PI }],
];
const polygon = (...points: Point[]): Shape => [
  points.map((from, i) => ({ kind: 'line', from, to: points[(i + 1) % points.length] })),
];
const box = (x0: number, y0: number, x1: number, y1: number): Shape => polygon([x0, y0], [x1, y0], [x1, y1], [x0, y1]);
const arrange = (...shapes: Shape[]): Arrangement =>
  arrangeShapes(
    shapes,
    shapes.map((_, i) => `s${i}`),
    1e-10,
  );
const sides = ({ edges }: Arrangement): string[] =>
  edges.map(({ left, right }) => `${Math.min(left, right)}|${Math.max(left, right)}`).sort();

test('nothing, one disk, one box', () => {
  expect(arrange().edges).toHaveLength(0);
  const one = arrange(disk([0, 0], 1));
  expect(one.edges).toHaveLength(1);
  expect(one.edges[0]).toMatchObject({ left: 0, right: -1 });
  expect(one.edges[0].from).toBe(one.edges[0].to);
  expect(arrange(box(0, 0, 1, 1)).edges).toHaveLength(4);
});

test('ends of edges are their vertices', () => {
  const { vertices, edges } = arrange(disk([0, 0], 1), box(-0.2, -2, 0.5, 0.3), disk([0.8, 0], 0.5));
  for (const { piece, from, to } of edges)
    [from, to].forEach((v, end) => {
      const [x, y] = pointAt(piece, end);
      expect(Math.hypot(x - vertices[2 * v], y - vertices[2 * v + 1])).toBeLessThan(1e-14);
    });
});

test('duplicates are one; a covered shape leaves no edge', () => {
  expect(sides(arrange(disk([0, 0], 1), disk([0, 0], 1)))).toEqual(['-1|1']);
  expect(sides(arrange(disk([0.1, 0], 0.3), disk([0, 0], 1)))).toEqual(['-1|1']);
  expect(sides(arrange(box(0, 0, 1, 1), box(0, 0, 1, 1)))).toEqual(Array(4).fill('-1|1'));
});

test('a clockwise outline encloses the same', () => {
  const { edges } = arrange(polygon([0, 0], [0, 1], [1, 1], [1, 0]));
  for (const { left, right } of edges) expect([left, right]).toEqual([-1, 0]);
});

test('shared edges belong to both; a collinear joint vanishes', () => {
  const two = arrange(box(0, 0, 1, 1), box(1, 0, 2, 1));
  expect(sides(two).filter((s) => s === '0|1')).toHaveLength(1);
  expect(two.edges).toHaveLength(7);
  // Overlapping boxes of equal height: the top of the first goes straight on in the second.
  const shifted = arrange(box(0, 0, 1, 1), box(0.5, 0, 1.5, 1));
  expect(shifted.edges.reduce((sum, { piece }) => sum + lengthOf(piece), 0)).toBeCloseTo(3 + 2 + 1, 12);
});

test('even–odd: an outline that crosses itself', () => {
  // A bow tie: two triangles.
  const bow = arrange(polygon([0, 0], [1, 1], [1, 0], [0, 1]));
  expect(bow.edges).toHaveLength(6);
  expect(bow.vertices.length / 2).toBe(5);
});

test('crossing circles: four arcs less the covered one', () => {
  const { edges, vertices } = arrange(disk([0, 0], 1), disk([1, 0], 1));
  expect(edges).toHaveLength(3);
  expect(vertices.length / 2).toBe(2);
  expect(Math.abs(vertices[0] - 0.5)).toBeLessThan(1e-15);
});

test('a touch becomes a neck, given to the later shape', () => {
  const { edges, notes } = arrange(disk([-1, 0], 1), disk([1, 0], 1));
  expect(notes).toHaveLength(1);
  expect(notes[0]).toContain("'s0' and 's1' touch at (0.00000, ");
  const necks = edges.filter(({ piece }) => piece.kind === 'line');
  expect(necks).toHaveLength(2);
  for (const { piece, left, right } of necks) {
    expect(lengthOf(piece)).toBeCloseTo(1e-3, 6);
    expect(Math.max(left, right)).toBe(1);
    expect(Math.min(left, right)).toBe(-1);
  }
});

test('a slight overlap is healed like a touch', () => {
  const { notes } = arrange(disk([-1, 0], 1), disk([1 - 1e-8, 0], 1));
  expect(notes.length).toBeGreaterThan(0);
});

test('a gap between the tolerance and a millionth is refused', () => {
  expect(() => arrange(disk([-1, 0], 1), disk([1 + 1e-8, 0], 1))).toThrow(GeometryError);
  expect(() => arrange(box(0, 0, 1, 1), box(1 + 1e-8, 0, 2, 1))).toThrow(/'s0' and 's1' come within 1.00e-8/);
  try {
    arrange(disk([-1, 0], 1), disk([1 + 1e-8, 0], 1));
  } catch (error) {
    expect((error as GeometryError).bodies).toEqual(['s0', 's1']);
    expect((error as GeometryError).place[0]).toBeCloseTo(5e-9, 12);
  }
});

test('corners that meet corners and arcs', () => {
  const corner = arrange(box(0, 0, 1, 1), box(1, 1, 2, 2));
  expect(corner.edges).toHaveLength(8);
  expect(corner.vertices.length / 2).toBe(7);
  const onArc = arrange(disk([0, 0], 1), polygon([1, 0], [2, -1], [2, 1]));
  expect(onArc.vertices.length / 2).toBe(3);
});

test('outlines of one shape that touch', () => {
  const { notes } = arrange([...disk([-1, 0], 1), ...disk([1, 0], 1)]);
  expect(notes).toEqual([expect.stringContaining("Outlines of 's0' touch at (0.00000, ")]);
});
