// What is the matrix A of an open device, at any k and any pump?

import { assembleElements, type ElementMatrices, type PointCoefficients } from '../elements/element-matrices.ts';
import type { Space } from '../elements/space.ts';
import { LAYER } from '../mesh/mesh.ts';
import type { ComplexArray } from '../numerics/complex.ts';
import type { Direction } from '../numerics/conventions.ts';
import { analyse } from '../sparse/analyse.ts';
import type { Analysis, Factorization } from '../sparse/pattern.ts';
import { multiplyElementsInto } from './multiply-elements.ts';
import type { RegionWeights } from './region-weights.ts';

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
      multiplyElementsInto(out, space, elements, direction, weights, x, columns);
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
