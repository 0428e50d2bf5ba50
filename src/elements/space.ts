// Which unknowns does each triangle carry?

import type { Mesh } from '../mesh/mesh.ts';
import { edgeFunction, functionCount, interiorFunction } from './basis.ts';

/**
 * A conforming finite-element space: every triangle has its own order, every edge that of its higher neighbour.
 * Unknowns: vertices first, then edges by degree, then interiors; those on the end circle are fixed to zero (-1).
 */
export interface Space {
  readonly mesh: Mesh;
  /** Largest order present. */
  readonly order: number;
  /** Order of each triangle. */
  readonly orders: Int32Array;
  readonly unknowns: number;
  /** Triangle t uses entries starts[t] … starts[t+1] of the three lists below. */
  readonly starts: Int32Array;
  /** Global unknown, or -1. */
  readonly list: Int32Array;
  /** Index of the shape function (basis.ts). */
  readonly functions: Int32Array;
  /** +1 or −1: edge functions of odd degree follow the edge's global direction. */
  readonly signs: Int8Array;
}

/** Builds the space of uniform order, or of one order a triangle. @throws RangeError for an order below 1 or above 20. */
export function buildSpace(mesh: Mesh, orders: number | Int32Array): Space {
  const triangles = mesh.triangles.length / 3;
  const order = typeof orders === 'number' ? orders : orders.reduce((a, b) => Math.max(a, b), 1);
  if (!(order >= 1 && order <= MOST_ORDER)) throw new RangeError(`the order came as ${order}; expected 1 to 20`);
  const orderOfEach = typeof orders === 'number' ? new Int32Array(triangles).fill(orders) : orders;

  // edge orders and fixed boundary
  const edges = mesh.edges.length / 2;
  const edgeOrder = new Int32Array(edges);
  const vertexFixed = new Uint8Array(mesh.vertices.length / 2);
  const edgeFixed = new Uint8Array(edges);
  for (let e = 0; e < edges; e++) {
    const t0 = mesh.edgeTriangles[2 * e];
    const t1 = mesh.edgeTriangles[2 * e + 1];
    edgeOrder[e] = Math.max(t0 >= 0 ? orderOfEach[t0] : 1, t1 >= 0 ? orderOfEach[t1] : 1);
    if ((t0 < 0 || t1 < 0) && (mesh.edgeFree?.[e] ?? -1) < 0) {
      edgeFixed[e] = 1;
      vertexFixed[mesh.edges[2 * e]] = 1;
      vertexFixed[mesh.edges[2 * e + 1]] = 1;
    }
  }

  // numbering
  let unknowns = 0;
  const vertexUnknown = Int32Array.from(vertexFixed, (fixed) => (fixed ? -1 : unknowns++));
  const edgeUnknown = new Int32Array(edges);
  for (let e = 0; e < edges; e++) {
    edgeUnknown[e] = edgeFixed[e] ? -1 : unknowns;
    if (!edgeFixed[e]) unknowns += edgeOrder[e] - 1;
  }
  const starts = new Int32Array(triangles + 1);
  for (let t = 0; t < triangles; t++) {
    const p = orderOfEach[t];
    let count = 3 + ((p - 1) * (p - 2)) / 2;
    for (let i = 0; i < 3; i++) count += edgeOrder[mesh.triangleEdges[3 * t + i]] - 1;
    starts[t + 1] = starts[t] + count;
  }

  // lists
  const list = new Int32Array(starts[triangles]);
  const functions = new Int32Array(list.length);
  const signs = new Int8Array(list.length).fill(1);
  for (let t = 0; t < triangles; t++) {
    let at = starts[t];
    for (let i = 0; i < 3; i++) {
      list[at] = vertexUnknown[mesh.triangles[3 * t + i]]!;
      functions[at++] = i;
    }
    for (let i = 0; i < 3; i++) {
      const e = mesh.triangleEdges[3 * t + i];
      const backwards = mesh.triangles[3 * t + i] !== mesh.edges[2 * e];
      for (let j = 2; j <= edgeOrder[e]; j++) {
        list[at] = edgeUnknown[e] < 0 ? -1 : edgeUnknown[e] + j - 2;
        functions[at] = edgeFunction(i, j);
        if (backwards && j % 2 === 1) signs[at] = -1;
        at++;
      }
    }
    for (let j = 3; j <= orderOfEach[t]; j++) {
      for (let i = 0; i < j - 2; i++) {
        list[at] = unknowns++;
        functions[at++] = interiorFunction(j) + i;
      }
    }
  }
  return { mesh, order, orders: orderOfEach, unknowns, starts, list, functions, signs };
}

/** Highest order a triangle can have. */
export const MOST_ORDER = 20;

/**
 * Orders of all triangles: order + shifts[t] from the order on that the shifts were made for, below it at most `order`; at
 * least 1 and at most 20. The order itself where all are alike.
 */
export const ordersAt = (order: number, shifts: Int32Array | null, madeFor = 0): number | Int32Array =>
  shifts
    ? shifts.map((s) => Math.min(Math.max(order >= madeFor ? order + s : Math.min(madeFor + s, order), 1), MOST_ORDER))
    : order;

/** Largest number of shape functions on any triangle of the space. */
export function largestElement(space: Space): number {
  let largest = 0;
  for (let t = 0; t + 1 < space.starts.length; t++) largest = Math.max(largest, space.starts[t + 1] - space.starts[t]);
  return largest;
}

/**
 * Embeds coefficient vectors of `from` (columns × 2·from.unknowns, interleaved) into the richer space `to` on the same
 * mesh: hierarchical functions keep their coefficients, new ones are zero.
 */
export function embed(to: Space, from: Space, x: Float64Array, columns = 1): Float64Array {
  const out = new Float64Array(2 * to.unknowns * columns);
  const where = new Int32Array(functionCount(to.order));
  const target = new Int32Array(from.unknowns).fill(-1);
  for (let t = 0; t + 1 < to.starts.length; t++) {
    where.fill(-1);
    for (let i = to.starts[t]; i < to.starts[t + 1]; i++) where[to.functions[i]] = to.list[i]!;
    for (let i = from.starts[t]; i < from.starts[t + 1]; i++) {
      if (from.list[i] >= 0) target[from.list[i]] = where[from.functions[i]]!;
    }
  }
  for (let c = 0; c < columns; c++) {
    for (let i = 0; i < from.unknowns; i++) {
      const j = target[i];
      if (j < 0) continue;
      out[2 * (c * to.unknowns + j)] = x[2 * (c * from.unknowns + i)]!;
      out[2 * (c * to.unknowns + j) + 1] = x[2 * (c * from.unknowns + i) + 1]!;
    }
  }
  return out;
}
