// Are faults of a mesh noticed?

import { expect, test } from 'vitest';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { measureMesh, smallestAngleOf, triangleArea } from '../../src/mesh/quality.ts';
import { body, disk, planFor } from './sample-bodies.ts';

const bodies = [body('disk', disk([0, 0], 1))];
const mesh = meshDevice(bodies, planFor(bodies));

test('areas of triangles add up to the disk', () => {
  let sum = 0;
  for (let t = 0; t < mesh.regions.length; t++) if (mesh.regions[t] === 0) sum += triangleArea(mesh, t);
  expect(Math.abs(sum / Math.PI - 1)).toBeLessThan(1e-14);
  expect(smallestAngleOf(mesh, 0)).toBeGreaterThan(25);
});

test('a turned triangle, a wrong edge, a loose curve are faults', () => {
  const turned = { ...mesh, triangles: mesh.triangles.slice() };
  [turned.triangles[0], turned.triangles[1]] = [turned.triangles[1], turned.triangles[0]];
  expect(measureMesh(turned).faults.join()).toMatch(/triangle 0 is turned over/);
  const torn = { ...mesh, edgeTriangles: mesh.edgeTriangles.slice() };
  torn.edgeTriangles[0] = mesh.regions.length - 1;
  expect(measureMesh(torn).faults).not.toEqual([]);
  const loose = { ...mesh, curves: mesh.curves.slice() };
  loose.curves[0] += 1e-9;
  expect(measureMesh(loose).faults).toEqual([expect.stringMatching(/curve 0 does not end in vertex/)]);
});
