// How do several threads factor one matrix?

import { Worker } from 'node:worker_threads';
import type { Factors } from './factors.ts';
import { multiplyAdds } from './factors.ts';
import { layArena, workFront, type Arena, type FrontTables, type Results } from './front-work.ts';
import type { Fronts } from './fronts.ts';
import { loadSharedKernels, MOST_THREADS, type SharedKernels } from './kernels/wasm-kernels.ts';
import type { MemoryPlan } from './memory-plan.ts';
import type { ElementFill, ElementPattern } from './pattern.ts';
import type { SparePanels } from './spare-panels.ts';
import { SIGNALS, type WorkerJob, type WorkerMessage } from './worker-job.ts';
import type { WorkerStart } from './worker.ts';

/** Threads that were started once and wait for matrices. */
export interface ThreadPool {
  readonly threads: number;
  readonly shared: SharedKernels;
  readonly workers: readonly Worker[];
}

let pool: ThreadPool | undefined;
let starting: Promise<number> | undefined;

/**
 * Starts threads for all factorizations to come, once; later calls return the same number. The numbers of a
 * factorization do not depend on it. Returns how many threads there are: 1 where shared memory is not allowed or a
 * thread cannot start. The threads do not keep the process alive.
 *
 * @param count threads in all, the caller's included
 */
export function startThreads(count: number): Promise<number> {
  if (!Number.isInteger(count) || count < 1 || count > MOST_THREADS) {
    throw new RangeError(`threads is ${count}; expected a whole number from 1 to ${MOST_THREADS}`);
  }
  starting ??= count === 1 ? undefined : start(count);
  return starting ?? Promise.resolve(1);
}

/** Ends the threads; factorizations go on with one. */
export async function stopThreads(): Promise<void> {
  const workers = pool?.workers ?? [];
  pool = undefined;
  starting = undefined;
  await Promise.all(workers.map((w) => w.terminate()));
}

/** The threads that are ready, if any. */
export const findThreads = (): ThreadPool | undefined => pool;

async function start(count: number): Promise<number> {
  const shared = loadSharedKernels();
  if (shared === undefined) return 1;
  const workers: Worker[] = [];
  try {
    for (let thread = 1; thread < count; thread++) {
      const workerData: WorkerStart = { module: shared.module, memory: shared.memory, thread };
      workers.push(startWorker(workerData));
    }
    await Promise.all(
      workers.map(
        (worker) =>
          new Promise<void>((resolve, reject) => {
            worker.once('message', resolve); // 'ready'
            worker.once('error', reject);
          }),
      ),
    );
  } catch {
    await Promise.all(workers.map((w) => w.terminate()));
    return 1;
  }
  for (const worker of workers) {
    worker.on('error', () => (pool = undefined));
    worker.unref();
  }
  pool = { threads: count, shared, workers };
  return count;
}

/** Compiled sources run as they are; uncompiled ones need their loader, which a thread does not inherit. */
function startWorker(workerData: WorkerStart): Worker {
  if (!import.meta.url.endsWith('.ts')) return new Worker(new URL('./worker.js', import.meta.url), { workerData });
  const url = new URL('./worker.ts', import.meta.url).href;
  const code = `import('tsx/esm/api').then(({ register }) => { register(); return import('${url}'); })`;
  return new Worker(code, { workerData, eval: true, execArgv: [] });
}

/** Which fronts each thread eliminates on its own, and which all do together at the end. */
export interface WorkSplit {
  /** Per thread the fronts of whole subtrees, increasing. */
  readonly own: readonly Int32Array[];
  readonly together: Int32Array;
}

/** Smaller problems are done before the others have woken up, in real operations. */
const WORTH_SHARING = 2e8;
/** Numbers of a thread's ring of element matrices, about. */
const RING = 1 << 20;

/**
 * Factors with all threads of the pool: subtrees apart, then the fronts above them together. `fill` runs in the calling
 * thread only, which passes the element matrices on. Returns undefined where the matrix needs rows passed between
 * fronts beyond the plan (one thread does that), or the problem is too small.
 */
export function factorTogether(
  pattern: ElementPattern,
  fronts: Fronts,
  plan: MemoryPlan,
  team: ThreadPool,
  session: TeamSession,
  fill: ElementFill,
  spare: SparePanels,
): Factors | undefined {
  if (fronts.flops < WORTH_SHARING) return undefined;
  const { shared, threads, workers } = team;
  const { kernels } = shared;
  const { count, boundaryStarts, pivotStarts } = fronts;
  const { tables, split } = session.open(pattern, fronts, plan, team);

  // Memory: an arena with its stack for every thread, then the rings.
  const slotNumbers = 2 * plan.largestElement * plan.largestElement + 2;
  const arenas: Arena[] = [];
  let free = kernels.base;
  for (let t = 0; t < threads; t++) {
    const arena = layArena(free, plan.largestFront, plan.largestElement);
    arenas.push(arena);
    free = arena.stack + stackNumbers(tables, split.own[t], t === 0 ? split.together : NONE) + 64;
  }
  const jobs: WorkerJob[] = [];
  const queues = split.own.map((own) => elementsOf(tables, own));
  const slots = Math.max(8, Math.ceil(RING / slotNumbers));
  const results: Results = {
    panels: spare.take(true) ?? sharedFloats(plan.panelStarts[count]),
    inversePivots: sharedFloats(4 * pattern.unknowns),
    order: new Int32Array(new SharedArrayBuffer(4 * pattern.unknowns)),
    largestDiagonal: sharedFloats(count),
    contributionAt: sharedFloats(count),
  };
  const rings = workers.map(() => (free += slots * slotNumbers) - slots * slotNumbers);
  kernels.reserve(free + 64);
  const epoch = Atomics.load(kernels.integers, shared.epochAt);
  workers.forEach((worker, w) => {
    const job: WorkerJob = {
      fronts: split.own[w + 1],
      arena: arenas[w + 1],
      results,
      ring: { at: rings[w], slots, slotNumbers },
      signals: new Int32Array(new SharedArrayBuffer(4 * SIGNALS.words)),
      numbers: free + 64,
      epoch,
    };
    jobs.push(job);
    worker.postMessage({ kind: 'job', id: session.id, ...job } satisfies WorkerMessage);
  });

  const m = kernels.numbers;
  const written = jobs.map(() => 0);
  const elementView = m.subarray(arenas[0].element, arenas[0].element + slotNumbers - 2);
  let failed = false;
  let perturbedPivots = 0;
  try {
    const takeElement = (e: number): number => {
      fill(e, elementView);
      return arenas[0].element;
    };
    let top = arenas[0].stack;
    for (const f of split.own[0]) {
      passElements();
      const first = tables.childStarts[f];
      const to = first < tables.childStarts[f + 1] ? results.contributionAt[tables.children[first]] : top;
      const replaced = workFront(tables, kernels, arenas[0], results, f, top, to, takeElement);
      failed ||= replaced < 0;
      if (failed) break;
      perturbedPivots += replaced;
      const nb = boundaryStarts[f + 1] - boundaryStarts[f];
      top = to + nb * (nb + 1);
    }
    while (!failed && passElements()) failed = jobs.some(({ signals }) => Atomics.load(signals, SIGNALS.done) === 2);
    for (const { signals } of jobs) {
      while (!failed && Atomics.load(signals, SIGNALS.done) === 0) Atomics.wait(signals, SIGNALS.done, 0, 100);
      failed ||= Atomics.load(signals, SIGNALS.done) === 2;
      perturbedPivots += Atomics.load(signals, SIGNALS.perturbed);
    }
    shared.setSharing(true);
    // Contributions of the subtrees lie in several stacks: nothing is freed any more.
    for (const f of split.together) {
      if (failed) break;
      const replaced = workFront(tables, kernels, arenas[0], results, f, top, top, takeElement);
      failed ||= replaced < 0;
      perturbedPivots += replaced;
      const nb = boundaryStarts[f + 1] - boundaryStarts[f];
      top += nb * (nb + 1);
    }
  } finally {
    shared.setSharing(false);
    for (const { signals } of jobs) Atomics.store(signals, SIGNALS.abort, 1);
    shared.stopHelp(true);
    for (const { signals } of jobs) {
      while (Atomics.load(signals, SIGNALS.idle) === 0) Atomics.wait(signals, SIGNALS.idle, 0, 100);
    }
    shared.stopHelp(false);
  }
  if (failed) {
    spare.give(results.panels);
    return undefined;
  }
  return {
    count,
    placeOf: fronts.placeOf,
    pivotStarts,
    order: results.order,
    edgeStarts: boundaryStarts,
    edges: fronts.boundary,
    panels: results.panels,
    panelStarts: plan.panelStarts,
    inversePivots: results.inversePivots,
    largestFront: plan.largestFront,
    perturbedPivots,
  };

  /** Fills the rings as far as there is room; whether elements are left. */
  function passElements(): boolean {
    let left = false;
    jobs.forEach(({ ring, signals }, w) => {
      const queue = queues[w + 1];
      const before = written[w];
      const end = Math.min(queue.length, Atomics.load(signals, SIGNALS.used) + ring.slots);
      while (written[w] < end) {
        const at = ring.at + (written[w] % ring.slots) * ring.slotNumbers;
        fill(queue[written[w]], m.subarray(at, at + ring.slotNumbers - 2));
        written[w]++;
        if ((written[w] & 31) === 0) publish(signals, written[w]);
      }
      if (written[w] > before) publish(signals, written[w]);
      left ||= written[w] < queue.length;
    });
    return left;
  }
}

function publish(signals: Int32Array, written: number): void {
  Atomics.store(signals, SIGNALS.filled, written);
  Atomics.notify(signals, SIGNALS.filled);
}

const NONE = new Int32Array(0);
const sharedFloats = (length: number): Float64Array => new Float64Array(new SharedArrayBuffer(8 * length));

/** What the threads of one pool know about one analysis. */
export interface TeamSession {
  readonly id: number;
  open(
    pattern: ElementPattern,
    fronts: Fronts,
    plan: MemoryPlan,
    team: ThreadPool,
  ): { tables: FrontTables; split: WorkSplit };
}

let sessions = 0;

export function makeSession(): TeamSession {
  const id = sessions++;
  let known: { team: ThreadPool; tables: FrontTables; split: WorkSplit } | undefined;
  const session: TeamSession = {
    id,
    open(pattern, fronts, plan, team) {
      if (known?.team === team) return known;
      const { count, parent, pivotStarts, boundaryStarts, boundaryInParent, childStarts, children } = fronts;
      const { elementStarts, elements, listInFront } = fronts;
      const tables: FrontTables = {
        count, parent, pivotStarts, boundaryStarts, boundaryInParent, childStarts, children,
        elementStarts, elements, listInFront, panelStarts: plan.panelStarts, elementListStarts: pattern.starts,
      }; // prettier-ignore
      for (const worker of team.workers) worker.postMessage({ kind: 'tables', id, tables } satisfies WorkerMessage);
      forgotten.register(session, { id, workers: team.workers });
      known = { team, tables, split: splitWork(tables, team.threads) };
      return known;
    },
  };
  return session;
}

/** Threads drop the tables of analyses that nobody holds any more. */
const forgotten = new FinalizationRegistry<{ id: number; workers: readonly Worker[] }>(({ id, workers }) => {
  for (const worker of workers) worker.postMessage({ kind: 'forget', id } satisfies WorkerMessage);
});

/** Real operations that one number of a front, or of an element matrix, costs besides the arithmetic. */
const ENTRY = 16;
/** Share of the fronts above the subtrees that the threads do not get done together. */
const SERIAL = 0.15;

/** Cuts the tree at the height where the threads finish soonest, largest subtree to the least loaded thread. */
export function splitWork(tables: FrontTables, threads: number): WorkSplit {
  const { count, parent, pivotStarts, boundaryStarts, childStarts, children, elementStarts, elements } = tables;
  const own = new Float64Array(count);
  const subtree = new Float64Array(count);
  const fillCost = new Float64Array(count);
  for (let f = 0; f < count; f++) {
    const np = pivotStarts[f + 1] - pivotStarts[f];
    const nb = boundaryStarts[f + 1] - boundaryStarts[f];
    own[f] = 8 * multiplyAdds(np, nb) + ENTRY * (np + nb) ** 2;
    for (let i = elementStarts[f]; i < elementStarts[f + 1]; i++) {
      const e = elements[i];
      fillCost[f] += ENTRY * (tables.elementListStarts[e + 1] - tables.elementListStarts[e]) ** 2;
    }
    subtree[f] += own[f];
    if (parent[f] >= 0) {
      subtree[parent[f]] += subtree[f];
      fillCost[parent[f]] += fillCost[f];
    }
  }
  let candidates: number[] = [];
  for (let f = 0; f < count; f++) if (parent[f] < 0) candidates.push(f);
  const above: number[] = [];
  let aboveCost = 0;
  let best: { finish: number; loads: number[][]; above: number[] } | undefined;
  for (let cut = 0; cut < 64; cut++) {
    candidates.sort((a, b) => subtree[b] - subtree[a] || a - b);
    const loads = Array.from({ length: threads }, (): number[] => []);
    const load = new Float64Array(threads);
    for (const f of candidates) {
      let t = 0;
      for (let i = 1; i < threads; i++) if (load[i] < load[t]) t = i;
      loads[t].push(f);
      load[t] += subtree[f];
      load[0] += fillCost[f];
    }
    const finish = Math.max(...load) + aboveCost * (SERIAL + (1 - SERIAL) / threads);
    if (best === undefined || finish < best.finish) best = { finish, loads, above: [...above] };
    const largest = candidates.shift();
    if (largest === undefined) break;
    above.push(largest);
    aboveCost += own[largest];
    candidates = candidates.concat([...children.subarray(childStarts[largest], childStarts[largest + 1])]);
  }
  const { loads, above: together } = best as { loads: number[][]; above: number[] };
  // Fronts of a subtree are contiguous and end with its root.
  const sizes = new Int32Array(count).fill(1);
  for (let f = 0; f < count; f++) if (parent[f] >= 0) sizes[parent[f]] += sizes[f];
  return {
    own: loads.map((roots) =>
      Int32Array.from(roots.flatMap((r) => Array.from({ length: sizes[r] }, (_, i) => r - sizes[r] + 1 + i))).sort(),
    ),
    together: Int32Array.from(together).sort(),
  };
}

function elementsOf({ elementStarts, elements }: FrontTables, fronts: Int32Array): Int32Array {
  const list: number[] = [];
  for (const f of fronts) for (let i = elementStarts[f]; i < elementStarts[f + 1]; i++) list.push(elements[i]);
  return Int32Array.from(list);
}

/** Peak of a thread's stack: subtrees one after the other, then the fronts done together, which free nothing. */
function stackNumbers(tables: FrontTables, own: Int32Array, together: Int32Array): number {
  const { pivotStarts, boundaryStarts, childStarts, children } = tables;
  const at = new Map<number, number>();
  let top = 0;
  let peak = 0;
  for (const list of [own, together]) {
    for (const f of list) {
      const np = pivotStarts[f + 1] - pivotStarts[f];
      const nb = boundaryStarts[f + 1] - boundaryStarts[f];
      peak = Math.max(peak, top + 2 * (np + nb) * np + 2 * nb * nb);
      const first = childStarts[f];
      const bottom = list === own && first < childStarts[f + 1] ? (at.get(children[first]) as number) : top;
      at.set(f, bottom);
      top = bottom + nb * (nb + 1);
      peak = Math.max(peak, top);
    }
  }
  return peak;
}
