// How fast is the direct solver, next to general-purpose native ones?
//
//   npx tsx test/bench/sparse.ts [cells,order …] [--rounds N] [--no-peers]        default: 105,3 211,3
//
// Every round times each solver once cold (first factorization of a process, or of new memory) and once warm, one
// solver after the other; printed are medians of CPU seconds and ratios to the solver here. Peers are timed where
// their libraries are installed (Debian: libmumps-seq-dev libsuitesparse-dev libopenblas0-serial python3-scipy, cc).

import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { analyse } from '../../src/sparse/analyse.ts';
import { solveRefined } from '../../src/sparse/refine.ts';
import { layeredSquare } from './layered-square.ts';
import { writeMatrixFile } from './matrix-file.ts';

interface Timing {
  readonly what: string;
  readonly factor: number;
  readonly flops?: number;
  readonly entries?: number;
  readonly peak?: number;
}

const words = process.argv.slice(2);
const rounds = Number(words[words.indexOf('--rounds') + 1] || 5) || 5;
const withPeers = !words.includes('--no-peers');
const sizes = words.filter((w) => /^\d+,\d+$/.test(w)).map((w) => w.split(',').map(Number));
const folder = mkdtempSync(join(tmpdir(), 'wavewell-bench-'));
const peers = withPeers ? buildPeers() : [];
const totals: { n: number; flops: number; nonzeros: number }[] = [];

for (const [cells, order] of sizes.length > 0 ? sizes : [[105, 3], [211, 3]]) timeMatrix(cells, order); // prettier-ignore
for (let i = 1; i < totals.length; i++) {
  const [a, b] = [totals[i - 1], totals[i]];
  if (b.n === a.n) continue;
  const exponent = (x: number, y: number): string => (Math.log(y / x) / Math.log(b.n / a.n)).toFixed(3);
  print(`growth ${a.n} → ${b.n}: flops n^${exponent(a.flops, b.flops)}, nnz(L) n^${exponent(a.nonzeros, b.nonzeros)}`);
}
rmSync(folder, { recursive: true });

function timeMatrix(cells: number, order: number): void {
  const matrix = layeredSquare(cells, order);
  const n = matrix.pattern.unknowns;
  const start = cpu();
  const analysis = analyse(matrix.pattern);
  const analysed = cpu() - start;
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
  for (const [name, values] of warm) {
    const { flops, entries, peak } = last.get(name) as Timing;
    print(
      `  ${name.padEnd(14)} warm ${median(values).toFixed(3)} s  cold ${median(cold.get(name) ?? []).toFixed(3)} s` +
        `  here/it ${(here / median(values)).toFixed(2)}` +
        (entries === undefined ? '' : `  nnz ${(entries / 1e6).toFixed(2)} M`) +
        (flops === undefined ? '' : `  ${(flops / 1e9).toFixed(2)} Gflop`) +
        (peak === undefined ? '' : `  peak ${(peak / 1024).toFixed(0)} MB`),
    );
  }

  const factorization = analysis.factorize(matrix.fill);
  totals.push({ n, flops: factorization.report.flops, nonzeros: factorization.report.nonzeros });
  const b = Float64Array.from({ length: 2 * n }, (_, i) => Math.sin(i * i));
  const plain = solveRefined(factorization, matrix.multiplyInto, b, 1, { steps: 0 });
  const refined = solveRefined(factorization, matrix.multiplyInto, b, 1);
  print(
    `  residual ‖b − Ax‖/‖b‖ ${plain.residual[0].toExponential(1)}, after ${refined.steps} corrections ` +
      `${refined.residual[0].toExponential(1)}; backward error ${refined.backwardError[0].toExponential(1)}`,
  );
  const block = Float64Array.from({ length: 128 * n }, (_, i) => (i * 0.618) % 1);
  const out = new Float64Array(128 * n);
  const single: number[] = [];
  const many: number[] = [];
  for (let i = 0; i < rounds + 2; i++) {
    single.push(timed(() => factorization.solveInto(out, b, 1)).seconds);
    many.push(timed(() => factorization.solveInto(out, block, 64)).seconds);
  }
  const [one, all] = [median(single.slice(2)), median(many.slice(2))];
  print(`  solve 1: ${one.toFixed(4)} s, 64: ${all.toFixed(3)} s = ${(all / one).toFixed(1)} single ones`);
  print(`  peak memory of this process ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`);
}

/** The peers that can be built or called here. */
function buildPeers(): { name: string; time: (file: string) => Timing[] }[] {
  const source = fileURLToPath(new URL('./peers/', import.meta.url));
  const binary = join(folder, 'peers');
  const list: { name: string; time: (file: string) => Timing[] }[] = [];
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
      list.push({ name, time: (file) => lines(execFileSync(binary, [file, '2', name])) });
    }
  } else print('peers.c does not build here: native solvers are left out');
  // Debian's SciPy, whatever other Python stands in front of it.
  const python = ['/usr/bin/python3', 'python3'].find((p) => spawnSync(p, ['-c', 'import scipy']).status === 0);
  if (python !== undefined) {
    list.push({
      name: 'superlu',
      time: (file) => lines(execFileSync(python, [join(source, 'superlu.py'), file, '2'])),
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

function timed<T>(work: () => T): { result: T; seconds: number } {
  const start = cpu();
  const result = work();
  return { result, seconds: cpu() - start };
}

function cpu(): number {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
}

function note(into: Map<string, number[]>, name: string, seconds: number): void {
  into.set(name, [...(into.get(name) ?? []), seconds]);
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

function print(line: string): void {
  process.stdout.write(`${line}\n`);
}
