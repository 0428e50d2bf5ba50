// How are the compiled kernels loaded?

import { readFileSync } from 'node:fs';
import type { FrontKernels, RightSides, SubstitutionKernels } from './kernels.ts';

/** What front.wasm exports; pointers in bytes. */
interface FrontExports {
  readonly putQuads: (...numbers: number[]) => void;
  readonly takeQuads: (...numbers: number[]) => void;
  readonly forwardBlock: (...numbers: number[]) => void;
  readonly backwardBlock: (...numbers: number[]) => void;
  readonly forwardColumnsBlock: (...numbers: number[]) => void;
  readonly backwardColumnsBlock: (...numbers: number[]) => void;
  readonly gatherBlock: (...numbers: number[]) => void;
  readonly scatterBlock: (...numbers: number[]) => void;
  readonly scatterForwardBlock: (...numbers: number[]) => void;
  readonly forwardOne: (...numbers: number[]) => void;
  readonly backwardOne: (...numbers: number[]) => void;
  readonly forwardColumnsOne: (...numbers: number[]) => void;
  readonly backwardColumnsOne: (...numbers: number[]) => void;
  readonly gatherForwardOne: (...numbers: number[]) => void;
  readonly scatterForwardOne: (...numbers: number[]) => void;
  readonly gatherBackwardOne: (...numbers: number[]) => void;
  readonly scatterBackwardOne: (...numbers: number[]) => void;
  readonly clear: (p: number, s: number, nf: number, np: number) => void;
  readonly addElement: (p: number, s: number, nf: number, np: number, element: number, nd: number, map: number) => void;
  readonly addContribution: (
    p: number,
    s: number,
    nf: number,
    np: number,
    from: number,
    n: number,
    map: number,
  ) => void;
  readonly factorFront: (...numbers: number[]) => number;
  readonly packContribution: (...numbers: number[]) => void;
}

/** Bytes that the module itself uses at the start of its memory. */
const RESERVED = 16384;
const PAGE = 65536;
const MOST_PAGES = 65536;
/** Bytes where the edge tiles of the threads lie, and the epoch of shared tasks (wasm/share.ts). */
const TILES = 8192;
const EPOCH = 2048;
/** Edge tiles fit for this many threads. */
export const MOST_THREADS = 32;

/** Kernels with a memory of their own; undefined where front.wasm was not built or SIMD is missing. */
export function loadWasmKernels(): FrontKernels | undefined {
  const module = compile('front.wasm');
  if (module === undefined) return undefined;
  const memory = new WebAssembly.Memory({ initial: 16, maximum: MOST_PAGES });
  return bindKernels(new WebAssembly.Instance(module, { env: { memory, abort } }), memory);
}

/** Kernels that several threads run on one memory. */
export interface SharedKernels {
  readonly module: WebAssembly.Module;
  readonly memory: WebAssembly.Memory;
  readonly kernels: FrontKernels;
  /** Whether large fronts are offered to helping threads. */
  setSharing(on: boolean): void;
  /** Works on what other threads offer until they stop it. */
  help(epoch: number): void;
  /** Word of `integers` that holds the epoch `help` starts from. */
  readonly epochAt: number;
  /** true: all `help` calls return; false: they may be entered again. */
  stopHelp(stop: boolean): void;
}

/** undefined where shared memory is not allowed, front-shared.wasm was not built, or SIMD is missing. */
export function loadSharedKernels(): SharedKernels | undefined {
  if (typeof SharedArrayBuffer === 'undefined') return undefined;
  const module = compile('front-shared.wasm');
  if (module === undefined) return undefined;
  return bindShared(module, new WebAssembly.Memory({ initial: 16, maximum: MOST_PAGES, shared: true }), 0);
}

/** The same kernels in thread number `thread` (0: the first). */
export function bindShared(module: WebAssembly.Module, memory: WebAssembly.Memory, thread: number): SharedKernels {
  const instance = new WebAssembly.Instance(module, { env: { memory, abort } });
  const wasm = instance.exports as unknown as {
    readonly setSharing: (on: number) => void;
    readonly help: (epoch: number) => void;
    readonly stopHelp: (stop: number) => void;
    readonly setTile: (at: number) => void;
  };
  wasm.setTile(TILES + 256 * thread);
  return {
    module,
    memory,
    kernels: bindKernels(instance, memory),
    setSharing: (on) => wasm.setSharing(on ? 1 : 0),
    help: (epoch) => wasm.help(epoch),
    epochAt: EPOCH / 4,
    stopHelp: (stop) => wasm.stopHelp(stop ? 1 : 0),
  };
}

function compile(name: string): WebAssembly.Module | undefined {
  try {
    return new WebAssembly.Module(readFileSync(new URL(`./${name}`, import.meta.url)));
  } catch {
    return undefined;
  }
}

function bindKernels(instance: WebAssembly.Instance, memory: WebAssembly.Memory): FrontKernels {
  const wasm = instance.exports as unknown as FrontExports;
  if (typeof wasm.putQuads !== 'function') {
    throw new Error('front.wasm is older than its source; expected one made by `npm run build:kernels`');
  }
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
      if (missing > 0) memory.grow(Math.ceil(missing / PAGE));
      // Another thread may have made it grow.
      if (numbers.buffer === memory.buffer) return;
      numbers = new Float64Array(memory.buffer);
      integers = new Int32Array(memory.buffer);
    },
    clear: (p, s, nf, np) => wasm.clear(8 * p, 8 * s, nf, np),
    addElement: (p, s, nf, np, element, nd, map) => wasm.addElement(8 * p, 8 * s, nf, np, 8 * element, nd, 4 * map),
    addContribution: (p, s, nf, np, from, n, map) => wasm.addContribution(8 * p, 8 * s, nf, np, 8 * from, n, 4 * map),
    factorFront: (p, s, nf, np, d, perm, work, tiny, force) =>
      wasm.factorFront(8 * p, 8 * s, nf, np, 8 * d, 4 * perm, 8 * work, tiny, force ? 1 : 0),
    packContribution: (p, s, nf, np, e, to, work) => wasm.packContribution(8 * p, 8 * s, nf, np, e, 8 * to, 8 * work),
    substitution: bindSubstitution(wasm),
  };
}

function bindSubstitution(wasm: FrontExports): SubstitutionKernels {
  return {
    putQuads: (columns, columnStep, places, count, b) =>
      wasm.putQuads(8 * columns, 8 * columnStep, 4 * places, count, b.quads, 8 * b.x, 8 * b.rowNumbers),
    takeQuads: (columns, columnStep, places, count, b) =>
      wasm.takeQuads(8 * columns, 8 * columnStep, 4 * places, count, b.quads, 8 * b.x, 8 * b.rowNumbers),
    forwardBlock: (first, last, l, t, b) =>
      wasm.forwardBlock(
        first, last, 8 * l, 4 * t.pivotStarts, 4 * t.boundaryStarts, 4 * t.order, 4 * t.boundary, 8 * t.pivots,
        8 * b.x, 8 * b.rowNumbers, b.quads, 8 * b.local, 8 * b.localStep, stripOf(b),
      ), // prettier-ignore
    backwardBlock: (first, last, l, t, b) =>
      wasm.backwardBlock(
        first, last, 8 * l, 4 * t.pivotStarts, 4 * t.boundaryStarts, 4 * t.order, 4 * t.boundary,
        8 * b.x, 8 * b.rowNumbers, b.quads, 8 * b.local, 8 * b.localStep, stripOf(b),
      ), // prettier-ignore
    forwardOne: (first, last, l, t, b) =>
      wasm.forwardOne(
        first, last, 8 * l, 4 * t.pivotStarts, 4 * t.boundaryStarts, 4 * t.order, 4 * t.boundary, 8 * t.pivots,
        8 * b.x, 8 * b.local,
      ), // prettier-ignore
    backwardOne: (first, last, l, t, b) =>
      wasm.backwardOne(
        first, last, 8 * l, 4 * t.pivotStarts, 4 * t.boundaryStarts, 4 * t.order, 4 * t.boundary,
        8 * b.x, 8 * b.local,
      ), // prettier-ignore
    forwardColumns: (l, plane, { np, nb, edge }, first, last, t, b) => {
      if (b.quads === 0) wasm.forwardColumnsOne(8 * l, 8 * plane, np + nb, first, last, 8 * b.local);
      else
        wasm.forwardColumnsBlock(
          8 * l, 8 * plane, np, nb, first, last, 4 * (t.boundary + edge),
          8 * b.x, 8 * b.rowNumbers, b.quads, 8 * b.local, 8 * b.localStep, stripOf(b),
        ); // prettier-ignore
    },
    backwardColumns: (l, plane, { np, nb }, first, last, b) => {
      if (b.quads === 0) wasm.backwardColumnsOne(8 * l, 8 * plane, np + nb, first, last, 8 * b.local);
      else
        wasm.backwardColumnsBlock(
          8 * l, 8 * plane, np + nb, first, last, b.quads, 8 * b.local, 8 * b.localStep, stripOf(b),
        ); // prettier-ignore
    },
    gatherForward: (t, { place, np, nb }, b) => {
      const rows = 4 * (t.order + place);
      if (b.quads === 0) wasm.gatherForwardOne(8 * b.x, rows, np, nb, 8 * b.local);
      else wasm.gatherBlock(8 * b.x, 8 * b.rowNumbers, rows, np, b.quads, 8 * b.local, 8 * b.localStep);
    },
    scatterForward: (t, { place, np, nb, edge }, b) => {
      const rows = 4 * (t.order + place);
      const d = 8 * (t.pivots + 4 * place);
      if (b.quads === 0) wasm.scatterForwardOne(8 * b.x, rows, 4 * (t.boundary + edge), np, nb, 8 * b.local, d);
      else wasm.scatterForwardBlock(8 * b.x, 8 * b.rowNumbers, rows, np, b.quads, 8 * b.local, 8 * b.localStep, d);
    },
    gatherBackward: (t, { place, np, nb, edge }, b) => {
      const rows = 4 * (t.order + place);
      const edges = 4 * (t.boundary + edge);
      if (b.quads === 0) wasm.gatherBackwardOne(8 * b.x, rows, edges, np, nb, 8 * b.local);
      else {
        wasm.gatherBlock(8 * b.x, 8 * b.rowNumbers, rows, np, b.quads, 8 * b.local, 8 * b.localStep);
        wasm.gatherBlock(8 * b.x, 8 * b.rowNumbers, edges, nb, b.quads, 8 * (b.local + 8 * np), 8 * b.localStep);
      }
    },
    scatterBackward: (t, { place, np, nb }, b) => {
      const rows = 4 * (t.order + place);
      if (b.quads === 0) wasm.scatterBackwardOne(8 * b.x, rows, np, np + nb, 8 * b.local);
      else wasm.scatterBlock(8 * b.x, 8 * b.rowNumbers, rows, np, b.quads, 8 * b.local, 8 * b.localStep);
    },
  };
}

/** Bytes where the strip of L lies, behind the rows of all quads. */
const stripOf = (b: RightSides): number => 8 * (b.local + b.localStep * b.quads);

function abort(): never {
  throw new Error('front.wasm stopped');
}
