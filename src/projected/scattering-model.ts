// What does a projected scattering model hold, so that S is known at any k of its band without the mesh?

import type { OpeningSpec } from '../boundary/openings.ts';
import type { Complex } from '../numerics/complex.ts';

/**
 * The device in a real basis V of r fields, closed exactly by the waves of its openings:
 *
 *     A(k) = Σ_t c_t k^{e_t} P_t − p Σ_j y_j(k) b_j b_jᵀ,   P_t = VᵀT_tV,   b_j = Vᵀc_j,
 *     S_ij = −8ip b_iᵀA⁻¹b_j / (α⁺_i α⁺_j) − δ_ij α⁻_j/α⁺_j,
 *
 * T_t the real matrices of the device, y_j and α^± of the waves (`boundary/openings.ts`). V real: S is symmetric, and
 * unitary where all c_t are real. A model is numbers and words only.
 */
export interface ScatteringModel {
  readonly kMin: number;
  readonly kMax: number;
  /** p of the background. */
  readonly p: number;
  /** r, fields of the basis. */
  readonly size: number;
  readonly openings: readonly ModelOpening[];
  readonly channels: readonly ModelChannel[];
  readonly terms: readonly ModelTerm[];
  /** functions × r, row by row: b_j of function j, openings one behind the other. */
  readonly coupling: Float64Array;
  /** Of each function: largest |c_jᵀu|² among the fields of unit drives that were solved in full. */
  readonly reach: Float64Array;
  /** Witnesses: l vectors w, normal with covariance X⁻¹, so that |wᵀr|² is ‖r‖² in X⁻¹ on average. */
  readonly witnesses: number;
  /** functions × l, row by row: Wᵀc_j. */
  readonly witnessCoupling: Float64Array;
  /** k of the full solves whose fields span the basis. */
  readonly snapshots: Float64Array;
  /** Largest ratio of true error to estimate seen where a full solve was compared with the model before it joined; 1 or more. */
  readonly ratio: number;
  /** Rounding of S, absolute, away from sharp resonances. */
  readonly rounding: number;
  /** Sharp resonances: k, and estimated |δk| against the full device. */
  readonly poles: readonly Pick<ModelPole, 'k' | 'error'>[];
}

export interface ModelOpening {
  readonly spec: OpeningSpec;
  /** Functions that close it. */
  readonly count: number;
}

export interface ModelChannel {
  readonly name: string;
  readonly opening: number;
  readonly index: number;
}

/** c k^e P. */
export interface ModelTerm {
  readonly coefficient: Complex;
  readonly exponent: number;
  /** r × r, symmetric. */
  readonly matrix: Float64Array;
  /** r × l, row by row: WᵀTV of each basis field. */
  readonly witness: Float64Array;
}

/** A sharp resonance of the model. */
export interface ModelPole {
  readonly k: Complex;
  /** Its field in the basis, scaled to uᵀ(∂A/∂k)u = 1, interleaved. */
  readonly vector: Float64Array;
  /** Estimated |δk| against the full device. */
  readonly error: number;
  /** Height of its peak in S: |residue|/|Im k|, 2 where all that leaks goes into the channels, 0 for a dark mode. */
  readonly height: number;
}
