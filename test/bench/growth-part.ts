// How do the entries of L and the operations grow with the number of unknowns?

import { dissect } from '../../src/sparse/dissection.ts';
import { planFronts } from '../../src/sparse/fronts.ts';
import { findIncidence } from '../../src/sparse/incidence.ts';
import { layeredSquare } from './layered-square.ts';
import { exponent, print, timed } from './timing.ts';

/** From the plan alone: the numbers of a healthy factorization are those. */
export function measureGrowth(): void {
  const n: number[] = [];
  const entries: number[] = [];
  const flops: number[] = [];
  const seconds: number[] = [];
  for (const cells of [60, 105, 211, 333]) {
    const { pattern } = layeredSquare(cells, 3);
    const planned = timed(() => {
      const incidence = findIncidence(pattern);
      return planFronts(pattern, incidence, dissect(pattern, incidence));
    });
    const { count, pivotStarts, boundaryStarts } = planned.result;
    let sum = 0;
    for (let f = 0; f < count; f++) {
      const np = pivotStarts[f + 1] - pivotStarts[f];
      sum += (np * (np + 1)) / 2 + np * (boundaryStarts[f + 1] - boundaryStarts[f]);
    }
    n.push(pattern.unknowns);
    entries.push(sum);
    flops.push(planned.result.flops);
    seconds.push(planned.seconds);
    print(`  n = ${pattern.unknowns}: ${(sum / 1e6).toFixed(2)} M in L, ${(planned.result.flops / 1e9).toFixed(2)} Gflop, analysis ${planned.seconds.toFixed(2)} s`); // prettier-ignore
  }
  print(
    `  exponents in n over a factor of ${(n[n.length - 1] / n[0]).toFixed(0)}: operations ${exponent(n, flops).toFixed(3)}, ` +
      `entries of L ${exponent(n, entries).toFixed(3)}, analysis ${exponent(n, seconds).toFixed(2)}`,
  );
}
