// Is the map of a curved triangle the stated one, and are its Jacobian's bounds true?

import fc from 'fast-check';
import { expect, test } from 'vitest';
import {
  boundJacobian,
  bulgeOfNodes,
  jacobianBounds,
  mapInto,
  mapPoint,
  triangleCurves,
} from '../../src/mesh/curved-triangles.ts';
import type { TriangleCurves } from '../../src/mesh/curved-triangles.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { gaussLobatto } from '../../src/numerics/quadrature.ts';
import { body, disk, ellipse, planFor } from './sample-bodies.ts';

const bodies = [body('disk', disk([0.2, 0], 0.7)), body('ellipse', ellipse([-1, 0.3], 0.6, 0.25, 1))];
const mesh = meshDevice(bodies, planFor(bodies));

/** Nodes of the arc of the unit circle from angle a to angle b. */
const arcNodes = (a: number, b: number, g = 10): Float64Array =>
  Float64Array.from(gaussLobatto(g + 1).nodes).reduce(
    (points, s, j) => {
      const t = (a * (1 - s) + b * (1 + s)) / 2;
      points[2 * j] = Math.cos(t);
      points[2 * j + 1] = Math.sin(t);
      return points;
    },
    new Float64Array(2 * g + 2),
  );

test('curved sides lie on the true curves', () => {
  let curved = 0;
  let farthest = 0;
  for (let t = 0; t < mesh.regions.length; t++)
    for (let i = 0; i < 3; i++) {
      const edge = mesh.triangleEdges[3 * t + i];
      if (mesh.edgeCurve[edge] < 0) continue;
      curved++;
      for (const s of [0.1, 0.37, 0.5, 0.93]) {
        const l = [0, 0, 0];
        l[i] = 1 - s;
        l[(i + 1) % 3] = s;
        const [x, y] = mapPoint(mesh, t, l[1], l[2]);
        const off = bodies.map(({ shape }) => {
          const arc = shape[0][0];
          if (arc.kind !== 'arc') return Infinity;
          const c = Math.cos(arc.tilt);
          const d = Math.sin(arc.tilt);
          const u = (c * (x - arc.center[0]) + d * (y - arc.center[1])) / arc.radii[0];
          const v = (c * (y - arc.center[1]) - d * (x - arc.center[0])) / arc.radii[1];
          return Math.abs(Math.hypot(u, v) - 1);
        });
        const circles = [2, 3].map((r) => Math.abs(Math.hypot(x, y) / r - 1));
        farthest = Math.max(farthest, Math.min(...off, ...circles));
      }
    }
  expect(curved).toBeGreaterThan(60);
  expect(farthest).toBeLessThan(2e-15);
});

test('neighbours agree on their common side', () => {
  let worst = 0;
  for (let edge = 0; edge < mesh.edges.length / 2; edge++) {
    const [t, u] = [mesh.edgeTriangles[2 * edge], mesh.edgeTriangles[2 * edge + 1]];
    if (u < 0) continue;
    const onSide = (triangle: number): readonly number[] => {
      const i = [0, 1, 2].find((j) => mesh.triangleEdges[3 * triangle + j] === edge)!;
      const l = [0, 0, 0];
      const forward = mesh.triangles[3 * triangle + i] === mesh.edges[2 * edge];
      l[i] = forward ? 0.7 : 0.3;
      l[(i + 1) % 3] = 1 - l[i];
      return mapPoint(mesh, triangle, l[1], l[2]);
    };
    const [p, q] = [onSide(t), onSide(u)];
    worst = Math.max(worst, Math.hypot(p[0] - q[0], p[1] - q[1]));
  }
  expect(worst).toBeLessThan(2e-15);
});

test('derivatives agree with differences', () => {
  const out = new Float64Array(6);
  for (let t = 0; t < mesh.regions.length; t += 7) {
    const map = triangleCurves(mesh, t);
    mapInto(out, map, 0.3, 0.45);
    const slopes = out.slice(2);
    const h = 1e-5;
    const difference = [
      [h, 0],
      [0, h],
    ].flatMap(([a, b]) => {
      const ahead = mapInto(out, map, 0.3 + a, 0.45 + b).slice(0, 2);
      const behind = mapInto(out, map, 0.3 - a, 0.45 - b).slice(0, 2);
      return [(ahead[0] - behind[0]) / (2 * h), (ahead[1] - behind[1]) / (2 * h)];
    });
    slopes.forEach((slope, i) => expect(Math.abs(slope - difference[i])).toBeLessThan(1e-9));
  }
});

test('bounds enclose the Jacobian at every sampled point and are near it', () => {
  const out = new Float64Array(6);
  for (let t = 0; t < mesh.regions.length; t++) {
    const map = triangleCurves(mesh, t);
    const { lower, upper } = jacobianBounds(mesh, t);
    let least = Infinity;
    let most = -Infinity;
    for (let i = 0; i <= 12; i++)
      for (let j = 0; i + j <= 12; j++) {
        mapInto(out, map, i / 12, j / 12);
        const jacobian = out[2] * out[5] - out[3] * out[4];
        least = Math.min(least, jacobian);
        most = Math.max(most, jacobian);
      }
    expect(lower).toBeLessThanOrEqual(least * (1 + 1e-12));
    expect(upper).toBeGreaterThanOrEqual(most * (1 - 1e-12));
    expect(lower).toBeGreaterThan(least - 0.1 * most);
    expect(upper).toBeLessThan(1.1 * most + 0.1 * Math.abs(least));
  }
});

test('a folded triangle is found out', () => {
  // Two sides on one smooth circle: the Jacobian vanishes at their common vertex.
  const flat: TriangleCurves = {
    corners: Float64Array.of(1, 0, Math.cos(0.5), Math.sin(0.5), Math.cos(1), Math.sin(1)),
    bulges: [bulgeOfNodes(arcNodes(0, 0.5)), bulgeOfNodes(arcNodes(0.5, 1)), null],
  };
  expect(Math.abs(boundJacobian(flat, 10).lower)).toBeLessThan(1e-2);
  // A vertex between chord and arc.
  const folded: TriangleCurves = {
    corners: Float64Array.of(Math.cos(1), Math.sin(1), 1, 0, 0.86, 0.46),
    bulges: [bulgeOfNodes(arcNodes(1, 0)), null, null],
  };
  expect(boundJacobian(folded, 10).lower).toBeLessThan(0);
});

test('bounds scale with the square of the triangle', () => {
  fc.assert(
    fc.property(fc.integer({ min: -30, max: 30 }), (power) => {
      const f = 2 ** power;
      const nodes = arcNodes(0, 0.5);
      const map = (k: number): TriangleCurves => ({
        corners: Float64Array.of(k, 0, k * nodes[20], k * nodes[21], 0, 0),
        bulges: [bulgeOfNodes(nodes.map((x) => k * x)), null, null],
      });
      const one = boundJacobian(map(1), 10);
      const other = boundJacobian(map(f), 10);
      expect(other.lower).toBe(one.lower * f * f);
      expect(other.upper).toBe(one.upper * f * f);
    }),
    { numRuns: 10, seed: 1 },
  );
});
