// At which vertices does a mesh have corners of its bodies?

import type { Mesh } from './mesh.ts';

/** Tangents that turn by more than this (radians) make a corner; fields are smooth beside less. */
const LEAST_TURN = (5 * Math.PI) / 180;

/**
 * Vertices where fields may be singular: borders between regions turn sharply there, end, or meet in more than two
 * edges. The rim does not count: no material changes there.
 */
export function cornerVertices(mesh: Mesh): Int32Array {
  const { vertices, edges, edgeTriangles, regions } = mesh;
  // per vertex the directions in which borders leave it
  const outward = new Map<number, [number, number][]>();
  for (let e = 0; e < edges.length / 2; e++) {
    const [s, t] = [edgeTriangles[2 * e], edgeTriangles[2 * e + 1]];
    if (s < 0 || t < 0 || regions[s] === regions[t] || (regions[s] < 0 && regions[t] < 0)) continue;
    const directions = endDirections(mesh, e);
    for (let end = 0; end < 2; end++) {
      const v = edges[2 * e + end];
      const list = outward.get(v);
      if (list) list.push(directions[end]);
      else outward.set(v, [directions[end]]);
    }
  }
  const corners: number[] = [];
  for (let v = 0; v < vertices.length / 2; v++) {
    const spokes = outward.get(v);
    if (!spokes) continue;
    if (spokes.length === 2) {
      const [[ax, ay], [bx, by]] = spokes;
      if (Math.PI - Math.abs(Math.atan2(ax * by - ay * bx, ax * bx + ay * by)) < LEAST_TURN) continue;
    }
    corners.push(v);
  }
  return Int32Array.from(corners);
}

/** Directions in which edge e leaves its lower and its higher vertex: towards the next points of its curve. */
function endDirections({ vertices, edges, edgeCurve, curves, curveOrder: g }: Mesh, e: number): [number, number][] {
  const [a, b] = [edges[2 * e], edges[2 * e + 1]];
  const ab: [number, number] = [vertices[2 * b] - vertices[2 * a], vertices[2 * b + 1] - vertices[2 * a + 1]];
  if (edgeCurve[e] < 0) return [ab, [-ab[0], -ab[1]]];
  const at = 2 * (g + 1) * edgeCurve[e];
  const step = (from: number, to: number): [number, number] => [
    curves[at + 2 * to] - curves[at + 2 * from],
    curves[at + 2 * to + 1] - curves[at + 2 * from + 1],
  ];
  return [step(0, 1), step(g, g - 1)];
}
