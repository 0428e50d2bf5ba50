// How is a nearly right space of eigenvectors made right?

import type { Complex, ComplexArray } from '../numerics/complex.ts';
import { addProduct, normaliseColumns, orthonormalBasis, transposeProduct } from './columns.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import type { EigenProblem, Inverse } from './problem.ts';

/** Inverse iteration, one step: U ← A(shift)⁻¹ A_k U, columns orthonormal. Best with a shift close to the cluster. */
export function inverseStep(
  problem: EigenProblem,
  inverse: Inverse,
  k: Complex,
  level: number,
  U: ComplexArray,
  columns: number,
): ComplexArray {
  const work = new Float64Array(2 * problem.size * columns);
  problem.multiplyInto(work, k, level, 'byK', U, columns);
  inverse.solveInto(work, work, columns);
  return orthonormalBasis(work, columns, problem.size);
}

/**
 * Correction with a factorization at some nearby shift: U ← U − A(shift)⁻¹ (A(k)U − A_k U Δ), where Δ is the small matrix
 * that makes the residual orthogonal to U. Damps each foreign component j by |k² − shift²| / |k_j² − shift²|, so the high
 * components that a step of order adds vanish at once.
 */
export function residualStep(
  problem: EigenProblem,
  inverse: Inverse,
  k: Complex,
  level: number,
  U: ComplexArray,
  columns: number,
): ComplexArray {
  const n = problem.size;
  const residual = new Float64Array(2 * n * columns);
  const slope = new Float64Array(2 * n * columns);
  problem.multiplyInto(residual, k, level, 'value', U, columns);
  problem.multiplyInto(slope, k, level, 'byK', U, columns);
  const delta = transposeProduct(U, columns, residual, columns, n);
  const lu = luFactor(transposeProduct(U, columns, slope, columns, n), columns);
  luSolveInto(delta, lu, delta, columns);
  addProduct(residual, slope, columns, delta, columns, n, -1);
  inverse.solveInto(residual, residual, columns);
  const out = Float64Array.from(U);
  for (let s = 0; s < out.length; s++) out[s] = out[s] - residual[s];
  return normaliseColumns(out, columns, n);
}

/** Largest ‖A(k)u‖ / (|k| ‖A_k u‖) over the columns: the backward error in k, relative. */
export function relativeResidual(
  problem: EigenProblem,
  k: Complex,
  level: number,
  U: ComplexArray,
  columns: number,
): number {
  const n = problem.size;
  const r = new Float64Array(2 * n * columns);
  const s = new Float64Array(2 * n * columns);
  problem.multiplyInto(r, k, level, 'value', U, columns);
  problem.multiplyInto(s, k, level, 'byK', U, columns);
  let worst = 0;
  for (let j = 0; j < columns; j++) {
    let a = 0;
    let b = 0;
    for (let i = 2 * j * n; i < 2 * (j + 1) * n; i++) {
      a += r[i] * r[i];
      b += s[i] * s[i];
    }
    worst = Math.max(worst, Math.sqrt(a / b) / Math.hypot(k.re, k.im));
  }
  return worst;
}
