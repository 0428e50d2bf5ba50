// How are right-hand sides solved with the factors?

import type { ComplexArray } from '../numerics/complex.ts';
import type { Factors } from './factors.ts';
import {
  LOCAL_EXTRA,
  type FrontKernels,
  type FrontShape,
  type RightSides,
  type SubstitutionKernels,
  type SubstitutionTables,
} from './kernels/kernels.ts';
import { substitutePlain } from './substitute.ts';

/** A x = b for `columns` right-hand sides, column-major interleaved; `out` may be `rhs`. */
export function solveFronts(
  factors: Factors,
  kernels: FrontKernels,
  out: ComplexArray,
  rhs: ComplexArray,
  columns: number,
): ComplexArray {
  const n = factors.placeOf.length;
  if (!Number.isInteger(columns) || columns < 0) {
    throw new RangeError(`columns is ${columns}; expected a whole number ≥ 0`);
  }
  if (rhs.length < 2 * n * columns || out.length < 2 * n * columns) {
    throw new RangeError(
      `rhs holds ${rhs.length} and out ${out.length} numbers; expected at least 2 × ${n} unknowns × ${columns} columns`,
    );
  }
  if (n === 0 || columns === 0) return out;
  if (kernels.substitution === undefined) return substitutePlain(factors, out, rhs, columns);
  return substituteCompiled(factors, kernels, kernels.substitution, out, rhs, columns);
}

/** Numbers of L that are copied in at a time: they stay in the second-level cache while all columns pass. */
const CHUNK = 32768;
/** A front too large for a chunk passes at least this many columns at a time. */
const MIN_WIDTH = 16;
/** Right-hand sides that pass together, at most, and the memory they may take in numbers. */
const GROUP_QUADS = 16;
const GROUP_NUMBERS = 2 ** 27;
/** Unknowns of all columns that are put in their places together, and numbers between two columns of them. */
const TILE_ROWS = 128;
const TILE_STEP = 2 * TILE_ROWS + 8;

/**
 * Panels stream through the kernels' memory chunk by chunk, once forward and once backward for each group of
 * right-hand sides.
 */
function substituteCompiled(
  factors: Factors,
  kernels: FrontKernels,
  substitution: SubstitutionKernels,
  out: ComplexArray,
  rhs: ComplexArray,
  columns: number,
): ComplexArray {
  const { count, placeOf, pivotStarts, order, edgeStarts, edges, panels, panelStarts, inversePivots } = factors;
  const { largestFront } = factors;
  const n = placeOf.length;
  const most = Math.max(1, Math.min(GROUP_QUADS, Math.floor(GROUP_NUMBERS / n / 8)));
  const groups = Math.ceil(columns / 4 / most);
  const quads = columns === 1 ? 0 : Math.ceil(columns / 4 / groups);
  // An odd number of cache lines a row: the same quad of many rows then meets all sets of a cache.
  const rowNumbers = quads === 0 ? 2 : 8 * (quads | 1);
  const localStep = 8 * (largestFront + 2);

  // Memory: tables, inverse pivots, right-hand sides, rows of one front, a chunk of L.
  let top = 2 * kernels.base;
  const integers = (length: number): number => (top += length) - length;
  const startsAt = integers(count + 1);
  const edgesAt = integers(count + 1);
  const orderAt = integers(n);
  const placesAt = integers(n);
  const boundaryAt = integers(edges.length);
  let free = 8 * Math.ceil((top + 2) / 16);
  const numbers = (length: number): number => (free += 8 * Math.ceil(length / 8)) - 8 * Math.ceil(length / 8);
  const pivotsAt = numbers(4 * n);
  const xAt = numbers(rowNumbers * n);
  const local = numbers(localStep * Math.max(1, quads) + LOCAL_EXTRA);
  const chunkAt = numbers(Math.max(CHUNK, 2 * MIN_WIDTH * largestFront, 4 * quads * TILE_STEP) + 64);
  kernels.reserve(free + 64);
  const m = kernels.numbers;
  const ints = kernels.integers;
  ints.set(pivotStarts, startsAt);
  for (let f = 0; f <= count; f++) ints[edgesAt + f] = edgeStarts[f];
  ints.set(order, orderAt);
  ints.set(placeOf, placesAt);
  ints.set(edges, boundaryAt);
  m.set(inversePivots, pivotsAt);
  const tables: SubstitutionTables = {
    pivotStarts: startsAt,
    boundaryStarts: edgesAt,
    order: orderAt,
    boundary: boundaryAt,
    pivots: pivotsAt,
  };
  const chunks = cutIntoChunks(panelStarts, count);

  for (let column = 0; column < columns; column += 4 * quads || 1) {
    const width = Math.min(4 * quads || 1, columns - column);
    const block = { quads: quads === 0 ? 0 : Math.ceil(width / 4), x: xAt, rowNumbers, local, localStep };
    putInPlaces(column, width, block);
    for (let c = 0; c + 1 < chunks.length; c++) passForward(chunks[c], chunks[c + 1], block);
    for (let c = chunks.length - 2; c >= 0; c--) passBackward(chunks[c], chunks[c + 1], block);
    takeFromPlaces(column, width, block);
  }
  return out;

  function putInPlaces(column: number, width: number, block: RightSides): void {
    if (quads === 0) {
      for (let u = 0; u < n; u++) copyOne(m, xAt + 2 * placeOf[u], rhs, 2 * u);
      return;
    }
    // Columns that the last quad lacks are zero.
    m.fill(0, chunkAt + TILE_STEP * width, chunkAt + TILE_STEP * 4 * block.quads);
    for (let u = 0; u < n; u += TILE_ROWS) {
      const rows = Math.min(TILE_ROWS, n - u);
      for (let c = 0; c < width; c++) {
        const from = 2 * (n * (column + c) + u);
        m.set(rhs.subarray(from, from + 2 * rows), chunkAt + TILE_STEP * c);
      }
      substitution.putQuads(chunkAt, TILE_STEP, placesAt + u, rows, block);
    }
  }

  function takeFromPlaces(column: number, width: number, block: RightSides): void {
    if (quads === 0) {
      for (let u = 0; u < n; u++) copyOne(out, 2 * u, m, xAt + 2 * placeOf[u]);
      return;
    }
    for (let u = 0; u < n; u += TILE_ROWS) {
      const rows = Math.min(TILE_ROWS, n - u);
      substitution.takeQuads(chunkAt, TILE_STEP, placesAt + u, rows, block);
      for (let c = 0; c < width; c++) {
        const from = chunkAt + TILE_STEP * c;
        out.set(m.subarray(from, from + 2 * rows), 2 * (n * (column + c) + u));
      }
    }
  }

  function passForward(first: number, last: number, block: RightSides): void {
    const length = panelStarts[last] - panelStarts[first];
    if (length <= CHUNK) {
      m.set(panels.subarray(panelStarts[first], panelStarts[last]), chunkAt);
      if (quads === 0) substitution.forwardOne(first, last, chunkAt, tables, block);
      else substitution.forwardBlock(first, last, chunkAt, tables, block);
      return;
    }
    const shape = shapeOf(first);
    substitution.gatherForward(tables, shape, block);
    eachColumns(first, shape, false, block);
    substitution.scatterForward(tables, shape, block);
  }

  function passBackward(first: number, last: number, block: RightSides): void {
    const length = panelStarts[last] - panelStarts[first];
    if (length <= CHUNK) {
      m.set(panels.subarray(panelStarts[first], panelStarts[last]), chunkAt);
      if (quads === 0) substitution.backwardOne(first, last, chunkAt + length, tables, block);
      else substitution.backwardBlock(first, last, chunkAt + length, tables, block);
      return;
    }
    const shape = shapeOf(first);
    substitution.gatherBackward(tables, shape, block);
    eachColumns(first, shape, true, block);
    substitution.scatterBackward(tables, shape, block);
  }

  /** A front too large for one chunk, a few columns at a time. */
  function eachColumns(f: number, shape: FrontShape, backward: boolean, block: RightSides): void {
    const { np } = shape;
    const nf = np + shape.nb;
    const width = Math.max(MIN_WIDTH, 2 * Math.floor(CHUNK / (4 * nf)));
    const pieces = Math.ceil(np / width);
    for (let piece = 0; piece < pieces; piece++) {
      const first = width * (backward ? pieces - 1 - piece : piece);
      const last = Math.min(np, first + width);
      const plane = (last - first) * nf;
      const from = panelStarts[f] + first * nf;
      m.set(panels.subarray(from, from + plane), chunkAt);
      m.set(panels.subarray(from + nf * np, from + nf * np + plane), chunkAt + plane);
      if (backward) substitution.backwardColumns(chunkAt, plane, shape, first, last, block);
      else substitution.forwardColumns(chunkAt, plane, shape, first, last, tables, block);
    }
  }

  function shapeOf(f: number): FrontShape {
    const place = pivotStarts[f];
    const edge = edgeStarts[f];
    return { place, np: pivotStarts[f + 1] - place, edge, nb: edgeStarts[f + 1] - edge };
  }
}

function copyOne(to: Float64Array, t: number, from: Float64Array, f: number): void {
  to[t] = from[f];
  to[t + 1] = from[f + 1];
}

/** Runs of fronts whose panels fit in a chunk together; one that does not fit stands alone. */
function cutIntoChunks(panelStarts: Float64Array, count: number): number[] {
  const chunks = [0];
  for (let f = 0; f < count; f++) {
    const first = chunks[chunks.length - 1];
    if (f > first && panelStarts[f + 1] - panelStarts[first] > CHUNK) chunks.push(f);
  }
  if (count > 0) chunks.push(count);
  return chunks;
}
