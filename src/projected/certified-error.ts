// How far can S of a projected model be from the full solve?

import type { ScatteringModel } from './scattering-model.ts';

/** Of full solves at high orders: absolute in S, and of a pole relative in k. */
const ROUNDING = 1e-12;
const POLE_ROUNDING = 5e-14;

/**
 * Of any entry of S at real k, from the residual that the solver estimated there, times the ratio seen in comparisons; and
 * rounding, which moves poles of full solves by 1e-15 (order 7) to 1e-14 (order 11) of k_p.
 */
export function certifiedError(
  { poles, ratio }: Pick<ScatteringModel, 'poles' | 'ratio'>,
  k: number,
  residual: number,
): number {
  let rounding = ROUNDING;
  for (const pole of poles)
    rounding += (POLE_ROUNDING * Math.abs(pole.k.im) * k) / ((k - pole.k.re) ** 2 + pole.k.im ** 2);
  return ratio * residualError(poles, k, residual) + rounding;
}

/**
 * |δS| ≤ ‖r‖² ‖A⁻¹‖/8p with ‖A⁻¹‖ about 1 in the energy norm, but for sharp resonances: there the part of A⁻¹ along the mode
 * is 1/(uᵀA′u (k − k_p)), and what r holds of the mode is what the mode's own residual makes of it: 1 + Σ |δk_p|/|k − k_p|.
 * More snapshots lower it; rounding they do not.
 */
export function residualError(poles: ScatteringModel['poles'], k: number, residual: number): number {
  let factor = 1;
  for (const pole of poles) factor += pole.error / Math.hypot(k - pole.k.re, pole.k.im);
  return residual * factor;
}
