// How is a matrix factored along a plan of fronts?

import type { ComplexArray } from '../numerics/complex.ts';
import { summarize, type Factors } from './factors.ts';
import { layArena, SMALLEST, TINY } from './front-work.ts';
import type { Fronts } from './fronts.ts';
import { MOST_DELAYED, type FrontKernels } from './kernels/kernels.ts';
import type { MemoryPlan } from './memory-plan.ts';
import type { ElementFill, ElementPattern, Factorization } from './pattern.ts';
import { solveFronts } from './solve.ts';
import type { SparePanels } from './spare-panels.ts';

/**
 * Numeric LDLᵀ, one front after the other, contributions on a stack; `together` may try it first with several threads.
 */
export function factorFronts(
  pattern: ElementPattern,
  fronts: Fronts,
  plan: MemoryPlan,
  kernels: FrontKernels,
  fill: ElementFill,
  spare: SparePanels,
  together?: () => Factors | undefined,
): Factorization {
  let room: Room = { front: plan.largestFront, stack: plan.stack };
  let factors = together?.() ?? eliminate(pattern, fronts, plan, kernels, fill, spare, room);
  while (factors === undefined) {
    // Rows that were passed on made a front larger than planned: once more with more room.
    room = { front: 2 * room.front + MOST_DELAYED, stack: 2 * room.stack + 8 * MOST_DELAYED * room.front };
    factors = eliminate(pattern, fronts, plan, kernels, fill, spare, room);
  }
  const done = factors;
  let released = false;
  return {
    unknowns: pattern.unknowns,
    ...summarize(done),
    solveInto(out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray {
      if (released) throw new Error('this factorization was released: factor again, or release later');
      return solveFronts(done, kernels, out, rhs, columns);
    },
    release(): void {
      if (!released) spare.give(done.panels);
      released = true;
    },
  };
}

/** What the working memory must hold: rows of a front, numbers of the stack. */
interface Room {
  readonly front: number;
  readonly stack: number;
}

/** One run through the fronts; undefined when the room does not suffice. */
function eliminate(
  pattern: ElementPattern,
  fronts: Fronts,
  plan: MemoryPlan,
  kernels: FrontKernels,
  fill: ElementFill,
  spare: SparePanels,
  room: Room,
): Factors | undefined {
  const { count, parent, pivotStarts, boundaryStarts, boundary, childStarts, children, boundaryInParent } = fronts;
  const { elementStarts, elements, listInFront } = fronts;
  const arena = layArena(kernels.base, room.front, plan.largestElement);
  const { map: mapAt, perm: permAt, pivots: pivotsAt, element: elementAt, work: workAt, stack: stackAt } = arena;
  kernels.reserve(stackAt + room.stack + 64);
  const m = kernels.numbers;
  const ints = kernels.integers;
  const elementView = m.subarray(elementAt, workAt);

  let panels = spare.take() ?? new Float64Array(plan.panelStarts[count]);
  const panelStarts = new Float64Array(count + 1);
  const inversePivots = new Float64Array(4 * pattern.unknowns);
  const order = new Int32Array(pattern.unknowns);
  const actualStarts = new Int32Array(count + 1);
  const largestDiagonal = new Float64Array(count);
  /** Places that front f leaves to its parent; absent where there are none. */
  const left = new Map<number, Int32Array>();
  let perturbedPivots = 0;
  let largestFront = 0;
  let top = stackAt;

  for (let f = 0; f < count; f++) {
    // Rows: what the children left, in their order, then the planned pivots, then the boundary.
    let late = 0;
    if (left.size > 0)
      for (let i = childStarts[f]; i < childStarts[f + 1]; i++) late += left.get(children[i])?.length ?? 0;
    const np = pivotStarts[f + 1] - pivotStarts[f] + late;
    const nb = boundaryStarts[f + 1] - boundaryStarts[f];
    const nf = np + nb;
    const p = top;
    const s = p + 2 * nf * np;
    if (nf > room.front || s + 2 * nb * nb > stackAt + room.stack) {
      spare.give(panels);
      return undefined;
    }
    largestFront = Math.max(largestFront, nf);
    kernels.clear(p, s, nf, np);

    let scale = 0;
    for (let i = elementStarts[f]; i < elementStarts[f + 1]; i++) {
      const e = elements[i];
      const from = pattern.starts[e];
      const nd = pattern.starts[e + 1] - from;
      fill(e, elementView);
      for (let j = 0; j < nd; j++) ints[mapAt + j] = listInFront[from + j] < 0 ? -1 : listInFront[from + j] + late;
      for (let j = 0; j < nd; j++) {
        const at = elementAt + 2 * (j * nd + j);
        const size = Math.max(Math.abs(m[at]), Math.abs(m[at + 1]));
        if (size > scale) scale = size;
      }
      kernels.addElement(p, s, nf, np, elementAt, nd, mapAt);
    }
    // The stack holds the contributions of the children in order, the last on top.
    let bottom = top;
    let offset = late;
    for (let i = childStarts[f + 1] - 1; i >= childStarts[f]; i--) {
      const c = children[i];
      const from = boundaryStarts[c];
      const planned = boundaryStarts[c + 1] - from;
      const unfinished = left.size > 0 ? (left.get(c)?.length ?? 0) : 0;
      const n = planned + unfinished;
      offset -= unfinished;
      for (let j = 0; j < unfinished; j++) ints[mapAt + j] = offset + j;
      for (let j = 0; j < planned; j++) ints[mapAt + unfinished + j] = boundaryInParent[from + j] + late;
      bottom -= n * (n + 1);
      kernels.addContribution(p, s, nf, np, bottom, n, mapAt);
      if (largestDiagonal[c] > scale) scale = largestDiagonal[c];
    }
    largestDiagonal[f] = scale;

    const tiny = TINY * scale || SMALLEST;
    const done = kernels.factorFront(p, s, nf, np, pivotsAt, permAt, workAt, tiny, parent[f] < 0);
    perturbedPivots += m[pivotsAt + 4 * np];

    const start = actualStarts[f];
    actualStarts[f + 1] = start + done;
    for (let j = 0; j < 4 * done; j++) inversePivots[4 * start + j] = m[pivotsAt + j];
    const placeAt = (j: number): number => {
      const row = ints[permAt + j];
      return row < late ? latePlace(f, row) : pivotStarts[f] + row - late;
    };
    for (let j = 0; j < done; j++) order[start + j] = placeAt(j);
    if (done < np)
      left.set(
        f,
        Int32Array.from({ length: np - done }, (_, j) => placeAt(done + j)),
      );

    const at = panelStarts[f];
    panelStarts[f + 1] = at + 2 * nf * done;
    if (panelStarts[f + 1] > panels.length) {
      const larger = new Float64Array(Math.ceil(1.25 * panelStarts[f + 1]));
      larger.set(panels.subarray(0, at));
      panels = larger;
    }
    if (done === np) panels.set(m.subarray(p, s), at);
    else {
      panels.set(m.subarray(p, p + nf * done), at);
      panels.set(m.subarray(p + nf * np, p + nf * (np + done)), at + nf * done);
    }
    kernels.packContribution(p, s, nf, np, done, bottom, workAt);
    top = bottom + (nf - done) * (nf - done + 1);
  }

  const common = {
    count,
    placeOf: fronts.placeOf,
    order,
    panels,
    panelStarts,
    inversePivots,
    largestFront,
    perturbedPivots,
  };
  if (left.size === 0) return { ...common, pivotStarts, edgeStarts: boundaryStarts, edges: boundary };
  const edgeStarts = new Float64Array(count + 1);
  for (let f = 0; f < count; f++) {
    edgeStarts[f + 1] = edgeStarts[f] + (left.get(f)?.length ?? 0) + boundaryStarts[f + 1] - boundaryStarts[f];
  }
  const edges = new Int32Array(edgeStarts[count]);
  for (let f = 0; f < count; f++) {
    const late = left.get(f) ?? new Int32Array(0);
    edges.set(late, edgeStarts[f]);
    edges.set(boundary.subarray(boundaryStarts[f], boundaryStarts[f + 1]), edgeStarts[f] + late.length);
  }
  return { ...common, pivotStarts: actualStarts, edgeStarts, edges };

  /** Place of the row-th of the rows that the children of f left. */
  function latePlace(f: number, row: number): number {
    for (let i = childStarts[f]; i < childStarts[f + 1]; i++) {
      const places = left.get(children[i]);
      if (places === undefined) continue;
      if (row < places.length) return places[row];
      row -= places.length;
    }
    return -1;
  }
}
