// How much memory will a factorization take?

import type { Fronts } from './fronts.ts';
import type { ElementPattern } from './pattern.ts';

/** Sizes that depend on the plan only. */
export interface MemoryPlan {
  readonly panelStarts: Float64Array;
  /** Largest front, largest element. */
  readonly largestFront: number;
  readonly largestElement: number;
  /** Numbers of the stack of contributions and fronts. */
  readonly stack: number;
}

/** Room for L and the peak of the working stack: known before any number is. */
export function planMemory(pattern: ElementPattern, fronts: Fronts): MemoryPlan {
  const { count, pivotStarts, boundaryStarts, childStarts, children } = fronts;
  const panelStarts = new Float64Array(count + 1);
  let largestFront = 0;
  let top = 0;
  let stack = 0;
  for (let f = 0; f < count; f++) {
    const np = pivotStarts[f + 1] - pivotStarts[f];
    const nb = boundaryStarts[f + 1] - boundaryStarts[f];
    const nf = np + nb;
    panelStarts[f + 1] = panelStarts[f] + 2 * nf * np;
    largestFront = Math.max(largestFront, nf);
    stack = Math.max(stack, top + 2 * nf * np + 2 * nb * nb);
    for (let i = childStarts[f]; i < childStarts[f + 1]; i++) {
      const n = boundaryStarts[children[i] + 1] - boundaryStarts[children[i]];
      top -= n * (n + 1);
    }
    top += nb * (nb + 1);
    stack = Math.max(stack, top);
  }
  let largestElement = 0;
  for (let e = 0; e + 1 < pattern.starts.length; e++) {
    largestElement = Math.max(largestElement, pattern.starts[e + 1] - pattern.starts[e]);
  }
  return { panelStarts, largestFront, largestElement, stack };
}
