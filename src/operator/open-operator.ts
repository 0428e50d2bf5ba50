// What is the matrix A of an open device, at any k and any pump?

import { assembleElements, type ElementMatrices, type PointCoefficients } from '../elements/element-matrices.ts';
import { largestElement, type Space } from '../elements/space.ts';
import { LAYER } from '../mesh/mesh.ts';
import type { Complex, ComplexArray } from '../numerics/complex.ts';
import type { Direction } from '../numerics/conventions.ts';
import { analyse } from '../sparse/analyse.ts';
import type { Analysis, Factorization } from '../sparse/pattern.ts';

/** One complex number for stiffness and one for mass on every region: index body + 2, so 0 is LAYER, 1 BACKGROUND. */
export interface RegionWeights {
  readonly stiffness: ComplexArray;
  readonly mass: ComplexArray;
  /** Of the boundary mass of each metal, in the order of their tags; absent: none. */
  readonly surface?: ComplexArray;
}

/** Boundary masses of metal walls, spread over their triangles. */
export interface SurfaceTerms {
  readonly count: number;
  /** Per triangle: which metal, which local functions, dense matrix of their products along the edge. */
  readonly parts: ReadonlyMap<number, readonly SurfacePart[]>;
}

export interface SurfacePart {
  readonly metal: number;
  readonly local: Int32Array;
  readonly mass: Float64Array;
}

/**
 * A = Σ_t w_K(region) K_t + w_M(region) M_t with any complex weights: the affine family of a mesh. The layer's
 * matrices are conjugated for incoming waves. Every matrix is complex symmetric.
 */
export interface OpenOperator {
  readonly space: Space;
  readonly direction: Direction;
  readonly elements: ElementMatrices;
  readonly analysis: Analysis;
  readonly surfaces?: SurfaceTerms;
  /** out = A x for `columns` interleaved column-major vectors of space.unknowns. */
  multiplyInto(out: ComplexArray, weights: RegionWeights, x: ComplexArray, columns: number): ComplexArray;
  factorize(weights: RegionWeights): Factorization;
}

/** Assembles all element matrices and analyses the pattern; both serve every direction through `facing`. */
export function assembleOpen(
  space: Space,
  layer: PointCoefficients,
  direction: Direction,
  surfaces?: SurfaceTerms,
): OpenOperator {
  const elements = assembleElements(space, layer);
  const { mesh } = space;
  const triangles = mesh.triangles.length / 3;
  const centroids = new Float64Array(2 * triangles);
  for (let t = 0; t < triangles; t++) {
    for (let i = 0; i < 3; i++) {
      const v = mesh.triangles[3 * t + i];
      centroids[2 * t] = centroids[2 * t] + mesh.vertices[2 * v] / 3;
      centroids[2 * t + 1] = centroids[2 * t + 1] + mesh.vertices[2 * v + 1] / 3;
    }
  }
  const analysis = analyse({ unknowns: space.unknowns, starts: space.starts, list: space.list, centroids });
  return makeOperator(space, elements, analysis, direction, surfaces);
}

/** The same device with the other direction of its open boundary; shares all stored matrices. */
export const facing = (operator: OpenOperator, direction: Direction): OpenOperator =>
  direction === operator.direction
    ? operator
    : makeOperator(operator.space, operator.elements, operator.analysis, direction, operator.surfaces);

/** Weights per region for a device with `bodies` bodies, all zero. */
export const zeroWeights = (bodies: number, metals = 0): RegionWeights => ({
  stiffness: new Float64Array(2 * (bodies + 2)),
  mass: new Float64Array(2 * (bodies + 2)),
  ...(metals > 0 ? { surface: new Float64Array(2 * metals) } : {}),
});

export function setSurface({ surface }: RegionWeights, metal: number, value: Complex): void {
  if (!surface) return;
  surface[2 * metal] = value.re;
  surface[2 * metal + 1] = value.im;
}

export function setWeight(array: ComplexArray, region: number, value: Complex): void {
  array[2 * (region + 2)] = value.re;
  array[2 * (region + 2) + 1] = value.im;
}

function makeOperator(
  space: Space,
  elements: ElementMatrices,
  analysis: Analysis,
  direction: Direction,
  surfaces?: SurfaceTerms,
): OpenOperator {
  return {
    space,
    direction,
    elements,
    analysis,
    ...(surfaces ? { surfaces } : {}),
    multiplyInto: (out, weights, x, columns) => {
      multiplyElements(out, space, elements, direction, weights, x, columns);
      if (surfaces && weights.surface) addSurfaces(out, space, surfaces, weights.surface, x, columns);
      return out;
    },
    factorize: (weights) =>
      analysis.factorize((t, into) => {
        fillElement(into, t, space.mesh.regions[t], elements, direction, weights);
        if (surfaces && weights.surface) fillSurface(into, t, space, surfaces, weights.surface);
      }),
  };
}

/** Adds w B of the triangle's edges on metal to its matrix. */
export function fillSurface(
  into: ComplexArray,
  t: number,
  space: Space,
  surfaces: SurfaceTerms,
  weights: ComplexArray,
): void {
  const nd = space.starts[t + 1] - space.starts[t];
  for (const { metal, local, mass } of surfaces.parts.get(t) ?? []) {
    const n = local.length;
    for (let j = 0; j < n; j++)
      for (let i = 0; i < n; i++) {
        const at = 2 * (local[i] + local[j] * nd);
        into[at] += weights[2 * metal] * mass[i + j * n];
        into[at + 1] += weights[2 * metal + 1] * mass[i + j * n];
      }
  }
}

function addSurfaces(
  out: ComplexArray,
  space: Space,
  surfaces: SurfaceTerms,
  weights: ComplexArray,
  x: ComplexArray,
  columns: number,
): void {
  const { starts, list, unknowns } = space;
  for (const [t, parts] of surfaces.parts)
    for (const { metal, local, mass } of parts) {
      const n = local.length;
      const wr = weights[2 * metal];
      const wi = weights[2 * metal + 1];
      for (let c = 0; c < columns; c++)
        for (let i = 0; i < n; i++) {
          const g = list[starts[t] + local[i]];
          if (g < 0) continue;
          let re = 0;
          let im = 0;
          for (let j = 0; j < n; j++) {
            const h = list[starts[t] + local[j]];
            if (h < 0) continue;
            re += mass[i + j * n] * x[2 * (h + c * unknowns)];
            im += mass[i + j * n] * x[2 * (h + c * unknowns) + 1];
          }
          out[2 * (g + c * unknowns)] += wr * re - wi * im;
          out[2 * (g + c * unknowns) + 1] += wr * im + wi * re;
        }
    }
}

/** Writes w_K K_t + w_M M_t of one triangle; the layer is conjugated for incoming waves. */
export function fillElement(
  into: ComplexArray,
  t: number,
  region: number,
  elements: ElementMatrices,
  direction: Direction,
  weights: RegionWeights,
): void {
  const k = elements.stiffness[t];
  const m = elements.mass[t];
  const at = 2 * (region + 2);
  const kr = weights.stiffness[at];
  const ki = weights.stiffness[at + 1];
  const mr = weights.mass[at];
  const mi = weights.mass[at + 1];
  if (region !== LAYER) {
    for (let n = 0; n < k.length; n++) {
      into[2 * n] = kr * k[n] + mr * m[n];
      into[2 * n + 1] = ki * k[n] + mi * m[n];
    }
    return;
  }
  const flip = direction === 'incoming' ? -1 : 1;
  for (let n = 0; n < k.length; n += 2) {
    const a = k[n];
    const b = flip * k[n + 1];
    const c = m[n];
    const d = flip * m[n + 1];
    into[n] = kr * a - ki * b + mr * c - mi * d;
    into[n + 1] = kr * b + ki * a + mr * d + mi * c;
  }
}

/**
 * Element by element: gather, multiply by K and M apart (real inside the rim), weigh, scatter. Columns are taken
 * together, so that each matrix entry is read once.
 */
function multiplyElements(
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
