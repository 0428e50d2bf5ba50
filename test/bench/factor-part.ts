// How long does a factorization take, next to general-purpose native solvers?

import { execFileSync, spawnSync } from 'node:child_process';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { analyse } from '../../src/sparse/analyse.ts';
import { solveRefined } from '../../src/sparse/refine.ts';
import { layeredSquare } from './layered-square.ts';
import { writeMatrixFile } from './matrix-file.ts';
import { median, print, timed } from './timing.ts';

export interface Timing {
  readonly what: string;
  readonly factor: number;
  readonly flops?: number;
  readonly entries?: number;
  readonly peak?: number;
}

/** A solver of somebody else: `time` factors the matrix of a file twice in one process, or `times` times. */
export interface Peer {
  readonly name: string;
  time(file: string, times?: number): Timing[];
}

/**
 * Every round times each solver once cold (first factorization of a process, or of new memory) and once warm, one solver
 * after the other; printed are medians of processor seconds and ratios.
 */
export function timeFactorization(
  cells: number,
  order: number,
  rounds: number,
  peers: readonly Peer[],
  folder: string,
): void {
  const matrix = layeredSquare(cells, order);
  const n = matrix.pattern.unknowns;
  const { result: analysis, seconds: analysed } = timed(() => analyse(matrix.pattern));
  print(`\nn = ${n}, order ${order}, ${2 * cells * cells} elements; analysis ${analysed.toFixed(2)} s`);

  const file = join(folder, 'matrix.bin');
  if (peers.length > 0) writeMatrixFile(file, matrix);
  const cold = new Map<string, number[]>();
  const warm = new Map<string, number[]>();
  const last = new Map<string, Timing>();
  for (let i = 0; i < 3; i++) analysis.factorize(matrix.fill).release(); // the compilers of the engine settle
  for (let round = 0; round < rounds; round++) {
    const unused = analyse(matrix.pattern); // its own panels: memory not touched before
    const fresh = timed(() => unused.factorize(matrix.fill));
    fresh.result.release();
    // What the analysis above left to collect must not count here.
    for (let i = 0; i < 2; i++) analysis.factorize(matrix.fill).release();
    const again = timed(() => analysis.factorize(matrix.fill));
    note(cold, 'here', fresh.seconds);
    note(warm, 'here', again.seconds);
    const { flops, nonzeros } = again.result.report;
    last.set('here', { what: 'here', factor: again.seconds, flops, entries: nonzeros });
    again.result.release();
    for (const peer of peers) {
      const [first, second] = peer.time(file);
      if (second === undefined) continue;
      note(cold, peer.name, first.factor);
      note(warm, peer.name, second.factor);
      last.set(peer.name, second);
    }
  }
  const here = median(warm.get('here') ?? []);
  const own = last.get('here')?.flops ?? NaN;
  for (const [name, values] of warm) {
    const { flops, entries, peak } = last.get(name) as Timing;
    print(
      `  ${name.padEnd(14)} warm ${median(values).toFixed(3)} s  cold ${median(cold.get(name) ?? []).toFixed(3)} s` +
        `  here/it ${(here / median(values)).toFixed(2)}` +
        (entries === undefined ? '' : `  nnz ${(entries / 1e6).toFixed(2)} M`) +
        (flops === undefined ? '' : `  ${(flops / 1e9).toFixed(2)} Gflop, here/it ${(own / flops).toFixed(2)}`) +
        (peak === undefined ? '' : `  peak ${(peak / 1024).toFixed(0)} MB`),
    );
  }

  const factorization = analysis.factorize(matrix.fill);
  const b = Float64Array.from({ length: 2 * n }, (_, i) => Math.sin(i * i));
  const plain = solveRefined(factorization, matrix.multiplyInto, b, 1, { steps: 0 });
  const refined = solveRefined(factorization, matrix.multiplyInto, b, 1);
  print(
    `  residual ‖b − Ax‖/‖b‖ ${plain.residual[0].toExponential(1)}, after ${refined.steps} corrections ` +
      `${refined.residual[0].toExponential(1)}; backward error ${refined.backwardError[0].toExponential(1)}`,
  );
}

/** The peers that can be built or called here. */
export function buildPeers(folder: string): Peer[] {
  const source = fileURLToPath(new URL('./peers/', import.meta.url));
  const binary = join(folder, 'peers');
  const list: Peer[] = [];
  const libraries = ['-lzmumps_seq', '-lumfpack', '-lcholmod', '-lm'];
  const built = spawnSync('cc', [
    '-O2',
    join(source, 'peers.c'),
    '-o',
    binary,
    '-I/usr/include/suitesparse',
    ...libraries,
  ]);
  if (built.status === 0) {
    for (const name of ['mumps-scotch', 'mumps-metis', 'umfpack']) {
      list.push({ name, time: (file, times = 2) => lines(execFileSync(binary, [file, String(times), name])) });
    }
  } else print('peers.c does not build here: native solvers are left out');
  // Debian's SciPy, whatever other Python stands in front of it.
  const python = ['/usr/bin/python3', 'python3'].find((p) => spawnSync(p, ['-c', 'import scipy']).status === 0);
  if (python !== undefined) {
    list.push({
      name: 'superlu',
      time: (file, times = 2) => lines(execFileSync(python, [join(source, 'superlu.py'), file, String(times)])),
    });
  } else print('no SciPy here: SuperLU is left out');
  return list;
}

function lines(text: Buffer): Timing[] {
  return text
    .toString()
    .trim()
    .split('\n')
    .map((line) => JSON.parse(line) as Timing);
}

function note(into: Map<string, number[]>, name: string, seconds: number): void {
  into.set(name, [...(into.get(name) ?? []), seconds]);
}
