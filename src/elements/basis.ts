// Which shape functions live on the reference triangle?

import { jacobiDerivativesInto, jacobiInto, scaledIntegratedLegendreInto } from '../numerics/polynomials.ts';

/**
 * Hierarchical shape functions on the triangle with corners (0,0), (1,0), (0,1); barycentrics λ0 = 1−x−y, λ1 = x, λ2 = y.
 * They are listed by degree, so that the functions of order p are the first (p+1)(p+2)/2 of any higher order:
 *
 *   degree 1      λ0, λ1, λ2
 *   degree j ≥ 2  three edge functions  c_j L_j^S(λb−λa, λa+λb)  for the edges (a,b) = (0,1), (1,2), (2,0), then
 *                 the j−2 interior ones c_i L_i^S(λ1−λ0, λ0+λ1) λ2 P_l^{(2i−2,1)}(2λ2−1),  i = 2 … j−1, l = j−1−i.
 *
 * L_j^S(x,t) = t^j L_j(x/t) is the scaled integrated Legendre polynomial and c_j = √((2j−1)/2). An edge function of odd
 * degree changes sign when its edge is run through backwards; the space (space.ts) holds that sign.
 * Source: Szabó & Babuška, Finite Element Analysis (1991); Beuchler & Schöberl, Numer. Math. 103 (2006) 339.
 */
export type FunctionKind = 'vertex' | 'edge' | 'interior';

/** Number of shape functions of order p on a triangle. */
export const functionCount = (order: number): number => ((order + 1) * (order + 2)) / 2;

/** Index in the list of edge `edge`'s function of degree j ≥ 2. */
export const edgeFunction = (edge: number, degree: number): number => functionCount(degree - 1) + edge;

/** Index of the first interior function of degree j ≥ 3; there are j − 2. */
export const interiorFunction = (degree: number): number => functionCount(degree - 1) + 3;

/**
 * Values and gradients of all functions up to `order` at the points [x0,y0,…] of the reference triangle.
 * Each array holds `functionCount(order)` numbers a point, point by point.
 */
export function tabulateBasis(
  order: number,
  points: ArrayLike<number>,
): { readonly values: Float64Array; readonly dx: Float64Array; readonly dy: Float64Array } {
  const nd = functionCount(order);
  const nq = points.length / 2;
  const values = new Float64Array(nd * nq);
  const dx = new Float64Array(nd * nq);
  const dy = new Float64Array(nd * nq);
  const bubble = new Float64Array(order + 1);
  const byX = new Float64Array(order + 1);
  const byT = new Float64Array(order + 1);
  const jacobi = new Float64Array(order + 1);
  const jacobiSlope = new Float64Array(order + 1);
  for (let q = 0; q < nq; q++) {
    const at = q * nd;
    const x = points[2 * q];
    const y = points[2 * q + 1];
    const lambda = [1 - x - y, x, y];
    for (let i = 0; i < 3; i++) {
      values[at + i] = lambda[i]!;
      dx[at + i] = GRADIENT[i][0];
      dy[at + i] = GRADIENT[i][1];
    }
    for (let e = 2; e >= 0; e--) {
      // edge 0 comes last, so that its values serve the interior functions below
      const a = e;
      const b = (e + 1) % 3;
      scaledIntegratedLegendreInto(bubble, byX, byT, order, lambda[b] - lambda[a], lambda[a] + lambda[b]);
      const sx = GRADIENT[b][0] - GRADIENT[a][0];
      const sy = GRADIENT[b][1] - GRADIENT[a][1];
      const tx = GRADIENT[b][0] + GRADIENT[a][0];
      const ty = GRADIENT[b][1] + GRADIENT[a][1];
      for (let j = 2; j <= order; j++) {
        const f = at + edgeFunction(e, j);
        const c = edgeScale(j);
        values[f] = c * bubble[j];
        dx[f] = c * (byX[j] * sx + byT[j] * tx);
        dy[f] = c * (byX[j] * sy + byT[j] * ty);
      }
    }
    for (let i = 2; i < order; i++) {
      // g = L_i^S(λ1−λ0, λ0+λ1): λ1−λ0 = 2x+y−1, λ0+λ1 = 1−y
      const c = edgeScale(i);
      const g = c * bubble[i];
      const gx = c * 2 * byX[i];
      const gy = c * (byX[i] - byT[i]);
      jacobiInto(jacobi, order - 1 - i, 2 * i - 2, 1, 2 * y - 1);
      jacobiDerivativesInto(jacobiSlope, order - 1 - i, 2 * i - 2, 1, 2 * y - 1);
      for (let l = 0; l <= order - 1 - i; l++) {
        const j = i + l + 1;
        const f = at + interiorFunction(j) + (i - 2);
        const h = y * jacobi[l];
        const hy = jacobi[l] + 2 * y * jacobiSlope[l];
        values[f] = g * h;
        dx[f] = gx * h;
        dy[f] = gy * h + g * hy;
      }
    }
  }
  return { values, dx, dy };
}

/** c_j: makes ∫(c_j L_j′)² = 1 on [−1, 1]. */
const edgeScale = (degree: number): number => Math.sqrt((2 * degree - 1) / 2);

/** Gradients of λ0, λ1, λ2. */
const GRADIENT: readonly (readonly [number, number])[] = [
  [-1, -1],
  [1, 0],
  [0, 1],
];
