// How are the compiled kernels loaded?

import { readFileSync } from 'node:fs';
import type { FrontKernels } from './kernels.ts';

/** What front.wasm exports; pointers in bytes. */
interface FrontExports {
  clear(p: number, s: number, nf: number, np: number): void;
  addElement(p: number, s: number, nf: number, np: number, element: number, nd: number, map: number): void;
  addContribution(p: number, s: number, nf: number, np: number, from: number, n: number, map: number): void;
  factorFront(
    p: number,
    s: number,
    nf: number,
    np: number,
    d: number,
    perm: number,
    work: number,
    tiny: number,
  ): number;
  packContribution(s: number, nb: number, to: number): void;
}

/** Bytes that the module itself uses at the start of its memory. */
const RESERVED = 16384;
const PAGE = 65536;

/** Kernels with a memory of their own; undefined where front.wasm was not built or SIMD is missing. */
export function loadWasmKernels(): FrontKernels | undefined {
  const module = compile('front.wasm');
  if (module === undefined) return undefined;
  const memory = new WebAssembly.Memory({ initial: 16, maximum: 65536 });
  return bindKernels(module, memory);
}

function compile(name: string): WebAssembly.Module | undefined {
  try {
    return new WebAssembly.Module(readFileSync(new URL(`./${name}`, import.meta.url)));
  } catch {
    return undefined;
  }
}

function bindKernels(module: WebAssembly.Module, memory: WebAssembly.Memory): FrontKernels {
  const { exports } = new WebAssembly.Instance(module, { env: { memory, abort } });
  const wasm = exports as unknown as FrontExports;
  let numbers = new Float64Array(memory.buffer);
  let integers = new Int32Array(memory.buffer);
  return {
    kind: 'wasm',
    base: RESERVED / 8,
    get numbers() {
      return numbers;
    },
    get integers() {
      return integers;
    },
    reserve(count: number): void {
      const missing = 8 * count - memory.buffer.byteLength;
      if (missing <= 0) return;
      memory.grow(Math.ceil(missing / PAGE));
      numbers = new Float64Array(memory.buffer);
      integers = new Int32Array(memory.buffer);
    },
    clear: (p, s, nf, np) => wasm.clear(8 * p, 8 * s, nf, np),
    addElement: (p, s, nf, np, element, nd, map) => wasm.addElement(8 * p, 8 * s, nf, np, 8 * element, nd, 4 * map),
    addContribution: (p, s, nf, np, from, n, map) => wasm.addContribution(8 * p, 8 * s, nf, np, 8 * from, n, 4 * map),
    factorFront: (p, s, nf, np, d, perm, work, tiny) =>
      wasm.factorFront(8 * p, 8 * s, nf, np, 8 * d, 4 * perm, 8 * work, tiny),
    packContribution: (s, nb, to) => wasm.packContribution(8 * s, nb, 8 * to),
  };
}

function abort(): never {
  throw new Error('front.wasm stopped');
}
