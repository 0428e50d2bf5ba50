// How long does the main job take on demo devices, on what, and how does it grow?

import { execFileSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { STAGES, type Stage, timeStages } from './stages.ts';
import { exponent, print } from './timing.ts';

const DEVICES = ['dented-disk', 'hexagon-laser', 'random-posts'];
const DIGITS = [4, 6, 8];

interface Job {
  readonly unknowns: number;
  readonly order: number;
  readonly found: number;
  readonly seconds: number;
  readonly wall: number;
  readonly stages: Record<Stage, number>;
}

/**
 * Thresholds of three devices, each job in a process of its own. `before`: a working copy of another version, which
 * takes turns with this one.
 */
export function timeJobs(devices: readonly string[], before: string | undefined): void {
  const here = fileURLToPath(new URL('../../', import.meta.url));
  for (const device of DEVICES.filter((d) => devices.length === 0 || devices.includes(d))) {
    const jobs: Job[] = [];
    for (const digits of DIGITS) {
      const job = runAlone(here, device, digits);
      jobs.push(job);
      const share = (job.stages.factorization + job.stages.solves) / job.seconds;
      print(
        `  ${device}, ${digits} digits: ${job.found} thresholds, up to order ${job.order}, ${job.unknowns} unknowns; ` +
          `${job.seconds.toFixed(1)} s of processors (${job.wall.toFixed(1)} s), factorization and solves ` +
          `${(100 * share).toFixed(0)} %`,
      );
      print(`    ${STAGES.map((s) => `${s} ${job.stages[s].toFixed(2)}`).join(', ')} s`);
      if (before !== undefined) {
        const old = runAlone(resolve(before), device, digits);
        print(`    before ${old.seconds.toFixed(1)} s; before/now ${(old.seconds / job.seconds).toFixed(2)}`);
      }
    }
    const n = jobs.map((j) => j.unknowns);
    const growth = STAGES.map((s) => `${s} ${exponent(n, jobs.map((j) => j.stages[s])).toFixed(1)}`); // prettier-ignore
    print(`    exponents in unknowns: all ${exponent(n, jobs.map((j) => j.seconds)).toFixed(2)}; ${growth.join(', ')}`); // prettier-ignore
  }
}

function runAlone(root: string, device: string, digits: number): Job {
  const script = fileURLToPath(new URL('./sparse.ts', import.meta.url));
  const words = [...process.execArgv, script, 'job-alone', root, device, String(digits)];
  return JSON.parse(execFileSync(process.execPath, words).toString()) as Job;
}

/** What the process of its own does. */
export async function jobAlone(root: string, device: string, digits: number): Promise<void> {
  const source = pathToFileURL(join(root, 'src/index.ts')).href;
  const { findThresholds, readDevice } = (await import(source)) as typeof import('../../src/index.ts');
  const file = fileURLToPath(new URL(`../../meshes-demo/${device}.yaml`, import.meta.url));
  const model = readDevice(readFileSync(file, 'utf8'), file);
  const clock = performance.now();
  const { result, seconds, stages } = timeStages(() => findThresholds(model, { digits }));
  const wall = (performance.now() - clock) / 1000;
  const order = result.crossings.reduce((top, c) => Math.max(top, c.order), 1);
  const { unknowns } = result.prepared.operator(order).space;
  print(JSON.stringify({ unknowns, order, found: result.crossings.length, seconds, wall, stages } satisfies Job));
}
