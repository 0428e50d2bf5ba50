// How much memory does a million unknowns take on two threads?

import { execFileSync } from 'node:child_process';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { analyse } from '../../src/sparse/analyse.ts';
import { solveRefined } from '../../src/sparse/refine.ts';
import { startThreads, stopThreads } from '../../src/sparse/threads.ts';
import type { Peer } from './factor-part.ts';
import { layeredSquare } from './layered-square.ts';
import { writeMatrixFile } from './matrix-file.ts';
import { print, timed } from './timing.ts';

const CELLS = 333;

/** Each solver in a process of its own, which reports its peak. */
export function measureMillion(peers: readonly Peer[], folder: string): void {
  const script = fileURLToPath(new URL('./sparse.ts', import.meta.url));
  const said = execFileSync(process.execPath, [...process.execArgv, script, 'million-alone']).toString();
  process.stdout.write(said);
  const own = Number(/peak (\d+) MB/.exec(said)?.[1]);
  const file = join(folder, 'million.bin');
  const mumps = peers.filter((peer) => peer.name.startsWith('mumps'));
  if (mumps.length > 0) writeMatrixFile(file, layeredSquare(CELLS, 3));
  for (const peer of mumps) {
    const peak = (peer.time(file, 1).at(-1)?.peak ?? NaN) / 1024;
    print(`  ${peer.name}: peak ${peak.toFixed(0)} MB; here/it ${(own / peak).toFixed(2)}`);
  }
}

/** What the process of its own does. */
export async function factorMillion(): Promise<void> {
  const threads = await startThreads(2);
  const matrix = layeredSquare(CELLS, 3);
  const n = matrix.pattern.unknowns;
  const before = process.resourceUsage().maxRSS / 1024;
  const analysis = analyse(matrix.pattern);
  const { result: factorization, wall, seconds } = timed(() => analysis.factorize(matrix.fill));
  const b = Float64Array.from({ length: 2 * n }, (_, i) => Math.sin(i * i));
  const { residual } = solveRefined(factorization, matrix.multiplyInto, b, 1);
  const peak = process.resourceUsage().maxRSS / 1024;
  await stopThreads();
  print(
    `  n = ${n}, ${threads} threads: first factorization ${wall.toFixed(1)} s on the wall (${seconds.toFixed(1)} s of ` +
      `processors), residual after refinement ${residual[0].toExponential(1)}`,
  );
  print(`  here: peak ${peak.toFixed(0)} MB, of which the matrix and the program ${before.toFixed(0)} MB`);
}
