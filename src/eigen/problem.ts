// As what does the eigen room see a device?

import type { Complex, ComplexArray } from '../numerics/complex.ts';

export type Part = 'value' | 'byK' | 'byLevel';

/** Solves with one factored A(k, level). */
export interface Inverse {
  solveInto(out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray;
  /** Gives its memory to the next factorization; it cannot solve any more. */
  release(): void;
}

/** What a term of the family is multiplied by at k, and the derivative of that by k. */
export interface TermFactor {
  readonly value: Complex;
  readonly byK: Complex;
}

/**
 * A family as a sum of fixed matrices, A(k, level) = Σ_i c_i(k, level) P_i: projected on a small space once, it is known
 * there at every k and level.
 */
export interface FixedPieces {
  readonly count: number;
  /** c_i and its derivatives. */
  factor(i: number, k: Complex, level: number): TermFactor & { readonly byLevel: Complex };
  /** out = P_i x. */
  multiplyInto(out: ComplexArray, i: number, x: ComplexArray, columns: number): ComplexArray;
}

/**
 * A family of complex symmetric matrices of one size, A(k, level) = Σ_j f_j(k) A_j(level): analytic in k, smooth in a
 * real level (pump, loss, knob), few terms, so that its projection on a small space is known at every k from one product
 * a term. Vectors are interleaved, columns column-major.
 */
export interface EigenProblem {
  readonly size: number;
  readonly terms: number;
  /** f_j and its derivative at k. */
  termFactor(j: number, k: Complex): TermFactor;
  /** out = A_j(level) x. */
  multiplyTermInto(out: ComplexArray, j: number, level: number, x: ComplexArray, columns: number): ComplexArray;
  /** out = A x, ∂A/∂k x or ∂A/∂level x. */
  multiplyInto(
    out: ComplexArray,
    k: Complex,
    level: number,
    part: Part,
    x: ComplexArray,
    columns: number,
  ): ComplexArray;
  factorize(k: Complex, level: number): Inverse;
  /** Where the family can be written so. */
  readonly pieces?: FixedPieces;
}
