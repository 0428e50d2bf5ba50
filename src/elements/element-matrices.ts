// What are the stiffness and mass matrices of one triangle?

import { LAYER } from '../mesh/mesh.ts';
import { triangleRule } from '../numerics/quadrature.ts';
import { functionCount, tabulateBasis } from './basis.ts';
import { isCurved, MAP_STRIDE, mapInto, tabulateMap } from './curved-map.ts';
import type { Space } from './space.ts';

/**
 * Complex coefficients of one point: ∇uᵀT∇v with the symmetric tensor T = [[t11,t12],[t12,t22]], and m·u·v, as
 * [Re t11, Im t11, Re t12, Im t12, Re t22, Im t22, Re m, Im m].
 */
export type PointCoefficients = (x: number, y: number, out: Float64Array) => void;

/**
 * Matrices of every triangle for unit material, so that A = Σ_t p_t K_t − k² q_t M_t. Inside the rim they are real
 * (nd² numbers, symmetric); in the layer complex, interleaved (2nd²). Signs of the space are folded in.
 */
export interface ElementMatrices {
  readonly stiffness: readonly Float64Array[];
  readonly mass: readonly Float64Array[];
  /** 1 where the triangle's matrices are complex (the stretched layer). */
  readonly complex: Uint8Array;
}

/** Quadrature degree beyond 2p that curved maps (degree 10, fast-decaying) and stretched layers ask for. */
const EXTRA_DEGREE = 8;

/** Assembles all element matrices; `layer` gives the coefficients in region LAYER. */
export function assembleElements(space: Space, layer: PointCoefficients): ElementMatrices {
  const { mesh, starts } = space;
  const triangles = mesh.triangles.length / 3;
  const stiffness: Float64Array[] = new Array<Float64Array>(triangles);
  const mass: Float64Array[] = new Array<Float64Array>(triangles);
  const complex = new Uint8Array(triangles);
  const reference = referenceMatrices(space.order);
  const rule = triangleRule(2 * space.order + EXTRA_DEGREE);
  const basis = tabulateBasis(space.order, rule.points);
  const table = tabulateMap(rule.points, mesh.curveOrder);
  const work = makeWork(rule, space.order);
  for (let t = 0; t < triangles; t++) {
    const functions = space.functions.subarray(starts[t], starts[t + 1]);
    const signs = space.signs.subarray(starts[t], starts[t + 1]);
    const nd = functions.length;
    if (mesh.regions[t] === LAYER) {
      complex[t] = 1;
      stiffness[t] = new Float64Array(2 * nd * nd);
      mass[t] = new Float64Array(2 * nd * nd);
      mapInto(work.map, mesh, t, table);
      integrateLayer(stiffness[t], mass[t], functions, basis, rule.weights, work, layer);
      applySigns(stiffness[t], signs, 2);
      applySigns(mass[t], signs, 2);
      continue;
    }
    stiffness[t] = new Float64Array(nd * nd);
    mass[t] = new Float64Array(nd * nd);
    mapInto(work.map, mesh, t, table);
    if (isCurved(mesh, t)) integrateCurved(stiffness[t], mass[t], functions, basis, rule.weights, work);
    else scaleReference(stiffness[t], mass[t], functions, reference, work.map);
    applySigns(stiffness[t], signs, 1);
    applySigns(mass[t], signs, 1);
  }
  return { stiffness, mass, complex };
}

interface Work {
  readonly map: Float64Array;
  readonly gx: Float64Array;
  readonly gy: Float64Array;
  readonly hx: Float64Array;
  readonly hy: Float64Array;
  readonly f: Float64Array;
}

const makeWork = (rule: { weights: Float64Array }, order: number): Work => ({
  map: new Float64Array(MAP_STRIDE * rule.weights.length),
  gx: new Float64Array(functionCount(order)),
  gy: new Float64Array(functionCount(order)),
  hx: new Float64Array(2 * functionCount(order)),
  hy: new Float64Array(2 * functionCount(order)),
  f: new Float64Array(functionCount(order)),
});

type Basis = ReturnType<typeof tabulateBasis>;

/** Gradients in the plane of the chosen functions at point q; returns det J. */
function planeGradients(functions: Int32Array, basis: Basis, q: number, work: Work): number {
  const { map, gx, gy, f } = work;
  const total = basis.values.length / (map.length / MAP_STRIDE);
  const at = MAP_STRIDE * q;
  const a = map[at + 2];
  const b = map[at + 3];
  const c = map[at + 4];
  const d = map[at + 5];
  const det = a * d - b * c;
  for (let i = 0; i < functions.length; i++) {
    const n = total * q + functions[i];
    const dx = basis.dx[n];
    const dy = basis.dy[n];
    gx[i] = (d * dx - c * dy) / det;
    gy[i] = (a * dy - b * dx) / det;
    f[i] = basis.values[n]!;
  }
  return det;
}

function integrateCurved(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  basis: Basis,
  weights: Float64Array,
  work: Work,
): void {
  const nd = functions.length;
  const { gx, gy, f } = work;
  for (let q = 0; q < weights.length; q++) {
    const w = weights[q] * planeGradients(functions, basis, q, work);
    for (let j = 0; j < nd; j++) {
      const wx = w * gx[j];
      const wy = w * gy[j];
      const wf = w * f[j];
      const col = j * nd;
      for (let i = 0; i <= j; i++) {
        k[col + i] = k[col + i] + wx * gx[i] + wy * gy[i];
        m[col + i] = m[col + i] + wf * f[i];
      }
    }
  }
  mirror(k, nd, 1);
  mirror(m, nd, 1);
}

function integrateLayer(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  basis: Basis,
  weights: Float64Array,
  work: Work,
  coefficients: PointCoefficients,
): void {
  const nd = functions.length;
  const { gx, gy, hx, hy, f, map } = work;
  const c = new Float64Array(8);
  for (let q = 0; q < weights.length; q++) {
    const w = weights[q] * planeGradients(functions, basis, q, work);
    coefficients(map[MAP_STRIDE * q], map[MAP_STRIDE * q + 1], c);
    for (let i = 0; i < nd; i++) {
      hx[2 * i] = c[0] * gx[i] + c[2] * gy[i];
      hx[2 * i + 1] = c[1] * gx[i] + c[3] * gy[i];
      hy[2 * i] = c[2] * gx[i] + c[4] * gy[i];
      hy[2 * i + 1] = c[3] * gx[i] + c[5] * gy[i];
    }
    for (let j = 0; j < nd; j++) {
      const wx = w * gx[j];
      const wy = w * gy[j];
      const mr = w * f[j] * c[6];
      const mi = w * f[j] * c[7];
      const col = 2 * j * nd;
      for (let i = 0; i <= j; i++) {
        const n = col + 2 * i;
        k[n] = k[n] + wx * hx[2 * i] + wy * hy[2 * i];
        k[n + 1] = k[n + 1] + wx * hx[2 * i + 1] + wy * hy[2 * i + 1];
        m[n] = m[n] + mr * f[i];
        m[n + 1] = m[n + 1] + mi * f[i];
      }
    }
  }
  mirror(k, nd, 2);
  mirror(m, nd, 2);
}

/** Matrices of the reference triangle: ξξ, ξη+ηξ, ηη stiffness and mass. */
interface Reference {
  readonly nd: number;
  readonly xx: Float64Array;
  readonly xy: Float64Array;
  readonly yy: Float64Array;
  readonly mass: Float64Array;
}

const REFERENCE = new Map<number, Reference>();

function referenceMatrices(order: number): Reference {
  const known = REFERENCE.get(order);
  if (known) return known;
  const nd = functionCount(order);
  const rule = triangleRule(2 * order);
  const { values, dx, dy } = tabulateBasis(order, rule.points);
  const xx = new Float64Array(nd * nd);
  const xy = new Float64Array(nd * nd);
  const yy = new Float64Array(nd * nd);
  const mass = new Float64Array(nd * nd);
  for (let q = 0; q < rule.weights.length; q++) {
    const w = rule.weights[q];
    const at = q * nd;
    for (let j = 0; j < nd; j++) {
      for (let i = 0; i < nd; i++) {
        const n = j * nd + i;
        xx[n] = xx[n] + w * dx[at + i] * dx[at + j];
        yy[n] = yy[n] + w * dy[at + i] * dy[at + j];
        xy[n] = xy[n] + w * (dx[at + i] * dy[at + j] + dy[at + i] * dx[at + j]);
        mass[n] = mass[n] + w * values[at + i] * values[at + j];
      }
    }
  }
  const made = { nd, xx, xy, yy, mass };
  REFERENCE.set(order, made);
  return made;
}

function scaleReference(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  reference: Reference,
  map: Float64Array,
): void {
  const a = map[2];
  const b = map[3];
  const c = map[4];
  const d = map[5];
  const det = a * d - b * c;
  const g11 = (d * d + b * b) / det;
  const g12 = -(c * d + a * b) / det;
  const g22 = (c * c + a * a) / det;
  const nd = functions.length;
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i < nd; i++) {
      const n = functions[j] * reference.nd + functions[i];
      k[j * nd + i] = g11 * reference.xx[n] + g12 * reference.xy[n] + g22 * reference.yy[n];
      m[j * nd + i] = det * reference.mass[n];
    }
  }
}

/** Copies the upper triangle (i ≤ j) below the diagonal; `width` 1 for real, 2 for complex entries. */
function mirror(a: Float64Array, nd: number, width: 1 | 2): void {
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i < j; i++) {
      for (let c = 0; c < width; c++) a[width * (i * nd + j) + c] = a[width * (j * nd + i) + c]!;
    }
  }
}

function applySigns(a: Float64Array, signs: Int8Array, width: 1 | 2): void {
  const nd = signs.length;
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i < nd; i++) {
      if (signs[i] === signs[j]) continue;
      for (let c = 0; c < width; c++) a[width * (j * nd + i) + c] = -a[width * (j * nd + i) + c];
    }
  }
}
