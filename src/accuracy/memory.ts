// May a step to higher orders still be made, and how much memory will it take?

import { LAYER, type Mesh } from '../mesh/mesh.ts';

/** What may be spent. */
export interface Limits {
  /** Bytes for element matrices and one factorization. */
  readonly bytes?: number;
  /** True once no new step may begin. */
  readonly outOfTime?: () => boolean;
}

/** Why a search ended before its digits were reached. */
export type Stop = 'order' | 'memory' | 'time';

/** Why a step to these orders (and one more) must not be made; null when it may. */
export function stopBefore(limits: Limits, mesh: Mesh, orders: Int32Array): Stop | null {
  if (limits.outOfTime?.()) return 'time';
  const need = bytesFor(
    mesh,
    orders.map((p) => p + 1),
  );
  return need > (limits.bytes ?? Infinity) ? 'memory' : null;
}

/** Numbers in the factor L of a grid of n unknowns in nested dissection order: 7.75 n log₂ n. Source: A. George, SIAM J. Numer. Anal. 10 (1973) 345 (from memory). */
const factorNumbers = (n: number): number => 7.75 * n * Math.log2(Math.max(2, n));

/** Bytes of a complex number. */
const COMPLEX = 16;

/**
 * Bytes of the element matrices (stiffness and mass, real inside the rim, complex in the layer) and of one factorization
 * with condensed interiors.
 */
export function bytesFor(mesh: Mesh, orders: Int32Array): number {
  const { regions, edgeTriangles, triangleEdges } = mesh;
  const edgeOrder = Int32Array.from({ length: mesh.edges.length / 2 }, (_, e) =>
    Math.max(...[edgeTriangles[2 * e], edgeTriangles[2 * e + 1]].map((t) => (t < 0 ? 1 : orders[t]))),
  );
  let bytes = 0;
  for (let t = 0; t < regions.length; t++) {
    const p = orders[t];
    const interior = ((p - 1) * (p - 2)) / 2;
    let outer = 3;
    for (let i = 0; i < 3; i++) outer += edgeOrder[triangleEdges[3 * t + i]] - 1;
    const nd = interior + outer;
    bytes += 2 * nd * nd * (regions[t] === LAYER ? COMPLEX : COMPLEX / 2);
    // the condensed interior's rows of L
    bytes += COMPLEX * interior * nd;
  }
  const shared = edgeOrder.reduce((sum, p) => sum + p - 1, mesh.vertices.length / 2);
  return bytes + COMPLEX * factorNumbers(shared);
}
