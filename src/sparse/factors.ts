// What does a factorization keep?

import type { FactorReport } from './pattern.ts';

/**
 * P A Pᵀ = L D Lᵀ front by front. A place is a position in the planned order of elimination; front f eliminates the
 * places order[pivotStarts[f]..pivotStarts[f+1]) in this order (numerical pivoting moves some of the planned ones
 * within the front, rarely to a parent) and has the rows edges[edgeStarts[f]..edgeStarts[f+1]) besides.
 */
export interface Factors {
  readonly count: number;
  /** Place of each unknown. */
  readonly placeOf: Int32Array;
  readonly pivotStarts: Int32Array;
  readonly order: Int32Array;
  readonly edgeStarts: Float64Array;
  readonly edges: Int32Array;
  /** L of front f from panelStarts[f]: nf × np column-major, real plane then imaginary plane; strictly below the diagonal. */
  readonly panels: Float64Array;
  readonly panelStarts: Float64Array;
  /** Inverse diagonal blocks, four numbers a pivot: (a, b) and (c, 0) of [[a, b], [b, c]]; b = 0: single pivots. */
  readonly inversePivots: Float64Array;
  readonly largestFront: number;
  readonly perturbedPivots: number;
}

/** Counts, pivot range and the determinant's logarithm. */
export function summarize(factors: Factors): { report: FactorReport; logDeterminant: { re: number; im: number } } {
  const { count, pivotStarts, edgeStarts, inversePivots: d, perturbedPivots } = factors;
  let smallest = Infinity;
  let largest = 0;
  let re = 0;
  let phase = 0;
  const take = (low: number, high: number): void => {
    smallest = Math.min(smallest, low);
    largest = Math.max(largest, high);
  };
  for (let j = 0; 4 * j < d.length; j++) {
    const at = 4 * j;
    const x = d[at];
    const y = d[at + 1];
    const modulus = Math.hypot(x, y);
    if (d[at + 2] === 0 && d[at + 3] === 0) {
      re -= Math.log(modulus);
      phase -= Math.atan2(y, x);
      take(1 / modulus, 1 / modulus);
      continue;
    }
    // det D⁻¹ of the pair, by its entry b: b² (ac/b² − 1).
    const s = Math.hypot(d[at + 2], d[at + 3]);
    const [br, bi] = [d[at + 2] / s, d[at + 3] / s];
    const [ar, ai] = [x / s, y / s];
    const [cr, ci] = [d[at + 4] / s, d[at + 5] / s];
    const dx = ar * cr - ai * ci - (br * br - bi * bi);
    const dy = ar * ci + ai * cr - 2 * br * bi;
    const pair = Math.hypot(dx, dy);
    re -= Math.log(pair) + 2 * Math.log(s);
    phase -= Math.atan2(dy, dx);
    // The larger entry of D⁻¹ is about 1/(smaller singular value of D), and det D the product of both.
    const big = s * Math.max(1, Math.hypot(ar, ai), Math.hypot(cr, ci));
    take(1 / big, big / (pair * s * s));
    j++;
  }
  let nonzeros = 0;
  let flops = 0;
  for (let f = 0; f < count; f++) {
    const np = pivotStarts[f + 1] - pivotStarts[f];
    const nb = edgeStarts[f + 1] - edgeStarts[f];
    nonzeros += (np * (np + 1)) / 2 + np * nb;
    flops += 8 * multiplyAdds(np, nb);
  }
  return {
    report: {
      fronts: count,
      nonzeros,
      flops,
      perturbedPivots,
      smallestPivot: d.length === 0 ? 1 : smallest,
      largestPivot: d.length === 0 ? 1 : largest,
    },
    logDeterminant: { re, im: Math.atan2(Math.sin(phase), Math.cos(phase)) },
  };
}

/** Σ over the pivots of r(r+1)/2 + r, r the rows below: multiply-adds of the update and scalings of the column. */
export function multiplyAdds(pivots: number, boundary: number): number {
  // Closed form of Σ (r² + 3r)/2 over r = boundary … boundary + pivots − 1.
  const sum = (n: number): number => (n * (n + 1) * (2 * n + 1)) / 6 + (3 * n * (n + 1)) / 2;
  return (sum(boundary + pivots - 1) - sum(boundary - 1)) / 2;
}
