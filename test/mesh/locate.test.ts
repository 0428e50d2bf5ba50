// Is every point found in its triangle?

import { expect, test } from 'vitest';
import { mapPoint } from '../../src/mesh/curved-triangles.ts';
import { meshLocator } from '../../src/mesh/locate.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { body, disk, ellipse, holds, planFor } from './sample-bodies.ts';

const bodies = [body('disk', disk([0.2, 0], 0.7)), body('ellipse', ellipse([-1.1, 0.3], 0.6, 0.25, 1))];
const mesh = meshDevice(bodies, planFor(bodies));
const locate = meshLocator(mesh);

test('the map at the found coordinates is the point, and the region is right', () => {
  const random = randomStream(7);
  let worst = 0;
  for (let i = 0; i < 3000; i++) {
    const r = 3 * Math.sqrt(random.uniform());
    const angle = 2 * Math.PI * random.uniform();
    const [x, y] = [r * Math.cos(angle), r * Math.sin(angle)];
    const found = locate(x, y);
    expect(found, `${x}, ${y}`).not.toBeNull();
    const [u, v] = mapPoint(mesh, found!.triangle, found!.l1, found!.l2);
    worst = Math.max(worst, Math.hypot(u - x, v - y));
    expect(Math.min(found!.l1, found!.l2, 1 - found!.l1 - found!.l2)).toBeGreaterThan(-1e-9);
    const region = mesh.regions[found!.triangle];
    const expected = r > 2 ? -2 : bodies.findLastIndex(({ shape }) => holds(shape, [x, y]));
    expect(region).toBe(expected);
  }
  expect(worst).toBeLessThan(1e-13);
});

test('vertices and middles of sides are found, points outside are not', () => {
  for (let v = 0; v < mesh.vertices.length / 2; v++)
    expect(locate(mesh.vertices[2 * v], mesh.vertices[2 * v + 1])).not.toBeNull();
  for (let t = 0; t < mesh.regions.length; t++) {
    const [x, y] = mapPoint(mesh, t, 0.5, 0);
    const found = locate(x, y)!;
    const [u, v] = mapPoint(mesh, found.triangle, found.l1, found.l2);
    expect(Math.hypot(u - x, v - y)).toBeLessThan(1e-13);
  }
  expect(locate(3.001, 0)).toBeNull();
  expect(locate(-50, 80)).toBeNull();
});
