// How is a mesh cut open along inner edges, so that the field may differ on their two sides?

import type { Mesh } from './mesh.ts';

/**
 * Every edge of `cuts` becomes two outer edges with the tag given (−1 or a tag of `edgeFree`). A vertex becomes as many as
 * there are fans of triangles about it that only meet across the cut; at the tip of a sheet one fan remains, and so does
 * the vertex.
 */
export function cutAlong(mesh: Mesh, cuts: ReadonlyMap<number, number>): Mesh {
  const { triangleEdges, edgeTriangles, curveOrder: g } = mesh;
  const triangles = mesh.triangles.slice();
  const vertices = Array.from(mesh.vertices);
  for (const [v, around] of trianglesAt(mesh, cuts)) {
    fansOf(v, around, mesh, cuts)
      .slice(1)
      .forEach((fan) => {
        const copy = vertices.length / 2;
        vertices.push(mesh.vertices[2 * v], mesh.vertices[2 * v + 1]);
        for (const t of fan)
          for (let i = 0; i < 3; i++) if (mesh.triangles[3 * t + i] === v) triangles[3 * t + i] = copy;
      });
  }
  // second sides of the cut edges
  const newEdges = triangleEdges.slice();
  const sides = Array.from(edgeTriangles);
  const edgeCurve = Array.from(mesh.edgeCurve);
  const edgeFree = Array.from(mesh.edgeFree ?? new Int32Array(mesh.edges.length / 2).fill(-1));
  for (const [e, tag] of cuts) {
    const second = edgeTriangles[2 * e + 1];
    const copy = edgeCurve.length;
    for (let i = 0; i < 3; i++) if (triangleEdges[3 * second + i] === e) newEdges[3 * second + i] = copy;
    sides[2 * e + 1] = -1;
    sides.push(second, -1);
    edgeCurve.push(edgeCurve[e]);
    edgeFree[e] = tag;
    edgeFree.push(tag);
  }
  // ends of all edges anew; a curve that now runs the other way is turned
  const edges = new Int32Array(2 * edgeCurve.length);
  const curves = Array.from(mesh.curves);
  const done = new Uint8Array(edgeCurve.length);
  for (let t = 0; t < triangles.length / 3; t++) {
    for (let i = 0; i < 3; i++) {
      const e = newEdges[3 * t + i];
      if (done[e]) continue;
      done[e] = 1;
      const ends = [triangles[3 * t + i], triangles[3 * t + ((i + 1) % 3)]];
      const old = [mesh.triangles[3 * t + i], mesh.triangles[3 * t + ((i + 1) % 3)]];
      edges.set(ends[0] < ends[1] ? ends : [ends[1], ends[0]], 2 * e);
      const turned = ends[0] < ends[1] !== old[0] < old[1];
      if (edgeCurve[e] < 0 || (e < mesh.edgeCurve.length && !turned)) continue;
      const width = 2 * (g + 1);
      const nodes = mesh.curves.slice(width * edgeCurve[e], width * (edgeCurve[e] + 1));
      edgeCurve[e] = curves.length / width;
      for (let j = 0; j <= g; j++) {
        const from = turned ? g - j : j;
        curves.push(nodes[2 * from], nodes[2 * from + 1]);
      }
    }
  }
  return {
    ...mesh,
    vertices: Float64Array.from(vertices),
    triangles,
    edges,
    triangleEdges: newEdges,
    edgeTriangles: Int32Array.from(sides),
    edgeCurve: Int32Array.from(edgeCurve),
    edgeFree: Int32Array.from(edgeFree),
    curves: Float64Array.from(curves),
  };
}

/** The triangles about every vertex of a cut edge. */
function trianglesAt(mesh: Mesh, cuts: ReadonlyMap<number, number>): Map<number, number[]> {
  const out = new Map<number, number[]>();
  for (const e of cuts.keys()) for (let i = 0; i < 2; i++) out.set(mesh.edges[2 * e + i], []);
  mesh.triangles.forEach((v, i) => out.get(v)?.push(Math.floor(i / 3)));
  return out;
}

/** Triangles about v that reach one another across edges that are not cut. */
function fansOf(v: number, around: readonly number[], mesh: Mesh, cuts: ReadonlyMap<number, number>): number[][] {
  const left = new Set(around);
  const fans: number[][] = [];
  for (const first of around) {
    if (!left.delete(first)) continue;
    const fan = [first];
    for (let at = 0; at < fan.length; at++) {
      for (let i = 0; i < 3; i++) {
        const e = mesh.triangleEdges[3 * fan[at] + i];
        if (cuts.has(e) || (mesh.edges[2 * e] !== v && mesh.edges[2 * e + 1] !== v)) continue;
        for (const t of [mesh.edgeTriangles[2 * e], mesh.edgeTriangles[2 * e + 1]]) if (left.delete(t)) fan.push(t);
      }
    }
    fans.push(fan);
  }
  return fans;
}
