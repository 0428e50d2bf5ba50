// What is the matrix of an open device times some vectors?

import { COLUMNS, type ElementMatrices, type ElementStore } from '../elements/element-matrices.ts';
import { largestElement, type Space } from '../elements/space.ts';
import { LAYER } from '../mesh/mesh.ts';
import type { ComplexArray } from '../numerics/complex.ts';
import type { Direction } from '../numerics/conventions.ts';
import type { RegionWeights } from './region-weights.ts';

/** out = Σ_t (w_K K_t + w_M M_t) x for `columns` interleaved column-major vectors. */
export function multiplyElementsInto(
  out: ComplexArray,
  space: Space,
  elements: ElementMatrices,
  direction: Direction,
  weights: RegionWeights,
  x: ComplexArray,
  columns: number,
): ComplexArray {
  const { store } = elements;
  if (store === undefined) return multiplyPlainInto(out, space, elements, direction, weights, x, columns);
  return multiplyCompiledInto(out, store, space.unknowns, direction, weights, x, columns);
}

/** Columns pass through the memory of the kernels a few at a time. */
function multiplyCompiledInto(
  out: ComplexArray,
  { kernels, tables, regions, weights: weightsAt, x: xAt, out: outAt }: ElementStore,
  unknowns: number,
  direction: Direction,
  { stiffness, mass }: RegionWeights,
  x: ComplexArray,
  columns: number,
): ComplexArray {
  const m = kernels.numbers;
  for (let r = 0; r < regions; r++) {
    m.set(stiffness.subarray(2 * r, 2 * r + 2), weightsAt + 4 * r);
    m.set(mass.subarray(2 * r, 2 * r + 2), weightsAt + 4 * r + 2);
  }
  const flip = direction === 'incoming' ? -1 : 1;
  for (let column = 0; column < columns; column += COLUMNS) {
    const width = Math.min(COLUMNS, columns - column);
    const from = 2 * unknowns * column;
    const length = 2 * unknowns * width;
    m.set(x.subarray(from, from + length), xAt);
    kernels.multiplyElements(tables, { weights: weightsAt, x: xAt, out: outAt, unknowns, columns: width, flip });
    out.set(m.subarray(outAt, outAt + length), from);
  }
  return out;
}

/**
 * Element by element: gather, multiply by K and M apart (real inside the rim), weigh, scatter. Columns are taken
 * together, so that each matrix entry is read once.
 */
export function multiplyPlainInto(
  out: ComplexArray,
  space: Space,
  elements: ElementMatrices,
  direction: Direction,
  weights: RegionWeights,
  x: ComplexArray,
  columns: number,
): ComplexArray {
  const { starts, list, unknowns, mesh } = space;
  const triangles = starts.length - 1;
  const widest = largestElement(space);
  const local = new Float64Array(2 * widest);
  const sum = new Float64Array(2 * widest);
  const flip = direction === 'incoming' ? -1 : 1;
  out.fill(0, 0, 2 * unknowns * columns);
  for (let t = 0; t < triangles; t++) {
    const region = mesh.regions[t];
    const at = 2 * (region + 2);
    const kr = weights.stiffness[at];
    const ki = weights.stiffness[at + 1];
    const mr = weights.mass[at];
    const mi = weights.mass[at + 1];
    const useK = kr !== 0 || ki !== 0;
    const useM = mr !== 0 || mi !== 0;
    if (!useK && !useM) continue;
    const start = starts[t];
    const nd = starts[t + 1] - start;
    for (let c = 0; c < columns; c++) {
      const shift = 2 * c * unknowns;
      for (let i = 0; i < nd; i++) {
        const g = list[start + i];
        local[2 * i] = g < 0 ? 0 : x[shift + 2 * g];
        local[2 * i + 1] = g < 0 ? 0 : x[shift + 2 * g + 1];
      }
      sum.fill(0, 0, 2 * nd);
      if (useK) addLocal(sum, elements.stiffness[t], nd, local, kr, ki, region === LAYER, flip);
      if (useM) addLocal(sum, elements.mass[t], nd, local, mr, mi, region === LAYER, flip);
      for (let i = 0; i < nd; i++) {
        const g = list[start + i];
        if (g < 0) continue;
        out[shift + 2 * g] = out[shift + 2 * g] + sum[2 * i];
        out[shift + 2 * g + 1] = out[shift + 2 * g + 1] + sum[2 * i + 1];
      }
    }
  }
  return out;
}

/**
 * sum += w B x for a symmetric element matrix B, real or complex. Row i of B is its column i: contiguous. Several rows
 * at once, so that each number of x loaded serves them all.
 */
function addLocal(
  sum: Float64Array,
  B: Float64Array,
  nd: number,
  x: Float64Array,
  wr: number,
  wi: number,
  complexMatrix: boolean,
  flip: number,
): void {
  const last = nd - 1;
  const put = (i: number, re: number, im: number): void => {
    sum[2 * i] += wr * re - wi * im;
    sum[2 * i + 1] += wr * im + wi * re;
  };
  if (!complexMatrix) {
    for (let i = 0; i < nd; i += 4) {
      const r0 = i * nd;
      const r1 = Math.min(i + 1, last) * nd;
      const r2 = Math.min(i + 2, last) * nd;
      const r3 = Math.min(i + 3, last) * nd;
      let re0 = 0;
      let im0 = 0;
      let re1 = 0;
      let im1 = 0;
      let re2 = 0;
      let im2 = 0;
      let re3 = 0;
      let im3 = 0;
      for (let j = 0; j < nd; j++) {
        const xr = x[2 * j];
        const xi = x[2 * j + 1];
        const a0 = B[r0 + j];
        const a1 = B[r1 + j];
        const a2 = B[r2 + j];
        const a3 = B[r3 + j];
        re0 += a0 * xr;
        im0 += a0 * xi;
        re1 += a1 * xr;
        im1 += a1 * xi;
        re2 += a2 * xr;
        im2 += a2 * xi;
        re3 += a3 * xr;
        im3 += a3 * xi;
      }
      put(i, re0, im0);
      if (i + 1 < nd) put(i + 1, re1, im1);
      if (i + 2 < nd) put(i + 2, re2, im2);
      if (i + 3 < nd) put(i + 3, re3, im3);
    }
    return;
  }
  for (let i = 0; i < nd; i += 2) {
    const r0 = 2 * i * nd;
    const r1 = 2 * Math.min(i + 1, last) * nd;
    let rr0 = 0;
    let ii0 = 0;
    let ri0 = 0;
    let ir0 = 0;
    let rr1 = 0;
    let ii1 = 0;
    let ri1 = 0;
    let ir1 = 0;
    for (let j = 0; j < 2 * nd; j += 2) {
      const xr = x[j];
      const xi = x[j + 1];
      const a0 = B[r0 + j];
      const b0 = B[r0 + j + 1];
      const a1 = B[r1 + j];
      const b1 = B[r1 + j + 1];
      rr0 += a0 * xr;
      ii0 += b0 * xi;
      ri0 += a0 * xi;
      ir0 += b0 * xr;
      rr1 += a1 * xr;
      ii1 += b1 * xi;
      ri1 += a1 * xi;
      ir1 += b1 * xr;
    }
    put(i, rr0 - flip * ii0, ri0 + flip * ir0);
    if (i + 1 < nd) put(i + 1, rr1 - flip * ii1, ri1 + flip * ir1);
  }
}
