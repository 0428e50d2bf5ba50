// In which triangle, and where in it, does a point lie?

import Flatbush from 'flatbush';
import type { TriangleCurves } from './curved-triangles.ts';
import { mapInto, triangleCurves } from './curved-triangles.ts';
import type { Mesh } from './mesh.ts';

/** A point of the mesh: barycentric coordinates (1 − l1 − l2, l1, l2) in a triangle. */
export interface Location {
  readonly triangle: number;
  readonly l1: number;
  readonly l2: number;
}

/** How far outside a triangle, in barycentric coordinates, a point still counts as on its border. */
const BORDER = 1e-10;

/**
 * A function that finds points of the mesh; null outside it. Boxes by an R-tree, then Newton's inversion of the curved
 * map. On a common border the triangle with the lower number is taken.
 */
export function meshLocator(mesh: Mesh): (x: number, y: number) => Location | null {
  const { triangles, regions, vertices, triangleEdges, edgeCurve, curves, curveOrder: g } = mesh;
  const count = regions.length;
  const index = new Flatbush(count);
  for (let t = 0; t < count; t++) {
    const box = [Infinity, Infinity, -Infinity, -Infinity];
    const include = (x: number, y: number): void => {
      box[0] = Math.min(box[0], x);
      box[1] = Math.min(box[1], y);
      box[2] = Math.max(box[2], x);
      box[3] = Math.max(box[3], y);
    };
    for (let i = 0; i < 3; i++) {
      const v = triangles[3 * t + i];
      include(vertices[2 * v], vertices[2 * v + 1]);
      const curve = edgeCurve[triangleEdges[3 * t + i]];
      for (let j = 0; curve >= 0 && j <= g; j++) {
        const at = 2 * ((g + 1) * curve + j);
        include(curves[at], curves[at + 1]);
      }
    }
    // Between its nodes a curve may pass the box by a little of its bulge.
    const slack = 0.02 * Math.max(box[2] - box[0], box[3] - box[1]);
    index.add(box[0] - slack, box[1] - slack, box[2] + slack, box[3] + slack);
  }
  if (count > 0) index.finish();
  const maps: (TriangleCurves | undefined)[] = [];
  const work = new Float64Array(6);
  return (x, y) => {
    let best: Location | null = null;
    let deepest = -BORDER;
    for (const t of index.search(x, y, x, y).sort((a, b) => a - b)) {
      const found = invert((maps[t] ??= triangleCurves(mesh, t)), x, y, work);
      if (!found) continue;
      const depth = Math.min(found[0], found[1], 1 - found[0] - found[1]);
      if (depth >= 0) return { triangle: t, l1: found[0], l2: found[1] };
      if (depth > deepest) [best, deepest] = [{ triangle: t, l1: found[0], l2: found[1] }, depth];
    }
    return best;
  };
}

/** (l1, l2) with X(l1, l2) = (x, y) by Newton's method from the straight triangle's answer; null when it strays. */
function invert(map: TriangleCurves, x: number, y: number, work: Float64Array): [number, number] | null {
  const { corners, bulges } = map;
  const straight = !bulges[0] && !bulges[1] && !bulges[2];
  const x1 = corners[2] - corners[0];
  const y1 = corners[3] - corners[1];
  const x2 = corners[4] - corners[0];
  const y2 = corners[5] - corners[1];
  const determinant = x1 * y2 - y1 * x2;
  let l1 = ((x - corners[0]) * y2 - (y - corners[1]) * x2) / determinant;
  let l2 = ((y - corners[1]) * x1 - (x - corners[0]) * y1) / determinant;
  if (straight) return [l1, l2];
  for (let step = 0; step < 30; step++) {
    // The map's polynomials grow fast outside: start and stay near the triangle.
    const depth = Math.min(l1, l2, 1 - l1 - l2);
    if (depth < -0.15) {
      const pull = (0.15 + 1 / 3) / (1 / 3 - depth);
      l1 = 1 / 3 + pull * (l1 - 1 / 3);
      l2 = 1 / 3 + pull * (l2 - 1 / 3);
    }
    mapInto(work, map, l1, l2);
    const dx = x - work[0];
    const dy = y - work[1];
    const jacobian = work[2] * work[5] - work[3] * work[4];
    if (!(jacobian > 0)) return null;
    const d1 = (dx * work[5] - dy * work[4]) / jacobian;
    const d2 = (dy * work[2] - dx * work[3]) / jacobian;
    l1 += d1;
    l2 += d2;
    if (Math.abs(d1) + Math.abs(d2) < 1e-14) return [l1, l2];
    if (step > 8 && Math.min(l1, l2, 1 - l1 - l2) < -0.1) return null;
  }
  return Math.min(l1, l2, 1 - l1 - l2) < -1e-6 ? null : [l1, l2];
}
