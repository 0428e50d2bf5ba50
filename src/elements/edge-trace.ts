// Which values do the shape functions take along an outer edge, and where do its points lie?

import { mapInto, triangleCurves } from '../mesh/curved-triangles.ts';
import { integratedLegendreInto } from '../numerics/polynomials.ts';
import { gaussLegendre } from '../numerics/quadrature.ts';
import { edgeFunction } from './basis.ts';
import type { Space } from './space.ts';

/** One outer edge, sampled at quadrature points. */
export interface EdgeTrace {
  readonly triangle: number;
  /** Places in the triangle's list (local functions) of those that do not vanish on the edge. */
  readonly local: Int32Array;
  /** Their unknowns, −1 where fixed. */
  readonly unknowns: Int32Array;
  /** [x0,y0,…] */
  readonly points: Float64Array;
  /** Length weights: ∫ f ds ≈ Σ w f. */
  readonly weights: Float64Array;
  /** Function-major: local function i at point q sits at i·nq + q; signs of the space folded in. */
  readonly values: Float64Array;
}

/** The outer edges whose tag in `edgeFree` passes, each with `nodes` Gauss–Legendre points. */
export function outerEdgeTraces(space: Space, chosen: (tag: number) => boolean, nodes: number): EdgeTrace[] {
  const { mesh } = space;
  const out: EdgeTrace[] = [];
  mesh.edgeFree?.forEach((tag, e) => {
    if (tag >= 0 && chosen(tag) && mesh.edgeTriangles[2 * e] >= 0) out.push(traceOf(space, e, nodes));
  });
  return out;
}

function traceOf(space: Space, e: number, nodes: number): EdgeTrace {
  const { mesh, starts, list, functions } = space;
  const t = mesh.edgeTriangles[2 * e];
  let side = 0;
  while (mesh.triangleEdges[3 * t + side] !== e) side++;
  const rule = gaussLegendre(nodes);
  const lower = mesh.edges[2 * e];
  const forwards = mesh.triangles[3 * t + side] === lower;
  const corners = [0, 0, 1, 0, 0, 1];
  const a = forwards ? side : (side + 1) % 3;
  const b = forwards ? (side + 1) % 3 : side;
  const [ax, ay, bx, by] = [corners[2 * a], corners[2 * a + 1], corners[2 * b], corners[2 * b + 1]];
  const curves = triangleCurves(mesh, t);
  const points = new Float64Array(2 * nodes);
  const weights = new Float64Array(nodes);
  const map = new Float64Array(6);
  const chosen: { local: number; degree: number }[] = [];
  for (let i = starts[t]; i < starts[t + 1]; i++) {
    const f = functions[i];
    if (f < 3) {
      if (f === side || f === (side + 1) % 3)
        chosen.push({ local: i - starts[t], degree: mesh.triangles[3 * t + f] === lower ? 0 : 1 });
      continue;
    }
    for (let j = 2; j <= space.order; j++)
      if (f === edgeFunction(side, j)) chosen.push({ local: i - starts[t], degree: j });
  }
  const values = new Float64Array(chosen.length * nodes);
  const shape = new Float64Array(space.order + 2);
  const slope = new Float64Array(space.order + 2);
  for (let q = 0; q < nodes; q++) {
    const s = rule.nodes[q];
    const r = (1 + s) / 2;
    mapInto(map, curves, ax + r * (bx - ax), ay + r * (by - ay));
    points[2 * q] = map[0];
    points[2 * q + 1] = map[1];
    const vx = map[2] * (bx - ax) + map[4] * (by - ay);
    const vy = map[3] * (bx - ax) + map[5] * (by - ay);
    weights[q] = (rule.weights[q] * Math.hypot(vx, vy)) / 2;
    integratedLegendreInto(shape, slope, space.order, s);
    chosen.forEach(({ degree }, i) => {
      values[i * nodes + q] =
        degree === 0 ? (1 - s) / 2 : degree === 1 ? (1 + s) / 2 : shape[degree] * Math.sqrt((2 * degree - 1) / 2);
    });
  }
  return {
    triangle: t,
    local: Int32Array.from(chosen, (c) => c.local),
    unknowns: Int32Array.from(chosen, (c) => list[starts[t] + c.local]),
    points,
    weights,
    values,
  };
}

/** ∫ N_i N_j ds over one edge, dense in the trace's functions, column-major. */
export function edgeMass({ local, weights, values }: EdgeTrace): Float64Array {
  const n = local.length;
  const nq = weights.length;
  const out = new Float64Array(n * n);
  for (let j = 0; j < n; j++)
    for (let i = 0; i <= j; i++) {
      let sum = 0;
      for (let q = 0; q < nq; q++) sum += weights[q] * values[i * nq + q] * values[j * nq + q];
      out[i + j * n] = sum;
      out[j + i * n] = sum;
    }
  return out;
}
