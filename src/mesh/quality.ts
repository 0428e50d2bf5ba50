// How good is a mesh, and does it hold together?

import { lagrangeBasis } from '../numerics/polynomials.ts';
import { gaussLobatto } from '../numerics/quadrature.ts';
import { boundJacobian, triangleCurves } from './curved-triangles.ts';
import type { Mesh } from './mesh.ts';

export interface RegionQuality {
  /** Body index, BACKGROUND or LAYER. */
  readonly region: number;
  readonly triangles: number;
  /** Area inside the curved edges, exact to rounding. */
  readonly area: number;
  /** Sides (chords) of the region's triangles, length units. */
  readonly meanSide: number;
  readonly shortestSide: number;
  readonly longestSide: number;
}

export interface MeshQuality {
  readonly triangles: number;
  readonly vertices: number;
  /** Degrees, between chords. */
  readonly smallestAngle: number;
  /** Smallest ratio of the lower to the upper bound of a triangle's Jacobian; ≤ 0 means a map that may fold. */
  readonly smallestJacobianRatio: number;
  /** V − E + T: 1 for a disk. */
  readonly eulerCharacteristic: number;
  /** In increasing order of region. */
  readonly regions: readonly RegionQuality[];
  /** What is wrong with the connections or orientations, in words; empty for a good mesh. */
  readonly faults: readonly string[];
}

/** Measures a mesh; see the fields. */
export function measureMesh(mesh: Mesh): MeshQuality {
  const { triangles, regions, vertices, edges } = mesh;
  const count = regions.length;
  let smallestAngle = Infinity;
  let smallestJacobianRatio = Infinity;
  for (let t = 0; t < count; t++) {
    smallestAngle = Math.min(smallestAngle, smallestAngleOf(mesh, t));
    const { lower, upper } = boundJacobian(triangleCurves(mesh, t), mesh.curveOrder);
    smallestJacobianRatio = Math.min(smallestJacobianRatio, upper > 0 ? lower / upper : -1);
  }
  return {
    triangles: count,
    vertices: vertices.length / 2,
    smallestAngle,
    smallestJacobianRatio,
    eulerCharacteristic: vertices.length / 2 - edges.length / 2 + triangles.length / 3,
    regions: [...new Set(regions)].sort((a, b) => a - b).map((region) => measureRegion(mesh, region)),
    faults: faultsOf(mesh),
  };
}

/** Smallest angle between the chords of a triangle, degrees; negative when it is turned over. */
export function smallestAngleOf({ vertices, triangles }: Mesh, t: number): number {
  let least = Infinity;
  for (let i = 0; i < 3; i++) {
    const [a, b, c] = [0, 1, 2].map((j) => triangles[3 * t + ((i + j) % 3)]);
    const ux = vertices[2 * b] - vertices[2 * a];
    const uy = vertices[2 * b + 1] - vertices[2 * a + 1];
    const vx = vertices[2 * c] - vertices[2 * a];
    const vy = vertices[2 * c + 1] - vertices[2 * a + 1];
    least = Math.min(least, Math.atan2(ux * vy - uy * vx, ux * vx + uy * vy));
  }
  return (least * 180) / Math.PI;
}

/** Area of triangle t inside its curved edges: ½ ∮ (x dy − y dx), by a Gauss–Lobatto rule that is exact for it. */
export function triangleArea(mesh: Mesh, t: number): number {
  const { vertices, triangles, triangleEdges, edges, edgeCurve, curves, curveOrder: g } = mesh;
  const [a, b, c] = [0, 1, 2].map((i) => triangles[3 * t + i]);
  const x0 = vertices[2 * a];
  const y0 = vertices[2 * a + 1];
  let area =
    ((vertices[2 * b] - x0) * (vertices[2 * c + 1] - y0) - (vertices[2 * b + 1] - y0) * (vertices[2 * c] - x0)) / 2;
  for (let i = 0; i < 3; i++) {
    const edge = triangleEdges[3 * t + i];
    if (edgeCurve[edge] < 0) continue;
    const forward = edges[2 * edge] === triangles[3 * t + i] ? 1 : -1;
    area += forward * areaBesideChord(curves.subarray(2 * (g + 1) * edgeCurve[edge]), g);
  }
  return area;
}

/** ½ ∫ (x dy − y dx) along the curve through g + 1 points, coordinates from its first point: the sliver on its chord. */
function areaBesideChord(points: Float64Array, g: number): number {
  const { nodes, weights } = gaussLobatto(g + 1);
  let basis = bases.get(g);
  if (!basis) bases.set(g, (basis = lagrangeBasis(nodes)));
  const { differentiation } = basis;
  let sum = 0;
  for (let i = 0; i <= g; i++) {
    let dx = 0;
    let dy = 0;
    for (let j = 0; j <= g; j++) {
      dx += differentiation[i + j * (g + 1)] * (points[2 * j] - points[0]);
      dy += differentiation[i + j * (g + 1)] * (points[2 * j + 1] - points[1]);
    }
    sum += (weights[i] * ((points[2 * i] - points[0]) * dy - (points[2 * i + 1] - points[1]) * dx)) / 2;
  }
  return sum;
}
const bases = new Map<number, ReturnType<typeof lagrangeBasis>>();

function measureRegion(mesh: Mesh, region: number): RegionQuality {
  const { regions, triangleEdges, edges, vertices } = mesh;
  let triangles = 0;
  let area = 0;
  let sum = 0;
  let shortestSide = Infinity;
  let longestSide = 0;
  const own = new Set<number>();
  for (let t = 0; t < regions.length; t++) {
    if (regions[t] !== region) continue;
    triangles++;
    area += triangleArea(mesh, t);
    for (let i = 0; i < 3; i++) own.add(triangleEdges[3 * t + i]);
  }
  for (const edge of own) {
    const [a, b] = [edges[2 * edge], edges[2 * edge + 1]];
    const side = Math.hypot(vertices[2 * a] - vertices[2 * b], vertices[2 * a + 1] - vertices[2 * b + 1]);
    sum += side;
    shortestSide = Math.min(shortestSide, side);
    longestSide = Math.max(longestSide, side);
  }
  return { region, triangles, area, meanSide: sum / own.size, shortestSide, longestSide };
}

/** Faults of the connections: every edge between one or two triangles that name it, all triangles counterclockwise. */
function faultsOf(mesh: Mesh): string[] {
  const { vertices, triangles, triangleEdges, edges, edgeTriangles, edgeCurve, curves, curveOrder: g } = mesh;
  const faults: string[] = [];
  const uses = new Int32Array(edges.length / 2);
  for (let t = 0; t < triangles.length / 3; t++) {
    if (smallestAngleOf(mesh, t) <= 0) faults.push(`triangle ${t} is turned over`);
    for (let i = 0; i < 3; i++) {
      const edge = triangleEdges[3 * t + i];
      const [a, b] = [triangles[3 * t + i], triangles[3 * t + ((i + 1) % 3)]];
      if (edges[2 * edge] !== Math.min(a, b) || edges[2 * edge + 1] !== Math.max(a, b))
        faults.push(`edge ${edge} does not join the vertices of triangle ${t}`);
      if (edgeTriangles[2 * edge] !== t && edgeTriangles[2 * edge + 1] !== t)
        faults.push(`edge ${edge} does not name triangle ${t}`);
      uses[edge]++;
    }
  }
  const pairs = new Set<string>();
  uses.forEach((n, edge) => {
    if (n !== (edgeTriangles[2 * edge + 1] < 0 ? 1 : 2)) faults.push(`edge ${edge} belongs to ${n} triangles`);
    const pair = `${edges[2 * edge]} ${edges[2 * edge + 1]}`;
    if (pairs.has(pair)) faults.push(`edge ${edge} comes twice`);
    pairs.add(pair);
    const curve = edgeCurve[edge];
    if (curve < 0) return;
    for (const [node, v] of [
      [0, edges[2 * edge]],
      [g, edges[2 * edge + 1]],
    ]) {
      const at = 2 * ((g + 1) * curve + node);
      if (curves[at] !== vertices[2 * v] || curves[at + 1] !== vertices[2 * v + 1])
        faults.push(`curve ${curve} does not end in vertex ${v}`);
    }
  });
  return faults;
}
