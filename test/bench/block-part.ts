// What does a block of right-hand sides cost, in single solves?

import { analyse } from '../../src/sparse/analyse.ts';
import { solveRefined } from '../../src/sparse/refine.ts';
import { layeredSquare } from './layered-square.ts';
import { median, print, timed } from './timing.ts';

const COLUMNS = 64;

/** Singles and blocks take turns; medians of processor seconds, without refinement and with one correction. */
export function timeBlocks(cells: number, order: number, rounds: number): void {
  const matrix = layeredSquare(cells, order);
  const n = matrix.pattern.unknowns;
  const factorization = analyse(matrix.pattern).factorize(matrix.fill);
  const b = Float64Array.from({ length: 2 * n * COLUMNS }, (_, i) => (i * 0.618) % 1);
  const out = new Float64Array(b.length);
  const widths = [1, 3, 8, COLUMNS];
  const plain = widths.map((): number[] => []);
  const refined = widths.map((): number[] => []);
  for (let round = -2; round < rounds; round++) {
    widths.forEach((columns, i) => {
      const { seconds } = timed(() => factorization.solveInto(out, b, columns));
      if (round >= 0) plain[i].push(seconds);
    });
  }
  // One correction each, so that both do the same work.
  for (let round = -1; round < Math.ceil(rounds / 2); round++) {
    for (const i of [0, widths.length - 1]) {
      const choice = { steps: 1, tolerance: 0 };
      const { seconds } = timed(() => solveRefined(factorization, matrix.multiplyInto, b, widths[i], choice));
      if (round >= 0) refined[i].push(seconds);
    }
  }
  const [one, , , all] = plain.map(median);
  const work = (16 * COLUMNS * factorization.report.nonzeros) / 1e9;
  print(`  n = ${n}: single ${one.toFixed(4)} s, ${widths.map((w, i) => `${w}: ${(median(plain[i]) / one).toFixed(1)}`).join(', ')} single ones`); // prettier-ignore
  print(
    `    ${COLUMNS} columns ${all.toFixed(3)} s, ${(work / all).toFixed(1)} GFLOP/s; least ratio of a round ` +
      `${Math.min(...plain[3].map((t, i) => t / plain[0][i])).toFixed(1)}; refined ` +
      `${(median(refined[3]) / median(refined[0])).toFixed(1)} single refined ones (products in plain loops)`,
  );
}
