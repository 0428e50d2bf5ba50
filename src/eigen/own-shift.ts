// How does a group found about a far shift become right for a family that is not linear in k²?

import { modulus, subtract } from '../numerics/complex.ts';
import { residualStep } from './improve.ts';
import type { EigenProblem } from './problem.ts';
import { type EigenGroup, rayleighGroups } from './rayleigh.ts';

/** Steps about a group's own k; each squares the error left by the family's curvature in k. */
const MOST_STEPS = 3;

/**
 * Residual iteration with a factorization at the group's own k. Vectors found about a shift solve the family linearised
 * there; for terms beyond K − k²M that leaves an error of second order in the distance from the shift.
 */
export function settleGroup(problem: EigenProblem, level: number, group: EigenGroup): EigenGroup {
  let best = group;
  for (let step = 0; step < MOST_STEPS; step++) {
    // off the eigenvalue, so that the matrix can be factored
    const shift = { re: best.k.re * (1 + 1e-6), im: best.k.im };
    const inverse = problem.factorize(shift, level);
    const vectors = residualStep(problem, inverse, best.k, level, best.vectors, best.multiplicity);
    inverse.release();
    const [next] = rayleighGroups(problem, best.k, level, vectors, best.multiplicity, Infinity);
    if (!next) return best;
    const moved = modulus(subtract(next.k, best.k));
    best = next;
    if (moved <= 1e-14 * modulus(best.k)) break;
  }
  return best;
}
