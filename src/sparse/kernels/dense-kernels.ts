// How are the compiled products of element matrices loaded?

import { readFileSync } from 'node:fs';

/** Positions as in FrontKernels: of float64 in `numbers`, of words in `integers`. The memory never grows. */
export interface DenseKernels {
  readonly numbers: Float64Array;
  readonly integers: Int32Array;
  /** First position that callers may use. */
  readonly base: number;
  /** out[i + j nd] = Σ_s left[i rows + s] right[j rows + s] for i ≤ j at least; `rows` is even. */
  gram(out: number, left: number, right: number, rows: number, nd: number): void;
  multiplyElements(tables: ElementTables, product: ElementProduct): void;
}

/** Where the elements of a space stand; all but `local` are words. */
export interface ElementTables {
  readonly elements: number;
  readonly starts: number;
  readonly list: number;
  /** Position of an element's stiffness, its mass right behind. */
  readonly places: number;
  /** Index of an element's four weights. */
  readonly regions: number;
  /** 1 where the matrices are complex. */
  readonly complex: number;
  /** Room for 5 × localNumbers. */
  readonly local: number;
  readonly localNumbers: number;
}

/** out = Σ (w_K K + w_M M) x for columns of n complex numbers each. */
export interface ElementProduct {
  /** Per region w_K and w_M, four numbers. */
  readonly weights: number;
  readonly x: number;
  readonly out: number;
  readonly unknowns: number;
  readonly columns: number;
  /** −1 conjugates the complex matrices. */
  readonly flip: 1 | -1;
}

interface DenseExports {
  readonly gram: (...numbers: number[]) => void;
  readonly multiplyElements: (...numbers: number[]) => void;
}

/** Bytes that the module uses at the start of its memory. */
const RESERVED = 8192;
const PAGE = 65536;
const MOST_PAGES = 65536;

let module: WebAssembly.Module | undefined;
let tried = false;

/** Kernels with a memory of their own for so many numbers; undefined where they cannot be had. */
export function makeDenseKernels(numbers: number): DenseKernels | undefined {
  const pages = Math.ceil((RESERVED + 8 * numbers) / PAGE);
  if (pages >= MOST_PAGES) return undefined;
  if (!tried) module = compile();
  tried = true;
  if (module === undefined) return undefined;
  let memory: WebAssembly.Memory;
  try {
    memory = new WebAssembly.Memory({ initial: pages, maximum: pages });
  } catch {
    return undefined;
  }
  const { exports } = new WebAssembly.Instance(module, { env: { memory, abort } });
  const wasm = exports as unknown as DenseExports;
  return {
    numbers: new Float64Array(memory.buffer),
    integers: new Int32Array(memory.buffer),
    base: RESERVED / 8,
    gram: (out, left, right, rows, nd) => wasm.gram(8 * out, 8 * left, 8 * right, rows, nd),
    multiplyElements: (t, p) =>
      wasm.multiplyElements(
        t.elements, 4 * t.starts, 4 * t.list, 4 * t.places, 4 * t.regions, 4 * t.complex, 8 * p.weights,
        8 * p.x, 8 * p.out, 16 * p.unknowns, p.columns, p.flip, 8 * t.local, 8 * t.localNumbers,
      ), // prettier-ignore
  };
}

function compile(): WebAssembly.Module | undefined {
  try {
    return new WebAssembly.Module(readFileSync(new URL('./dense.wasm', import.meta.url)));
  } catch {
    return undefined;
  }
}

function abort(): never {
  throw new Error('dense.wasm stopped');
}
