// How fast are the direct solver and the jobs it serves?
//
//   npm run bench -- [parts …] [cells,order …] [device …] [--rounds N] [--no-peers] [--before FOLDER]
//
//   parts (all if none is named), default sizes 105,3 211,3 (1e5 and 4e5 unknowns):
//     factor   factorization, cold and warm, next to native solvers; residuals
//     block    64 right-hand sides against single ones
//     threads  two threads against one, on the wall
//     growth   operations and entries of L from 3e4 to 1e6 unknowns
//     million  peak memory at 1e6 unknowns on two threads
//     jobs     thresholds of demo devices by stage; --before: next to another working copy with its kernels built
//
// Native solvers are timed where their libraries are installed (Debian: libmumps-seq-dev libsuitesparse-dev
// libopenblas0-serial python3-scipy, cc). Everything printed as a ratio was measured in turns within this run.

import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { timeBlocks } from './block-part.ts';
import { buildPeers, timeFactorization } from './factor-part.ts';
import { measureGrowth } from './growth-part.ts';
import { jobAlone, timeJobs } from './jobs-part.ts';
import { factorMillion, measureMillion } from './million-part.ts';
import { timeThreads } from './threads-part.ts';
import { machineLoad, print } from './timing.ts';

const PARTS = ['factor', 'block', 'threads', 'growth', 'million', 'jobs'] as const;

void main(process.argv.slice(2));

async function main(words: string[]): Promise<void> {
  if (words[0] === 'million-alone') return factorMillion();
  if (words[0] === 'job-alone') return jobAlone(words[1], words[2], Number(words[3]));
  const after = (name: string): string | undefined =>
    words.includes(name) ? words[words.indexOf(name) + 1] : undefined;
  const rounds = Number(after('--rounds') ?? 5);
  const before = after('--before');
  const named = PARTS.filter((part) => words.includes(part));
  const parts = named.length > 0 ? named : PARTS;
  const given = words.filter((w) => /^\d+,\d+$/.test(w)).map((w) => w.split(',').map(Number));
  const sizes = given.length > 0 ? given : [[105, 3], [211, 3]]; // prettier-ignore
  const devices = words.filter((w) => /^[a-z]+-[a-z]+$/.test(w));
  const folder = mkdtempSync(join(tmpdir(), 'wavewell-bench-'));
  const wanted = parts.includes('factor') || parts.includes('million');
  const peers = words.includes('--no-peers') || !wanted ? [] : buildPeers(folder);
  try {
    for (const part of parts) {
      print(`\n${part} (${machineLoad()})`);
      if (part === 'factor') for (const [cells, order] of sizes) timeFactorization(cells, order, rounds, peers, folder);
      if (part === 'block') for (const [cells, order] of sizes) timeBlocks(cells, order, rounds);
      if (part === 'threads') for (const [cells, order] of sizes) await timeThreads(cells, order, rounds);
      if (part === 'growth') measureGrowth();
      if (part === 'million') measureMillion(peers, folder);
      if (part === 'jobs') timeJobs(devices, before);
    }
  } finally {
    rmSync(folder, { recursive: true });
  }
}
