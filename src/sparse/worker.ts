// What does a helping thread run?

import { parentPort, workerData } from 'node:worker_threads';
import type { FrontTables } from './front-work.ts';
import { bindShared } from './kernels/wasm-kernels.ts';
import { runJob, type WorkerMessage } from './worker-job.ts';

/** Given at the start. */
export interface WorkerStart {
  readonly module: WebAssembly.Module;
  readonly memory: WebAssembly.Memory;
  readonly thread: number;
}

const { module, memory, thread } = workerData as WorkerStart;
const shared = bindShared(module, memory, thread);
const known = new Map<number, FrontTables>();
parentPort?.on('message', (message: WorkerMessage) => {
  if (message.kind === 'tables') known.set(message.id, message.tables);
  else if (message.kind === 'forget') known.delete(message.id);
  else runJob(known.get(message.id) as FrontTables, shared, message);
});
parentPort?.postMessage('ready');
