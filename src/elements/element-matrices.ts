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

/** Function-major tables of one triangle: function i at point q sits at i·nq + q. */
interface Work {
  readonly map: Float64Array;
  /** ∂x then ∂y of each function: rows of 2nq. */
  readonly gradients: Float64Array;
  readonly values: Float64Array;
  /** The same, weighted: real and imaginary part. */
  readonly fluxRe: Float64Array;
  readonly fluxIm: Float64Array;
  readonly loadRe: Float64Array;
  readonly loadIm: Float64Array;
  readonly sum: Float64Array;
}

function makeWork(rule: { weights: Float64Array }, order: number): Work {
  const nq = rule.weights.length;
  const nd = functionCount(order);
  const rows = (width: number): Float64Array => new Float64Array(nd * nq * width);
  return {
    map: new Float64Array(MAP_STRIDE * nq),
    gradients: rows(2),
    values: rows(1),
    fluxRe: rows(2),
    fluxIm: rows(2),
    loadRe: rows(1),
    loadIm: rows(1),
    sum: new Float64Array(nd * nd),
  };
}

type Basis = ReturnType<typeof tabulateBasis>;

/** Fills values and plane gradients of the chosen functions at all points. */
function tabulateTriangle(functions: Int32Array, basis: Basis, nq: number, work: Work): void {
  const { map, gradients, values } = work;
  const total = basis.values.length / nq;
  for (let q = 0; q < nq; q++) {
    const at = MAP_STRIDE * q;
    const a = map[at + 2];
    const b = map[at + 3];
    const c = map[at + 4];
    const d = map[at + 5];
    const inverse = 1 / (a * d - b * c);
    for (let i = 0; i < functions.length; i++) {
      const n = total * q + functions[i];
      const dx = basis.dx[n];
      const dy = basis.dy[n];
      gradients[2 * i * nq + q] = (d * dx - c * dy) * inverse;
      gradients[(2 * i + 1) * nq + q] = (a * dy - b * dx) * inverse;
      values[i * nq + q] = basis.values[n];
    }
  }
}

const determinant = (map: Float64Array, q: number): number =>
  map[MAP_STRIDE * q + 2] * map[MAP_STRIDE * q + 5] - map[MAP_STRIDE * q + 3] * map[MAP_STRIDE * q + 4];

function integrateCurved(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  basis: Basis,
  weights: Float64Array,
  work: Work,
): void {
  const nd = functions.length;
  const nq = weights.length;
  const { gradients, values, fluxRe, loadRe, map, sum } = work;
  tabulateTriangle(functions, basis, nq, work);
  for (let q = 0; q < nq; q++) {
    const w = weights[q] * determinant(map, q);
    for (let i = 0; i < nd; i++) {
      fluxRe[2 * i * nq + q] = w * gradients[2 * i * nq + q];
      fluxRe[(2 * i + 1) * nq + q] = w * gradients[(2 * i + 1) * nq + q];
      loadRe[i * nq + q] = w * values[i * nq + q];
    }
  }
  scatterGram(k, 1, 0, gramInto(sum, gradients, fluxRe, 2 * nq, nd), nd);
  scatterGram(m, 1, 0, gramInto(sum, values, loadRe, nq, nd), nd);
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
  const nq = weights.length;
  const { gradients, values, fluxRe, fluxIm, loadRe, loadIm, map, sum } = work;
  const c = new Float64Array(8);
  tabulateTriangle(functions, basis, nq, work);
  for (let q = 0; q < nq; q++) {
    coefficients(map[MAP_STRIDE * q], map[MAP_STRIDE * q + 1], c);
    const w = weights[q] * determinant(map, q);
    for (let i = 0; i < nd; i++) {
      const x = 2 * i * nq + q;
      const y = x + nq;
      const gx = w * gradients[x];
      const gy = w * gradients[y];
      const f = w * values[i * nq + q];
      fluxRe[x] = c[0] * gx + c[2] * gy;
      fluxIm[x] = c[1] * gx + c[3] * gy;
      fluxRe[y] = c[2] * gx + c[4] * gy;
      fluxIm[y] = c[3] * gx + c[5] * gy;
      loadRe[i * nq + q] = c[6] * f;
      loadIm[i * nq + q] = c[7] * f;
    }
  }
  scatterGram(k, 2, 0, gramInto(sum, gradients, fluxRe, 2 * nq, nd), nd);
  scatterGram(k, 2, 1, gramInto(sum, gradients, fluxIm, 2 * nq, nd), nd);
  scatterGram(m, 2, 0, gramInto(sum, values, loadRe, nq, nd), nd);
  scatterGram(m, 2, 1, gramInto(sum, values, loadIm, nq, nd), nd);
}

/**
 * out[i + j nd] = Σ_s left[i·rows + s] right[j·rows + s] for i ≤ j (and the rest of the 4 × 2 blocks on the diagonal):
 * eight sums in registers, every number loaded serves two or four of them.
 */
function gramInto(out: Float64Array, left: Float64Array, right: Float64Array, rows: number, nd: number): Float64Array {
  const last = nd - 1;
  for (let j = 0; j < nd; j += 2) {
    const b0 = j * rows;
    const b1 = Math.min(j + 1, last) * rows;
    for (let i = 0; i <= Math.min(j + 1, last); i += 4) {
      const a0 = i * rows;
      const a1 = Math.min(i + 1, last) * rows;
      const a2 = Math.min(i + 2, last) * rows;
      const a3 = Math.min(i + 3, last) * rows;
      let s00 = 0;
      let s10 = 0;
      let s20 = 0;
      let s30 = 0;
      let s01 = 0;
      let s11 = 0;
      let s21 = 0;
      let s31 = 0;
      for (let s = 0; s < rows; s++) {
        const u = right[b0 + s];
        const v = right[b1 + s];
        const x0 = left[a0 + s];
        const x1 = left[a1 + s];
        const x2 = left[a2 + s];
        const x3 = left[a3 + s];
        s00 += x0 * u;
        s10 += x1 * u;
        s20 += x2 * u;
        s30 += x3 * u;
        s01 += x0 * v;
        s11 += x1 * v;
        s21 += x2 * v;
        s31 += x3 * v;
      }
      const c0 = j * nd;
      const c1 = Math.min(j + 1, last) * nd;
      // where indices were clipped the same sum is written twice
      out[c0 + i] = s00;
      out[c1 + i] = s01;
      out[c0 + Math.min(i + 1, last)] = s10;
      out[c1 + Math.min(i + 1, last)] = s11;
      out[c0 + Math.min(i + 2, last)] = s20;
      out[c1 + Math.min(i + 2, last)] = s21;
      out[c0 + Math.min(i + 3, last)] = s30;
      out[c1 + Math.min(i + 3, last)] = s31;
    }
  }
  return out;
}

/** Copies the upper triangle of the sums to both triangles of `a`, at stride `width` and an offset in the entry. */
function scatterGram(a: Float64Array, width: 1 | 2, offset: 0 | 1, sums: Float64Array, nd: number): void {
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i <= j; i++) {
      a[width * (i + j * nd) + offset] = sums[i + j * nd];
      a[width * (j + i * nd) + offset] = sums[i + j * nd];
    }
  }
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

function applySigns(a: Float64Array, signs: Int8Array, width: 1 | 2): void {
  const nd = signs.length;
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i < nd; i++) {
      if (signs[i] === signs[j]) continue;
      for (let c = 0; c < width; c++) a[width * (j * nd + i) + c] = -a[width * (j * nd + i) + c];
    }
  }
}
