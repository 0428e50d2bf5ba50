// As what does the eigen room see a device?

import type { Complex, ComplexArray } from '../numerics/complex.ts';

export type Part = 'value' | 'byK' | 'byLevel';

/** Solves with one factored A(k, level). */
export interface Inverse {
  solveInto(out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray;
}

/**
 * A family of complex symmetric matrices A(k, level) of one size, analytic in k and in a real level (pump, loss, knob).
 * Vectors are interleaved, columns column-major.
 */
export interface EigenProblem {
  readonly size: number;
  /** out = A x, ∂A/∂k x or ∂A/∂level x. */
  multiplyInto(out: ComplexArray, k: Complex, level: number, part: Part, x: ComplexArray, columns: number): ComplexArray;
  factorize(k: Complex, level: number): Inverse;
}
