// What does a thread do with one front whose size is as planned?

import type { Fronts } from './fronts.ts';
import { workNumbers, type FrontKernels } from './kernels/kernels.ts';
import type { MemoryPlan } from './memory-plan.ts';

/** Positions of a thread's part of the working memory. */
export interface Arena {
  readonly map: number;
  readonly perm: number;
  readonly pivots: number;
  readonly element: number;
  readonly work: number;
  readonly stack: number;
}

/** Room for one map and one permutation, inverse pivots, an element and work, from position `at` on. */
export function layArena(at: number, largestFront: number, largestElement: number): Arena {
  const integers = Math.max(largestFront, largestElement) + 8;
  const pivots = at + integers + 4;
  const element = pivots + 4 * largestFront + 8;
  const work = element + 2 * largestElement * largestElement;
  return { map: 2 * at, perm: 2 * at + integers, pivots, element, work, stack: work + workNumbers(largestFront) };
}

/** Where the numbers of all fronts go; shared between the threads. */
export interface Results {
  readonly panels: Float64Array;
  readonly inversePivots: Float64Array;
  readonly order: Int32Array;
  readonly largestDiagonal: Float64Array;
  /** Position of each front's contribution in the working memory. */
  readonly contributionAt: Float64Array;
}

/** What the symbolic work says that a thread must know. */
export type FrontTables = Pick<
  Fronts,
  | 'count'
  | 'parent'
  | 'pivotStarts'
  | 'boundaryStarts'
  | 'boundaryInParent'
  | 'childStarts'
  | 'children'
  | 'elementStarts'
  | 'elements'
  | 'listInFront'
> &
  Pick<MemoryPlan, 'panelStarts'> & { readonly elementListStarts: Int32Array };

/** Pivots that must be replaced get this multiple of the largest diagonal entry in their subtree: a rounding error. */
export const TINY = 2 ** -52;
/** Replaces a pivot where everything is zero. */
export const SMALLEST = 1e-280;

/**
 * Assembles front f at position p, eliminates its pivots and leaves its contribution at `to` (≤ p).
 * `takeElement(e)` returns the position of element e's matrix. Returns the number of perturbed pivots, or -1 when rows
 * would have to be passed on to the parent, which the plan has no room for.
 */
export function workFront(
  tables: FrontTables,
  kernels: FrontKernels,
  arena: Arena,
  results: Results,
  f: number,
  p: number,
  to: number,
  takeElement: (e: number) => number,
): number {
  const { pivotStarts, boundaryStarts, childStarts, children, elementStarts, elements, elementListStarts } = tables;
  const { boundaryInParent, listInFront, panelStarts, parent } = tables;
  const { numbers: m, integers: ints } = kernels;
  const { map, perm, pivots } = arena;
  const place = pivotStarts[f];
  const np = pivotStarts[f + 1] - place;
  const nb = boundaryStarts[f + 1] - boundaryStarts[f];
  const nf = np + nb;
  const s = p + 2 * nf * np;
  kernels.clear(p, s, nf, np);
  let scale = 0;
  for (let i = elementStarts[f]; i < elementStarts[f + 1]; i++) {
    const from = elementListStarts[elements[i]];
    const nd = elementListStarts[elements[i] + 1] - from;
    const at = takeElement(elements[i]);
    for (let j = 0; j < nd; j++) {
      ints[map + j] = listInFront[from + j];
      const t = at + 2 * (j * nd + j);
      const size = Math.max(Math.abs(m[t]), Math.abs(m[t + 1]));
      if (size > scale) scale = size;
    }
    kernels.addElement(p, s, nf, np, at, nd, map);
  }
  for (let i = childStarts[f + 1] - 1; i >= childStarts[f]; i--) {
    const c = children[i];
    const from = boundaryStarts[c];
    const n = boundaryStarts[c + 1] - from;
    for (let j = 0; j < n; j++) ints[map + j] = boundaryInParent[from + j];
    kernels.addContribution(p, s, nf, np, results.contributionAt[c], n, map);
    if (results.largestDiagonal[c] > scale) scale = results.largestDiagonal[c];
  }
  results.largestDiagonal[f] = scale;
  const done = kernels.factorFront(p, s, nf, np, pivots, perm, arena.work, TINY * scale || SMALLEST, parent[f] < 0);
  if (done < np) return -1;
  results.panels.set(m.subarray(p, s), panelStarts[f]);
  for (let j = 0; j < 4 * np; j++) results.inversePivots[4 * place + j] = m[pivots + j];
  for (let j = 0; j < np; j++) results.order[place + j] = place + ints[perm + j];
  kernels.packContribution(p, s, nf, np, np, to, arena.work);
  results.contributionAt[f] = to;
  return m[pivots + 4 * np];
}
