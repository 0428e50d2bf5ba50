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
  /** Absent in the twin, which solves on the stored panels. */
  readonly substitution?: SubstitutionKernels;
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
   * Eliminates the pivots of P as far as they are safe: P becomes L (unit diagonal and what lies above it not stored),
   * S its Schur complement. Row j of the front, j < np, is row perm[j] of the front as assembled. Returns the number e
   * of pivots eliminated; rows e..np have no pivot larger than DELAY times the largest entry of their column and wait
   * for the parent. Inverse pivots go to d (4 numbers each), the number of perturbed ones to d[4 np].
   * With `force`, or when more than MOST_DELAYED rows would wait, all are eliminated, pivots of modulus ≤ tiny
   * replaced by tiny. `work` has room for workNumbers(nf).
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
    force: boolean,
  ): number;
  /**
   * What the front passes on: the lower triangle of rows e..nf, column by column, all real parts, then all imaginary
   * ones. `to` may be ≤ p and overlap.
   */
  packContribution(p: number, s: number, nf: number, np: number, e: number, to: number, work: number): void;
}

/** Largest growth of entries in one elimination is about 1/DELAY; a later refinement step gains what that loses. */
export const DELAY = 1e-6;
/** Rows that a front passes on unfinished, at most. */
export const MOST_DELAYED = 128;

/**
 * Substitution on panels that were copied into the memory. Positions as in FrontKernels; `order`, `boundary` and the two
 * tables of starts index `integers`. Columns of one front can be passed in parts (gather, columns…, scatter); all parts
 * but the last have an even number of them.
 */
export interface SubstitutionKernels {
  /**
   * `count` numbers of each column, from position `columns` on, columnStep apart, four columns a quad, to the rows of x
   * listed in `integers` from `places` on; and back.
   */
  putQuads(columns: number, columnStep: number, places: number, count: number, block: RightSides): void;
  takeQuads(columns: number, columnStep: number, places: number, count: number, block: RightSides): void;
  /** Fronts first..last, panels one after the other from l. */
  forwardBlock(first: number, last: number, l: number, tables: SubstitutionTables, block: RightSides): void;
  /** The same fronts backwards; l points behind the last panel. */
  backwardBlock(first: number, last: number, l: number, tables: SubstitutionTables, block: RightSides): void;
  /** One right-hand side, (re, im) a place; block.quads is 0. */
  forwardOne(first: number, last: number, l: number, tables: SubstitutionTables, block: RightSides): void;
  backwardOne(first: number, last: number, l: number, tables: SubstitutionTables, block: RightSides): void;
  /** Columns of one front whose rows stand in `local`; column `first` is at l, its imaginary part at l + plane. */
  forwardColumns(
    l: number,
    plane: number,
    f: FrontShape,
    first: number,
    last: number,
    tables: SubstitutionTables,
    block: RightSides,
  ): void;
  backwardColumns(l: number, plane: number, f: FrontShape, first: number, last: number, block: RightSides): void;
  /** Rows of a front from x to `local` and back; np pivots from `place` on, nb boundary rows listed from `edge` on. */
  gatherForward(tables: SubstitutionTables, f: FrontShape, block: RightSides): void;
  scatterForward(tables: SubstitutionTables, f: FrontShape, block: RightSides): void;
  gatherBackward(tables: SubstitutionTables, f: FrontShape, block: RightSides): void;
  scatterBackward(tables: SubstitutionTables, f: FrontShape, block: RightSides): void;
}

/**
 * Right-hand sides by quads: a quad is four of them, 8 numbers a place (4 real parts, then 4 imaginary ones), the quads
 * of one place side by side.
 */
export interface RightSides {
  /** 0: one right-hand side alone. */
  readonly quads: number;
  readonly x: number;
  /** Numbers between two places of x. */
  readonly rowNumbers: number;
  /** Room for the rows of the largest front, localStep numbers a quad, and for LOCAL_EXTRA numbers behind them. */
  readonly local: number;
  readonly localStep: number;
}

/** Numbers that the kernels want behind the rows of a front for a strip of L and a spare row. */
export const LOCAL_EXTRA = 4 * 96 + 16;

/** Positions of what describes the fronts. */
export interface SubstitutionTables {
  readonly pivotStarts: number;
  readonly boundaryStarts: number;
  readonly order: number;
  readonly boundary: number;
  readonly pivots: number;
}

export interface FrontShape {
  readonly place: number;
  readonly np: number;
  readonly nb: number;
  /** Start of its boundary in the list of boundaries. */
  readonly edge: number;
}

/** Numbers of work space that factorFront wants for fronts up to this size. */
export const workNumbers = (largestFront: number): number => 4 * 64 * (largestFront + 8) + 2 * 66 * 66;
