// How does each basis function project on the waves e^{imφ} of the rim?

import { edgeFunction } from '../elements/basis.ts';
import type { Space } from '../elements/space.ts';
import { LAYER } from '../mesh/mesh.ts';
import type { ComplexArray } from '../numerics/complex.ts';
import { integratedLegendreInto } from '../numerics/polynomials.ts';
import { gaussLegendre } from '../numerics/quadrature.ts';

/** F_m[i] = (1/2π) ∮ N_i e^{−imφ} dφ over the rim circle, for the unknowns that do not vanish there. */
export interface RimFunctionals {
  /** Highest |m|. */
  readonly order: number;
  /** Unknowns of the space with a trace on the rim. */
  readonly unknowns: Int32Array;
  /** (2M+1) × unknowns.length, interleaved: F_m of rim unknown j at (m + M) + j (2M+1). F_{−m} is the conjugate of F_m. */
  readonly values: ComplexArray;
}

/** Integrates the traces; Gauss–Legendre with enough nodes for order, span and the fastest wave. */
export function rimFunctionals(space: Space, order: number): RimFunctionals {
  const { mesh } = space;
  const width = 2 * order + 1;
  const place = new Map<number, number>();
  const columns: Float64Array[] = [];
  const shape = new Float64Array(space.order + 1);
  const slope = new Float64Array(space.order + 1);
  for (let e = 0; e < mesh.edges.length / 2; e++) {
    const inner = rimTriangle(space, e);
    if (inner < 0) continue;
    const trace = edgeTrace(space, inner, e);
    const from = angleOf(mesh.vertices, mesh.edges[2 * e], mesh.center);
    let turn = angleOf(mesh.vertices, mesh.edges[2 * e + 1], mesh.center) - from;
    turn -= 2 * Math.PI * Math.round(turn / (2 * Math.PI));
    const rule = gaussLegendre(space.order + 6 + Math.ceil((order * Math.abs(turn)) / 2));
    for (let q = 0; q < rule.nodes.length; q++) {
      const s = rule.nodes[q];
      const phi = from + (turn * (1 + s)) / 2;
      const w = (rule.weights[q] * Math.abs(turn)) / (4 * Math.PI);
      integratedLegendreInto(shape, slope, space.order, s);
      for (const { unknown, degree } of trace) {
        const value =
          degree === 0 ? (1 - s) / 2 : degree === 1 ? (1 + s) / 2 : shape[degree] * Math.sqrt((2 * degree - 1) / 2);
        let j = place.get(unknown);
        if (j === undefined) {
          j = columns.length;
          place.set(unknown, j);
          columns.push(new Float64Array(2 * width));
        }
        const column = columns[j];
        for (let m = -order; m <= order; m++) {
          column[2 * (m + order)] += w * value * Math.cos(m * phi);
          column[2 * (m + order) + 1] -= w * value * Math.sin(m * phi);
        }
      }
    }
  }
  const values = new Float64Array(2 * width * columns.length);
  columns.forEach((column, j) => values.set(column, 2 * width * j));
  return { order, unknowns: Int32Array.from(place.keys()), values };
}

/** û_m = F_m u for m = −M … M. */
export function projectRim(rim: RimFunctionals, field: ComplexArray): ComplexArray {
  const width = 2 * rim.order + 1;
  const out = new Float64Array(2 * width);
  rim.unknowns.forEach((g, j) => {
    const re = field[2 * g];
    const im = field[2 * g + 1];
    for (let m = 0; m < width; m++) {
      const a = rim.values[2 * (m + j * width)];
      const b = rim.values[2 * (m + j * width) + 1];
      out[2 * m] += a * re - b * im;
      out[2 * m + 1] += a * im + b * re;
    }
  });
  return out;
}

/** The triangle inside the rim at a rim edge, else -1. */
function rimTriangle(space: Space, e: number): number {
  const { edgeTriangles, regions } = space.mesh;
  const a = edgeTriangles[2 * e];
  const b = edgeTriangles[2 * e + 1];
  if (a < 0 || b < 0) return -1;
  const la = regions[a] === LAYER;
  const lb = regions[b] === LAYER;
  return la === lb ? -1 : la ? b : a;
}

/** Unknowns of an edge: its lower vertex (degree 0), higher vertex (1), then its own functions by degree. */
function edgeTrace(space: Space, t: number, e: number): { unknown: number; degree: number }[] {
  const { mesh, starts, list, functions } = space;
  let local = 0;
  while (mesh.triangleEdges[3 * t + local] !== e) local++;
  const out: { unknown: number; degree: number }[] = [];
  for (let i = starts[t]; i < starts[t + 1]; i++) {
    const g = list[i];
    if (g < 0) continue;
    const f = functions[i];
    if (f < 3) {
      const v = mesh.triangles[3 * t + f];
      if (v === mesh.edges[2 * e]) out.push({ unknown: g, degree: 0 });
      else if (v === mesh.edges[2 * e + 1]) out.push({ unknown: g, degree: 1 });
      continue;
    }
    for (let j = 2; j <= space.order; j++) if (f === edgeFunction(local, j)) out.push({ unknown: g, degree: j });
  }
  return out;
}

const angleOf = (vertices: Float64Array, v: number, center: readonly [number, number]): number =>
  Math.atan2(vertices[2 * v + 1] - center[1], vertices[2 * v] - center[0]);
