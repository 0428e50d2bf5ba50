// How does long work run beside the command, so that Ctrl-C and the progress line are never kept waiting?

import { Worker } from 'node:worker_threads';
import { FarError } from './faults.ts';
import { progressLine } from './progress.ts';
import type { FarMessage, FarTask } from './tasks.ts';

/** Runs a task of `worker.ts` in a thread of its own; arrays come back without being copied. */
export function farWork<T>(what: string, { task, input }: FarTask): Promise<T> {
  const line = progressLine(what);
  const worker = startWorker({ task, input });
  return new Promise<T>((done, failed) => {
    worker.on('message', (message: FarMessage) => {
      if (message.kind === 'progress') line.report(message.stage, message.done);
      else if (message.kind === 'done') done(message.output as T);
      else failed(new FarError(message.report));
    });
    worker.once('error', (error: NodeJS.ErrnoException) => {
      failed(error.code === undefined ? error : new Error(`${error.code}: ${error.message}`));
    });
    worker.once('exit', (code) => failed(new Error(`the worker ended with code ${String(code)} and no answer`)));
  }).finally(() => {
    line.clear();
    void worker.terminate();
  });
}

/** Compiled, the worker is JavaScript beside this file. From the source the thread needs the loader that this one has. */
function startWorker(workerData: FarTask): Worker {
  if (!import.meta.url.endsWith('.ts')) return new Worker(new URL('./worker.js', import.meta.url), { workerData });
  const [loader, file] = [import.meta.resolve('tsx/esm/api'), new URL('./worker.ts', import.meta.url).href];
  const start = `import('${loader}').then(({ register }) => { register(); return import('${file}'); })`;
  return new Worker(start, { eval: true, workerData });
}
