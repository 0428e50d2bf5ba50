// Does uniform refinement keep the shape and the soundness of a mesh?

import { expect, test } from 'vitest';
import { jacobianBounds } from '../../src/mesh/curved-triangles.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { measureMesh } from '../../src/mesh/quality.ts';
import { refineUniformly } from '../../src/mesh/refine.ts';
import { body, disk, planFor, rectangle } from './sample-bodies.ts';

test('four triangles for each, the same areas, sides halved, no fold', () => {
  const bodies = [body('disk', disk([0.3, 0], 0.8)), body('box', rectangle([-1, 0], 0.8, 0.5, 0.2))];
  let mesh = meshDevice(bodies, planFor(bodies));
  const first = measureMesh(mesh);
  for (let level = 1; level <= 2; level++) {
    mesh = refineUniformly(mesh);
    const finer = measureMesh(mesh);
    expect(finer.faults).toEqual([]);
    expect(finer.eulerCharacteristic).toBe(1);
    expect(finer.triangles).toBe(4 ** level * first.triangles);
    expect(finer.smallestJacobianRatio).toBeGreaterThan(0.15);
    finer.regions.forEach(({ region, area, longestSide }, i) => {
      expect(region).toBe(first.regions[i].region);
      expect(Math.abs(area / first.regions[i].area - 1)).toBeLessThan(1e-13);
      expect(longestSide).toBeLessThan(1.1 * first.regions[i].longestSide * 0.5 ** level);
    });
  }
  // New curved sides lie on the true circle.
  let worst = 0;
  for (let i = 0; i < mesh.edgeCurve.length; i++) {
    if (mesh.edgeCurve[i] < 0) continue;
    const at = 22 * mesh.edgeCurve[i];
    for (let j = 0; j <= 10; j++) {
      const [x, y] = [mesh.curves[at + 2 * j], mesh.curves[at + 2 * j + 1]];
      const off = [Math.hypot(x - 0.3, y) / 0.8, Math.hypot(x, y) / 2, Math.hypot(x, y) / 3].map((r) =>
        Math.abs(r - 1),
      );
      worst = Math.max(worst, Math.min(...off));
    }
  }
  expect(worst).toBeLessThan(3e-15);
  expect(jacobianBounds(mesh, 0).lower).toBeGreaterThan(0);
});
