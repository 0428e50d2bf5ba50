// What does the factorization ask of its dense kernels?

/**
 * Dense work on fronts that lie in one linear memory. Every position is an index into `numbers` (float64), except
 * `map` and `perm`, which index `integers` over the same bytes. Views change when the memory grows: take them anew
 * after `reserve`.
 *
 *      ┌ P: nf × np, column-major, plane of real parts then plane of imaginary parts, rows ≥ column used
 *      │ np   nb
 *     ┌────┐
 *  np │╲   │        nf = np + nb
 *     │  ╲ ├────┐
 *  nb │    │╲   │   S: nb × nb, the same way
 *     │    │  ╲ │
 *     └────┴────┘
 */
export interface FrontKernels {
  readonly kind: 'typescript' | 'wasm';
  readonly numbers: Float64Array;
  /** First position that callers may use. */
  readonly base: number;
  readonly integers: Int32Array;
  /** Makes the memory hold at least this many float64; contents may be lost. */
  reserve(numbers: number): void;
  /** Zeros wherever a front is read. */
  clear(p: number, s: number, nf: number, np: number): void;
  /** Adds an element matrix (nd × nd, column-major, interleaved); row i goes to row map[i] of the front, -1: nowhere. */
  addElement(p: number, s: number, nf: number, np: number, element: number, nd: number, map: number): void;
  /** Adds a packed contribution (see packContribution) of order n; map increases. */
  addContribution(p: number, s: number, nf: number, np: number, from: number, n: number, map: number): void;
  /**
   * Eliminates the np pivots: P becomes L (unit diagonal and what lies above it not stored), S its Schur complement.
   * Row j of L belongs to row perm[j] of the front as assembled. Inverse pivots go to d (4 numbers each).
   * Pivots of modulus ≤ tiny are replaced by tiny; returns how many. `work` has room for 2·nf·panel numbers.
   */
  factorFront(
    p: number,
    s: number,
    nf: number,
    np: number,
    d: number,
    perm: number,
    work: number,
    tiny: number,
  ): number;
  /** Lower triangle of S, column by column: nb(nb+1)/2 real parts, then the imaginary ones. `to` may be ≤ s and overlap. */
  packContribution(s: number, nb: number, to: number): void;
}

/** Numbers of work space that factorFront wants for fronts up to this size. */
export const workNumbers = (largestFront: number): number => 4 * 64 * (largestFront + 8) + 2 * 66 * 66;
