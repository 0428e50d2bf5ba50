// How are products of tall matrices computed fast?

import { readFileSync } from 'node:fs';
import type { ComplexArray } from './complex.ts';

/** A memory for tall matrices, and their products in compiled loops. All positions are numbers from `base` on. */
export interface TallMemory {
  readonly numbers: Float64Array;
  /** First number that callers may use; the coefficients of a product stand before it. */
  readonly base: number;
  /** XᴴY of p columns at x and q columns at y, each n complex numbers; undefined when p q is too large. */
  adjointProduct(x: number, p: number, y: number, q: number, n: number): ComplexArray | undefined;
  /** Columns at y += X C; false when p q is too large. */
  addProduct(y: number, x: number, p: number, c: ComplexArray, q: number, n: number): boolean;
}

/** Coefficients of one product, complex numbers. */
const MOST_COEFFICIENTS = 4096;
const RESERVED = 8192;
const PAGE = 65536;
const MOST_PAGES = 65536;

let compiled: WebAssembly.Module | null | undefined;

/** Room for so many numbers; undefined where there are no compiled loops or not so much memory. */
export function makeTallMemory(numbers: number): TallMemory | undefined {
  compiled ??= compile();
  const base = RESERVED / 8 + 2 * MOST_COEFFICIENTS;
  const pages = Math.ceil((8 * (base + numbers)) / PAGE);
  if (compiled === null || pages >= MOST_PAGES) return undefined;
  let memory: WebAssembly.Memory;
  try {
    memory = new WebAssembly.Memory({ initial: pages, maximum: pages });
  } catch {
    return undefined;
  }
  const env = { memory, abort: (): never => { throw new Error('columns.wasm stopped'); } }; // prettier-ignore
  const wasm = new WebAssembly.Instance(compiled, { env }).exports as unknown as {
    readonly adjointProduct: (...at: number[]) => void;
    readonly addProduct: (...at: number[]) => void;
  };
  const m = new Float64Array(memory.buffer);
  const small = RESERVED / 8;
  return {
    numbers: m,
    base,
    adjointProduct(x, p, y, q, n) {
      if (p * q > MOST_COEFFICIENTS) return undefined;
      wasm.adjointProduct(8 * x, p, 8 * y, q, n, 8 * small);
      return m.slice(small, small + 2 * p * q);
    },
    addProduct(y, x, p, c, q, n) {
      if (p * q > MOST_COEFFICIENTS) return false;
      m.set(c.subarray(0, 2 * p * q), small);
      wasm.addProduct(8 * y, 8 * x, p, 8 * small, q, n);
      return true;
    },
  };
}

function compile(): WebAssembly.Module | null {
  try {
    return new WebAssembly.Module(readFileSync(new URL('./columns.wasm', import.meta.url)));
  } catch {
    return null;
  }
}
