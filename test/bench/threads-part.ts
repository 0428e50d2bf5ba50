// How much sooner are two threads done than one?

import { analyse } from '../../src/sparse/analyse.ts';
import { loadWasmKernels } from '../../src/sparse/kernels/wasm-kernels.ts';
import { startThreads, stopThreads } from '../../src/sparse/threads.ts';
import { layeredSquare } from './layered-square.ts';
import { median, print, timed } from './timing.ts';

/** One and two threads take turns on one matrix; seconds on the wall, which mean something on an idle machine only. */
export async function timeThreads(cells: number, order: number, rounds: number): Promise<void> {
  const kernels = loadWasmKernels();
  if ((await startThreads(2)) < 2 || kernels === undefined) {
    print('  no shared memory or no compiled kernels here');
    return;
  }
  const matrix = layeredSquare(cells, order);
  const alone = analyse(matrix.pattern, { kernels });
  const together = analyse(matrix.pattern);
  const one: number[] = [];
  const two: number[] = [];
  for (let round = -2; round < rounds; round++) {
    for (const [analysis, times] of [
      [alone, one],
      [together, two],
    ] as const) {
      const { result, wall } = timed(() => analysis.factorize(matrix.fill));
      result.release();
      if (round >= 0) times.push(wall);
    }
  }
  await stopThreads();
  const least = Math.min(...two) / Math.min(...one);
  print(
    `  n = ${matrix.pattern.unknowns}: one ${median(one).toFixed(3)} s, two ${median(two).toFixed(3)} s on the wall; ` +
      `two/one ${(median(two) / median(one)).toFixed(2)} by medians, ${least.toFixed(2)} by the least`,
  );
}
