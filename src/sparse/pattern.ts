// In what form does a matrix come to the direct solver?

import type { Complex, ComplexArray } from '../numerics/complex.ts';

/**
 * A symmetric matrix as a sum of small dense ones ("elements"). Element e couples the unknowns
 * list[starts[e]..starts[e+1]); -1 in the list means "fixed to zero: skip this row and column".
 * Unknowns that belong to one element only (element interiors) are condensed first, inside that element's front.
 */
export interface ElementPattern {
  readonly unknowns: number;
  readonly starts: Int32Array;
  readonly list: Int32Array;
  /** [x0,y0,x1,y1,…] one point an element: what nested dissection cuts by. */
  readonly centroids: Float64Array;
}

/**
 * Writes element e's dense complex symmetric matrix (both triangles, column-major, interleaved re/im, size nd × nd with
 * nd = starts[e+1] − starts[e]) to the start of `into`.
 */
export type ElementFill = (element: number, into: ComplexArray) => void;

/** What a factorization says of itself. */
export interface FactorReport {
  readonly fronts: number;
  readonly nonzeros: number;
  readonly flops: number;
  /** Pivots that had to be perturbed; 0 in a healthy factorization. */
  readonly perturbedPivots: number;
  /** Smallest and largest pivot modulus. */
  readonly smallestPivot: number;
  readonly largestPivot: number;
}

export interface Factorization {
  readonly unknowns: number;
  readonly report: FactorReport;
  /** log det A on some branch: Re = log|det|, Im = phase modulo 2π. */
  readonly logDeterminant: Complex;
  /** Solves A x = b for `columns` right-hand sides, column-major interleaved; `out` may be `rhs`. */
  solveInto(out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray;
  /**
   * Optional, and worth much in a loop: gives the memory of L to the next factorization of the same analysis. This one
   * must not solve afterwards; its report and determinant stay.
   */
  release(): void;
}

/** Everything that depends on the pattern only: ordering, tree, symbolic fronts, memory plan. */
export interface Analysis {
  readonly pattern: ElementPattern;
  factorize(fill: ElementFill): Factorization;
}
