// What is the same mesh with every triangle cut into four?

import { lagrangeBasis, lagrangeInto } from '../numerics/polynomials.ts';
import { gaussLobatto } from '../numerics/quadrature.ts';
import type { Mesh } from './mesh.ts';

/**
 * Uniform refinement: old vertices keep their numbers, edge e's middle becomes vertex V + e. The halves of a curved edge
 * lie on its polynomial, which is the true curve to rounding; the new inner edges are straight.
 *
 *            2
 *           / \       children 4t … 4t + 3 of triangle t: those at its
 *         m2---m1     vertices 0, 1, 2, then the middle (m0, m1, m2)
 *         / \ / \
 *        0---m0--1
 */
export function refineUniformly(mesh: Mesh): Mesh {
  const { vertices, triangles, regions, edges, triangleEdges, edgeTriangles, edgeCurve, curveOrder: g, curves } = mesh;
  const v = vertices.length / 2;
  const e = edges.length / 2;
  const t = regions.length;
  const curveCount = curves.length / (2 * (g + 1));
  const finer = {
    vertices: new Float64Array(2 * (v + e)),
    triangles: new Int32Array(12 * t),
    regions: new Int32Array(4 * t),
    edges: new Int32Array(2 * (2 * e + 3 * t)),
    triangleEdges: new Int32Array(12 * t),
    edgeTriangles: new Int32Array(2 * (2 * e + 3 * t)).fill(-1),
    edgeCurve: new Int32Array(2 * e + 3 * t).fill(-1),
    curves: new Float64Array(2 * curves.length),
    ...(mesh.edgeFree ? { edgeFree: new Int32Array(2 * e + 3 * t).fill(-1) } : {}),
  };
  mesh.edgeFree?.forEach((tag, i) => finer.edgeFree!.fill(tag, 2 * i, 2 * i + 2));
  finer.vertices.set(vertices);

  // Edge i becomes edges 2i (at its lower vertex) and 2i + 1 (at its higher one).
  const { nodes } = gaussLobatto(g + 1);
  const basis = lagrangeBasis(nodes);
  const values = new Float64Array(g + 1);
  const half = 2 * (g + 1);
  for (let i = 0; i < e; i++) {
    const [a, b, m] = [edges[2 * i], edges[2 * i + 1], v + i];
    finer.edges.set([a, m, b, m], 4 * i);
    const curve = edgeCurve[i];
    if (curve < 0) {
      for (let c = 0; c < 2; c++) finer.vertices[2 * m + c] = (vertices[2 * a + c] + vertices[2 * b + c]) / 2;
      continue;
    }
    const points = curves.subarray(half * curve, half * (curve + 1));
    for (let side = 0; side < 2; side++) {
      finer.edgeCurve[2 * i + side] = curve + side * curveCount;
      const child = finer.curves.subarray(half * (curve + side * curveCount));
      for (let j = 0; j <= g; j++) {
        // From the old vertex to the middle, s = 0.
        const s = side === 0 ? (nodes[j] - 1) / 2 : (1 - nodes[j]) / 2;
        lagrangeInto(values, basis, j === 0 ? (side === 0 ? -1 : 1) : j === g ? 0 : s);
        for (let c = 0; c < 2; c++) {
          let sum = 0;
          for (let k = 0; k <= g; k++) sum += values[k] * points[2 * k + c];
          child[2 * j + c] = sum;
        }
      }
      // The ends belong to vertices: the same numbers, bit for bit.
      const end = side === 0 ? a : b;
      child[0] = vertices[2 * end];
      child[1] = vertices[2 * end + 1];
      if (side === 0) finer.vertices.set(child.subarray(2 * g, 2 * g + 2), 2 * m);
      child.set(finer.vertices.subarray(2 * m, 2 * m + 2), 2 * g);
    }
  }

  for (let i = 0; i < t; i++) {
    const corner = [0, 1, 2].map((j) => triangles[3 * i + j]);
    const edge = [0, 1, 2].map((j) => triangleEdges[3 * i + j]);
    const middle = edge.map((k) => v + k);
    // Half of edge k at vertex w.
    const halfAt = (k: number, w: number): number => 2 * k + (edges[2 * k] === w ? 0 : 1);
    const inner = [0, 1, 2].map((j) => 2 * e + 3 * i + j); // inner[j] cuts off vertex j
    for (let j = 0; j < 3; j++) {
      const before = (j + 2) % 3;
      const child = 4 * i + j;
      finer.triangles.set([corner[j], middle[j], middle[before]], 3 * child);
      finer.triangleEdges.set([halfAt(edge[j], corner[j]), inner[j], halfAt(edge[before], corner[j])], 3 * child);
      finer.edges.set([Math.min(middle[j], middle[before]), Math.max(middle[j], middle[before])], 2 * inner[j]);
      finer.edgeTriangles.set([child, 4 * i + 3], 2 * inner[j]);
      for (const k of [edge[j], edge[before]]) {
        const slot = edgeTriangles[2 * k] === i ? 0 : 1;
        finer.edgeTriangles[2 * halfAt(k, corner[j]) + slot] = child;
      }
    }
    finer.triangles.set(middle, 12 * i + 9);
    // m0–m1 cuts off vertex 1, m1–m2 vertex 2, m2–m0 vertex 0.
    finer.triangleEdges.set([inner[1], inner[2], inner[0]], 12 * i + 9);
    finer.regions.fill(regions[i], 4 * i, 4 * i + 4);
  }
  return { ...mesh, ...finer };
}
