// How are the wasm kernels built?  node src/sparse/kernels/build.mjs [folder, default: beside this file]

import { mkdirSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import asc from 'assemblyscript/asc';

const here = dirname(fileURLToPath(import.meta.url));
const into = process.argv[2] === undefined ? here : resolve(process.argv[2]);

const common = ['--optimizeLevel', '3', '--shrinkLevel', '0', '--noAssert', '--runtime', 'stub'];
const memory = ['--importMemory', '--memoryBase', '4096', '--enable', 'simd', '--enable', 'bulk-memory'];
const builds = [
  ['front.ts', 'front.wasm', ['--initialMemory', '1', '--maximumMemory', '65536']],
  ['columns.ts', '../../numerics/columns.wasm', ['--initialMemory', '1', '--maximumMemory', '65536']],
  ['dense.ts', 'dense.wasm', ['--initialMemory', '1', '--maximumMemory', '65536']],
  // prettier-ignore
  ['front-shared.ts', 'front-shared.wasm', ['--enable', 'threads', '--sharedMemory', '--initialMemory', '1', '--maximumMemory', '65536']],
];
for (const [entry, name, more] of builds) {
  const source = join(here, 'wasm', entry);
  mkdirSync(dirname(join(into, name)), { recursive: true });
  const { error, stderr } = await asc.main([source, '--outFile', join(into, name), ...common, ...memory, ...more]);
  if (error) {
    process.stderr.write(`${stderr.toString()}\n${error.message}\n`);
    process.exit(1);
  }
}
