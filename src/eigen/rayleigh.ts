// Given a space that holds a cluster of eigenvectors, what are its eigenvalues and how do they move?

import {
  add,
  type Complex,
  complex,
  type ComplexArray,
  divide,
  modulus,
  scale,
  subtract,
} from '../numerics/complex.ts';
import { eigenGeneral } from '../numerics/eigenvalues.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import { combine, normaliseColumns, orthonormalBasis, transposeProduct } from './columns.ts';
import type { EigenProblem, TermFactor } from './problem.ts';

/** Members of a cluster that agree within the tolerance: one row of an answer. */
export interface EigenGroup {
  /** Mean of the members: well-conditioned even where uᵀA′u vanishes for a single vector. */
  readonly k: Complex;
  /** Largest distance of a member from the mean. */
  readonly spread: number;
  /** dk/d(level) of the mean. */
  readonly slope: Complex;
  readonly multiplicity: number;
  /** size × multiplicity, columns of norm 1. */
  readonly vectors: ComplexArray;
}

/**
 * Eigenvalues near k of the problem projected on the columns of U, by the block Rayleigh functional: eigenvalues δ of
 * UᵀA(k)U + δ UᵀA′(k)U. Complex symmetry makes the error quadratic in that of U. Repeated from the group's own mean
 * until it stands still, since A is not linear in k; one product a term serves every k.
 *
 * @param near   where the cluster lies
 * @param columns of U, which is size × columns
 * @param tolerance absolute distance within which members form one group
 * @param projection of the problem on U, where the caller has it already (see projectPieces)
 */
export function rayleighGroups(
  problem: EigenProblem,
  near: Complex,
  level: number,
  U: ComplexArray,
  columns: number,
  tolerance: number,
  withSlope = true,
  projection: Projection = projectPieces(problem, U, columns) ?? projectTerms(problem, level, U, columns),
): EigenGroup[] {
  const n = problem.size;
  const first = smallPencil(projection, near, level);
  if (!first) return [];
  return gather(first.offsets, tolerance).flatMap((members) => {
    const count = members.length;
    let y: ComplexArray = new Float64Array(2 * columns * count);
    members.forEach((i, j) => y.set(first.vectors.subarray(2 * columns * i, 2 * columns * (i + 1)), 2 * columns * j));
    // eigenvectors of a degenerate group are those of rounding, as parallel as it likes: its span is what counts
    y = orthonormalBasis(y, count, columns);
    const own = within(projection, y, count);
    let k = add(near, mean(members.map((i) => first.offsets[i])));
    let spread = 0;
    for (let pass = 0; pass < 12; pass++) {
      const again = smallPencil(own, k, level);
      if (!again) return [];
      const step = mean(again.offsets);
      spread = Math.max(...again.offsets.map((o) => modulus(subtract(o, step))));
      k = add(k, step);
      // Newton's next step is the square of this one
      if (modulus(step) <= 1e-8 * modulus(k)) break;
    }
    const vectors = normaliseColumns(combine(U, columns, y, count, n), count, n);
    const slope = withSlope ? groupSlope(problem, own, k, level, vectors) : complex(0);
    return [{ k, spread, slope, multiplicity: count, vectors }];
  });
}

/** A family on a small space: A = Σ c_i(k, level) P_i with the P_i projected. */
export interface Projection {
  readonly columns: number;
  readonly matrices: readonly ComplexArray[];
  /** `byLevel` is absent where the matrices belong to one level. */
  readonly factor: (i: number, k: Complex, level: number) => TermFactor & { readonly byLevel?: Complex };
}

/** UᵀP_iU of a family of fixed pieces: serves every k and level. Undefined where the family is no such sum. */
export function projectPieces(problem: EigenProblem, U: ComplexArray, columns: number): Projection | undefined {
  const { pieces } = problem;
  if (pieces === undefined) return undefined;
  const work = new Float64Array(2 * problem.size * columns);
  const matrices = Array.from({ length: pieces.count }, (_, i) => {
    pieces.multiplyInto(work, i, U, columns);
    return transposeProduct(U, columns, work, columns, problem.size);
  });
  return { columns, matrices, factor: (i, k, level) => pieces.factor(i, k, level) };
}

/** UᵀA_jU of every term at one level. */
function projectTerms(problem: EigenProblem, level: number, U: ComplexArray, columns: number): Projection {
  const work = new Float64Array(2 * problem.size * columns);
  const matrices = Array.from({ length: problem.terms }, (_, j) => {
    problem.multiplyTermInto(work, j, level, U, columns);
    return transposeProduct(U, columns, work, columns, problem.size);
  });
  return { columns, matrices, factor: (j, k) => problem.termFactor(j, k) };
}

/** The projection on U y. */
function within({ columns, matrices, factor }: Projection, y: ComplexArray, count: number): Projection {
  const smaller = matrices.map((p) =>
    transposeProduct(y, count, combine(p, columns, y, count, columns), count, columns),
  );
  return { columns: count, matrices: smaller, factor };
}

/** Mean dk/d(level) = −tr[(UᵀA_k U)⁻¹ UᵀA_level U]/μ of a group with the vectors U. */
function groupSlope(problem: EigenProblem, own: Projection, k: Complex, level: number, U: ComplexArray): Complex {
  const { columns } = own;
  let byK: ComplexArray;
  let byLevel: ComplexArray;
  if (own.matrices.every((_, i) => own.factor(i, k, level).byLevel !== undefined)) {
    byK = weighted(own, (i) => own.factor(i, k, level).byK);
    byLevel = weighted(own, (i) => own.factor(i, k, level).byLevel ?? complex(0));
  } else {
    const n = problem.size;
    const work = new Float64Array(2 * n * columns);
    problem.multiplyInto(work, k, level, 'byK', U, columns);
    byK = transposeProduct(U, columns, work, columns, n);
    problem.multiplyInto(work, k, level, 'byLevel', U, columns);
    byLevel = transposeProduct(U, columns, work, columns, n);
  }
  const lu = luFactor(byK, columns);
  luSolveInto(byLevel, lu, byLevel, columns);
  let trace = complex(0);
  for (let i = 0; i < columns; i++) {
    trace = add(trace, complex(byLevel[2 * (i + i * columns)], byLevel[2 * (i + i * columns) + 1]));
  }
  return scale(trace, -1 / columns);
}

/** Σ c_i P_i. */
function weighted({ columns, matrices }: Projection, factor: (i: number) => Complex): ComplexArray {
  const out = new Float64Array(2 * columns * columns);
  matrices.forEach((p, i) => {
    const { re, im } = factor(i);
    for (let s = 0; s < out.length; s += 2) {
      const a = p[s];
      const b = p[s + 1];
      out[s] = out[s] + re * a - im * b;
      out[s + 1] = out[s + 1] + re * b + im * a;
    }
  });
  return out;
}

/** Offsets δ and vectors of A + δ ∂A/∂k on the small space; null where the second matrix is singular or not finite. */
function smallPencil(
  projection: Projection,
  k: Complex,
  level: number,
): { readonly offsets: readonly Complex[]; readonly vectors: ComplexArray } | null {
  const { columns } = projection;
  const g = weighted(projection, (i) => projection.factor(i, k, level).value);
  const slope = weighted(projection, (i) => projection.factor(i, k, level).byK);
  if (!slope.every(Number.isFinite)) return null;
  if (columns === 1) {
    const d = complex(slope[0], slope[1]);
    if (modulus(d) === 0) return null;
    const offset = scale(divide(complex(g[0], g[1]), d), -1);
    return { offsets: [offset], vectors: Float64Array.of(1, 0) };
  }
  const lu = luFactor(slope, columns);
  const matrix = luSolveInto(new Float64Array(g.length), lu, g, columns);
  for (let s = 0; s < matrix.length; s++) matrix[s] = -matrix[s];
  if (!matrix.every(Number.isFinite)) return null;
  const { values, vectors } = eigenGeneral(matrix, columns);
  return {
    offsets: Array.from({ length: columns }, (_, i) => complex(values[2 * i], values[2 * i + 1])),
    vectors,
  };
}

/** Chains of values that lie within the tolerance of one another, as lists of indices. */
export function gather(values: readonly Complex[], tolerance: number): number[][] {
  const groups: number[][] = [];
  const taken = values.map(() => false);
  for (let i = 0; i < values.length; i++) {
    if (taken[i]) continue;
    const group = [i];
    taken[i] = true;
    for (let at = 0; at < group.length; at++) {
      for (let j = 0; j < values.length; j++) {
        if (!taken[j] && modulus(subtract(values[j], values[group[at]])) <= tolerance) {
          taken[j] = true;
          group.push(j);
        }
      }
    }
    groups.push(group);
  }
  return groups;
}

const mean = (values: readonly Complex[]): Complex =>
  scale(
    values.reduce((a, b) => add(a, b), complex(0)),
    1 / values.length,
  );
