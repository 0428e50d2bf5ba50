// How are right-hand sides solved with the factors?

import type { ComplexArray } from '../numerics/complex.ts';
import type { Factors } from './factors.ts';
import type { FrontKernels, FrontShape, SubstitutionKernels, SubstitutionTables } from './kernels/kernels.ts';
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
/** Right-hand sides that pass together, at most, and the memory they may take in numbers. */
const GROUP_QUADS = 8;
const GROUP_NUMBERS = 2 ** 27;

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
  const one = columns === 1;
  const quadsAtOnce = Math.max(1, Math.min(GROUP_QUADS, Math.ceil(columns / 4), Math.floor(GROUP_NUMBERS / (8 * n))));

  // Memory: tables, inverse pivots, right-hand sides, rows of one front for every quad, a chunk of L.
  let top = 2 * kernels.base;
  const integers = (length: number): number => (top += length) - length;
  const startsAt = integers(count + 1);
  const edgesAt = integers(count + 1);
  const orderAt = integers(n);
  const boundaryAt = integers(edges.length);
  let free = (top >> 1) + 2;
  const numbers = (length: number): number => (free += length) - length;
  const pivotsAt = numbers(4 * n);
  const xAt = numbers(one ? 2 * n : 8 * n * quadsAtOnce);
  const localNumbers = (one ? 2 : 8) * (largestFront + 2);
  const local = numbers(localNumbers * quadsAtOnce);
  const chunkAt = numbers(Math.max(CHUNK, 2 * MIN_WIDTH * largestFront) + 64);
  kernels.reserve(free + 64);
  const m = kernels.numbers;
  const ints = kernels.integers;
  ints.set(pivotStarts, startsAt);
  for (let f = 0; f <= count; f++) ints[edgesAt + f] = edgeStarts[f];
  ints.set(order, orderAt);
  ints.set(edges, boundaryAt);
  m.set(inversePivots, pivotsAt);
  const tables: SubstitutionTables = {
    pivotStarts: startsAt,
    boundaryStarts: edgesAt,
    order: orderAt,
    boundary: boundaryAt,
    pivots: pivotsAt,
    local,
    quadNumbers: 8 * n,
  };
  const chunks = cutIntoChunks(panelStarts, count);

  for (let column = 0; column < columns; column += 4 * quadsAtOnce) {
    const width = Math.min(4 * quadsAtOnce, columns - column);
    const quads = Math.ceil(width / 4);
    if (one) for (let u = 0; u < n; u++) copyOne(m, xAt + 2 * placeOf[u], rhs, 2 * u);
    else for (let q = 0; q < quads; q++) readQuad(q, column + 4 * q, Math.min(4, width - 4 * q));
    for (let c = 0; c + 1 < chunks.length; c++) passForward(chunks[c], chunks[c + 1], quads);
    for (let c = chunks.length - 2; c >= 0; c--) passBackward(chunks[c], chunks[c + 1], quads);
    if (one) for (let u = 0; u < n; u++) copyOne(out, 2 * u, m, xAt + 2 * placeOf[u]);
    else for (let q = 0; q < quads; q++) writeQuad(q, column + 4 * q, Math.min(4, width - 4 * q));
  }
  return out;

  // Right-hand sides pass in their own order, so that only the rows of a quad (a cache line each) jump. Columns that
  // a quad lacks repeat its first one: their solutions are the same and land on the same place.
  function readQuad(q: number, column: number, width: number): void {
    const at = xAt + 8 * n * q;
    let c0 = 2 * n * column;
    let c1 = width > 1 ? c0 + 2 * n : c0;
    let c2 = width > 2 ? c1 + 2 * n : c0;
    let c3 = width > 3 ? c2 + 2 * n : c0;
    for (let u = 0; u < n; u++, c0 += 2, c1 += 2, c2 += 2, c3 += 2) {
      const to = at + 8 * placeOf[u];
      m[to] = rhs[c0];
      m[to + 1] = rhs[c1];
      m[to + 2] = rhs[c2];
      m[to + 3] = rhs[c3];
      m[to + 4] = rhs[c0 + 1];
      m[to + 5] = rhs[c1 + 1];
      m[to + 6] = rhs[c2 + 1];
      m[to + 7] = rhs[c3 + 1];
    }
  }

  function writeQuad(q: number, column: number, width: number): void {
    const at = xAt + 8 * n * q;
    let c0 = 2 * n * column;
    let c1 = width > 1 ? c0 + 2 * n : c0;
    let c2 = width > 2 ? c1 + 2 * n : c0;
    let c3 = width > 3 ? c2 + 2 * n : c0;
    for (let u = 0; u < n; u++, c0 += 2, c1 += 2, c2 += 2, c3 += 2) {
      const from = at + 8 * placeOf[u];
      out[c0] = m[from];
      out[c1] = m[from + 1];
      out[c2] = m[from + 2];
      out[c3] = m[from + 3];
      out[c0 + 1] = m[from + 4];
      out[c1 + 1] = m[from + 5];
      out[c2 + 1] = m[from + 6];
      out[c3 + 1] = m[from + 7];
    }
  }

  function passForward(first: number, last: number, quads: number): void {
    const length = panelStarts[last] - panelStarts[first];
    if (length <= CHUNK) {
      m.set(panels.subarray(panelStarts[first], panelStarts[last]), chunkAt);
      if (one) substitution.forwardOne(first, last, chunkAt, tables, xAt);
      else substitution.forwardQuads(first, last, chunkAt, tables, xAt, quads);
      return;
    }
    const shape = shapeOf(first);
    for (let q = 0; q < quads; q++)
      substitution.gatherForward(!one, tables, xAt + 8 * n * q, shape, local + localNumbers * q);
    eachColumns(first, shape, false, quads);
    for (let q = 0; q < quads; q++)
      substitution.scatterForward(!one, tables, xAt + 8 * n * q, shape, local + localNumbers * q);
  }

  function passBackward(first: number, last: number, quads: number): void {
    const length = panelStarts[last] - panelStarts[first];
    if (length <= CHUNK) {
      m.set(panels.subarray(panelStarts[first], panelStarts[last]), chunkAt);
      if (one) substitution.backwardOne(first, last, chunkAt + length, tables, xAt);
      else substitution.backwardQuads(first, last, chunkAt + length, tables, xAt, quads);
      return;
    }
    const shape = shapeOf(first);
    for (let q = 0; q < quads; q++)
      substitution.gatherBackward(!one, tables, xAt + 8 * n * q, shape, local + localNumbers * q);
    eachColumns(first, shape, true, quads);
    for (let q = 0; q < quads; q++)
      substitution.scatterBackward(!one, tables, xAt + 8 * n * q, shape, local + localNumbers * q);
  }

  /** A front too large for one chunk, a few columns at a time. */
  function eachColumns(f: number, { np, nb }: FrontShape, backward: boolean, quads: number): void {
    const nf = np + nb;
    const width = Math.max(MIN_WIDTH, 2 * Math.floor(CHUNK / (4 * nf)));
    const pieces = Math.ceil(np / width);
    for (let piece = 0; piece < pieces; piece++) {
      const first = width * (backward ? pieces - 1 - piece : piece);
      const last = Math.min(np, first + width);
      const plane = (last - first) * nf;
      const from = panelStarts[f] + first * nf;
      m.set(panels.subarray(from, from + plane), chunkAt);
      m.set(panels.subarray(from + nf * np, from + nf * np + plane), chunkAt + plane);
      for (let q = 0; q < quads; q++) {
        const rows = local + localNumbers * q;
        if (backward) substitution.backwardColumns(!one, chunkAt, plane, nf, first, last, rows);
        else substitution.forwardColumns(!one, chunkAt, plane, nf, first, last, rows);
      }
    }
  }

  function shapeOf(f: number): FrontShape {
    const place = pivotStarts[f];
    const edge = edgeStarts[f];
    return { place, np: pivotStarts[f + 1] - place, edge, nb: edgeStarts[f + 1] - edge };
  }
}

/** A front too large for a chunk passes at least this many columns at a time. */
const MIN_WIDTH = 8;

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
