// Are corners of bodies found, and smaller triangles made where they are wished for?

import { describe, expect, test } from 'vitest';
import { cornerVertices } from '../../src/mesh/corners.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import type { Mesh } from '../../src/mesh/mesh.ts';
import { measureMesh } from '../../src/mesh/quality.ts';
import { body, disk, planFor, rectangle, ring } from './sample-bodies.ts';

const placesOf = (mesh: Mesh): string[] =>
  Array.from(cornerVertices(mesh), (v) =>
    [mesh.vertices[2 * v], mesh.vertices[2 * v + 1]].map((x) => x.toFixed(6)).join(' '),
  ).sort();

describe('corners', () => {
  test('a disk and a ring have none, the rim does not count', () => {
    const bodies = [body('disk', disk([-1, 0], 0.5)), body('ring', ring([0.8, 0], 0.7, 0.4))];
    expect(placesOf(meshDevice(bodies, planFor(bodies)))).toEqual([]);
  });

  test('a square has its four', () => {
    const bodies = [body('square', rectangle([0, 0], 1, 1))];
    expect(placesOf(meshDevice(bodies, planFor(bodies)))).toEqual(
      ['-0.500000 -0.500000', '-0.500000 0.500000', '0.500000 -0.500000', '0.500000 0.500000'].sort(),
    );
  });

  test('where a border ends on another one, three regions meet: a junction', () => {
    const bodies = [body('left', rectangle([-0.5, 0], 1, 1)), body('right', rectangle([0.5, 0], 1, 1))];
    expect(placesOf(meshDevice(bodies, planFor(bodies)))).toContain('0.000000 0.500000');
  });
});

describe('wishes', () => {
  const bodies = [body('disk', disk([0, 0], 1))];
  const sideAt = (mesh: Mesh, x: number, y: number): number => {
    let nearest = Infinity;
    let side = NaN;
    for (let e = 0; e < mesh.edges.length / 2; e++) {
      const [a, b] = [mesh.edges[2 * e], mesh.edges[2 * e + 1]];
      const [ax, ay] = [mesh.vertices[2 * a], mesh.vertices[2 * a + 1]];
      const [bx, by] = [mesh.vertices[2 * b], mesh.vertices[2 * b + 1]];
      const d = Math.hypot((ax + bx) / 2 - x, (ay + by) / 2 - y);
      if (d < nearest) [nearest, side] = [d, Math.hypot(ax - bx, ay - by)];
    }
    return side;
  };

  test.each([
    ['inside', 0.3, 0.2],
    ['on a curved border', Math.SQRT1_2, Math.SQRT1_2],
    ['outside', 1.5, 0.1],
  ])('%s: triangles there have the size, far ones stay', (_, x, y) => {
    const plain = meshDevice(bodies, planFor(bodies));
    const wished = meshDevice(bodies, planFor(bodies, { wishes: [{ x, y, size: 0.02 }] }));
    expect(measureMesh(wished).faults).toEqual([]);
    expect(sideAt(wished, x, y)).toBeLessThan(0.04);
    expect(sideAt(plain, x, y)).toBeGreaterThan(0.1);
    expect(sideAt(wished, -x, -y)).toBeGreaterThan(0.1);
  });
});
