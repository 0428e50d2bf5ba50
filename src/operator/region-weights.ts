// By what are the matrices of each region multiplied?

import type { Complex, ComplexArray } from '../numerics/complex.ts';

/** One complex number for stiffness and one for mass on every region: index body + 2, so 0 is LAYER, 1 BACKGROUND. */
export interface RegionWeights {
  readonly stiffness: ComplexArray;
  readonly mass: ComplexArray;
  /** Of the boundary mass of each metal, in the order of their tags; absent: none. */
  readonly surface?: ComplexArray;
}

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
