// What does a helping thread do for a factorization?

import { workFront, type Arena, type FrontTables, type Results } from './front-work.ts';
import type { SharedKernels } from './kernels/wasm-kernels.ts';

/** Tables of an analysis, sent once, and the jobs that refer to them. */
export type WorkerMessage =
  | { readonly kind: 'tables'; readonly id: number; readonly tables: FrontTables }
  | { readonly kind: 'forget'; readonly id: number }
  | ({ readonly kind: 'job'; readonly id: number } & WorkerJob);

/** Whole subtrees to eliminate, then help with the fronts above them. */
export interface WorkerJob {
  /** Numbers of fronts, increasing. */
  readonly fronts: Int32Array;
  readonly arena: Arena;
  readonly results: Results;
  /** Element matrices come through a ring of slots in the working memory. */
  readonly ring: { readonly at: number; readonly slots: number; readonly slotNumbers: number };
  /** Words as in SIGNALS. */
  readonly signals: Int32Array;
  /** Numbers that the working memory has. */
  readonly numbers: number;
  readonly epoch: number;
}

/** Elements written and used; 1 when the subtrees are done, 2 when they failed; perturbed pivots; 1 to give up; 1 when idle. */
export const SIGNALS = { filled: 0, used: 1, done: 2, perturbed: 3, abort: 4, idle: 5, words: 6 } as const;

/** Eliminates the fronts of a job, which are whole subtrees; on the stack of the arena. */
export function runJob(tables: FrontTables, shared: SharedKernels, job: WorkerJob): void {
  const { fronts, arena, results, ring, signals } = job;
  const { kernels } = shared;
  let taken = 0;
  const takeElement = (): number => {
    // The slot before is free again.
    Atomics.store(signals, SIGNALS.used, taken);
    while (Atomics.load(signals, SIGNALS.filled) <= taken) {
      if (Atomics.load(signals, SIGNALS.abort) !== 0) throw new Error('given up');
      Atomics.wait(signals, SIGNALS.filled, taken, 50);
    }
    return ring.at + (taken++ % ring.slots) * ring.slotNumbers;
  };
  let outcome = 1;
  try {
    kernels.reserve(job.numbers);
    let top = arena.stack;
    let perturbed = 0;
    for (const f of fronts) {
      const first = tables.childStarts[f];
      const to = first < tables.childStarts[f + 1] ? results.contributionAt[tables.children[first]] : top;
      const replaced = workFront(tables, kernels, arena, results, f, top, to, takeElement);
      if (replaced < 0) {
        outcome = 2;
        break;
      }
      perturbed += replaced;
      const nb = tables.boundaryStarts[f + 1] - tables.boundaryStarts[f];
      top = to + nb * (nb + 1);
    }
    Atomics.store(signals, SIGNALS.perturbed, perturbed);
  } catch {
    outcome = 2;
  }
  Atomics.store(signals, SIGNALS.done, outcome);
  Atomics.notify(signals, SIGNALS.done);
  shared.help(job.epoch);
  Atomics.store(signals, SIGNALS.idle, 1);
  Atomics.notify(signals, SIGNALS.idle);
}
