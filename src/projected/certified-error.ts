// How far can S of a projected model be from the full solve?

import type { ScatteringModel } from './scattering-model.ts';

/** Least rounding of S, and what moves a pole, relative in k, in units of it. */
const LEAST_ROUNDING = 1e-12;
const POLE_SHARE = 0.05;
/** Measured at a dozen points, asked at thousands. */
const MARGIN = 3;

/**
 * Of any entry of S at real k, from the residual that the solver estimated there, times the ratio seen in comparisons; and
 * rounding, which moves S and, relative in k, its poles.
 */
export const certifiedError = (
  model: Pick<ScatteringModel, 'poles' | 'ratio' | 'rounding'>,
  k: number,
  residual: number,
): number => model.ratio * residualError(model.poles, k, residual) + model.rounding * roundingShape(model.poles, k);

/** 1 and, about poles, more. */
function roundingShape(poles: ScatteringModel['poles'], k: number): number {
  let shape = 1;
  for (const pole of poles) shape += (POLE_SHARE * Math.abs(pole.k.im) * k) / ((k - pole.k.re) ** 2 + pole.k.im ** 2);
  return shape;
}

/** Rounding of full solves, from the differences of model and full solve at the snapshots, where residuals vanish. */
export function roundingSeen(
  poles: ScatteringModel['poles'],
  differences: readonly { readonly k: number; readonly difference: number }[],
): number {
  const seen = differences.map(({ k, difference }) => difference / roundingShape(poles, k));
  return Math.max(LEAST_ROUNDING, MARGIN * Math.max(0, ...seen));
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
