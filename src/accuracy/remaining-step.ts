// How far may all orders beyond still move a mode?

import type { Complex, ComplexArray } from '../numerics/complex.ts';
import type { DeviceFamily } from '../operator/device-family.ts';
import { smallestExponent } from './corner-exponent.ts';
import { degreeEnergies, surplusEnergies } from './degree-energies.ts';
import { errorRatios } from './refinement-plan.ts';

/**
 * Σ η_t/(1 − q_t), in units of k: the surplus η_t of each triangle bounds its part of the step from one space to the one
 * an order higher everywhere, and q_t is the ratio by which the parts of further orders fall there. The step itself may be
 * less: parts of smooth triangles and of corners have phases of their own and may cancel in it, but fall at different
 * rates.
 *
 * @param vectors size × columns: members of a group in the space of `here`
 * @param richer  the same group in the space of `up`
 */
export function remainingStep(
  here: DeviceFamily,
  up: DeviceFamily,
  k: Complex,
  level: number,
  vectors: ComplexArray,
  richer: ComplexArray,
  columns: number,
): number {
  const { mesh, orders } = up.operator.space;
  const surplus = surplusEnergies(here, up, k, level, vectors, richer, columns);
  const parts = degreeEnergies(up, k, level, richer, columns);
  const ratios = errorRatios(mesh, orders, parts, smallestExponent(mesh, up.weights(k, level, 'value')));
  return surplus.reduce((sum, eta, t) => sum + eta / (1 - ratios[t]), 0);
}
