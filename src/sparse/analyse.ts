// How does a pattern become a plan that any matrix on it can be factored by?

import { dissect } from './dissection.ts';
import { factorFronts } from './factorize.ts';
import { planFronts } from './fronts.ts';
import { findIncidence } from './incidence.ts';
import type { FrontKernels } from './kernels/kernels.ts';
import { makeTwinKernels } from './kernels/twin.ts';
import { makeSparePanels } from './spare-panels.ts';
import { factorTogether, findThreads, makeSession } from './threads.ts';
import { loadWasmKernels } from './kernels/wasm-kernels.ts';
import { planMemory } from './memory-plan.ts';
import type { Analysis, ElementFill, ElementPattern, Factorization } from './pattern.ts';

export interface AnalysisChoice {
  /** By default the compiled ones where there are any, else their twin; with the threads of startThreads. */
  readonly kernels?: FrontKernels;
}

/**
 * Ordering, assembly tree and memory plan of a pattern; then factor any matrix on it, any number of times.
 *
 * @throws RangeError when the pattern is inconsistent, or an unknown belongs to no element.
 * @example
 * const analysis = analyse({ unknowns: 2, starts: Int32Array.of(0, 2), list: Int32Array.of(0, 1), centroids: Float64Array.of(0, 0) });
 * const factorization = analysis.factorize((element, into) => into.set([2, 0, 1, 0, 1, 0, 2, 0]));
 * const x = factorization.solveInto(new Float64Array(4), Float64Array.of(3, 0, 3, 0), 1); // [1, 0, 1, 0]
 */
export function analyse(pattern: ElementPattern, { kernels }: AnalysisChoice = {}): Analysis {
  const incidence = findIncidence(pattern);
  const fronts = planFronts(pattern, incidence, dissect(pattern, incidence));
  const plan = planMemory(pattern, fronts);
  const spare = makeSparePanels();
  const session = makeSession();
  return {
    pattern,
    factorize(fill: ElementFill): Factorization {
      const team = kernels === undefined ? findThreads() : undefined;
      if (team === undefined) return factorFronts(pattern, fronts, plan, kernels ?? sharedKernels(), fill, spare);
      return factorFronts(pattern, fronts, plan, team.shared.kernels, fill, spare, () =>
        factorTogether(pattern, fronts, plan, team, session, fill, spare),
      );
    },
  };
}

let shared: FrontKernels | undefined;

/** One working memory for all factorizations: they run one after the other and keep their results elsewhere. */
function sharedKernels(): FrontKernels {
  shared ??= loadWasmKernels() ?? makeTwinKernels();
  return shared;
}
