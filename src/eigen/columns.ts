// The few block operations on tall complex matrices that the eigen solvers share.

import type { ComplexArray } from '../numerics/complex.ts';
import { makeTallMemory, type TallMemory } from '../numerics/tall-columns.ts';

/** out[i + j·p] = Σ x_i y_j over the n rows (no conjugation): XᵀY of p and q columns. */
export function transposeProduct(x: ComplexArray, p: number, y: ComplexArray, q: number, n: number): ComplexArray {
  return product(x, p, y, q, n, 1);
}

/** The same with the left factor conjugated: XᴴY. */
export function adjointProduct(x: ComplexArray, p: number, y: ComplexArray, q: number, n: number): ComplexArray {
  const compiled = commonMemory(x, y)?.adjointProduct(x.byteOffset / 8, p, y.byteOffset / 8, q, n);
  return compiled ?? product(x, p, y, q, n, -1);
}

/** Memories in which tall matrices were laid. */
const memories = new WeakMap<ArrayBufferLike, TallMemory>();

/** Zero matrices of n rows and so many columns, in one memory where products of them are compiled. */
export function tallMatrices(n: number, columns: readonly number[]): ComplexArray[] {
  const total = columns.reduce((sum, c) => sum + 2 * n * c, 0);
  const memory = makeTallMemory(total);
  if (memory === undefined) return columns.map((c) => new Float64Array(2 * n * c));
  memories.set(memory.numbers.buffer, memory);
  let at = memory.base;
  return columns.map((c) => memory.numbers.subarray(at, (at += 2 * n * c)));
}

/** The memory that holds both. */
function commonMemory(x: ComplexArray, y: ComplexArray): TallMemory | undefined {
  return x.buffer === y.buffer ? memories.get(x.buffer) : undefined;
}

function product(x: ComplexArray, p: number, y: ComplexArray, q: number, n: number, sign: 1 | -1): ComplexArray {
  const strip = worthCopying(p, q, n) ? stripMemory() : undefined;
  if (strip) return productByStrips(strip, x, p, y, q, n, sign);
  const out = new Float64Array(2 * p * q);
  for (let j = 0; j < q; j++) {
    const yj = y.subarray(2 * j * n, 2 * (j + 1) * n);
    for (let i = 0; i < p; i++) {
      const xi = x.subarray(2 * i * n, 2 * (i + 1) * n);
      let rr = 0;
      let ii = 0;
      let ri = 0;
      let ir = 0;
      for (let s = 0; s < 2 * n; s += 2) {
        const a = xi[s];
        const b = xi[s + 1];
        const c = yj[s];
        const d = yj[s + 1];
        rr += a * c;
        ii += b * d;
        ri += a * d;
        ir += b * c;
      }
      out[2 * (i + j * p)] = rr - sign * ii;
      out[2 * (i + j * p) + 1] = ri + sign * ir;
    }
  }
  return out;
}

/** Numbers of the memory through which strips of rows pass. */
const STRIP_NUMBERS = 2 ** 17;

/** Made once; null where nothing is compiled. */
let scratch: TallMemory | null | undefined;
function stripMemory(): TallMemory | undefined {
  scratch ??= makeTallMemory(STRIP_NUMBERS) ?? null;
  return scratch ?? undefined;
}

/** A number copied in should take part in a few products. */
const worthCopying = (p: number, q: number, n: number): boolean =>
  Math.min(p, q) >= 4 && 2 * (p + q) * 16 <= STRIP_NUMBERS && p * q <= 4096 && n >= 256;

/** Rows of a strip in which p + q columns find room. */
const stripRows = (p: number, q: number): number => 2 * Math.floor(STRIP_NUMBERS / 4 / (p + q));

/** Strip after strip into the memory, the left side conjugated there where the product does not conjugate it. */
function productByStrips(
  strip: TallMemory,
  x: ComplexArray,
  p: number,
  y: ComplexArray,
  q: number,
  n: number,
  sign: 1 | -1,
): ComplexArray {
  const m = strip.numbers;
  const out = new Float64Array(2 * p * q);
  const most = stripRows(p, q);
  for (let row = 0; row < n; row += most) {
    const rows = Math.min(most, n - row);
    const right = strip.base + 2 * rows * p;
    copyStrip(m, strip.base, x, p, n, row, rows);
    if (sign === 1) for (let s = strip.base + 1; s < right; s += 2) m[s] = -m[s];
    copyStrip(m, right, y, q, n, row, rows);
    const part = strip.adjointProduct(strip.base, p, right, q, rows)!;
    for (let s = 0; s < out.length; s++) out[s] = out[s] + part[s];
  }
  return out;
}

function copyStrip(
  to: Float64Array,
  at: number,
  x: ComplexArray,
  columns: number,
  n: number,
  row: number,
  rows: number,
): void {
  for (let j = 0; j < columns; j++) to.set(x.subarray(2 * (j * n + row), 2 * (j * n + row + rows)), at + 2 * rows * j);
}

/** Rows that pass at a time: those of a few columns then stay in the first-level cache. */
const ROWS = 512;

/** out += factor · X C, with X n × p and C p × q. */
export function addProduct(
  out: ComplexArray,
  x: ComplexArray,
  p: number,
  c: ComplexArray,
  q: number,
  n: number,
  factor = 1,
): ComplexArray {
  const memory = commonMemory(x, out);
  if (memory) {
    const scaled = factor === 1 ? c : c.map((v) => factor * v);
    if (memory.addProduct(out.byteOffset / 8, x.byteOffset / 8, p, scaled, q, n)) return out;
  }
  // Four columns of X at a time, so that a column of out is read and written a fourth as often.
  const c4 = new Float64Array(8);
  for (let row = 0; row < n; row += ROWS) {
    const rows = Math.min(ROWS, n - row);
    for (let i = 0; i < p; i += 4) {
      for (let j = 0; j < q; j++) {
        for (let k = 0; k < 8; k++) c4[k] = i + (k >> 1) < p ? factor * c[2 * (i + j * p) + k] : 0;
        addColumns(out, 2 * (j * n + row), x, 2 * n, i, p, c4, 2 * row, rows);
      }
    }
  }
  return out;
}

/** Rows of one column of out += up to four columns of x from i on, times the numbers of c. */
function addColumns(
  out: ComplexArray,
  to: number,
  x: ComplexArray,
  step: number,
  i: number,
  p: number,
  c: Float64Array,
  from: number,
  rows: number,
): void {
  let a0 = i * step + from;
  let a1 = i + 1 < p ? a0 + step : a0;
  let a2 = i + 2 < p ? a1 + step : a0;
  let a3 = i + 3 < p ? a2 + step : a0;
  const [r0, i0, r1, i1, r2, i2, r3, i3] = c;
  for (const end = to + 2 * rows; to < end; to += 2, a0 += 2, a1 += 2, a2 += 2, a3 += 2) {
    const x0 = x[a0];
    const y0 = x[a0 + 1];
    const x1 = x[a1];
    const y1 = x[a1 + 1];
    const x2 = x[a2];
    const y2 = x[a2 + 1];
    const x3 = x[a3];
    const y3 = x[a3 + 1];
    out[to] += r0 * x0 - i0 * y0 + (r1 * x1 - i1 * y1) + (r2 * x2 - i2 * y2 + (r3 * x3 - i3 * y3));
    out[to + 1] += r0 * y0 + i0 * x0 + (r1 * y1 + i1 * x1) + (r2 * y2 + i2 * x2 + (r3 * y3 + i3 * x3));
  }
}

/** X C as a new n × q matrix. */
export const combine = (x: ComplexArray, p: number, c: ComplexArray, q: number, n: number): ComplexArray =>
  addProduct(new Float64Array(2 * n * q), x, p, c, q, n);

/** Euclidean norm of column j. */
export function columnNorm(x: ComplexArray, j: number, n: number): number {
  let sum = 0;
  for (let s = 2 * j * n; s < 2 * (j + 1) * n; s++) sum += x[s] * x[s];
  return Math.sqrt(sum);
}

/** Multiplies column j by a complex number. */
export function scaleColumn(x: ComplexArray, j: number, n: number, re: number, im = 0): void {
  for (let s = 2 * j * n; s < 2 * (j + 1) * n; s += 2) {
    const a = x[s];
    const b = x[s + 1];
    x[s] = re * a - im * b;
    x[s + 1] = re * b + im * a;
  }
}

/** Scales every column to Euclidean norm 1. */
export function normaliseColumns(x: ComplexArray, columns: number, n: number): ComplexArray {
  for (let j = 0; j < columns; j++) {
    const norm = columnNorm(x, j, n);
    if (norm > 0) scaleColumn(x, j, n, 1 / norm);
  }
  return x;
}

/**
 * Orthonormalises the columns of W (n × q) against the orthonormal V (n × p) and among themselves, block classical
 * Gram–Schmidt twice. Returns the coefficients: H (p × q) with W_old = V H + W R, and R (q × q) upper triangular.
 * Columns that vanish (relative 1e-12) are replaced by zero and their R diagonal is 0.
 */
export function orthonormalise(
  w: ComplexArray,
  q: number,
  v: ComplexArray,
  p: number,
  n: number,
): { readonly h: ComplexArray; readonly r: ComplexArray } {
  const before = Array.from({ length: q }, (_, j) => columnNorm(w, j, n));
  const h = new Float64Array(2 * p * q);
  for (let pass = 0; pass < 2; pass++) {
    if (p === 0) break;
    const c = adjointProduct(v, p, w, q, n);
    addProduct(w, v, p, c, q, n, -1);
    for (let s = 0; s < c.length; s++) h[s] = h[s] + c[s];
  }
  const r = new Float64Array(2 * q * q);
  for (let j = 0; j < q; j++) {
    const wj = w.subarray(2 * j * n, 2 * (j + 1) * n);
    for (let pass = 0; pass < 2; pass++) {
      if (j === 0) break;
      const c = adjointProduct(w, j, wj, 1, n);
      addProduct(wj, w, j, c, 1, n, -1);
      for (let i = 0; i < j; i++) {
        r[2 * (i + j * q)] = r[2 * (i + j * q)] + c[2 * i];
        r[2 * (i + j * q) + 1] = r[2 * (i + j * q) + 1] + c[2 * i + 1];
      }
    }
    const norm = columnNorm(wj, 0, n);
    if (norm <= 1e-12 * before[j] || norm === 0) {
      wj.fill(0);
      continue;
    }
    r[2 * (j + j * q)] = norm;
    scaleColumn(wj, 0, n, 1 / norm);
  }
  return { h, r };
}

/**
 * The columns as an orthonormal basis of what they span. Members of a degenerate group may have grown nearly parallel,
 * which costs the block Rayleigh functional the square of their condition; columns that depend on the others altogether
 * only get norm 1.
 */
export function orthonormalBasis(x: ComplexArray, columns: number, n: number): ComplexArray {
  if (columns === 1) return normaliseColumns(x, columns, n);
  const before = Float64Array.from(x);
  const { r } = orthonormalise(x, columns, new Float64Array(0), 0, n);
  for (let j = 0; j < columns; j++) if (r[2 * (j + j * columns)] === 0) return normaliseColumns(before, columns, n);
  return x;
}
