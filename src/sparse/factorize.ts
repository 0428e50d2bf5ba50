// How is a matrix factored along a plan of fronts?

import type { ComplexArray } from '../numerics/complex.ts';
import type { Fronts } from './fronts.ts';
import { workNumbers, type FrontKernels } from './kernels/kernels.ts';
import type { ElementFill, ElementPattern, Factorization, FactorReport } from './pattern.ts';
import { solveFronts } from './solve.ts';

/** The numbers of a factorization: P A Pᵀ = L D Lᵀ front by front. */
export interface Factors {
  readonly fronts: Fronts;
  /** L of front f from panelStarts[f]: nf × np column-major, real plane then imaginary plane; strictly below the diagonal. */
  readonly panels: Float64Array;
  readonly panelStarts: Float64Array;
  /** Inverse diagonal blocks, four numbers a place: (a, b) and (c, 0) of [[a, b], [b, c]]; b = 0: single pivots. */
  readonly inversePivots: Float64Array;
  /** Row j of the pivot block of f belongs to place pivotStarts[f] + pivotOrder[pivotStarts[f] + j]. */
  readonly pivotOrder: Int32Array;
}

/** Sizes that depend on the plan only. */
export interface MemoryPlan {
  readonly panelStarts: Float64Array;
  /** Largest front, largest element. */
  readonly largestFront: number;
  readonly largestElement: number;
  readonly largestPivots: number;
  /** Numbers of the stack of contributions and fronts. */
  readonly stack: number;
}

/** Room for L and the peak of the working stack: known before any number is. */
export function planMemory(pattern: ElementPattern, fronts: Fronts): MemoryPlan {
  const { count, pivotStarts, boundaryStarts, childStarts, children } = fronts;
  const panelStarts = new Float64Array(count + 1);
  let largestFront = 0;
  let largestPivots = 0;
  let top = 0;
  let stack = 0;
  for (let f = 0; f < count; f++) {
    const np = pivotStarts[f + 1] - pivotStarts[f];
    const nb = boundaryStarts[f + 1] - boundaryStarts[f];
    const nf = np + nb;
    panelStarts[f + 1] = panelStarts[f] + 2 * nf * np;
    largestFront = Math.max(largestFront, nf);
    largestPivots = Math.max(largestPivots, np);
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
  return { panelStarts, largestFront, largestElement, largestPivots, stack };
}

/** Memory of released factorizations of one plan, for the next ones: touching new memory costs as much as factoring. */
export interface SparePanels {
  take(): Float64Array | undefined;
  give(panels: Float64Array): void;
}

/** Keeps at most this many released panels. */
const MOST_SPARE = 2;

export function makeSparePanels(): SparePanels {
  const held: Float64Array[] = [];
  return {
    take: () => held.pop(),
    give(panels): void {
      if (held.length < MOST_SPARE) held.push(panels);
    },
  };
}

/** Pivots below this multiple of the largest entry met in the front so far are replaced: a rounding error's size. */
const TINY = 2 ** -52;

/** Numeric LDLᵀ, one front after the other, contributions on a stack. */
export function factorFronts(
  pattern: ElementPattern,
  fronts: Fronts,
  plan: MemoryPlan,
  kernels: FrontKernels,
  fill: ElementFill,
  spare: SparePanels,
): Factorization {
  const { count, pivotStarts, boundaryStarts, childStarts, children, boundaryInParent } = fronts;
  const { elementStarts, elements, listInFront } = fronts;
  // Memory: integers for one map and one permutation, inverse pivots, an element, work, then the stack.
  const mapAt = 2 * kernels.base;
  const mapNumbers = Math.max(plan.largestFront, plan.largestElement) + 8;
  const permAt = mapAt + 2 * mapNumbers;
  const pivotsAt = kernels.base + 2 * mapNumbers;
  const elementAt = pivotsAt + 4 * plan.largestPivots + 8;
  const workAt = elementAt + 2 * plan.largestElement * plan.largestElement;
  const stackAt = workAt + workNumbers(plan.largestFront);
  kernels.reserve(stackAt + plan.stack + 64);
  const m = kernels.numbers;
  const ints = kernels.integers;

  const panels = spare.take() ?? new Float64Array(plan.panelStarts[count]);
  const inversePivots = new Float64Array(4 * pattern.unknowns);
  const pivotOrder = new Int32Array(pattern.unknowns);
  const largestChild = new Float64Array(count);
  let perturbed = 0;
  let top = stackAt;
  const elementView = m.subarray(elementAt, elementAt + 2 * plan.largestElement * plan.largestElement);

  for (let f = 0; f < count; f++) {
    const np = pivotStarts[f + 1] - pivotStarts[f];
    const nb = boundaryStarts[f + 1] - boundaryStarts[f];
    const nf = np + nb;
    const p = top;
    const s = p + 2 * nf * np;
    let scale = 0;
    kernels.clear(p, s, nf, np);

    for (let i = elementStarts[f]; i < elementStarts[f + 1]; i++) {
      const e = elements[i];
      const from = pattern.starts[e];
      const nd = pattern.starts[e + 1] - from;
      fill(e, elementView);
      for (let j = 0; j < nd; j++) ints[mapAt + j] = listInFront[from + j];
      for (let j = 0; j < nd; j++) {
        const at = elementAt + 2 * (j * nd + j);
        scale = Math.max(scale, Math.abs(m[at]), Math.abs(m[at + 1]));
      }
      kernels.addElement(p, s, nf, np, elementAt, nd, mapAt);
    }
    // The stack holds the contributions of the children in order, the last on top.
    let bottom = top;
    for (let i = childStarts[f + 1] - 1; i >= childStarts[f]; i--) {
      const c = children[i];
      const from = boundaryStarts[c];
      const n = boundaryStarts[c + 1] - from;
      bottom -= n * (n + 1);
      for (let j = 0; j < n; j++) ints[mapAt + j] = boundaryInParent[from + j];
      kernels.addContribution(p, s, nf, np, bottom, n, mapAt);
      scale = Math.max(scale, largestChild[c]);
    }
    largestChild[f] = scale;

    perturbed += kernels.factorFront(
      p,
      s,
      nf,
      np,
      pivotsAt,
      permAt,
      workAt,
      TINY * scale || Number.MIN_VALUE * 2 ** 60,
    );
    const place = pivotStarts[f];
    panels.set(m.subarray(p, s), plan.panelStarts[f]);
    for (let j = 0; j < 4 * np; j++) inversePivots[4 * place + j] = m[pivotsAt + j];
    for (let j = 0; j < np; j++) pivotOrder[place + j] = ints[permAt + j];
    kernels.packContribution(s, nb, bottom);
    top = bottom + nb * (nb + 1);
  }

  let released = false;
  const factors: Factors = { fronts, panels, panelStarts: plan.panelStarts, inversePivots, pivotOrder };
  return {
    unknowns: pattern.unknowns,
    ...summarize(fronts, factors, perturbed),
    solveInto(out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray {
      if (released) throw new Error('this factorization was released: factor again, or release later');
      return solveFronts(factors, plan, kernels, out, rhs, columns);
    },
    release(): void {
      if (!released) spare.give(panels);
      released = true;
    },
  };
}

function summarize(
  fronts: Fronts,
  factors: Factors,
  perturbedPivots: number,
): { report: FactorReport; logDeterminant: { re: number; im: number } } {
  const { inversePivots: d } = factors;
  let smallest = Infinity;
  let largest = 0;
  let re = 0;
  let phase = 0;
  for (let j = 0; 4 * j < d.length; j++) {
    const at = 4 * j;
    const x = d[at];
    const y = d[at + 1];
    if (d[at + 2] !== 0 || d[at + 3] !== 0) {
      // det D⁻¹ of the pair, by its largest entry b: b² (ac/b² − 1).
      const [br, bi] = [d[at + 2], d[at + 3]];
      const [cr, ci] = [d[at + 4], d[at + 5]];
      const s = Math.hypot(br, bi);
      const [px, py] = [x / s, y / s];
      const dx = px * (cr / s) - py * (ci / s) - ((br / s) * (br / s) - (bi / s) * (bi / s));
      const dy = px * (ci / s) + py * (cr / s) - 2 * (br / s) * (bi / s);
      const pair = Math.hypot(dx, dy);
      re -= Math.log(pair) + 2 * Math.log(s);
      phase -= Math.atan2(dy, dx);
      // Moduli of the pair's two eigenvalues lie near these two; their product is the determinant.
      const big = Math.max(s, Math.hypot(x, y), Math.hypot(cr, ci));
      smallest = Math.min(smallest, 1 / big);
      largest = Math.max(largest, big / (pair * s * s));
      j++;
      continue;
    }
    const modulus = Math.hypot(x, y);
    re -= Math.log(modulus);
    phase -= Math.atan2(y, x);
    smallest = Math.min(smallest, 1 / modulus);
    largest = Math.max(largest, 1 / modulus);
  }
  return {
    report: {
      fronts: fronts.count,
      nonzeros: fronts.nonzeros,
      flops: fronts.flops,
      perturbedPivots,
      smallestPivot: d.length === 0 ? 1 : smallest,
      largestPivot: d.length === 0 ? 1 : largest,
    },
    logDeterminant: { re, im: Math.atan2(Math.sin(phase), Math.cos(phase)) },
  };
}
