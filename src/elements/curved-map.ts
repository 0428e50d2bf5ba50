// Where does a point of the reference triangle lie in the plane?

import type { Mesh } from '../mesh/mesh.ts';
import { type LagrangeBasis, lagrangeBasis, lagrangeDerivativesInto, lagrangeInto } from '../numerics/polynomials.ts';
import { gaussLobatto } from '../numerics/quadrature.ts';

/**
 * The map of a triangle with curved edges, tabulated at fixed reference points:
 *
 *   X(λ) = Σ λ_i x_i + Σ_edges λ_a λ_b φ(λ_b − λ_a),   φ(s) = 4 d(s) / (1 − s²),
 *
 * d(s) the deviation of the edge's curve from its chord: the smooth blending that leaves straight edges straight
 * (Szabó & Babuška, Finite Element Analysis, 1991). φ is interpolated at the g − 1 inner Gauss–Lobatto nodes.
 */
export interface MapTable {
  /** Reference points [x0,y0,…]. */
  readonly points: ArrayLike<number>;
  readonly curveOrder: number;
  /** For each edge and point: λaλb, its x and y derivative. */
  readonly bubble: Float64Array;
  /** For each edge and point: g−1 weights giving φ, then g−1 giving φ′. */
  readonly weights: Float64Array;
}

/** Places and Jacobians of the tabulated points on one triangle: six numbers a point (x, y, ∂x/∂ξ, ∂x/∂η, ∂y/∂ξ, ∂y/∂η). */
export const MAP_STRIDE = 6;

/** Tabulates the map for the given reference points. */
export function tabulateMap(points: ArrayLike<number>, curveOrder: number): MapTable {
  const nq = points.length / 2;
  const inner = innerBasis(curveOrder);
  const g = inner.nodes.length;
  const value = new Float64Array(g);
  const slope = new Float64Array(g);
  const bubble = new Float64Array(3 * nq * 3);
  const weights = new Float64Array(3 * nq * 2 * g);
  for (let q = 0; q < nq; q++) {
    const x = points[2 * q];
    const y = points[2 * q + 1];
    const lambda = [1 - x - y, x, y];
    for (let e = 0; e < 3; e++) {
      const a = e;
      const b = (e + 1) % 3;
      const at = 3 * (e * nq + q);
      bubble[at] = lambda[a] * lambda[b];
      bubble[at + 1] = GX[a] * lambda[b] + lambda[a] * GX[b];
      bubble[at + 2] = GY[a] * lambda[b] + lambda[a] * GY[b];
      lagrangeInto(value, inner, lambda[b] - lambda[a]);
      lagrangeDerivativesInto(slope, value, inner);
      weights.set(value, 2 * g * (e * nq + q));
      weights.set(slope, 2 * g * (e * nq + q) + g);
    }
  }
  return { points, curveOrder, bubble, weights };
}

/** True when any edge of the triangle is curved. */
export function isCurved(mesh: Mesh, triangle: number): boolean {
  for (let e = 0; e < 3; e++) if (mesh.edgeCurve[mesh.triangleEdges[3 * triangle + e]] >= 0) return true;
  return false;
}

/** Fills `out` (MAP_STRIDE numbers a point) with places and Jacobians of triangle `t`. */
export function mapInto(out: Float64Array, mesh: Mesh, t: number, table: MapTable): Float64Array {
  const { points, bubble, weights } = table;
  const nq = points.length / 2;
  const { vertices, triangles } = mesh;
  const v0 = 2 * triangles[3 * t];
  const v1 = 2 * triangles[3 * t + 1];
  const v2 = 2 * triangles[3 * t + 2];
  const x0 = vertices[v0];
  const y0 = vertices[v0 + 1];
  const ax = vertices[v1] - x0;
  const ay = vertices[v1 + 1] - y0;
  const bx = vertices[v2] - x0;
  const by = vertices[v2 + 1] - y0;
  for (let q = 0; q < nq; q++) {
    const at = MAP_STRIDE * q;
    const x = points[2 * q];
    const y = points[2 * q + 1];
    out[at] = x0 + ax * x + bx * y;
    out[at + 1] = y0 + ay * x + by * y;
    out[at + 2] = ax;
    out[at + 3] = bx;
    out[at + 4] = ay;
    out[at + 5] = by;
  }
  for (let e = 0; e < 3; e++) {
    const phi = edgeBulge(mesh, t, e);
    if (!phi) continue;
    const g = phi.length / 2;
    // s = λb − λa changes along ξ and η by these constants
    const sx = GX[(e + 1) % 3] - GX[e];
    const sy = GY[(e + 1) % 3] - GY[e];
    for (let q = 0; q < nq; q++) {
      const w = 2 * g * (e * nq + q);
      let fx = 0;
      let fy = 0;
      let dfx = 0;
      let dfy = 0;
      for (let j = 0; j < g; j++) {
        const l = weights[w + j];
        const dl = weights[w + g + j];
        fx += l * phi[2 * j];
        fy += l * phi[2 * j + 1];
        dfx += dl * phi[2 * j];
        dfy += dl * phi[2 * j + 1];
      }
      const c = bubble[3 * (e * nq + q)];
      const cx = bubble[3 * (e * nq + q) + 1];
      const cy = bubble[3 * (e * nq + q) + 2];
      const at = MAP_STRIDE * q;
      out[at] = out[at] + c * fx;
      out[at + 1] = out[at + 1] + c * fy;
      out[at + 2] = out[at + 2] + cx * fx + c * dfx * sx;
      out[at + 3] = out[at + 3] + cy * fx + c * dfx * sy;
      out[at + 4] = out[at + 4] + cx * fy + c * dfy * sx;
      out[at + 5] = out[at + 5] + cy * fy + c * dfy * sy;
    }
  }
  return out;
}

/** φ at the inner nodes, [x0,y0,…] in the triangle's own direction of edge `e`; null for a straight edge. */
function edgeBulge(mesh: Mesh, t: number, e: number): Float64Array | null {
  const edge = mesh.triangleEdges[3 * t + e];
  const curve = mesh.edgeCurve[edge];
  if (curve < 0) return null;
  const g = mesh.curveOrder;
  const inner = innerBasis(g).nodes;
  const start = 2 * (g + 1) * curve;
  const backwards = mesh.triangles[3 * t + e] !== mesh.edges[2 * edge];
  const phi = new Float64Array(2 * (g - 1));
  const { curves } = mesh;
  for (let i = 0; i < 2; i++) {
    const from = curves[start + i];
    const to = curves[start + 2 * g + i];
    for (let j = 0; j < g - 1; j++) {
      const s = inner[j];
      const deviation = curves[start + 2 * (j + 1) + i] - (from * (1 - s) + to * (1 + s)) / 2;
      phi[2 * (backwards ? g - 2 - j : j) + i] = (4 * deviation) / (1 - s * s);
    }
  }
  return phi;
}

const GX = [-1, 1, 0];
const GY = [-1, 0, 1];
const INNER = new Map<number, LagrangeBasis>();

function innerBasis(g: number): LagrangeBasis {
  let basis = INNER.get(g);
  if (!basis) {
    basis = lagrangeBasis(Float64Array.from(gaussLobatto(g + 1).nodes).slice(1, g));
    INNER.set(g, basis);
  }
  return basis;
}
