// Which cylindrical waves does a field show on the rim?

import type { Device } from '../device/model.ts';
import { edgeFunction } from '../elements/basis.ts';
import type { Space } from '../elements/space.ts';
import { LAYER } from '../mesh/mesh.ts';
import { hankel } from '../numerics/cylinder-functions.ts';
import { type Complex, complex, type ComplexArray, divide, scale } from '../numerics/complex.ts';
import { integratedLegendreInto } from '../numerics/polynomials.ts';
import { gaussLegendre } from '../numerics/quadrature.ts';
import type { Multipoles } from './contrast.ts';

/**
 * Amplitudes of H⁽¹⁾_m (kind 1) or H⁽²⁾_m (kind 2), m = −M … M, of a field that holds only these outside:
 * (1/2π) ∮ u e^{−imφ} dφ / H_m(κR). As accurate as the field itself; `modeMultipoles` squares that at more cost.
 */
export function rimMultipoles(
  device: Device,
  space: Space,
  k: Complex,
  kind: 1 | 2,
  order: number,
  fields: readonly ComplexArray[],
): Multipoles[] {
  const { mesh } = space;
  const rule = gaussLegendre(space.order + 6);
  const nq = rule.nodes.length;
  const sums = fields.map(() => new Float64Array(2 * (2 * order + 1)));
  const shape = new Float64Array(space.order + 1);
  const slope = new Float64Array(space.order + 1);
  const u = new Float64Array(2);
  for (let e = 0; e < mesh.edges.length / 2; e++) {
    const inner = rimTriangle(space, e);
    if (inner < 0) continue;
    const trace = edgeTrace(space, inner, e);
    const from = angleOf(mesh.vertices, mesh.edges[2 * e], mesh.center);
    let turn = angleOf(mesh.vertices, mesh.edges[2 * e + 1], mesh.center) - from;
    turn -= 2 * Math.PI * Math.round(turn / (2 * Math.PI));
    for (let q = 0; q < nq; q++) {
      const s = rule.nodes[q];
      const phi = from + (turn * (1 + s)) / 2;
      const w = (rule.weights[q] * Math.abs(turn)) / (4 * Math.PI);
      integratedLegendreInto(shape, slope, space.order, s);
      fields.forEach((field, j) => {
        u[0] = 0;
        u[1] = 0;
        for (const { unknown, degree } of trace) {
          const value =
            degree === 0 ? (1 - s) / 2 : degree === 1 ? (1 + s) / 2 : shape[degree] * Math.sqrt((2 * degree - 1) / 2);
          u[0] = u[0] + value * field[2 * unknown];
          u[1] = u[1] + value * field[2 * unknown + 1];
        }
        const sum = sums[j];
        for (let m = -order; m <= order; m++) {
          const c = w * Math.cos(m * phi);
          const d = -w * Math.sin(m * phi);
          const i = 2 * (m + order);
          sum[i] = sum[i] + c * u[0] - d * u[1];
          sum[i + 1] = sum[i + 1] + c * u[1] + d * u[0];
        }
      });
    }
  }
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const h = hankel(kind, order, scale(k, index * mesh.rimRadius));
  for (const sum of sums) {
    for (let m = -order; m <= order; m++) {
      const i = 2 * (m + order);
      const a = Math.abs(m);
      const sign = m < 0 && a % 2 === 1 ? -1 : 1;
      const value = divide(complex(sum[i], sum[i + 1]), complex(sign * h[2 * a], sign * h[2 * a + 1]));
      sum[i] = Number.isFinite(value.re) ? value.re : 0;
      sum[i + 1] = Number.isFinite(value.im) ? value.im : 0;
    }
  }
  return sums;
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
