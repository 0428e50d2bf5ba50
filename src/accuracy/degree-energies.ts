// How is a mode's energy shared out among triangles, and there among polynomial degrees?

import { functionCount } from '../elements/basis.ts';
import { embed } from '../elements/space.ts';
import { addProduct, adjointProduct, orthonormalBasis, transposeProduct } from '../eigen/columns.ts';
import { LAYER } from '../mesh/mesh.ts';
import type { Complex, ComplexArray } from '../numerics/complex.ts';
import { luFactor } from '../numerics/lu.ts';
import type { DeviceFamily } from '../operator/device-family.ts';

/** Energies in units of k: divided by |det UᵀA_kU|^{1/μ}, so that an error e of the field costs about e's energy in k. */
export interface DegreeEnergies {
  /** Entry t·stride + j: of the functions of degree j in triangle t. */
  readonly energies: Float64Array;
  readonly stride: number;
}

/** |cᴴ(|w_K|K + |w_M|M)c| of the functions of each degree, mean over the members of a group. */
export function degreeEnergies(
  family: DeviceFamily,
  k: Complex,
  level: number,
  vectors: ComplexArray,
  columns: number,
): DegreeEnergies {
  const { space } = family.operator;
  const { starts, functions } = space;
  const stride = space.order + 1;
  const out = new Float64Array(stride * (starts.length - 1));
  const degrees = degreesOfFunctions(space.order);
  const scale = 1 / (columns * groupNorm(family, k, level, vectors, columns));
  const form = elementForm(family, k, level, vectors, columns);
  for (let t = 0; t + 1 < starts.length; t++) {
    const last = starts[t + 1];
    // functions of one degree stand together for edges and again for interiors: the block form needs their indices
    const byDegree: number[][] = [];
    for (let i = starts[t]; i < last; i++) (byDegree[degrees[functions[i]]] ??= []).push(i - starts[t]);
    byDegree.forEach((members, j) => (out[t * stride + j] = scale * form(t, members)));
  }
  return { energies: out, stride };
}

/**
 * Energy, triangle by triangle, of what a richer space adds to the members of a group: that part of each member which
 * the span of the same group there does not hold. Their sum bounds the change of k.
 *
 * @param vectors the group's columns in the space of `from`
 * @param richer  columns of the same group in the space of `to`
 */
export function surplusEnergies(
  from: DeviceFamily,
  to: DeviceFamily,
  k: Complex,
  level: number,
  vectors: ComplexArray,
  richer: ComplexArray,
  columns: number,
): Float64Array {
  const n = to.size;
  const { starts } = to.operator.space;
  const e = embed(to.operator.space, from.operator.space, vectors, columns);
  const basis = orthonormalBasis(Float64Array.from(richer), columns, n);
  addProduct(e, basis, columns, adjointProduct(basis, columns, e, columns, n), columns, n, -1);
  const scale = 1 / (columns * groupNorm(from, k, level, vectors, columns));
  const form = elementForm(to, k, level, e, columns);
  const all = Array.from({ length: starts.length - 1 }, (_, t) => t);
  return Float64Array.from(all, (t) => {
    const members = Array.from({ length: starts[t + 1] - starts[t] }, (_, i) => i);
    return scale * form(t, members);
  });
}

/** |det UᵀA_kU|^{1/μ}: for a single vector |uᵀA_ku|; does not vanish for a pair e^{±imφ}. */
function groupNorm(family: DeviceFamily, k: Complex, level: number, U: ComplexArray, columns: number): number {
  const n = family.size;
  const work = family.multiplyInto(new Float64Array(2 * n * columns), k, level, 'byK', U, columns);
  const { logDeterminant } = luFactor(transposeProduct(U, columns, work, columns, n), columns);
  return Math.exp(logDeterminant.re / columns);
}

/** Σ over the columns of |cᴴ(|w_K|K_t + |w_M|M_t)c| with the coefficients c of some local functions of triangle t. */
function elementForm(
  family: DeviceFamily,
  k: Complex,
  level: number,
  vectors: ComplexArray,
  columns: number,
): (t: number, members: readonly number[]) => number {
  const { space, elements } = family.operator;
  const { starts, list, mesh, unknowns } = space;
  const { stiffness, mass } = family.weights(k, level, 'value');
  return (t, members) => {
    const region = mesh.regions[t];
    const at = 2 * (region + 2);
    const wK = Math.hypot(stiffness[at], stiffness[at + 1]);
    const wM = Math.hypot(mass[at], mass[at + 1]);
    const K = elements.stiffness[t];
    const M = elements.mass[t];
    const nd = starts[t + 1] - starts[t];
    const width = region === LAYER ? 2 : 1;
    let total = 0;
    for (let c = 0; c < columns; c++) {
      const shift = 2 * c * unknowns;
      let re = 0;
      let im = 0;
      for (const j of members) {
        const gj = list[starts[t] + j];
        if (gj < 0) continue;
        const xr = vectors[shift + 2 * gj];
        const xi = vectors[shift + 2 * gj + 1];
        if (xr === 0 && xi === 0) continue;
        for (const i of members) {
          const gi = list[starts[t] + i];
          if (gi < 0) continue;
          // K and M are symmetric: only Re(c̄ᵢcⱼ) survives the sum
          const cc = vectors[shift + 2 * gi] * xr + vectors[shift + 2 * gi + 1] * xi;
          const s = width * (j * nd + i);
          re += cc * (wK * K[s] + wM * M[s]);
          if (width === 2) im += cc * (wK * K[s + 1] + wM * M[s + 1]);
        }
      }
      total += Math.hypot(re, im);
    }
    return total;
  };
}

/** Degree of each shape function up to an order, 1 for the vertices. */
function degreesOfFunctions(order: number): Int32Array {
  const out = new Int32Array(functionCount(order)).fill(1);
  for (let j = 2; j <= order; j++) out.fill(j, functionCount(j - 1), functionCount(j));
  return out;
}
