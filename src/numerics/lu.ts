// What is the solution of a small dense complex system, and its determinant?

import type { Complex, ComplexArray } from './complex.ts';

/** P A = L U of an n × n matrix: L (unit diagonal) below, U on and above the diagonal of `factors`. */
export interface LuFactors {
  readonly n: number;
  /** Column-major interleaved, length 2n². */
  readonly factors: ComplexArray;
  /** Row swapped with row k at step k. */
  readonly pivots: Int32Array;
  /** log det A: Re = log|det|, Im = phase on some branch. Re = −∞ for an exactly singular matrix. */
  readonly logDeterminant: Complex;
  /** Smallest and largest |U_kk|; their quotient is a first hint of the condition, see `reciprocalCondition`. */
  readonly smallestPivot: number;
  readonly largestPivot: number;
  /** ‖A‖₁, largest column sum of moduli. */
  readonly norm: number;
}

/**
 * Factors a copy of the n × n matrix A (column-major interleaved, length ≥ 2n²) with partial pivoting. A singular
 * matrix is no error: `smallestPivot` is 0 and solving with it gives infinities.
 *
 * @throws RangeError when A is too short or holds a number that is not finite.
 */
export function luFactor(A: ComplexArray, n: number): LuFactors {
  checkSquare('luFactor', A, n);
  const a = A.slice(0, 2 * n * n);
  const pivots = new Int32Array(n);
  const norm = columnNorm(a, n);
  let logModulus = 0;
  let phase = 0;
  let smallestPivot = Infinity;
  let largestPivot = 0;
  for (let j = 0; j < n; j++) {
    const cj = 2 * n * j;
    // Column j: earlier swaps, then earlier columns of L times the finished entries of U.
    for (let k = 0; k < j; k++) swapEntries(a, cj + 2 * k, cj + 2 * pivots[k]);
    for (let k = 0; k < j; k++) addMultiple(a, cj, 2 * n * k, k + 1, n, -a[cj + 2 * k], -a[cj + 2 * k + 1]);
    // Pivot: the largest |re| + |im|.
    let best = -1;
    let p = j;
    for (let i = j; i < n; i++) {
      const size = Math.abs(a[cj + 2 * i]) + Math.abs(a[cj + 2 * i + 1]);
      if (size > best) {
        best = size;
        p = i;
      }
    }
    pivots[j] = p;
    if (p !== j) {
      phase += Math.PI;
      for (let k = 0; k <= j; k++) swapEntries(a, 2 * (n * k + j), 2 * (n * k + p));
    }
    const dr = a[cj + 2 * j];
    const di = a[cj + 2 * j + 1];
    const modulus = Math.hypot(dr, di);
    logModulus += Math.log(modulus);
    phase += Math.atan2(di, dr);
    if (modulus < smallestPivot) smallestPivot = modulus;
    if (modulus > largestPivot) largestPivot = modulus;
    if (modulus === 0) continue;
    const [ir, ii] = reciprocal(dr, di);
    for (let i = cj + 2 * j + 2, end = cj + 2 * n; i < end; i += 2) {
      const re = a[i];
      const im = a[i + 1];
      a[i] = re * ir - im * ii;
      a[i + 1] = re * ii + im * ir;
    }
  }
  return {
    n,
    factors: a,
    pivots,
    logDeterminant: { re: logModulus, im: phase },
    smallestPivot: n === 0 ? 1 : smallestPivot,
    largestPivot: n === 0 ? 1 : largestPivot,
    norm,
  };
}

/** Solves A X = B for `columns` right-hand sides (column-major interleaved, n rows); `out` may be `rhs`. */
export function luSolveInto(out: ComplexArray, lu: LuFactors, rhs: ComplexArray, columns = 1): ComplexArray {
  const { n, factors, pivots } = lu;
  checkRightHandSide(out, rhs, n, columns);
  if (out !== rhs) out.set(rhs.subarray(0, 2 * n * columns));
  for (let c = 0; c < columns; c++) {
    const at = 2 * n * c;
    for (let k = 0; k < n; k++) swapEntries(out, at + 2 * k, at + 2 * pivots[k]);
    for (let k = 0; k < n; k++) axpy(out, at, factors, 2 * n * k, k + 1, n, -out[at + 2 * k], -out[at + 2 * k + 1]);
    for (let k = n - 1; k >= 0; k--) {
      const d = 2 * (n * k + k);
      divideEntry(out, at + 2 * k, factors[d], factors[d + 1]);
      axpy(out, at, factors, 2 * n * k, 0, k, -out[at + 2 * k], -out[at + 2 * k + 1]);
    }
  }
  return out;
}

/** Solves A X = B and returns X new; see `luSolveInto`. */
export const luSolve = (lu: LuFactors, rhs: ComplexArray, columns = 1): ComplexArray =>
  luSolveInto(new Float64Array(2 * lu.n * columns), lu, rhs, columns);

/** Solves Aᴴ X = B (conjugate transpose); `out` may be `rhs`. For Aᵀ conjugate both sides. */
export function luSolveAdjointInto(out: ComplexArray, lu: LuFactors, rhs: ComplexArray, columns = 1): ComplexArray {
  const { n, factors, pivots } = lu;
  checkRightHandSide(out, rhs, n, columns);
  if (out !== rhs) out.set(rhs.subarray(0, 2 * n * columns));
  for (let c = 0; c < columns; c++) {
    const at = 2 * n * c;
    for (let k = 0; k < n; k++) {
      subtractDot(out, at, at + 2 * k, factors, 2 * n * k, 0, k);
      const d = 2 * (n * k + k);
      divideEntry(out, at + 2 * k, factors[d], -factors[d + 1]);
    }
    for (let k = n - 1; k >= 0; k--) subtractDot(out, at, at + 2 * k, factors, 2 * n * k, k + 1, n);
    for (let k = n - 1; k >= 0; k--) swapEntries(out, at + 2 * k, at + 2 * pivots[k]);
  }
  return out;
}

/**
 * 1 / (‖A‖₁ ‖A⁻¹‖₁), the second factor estimated from below (usually within 3): 0 for a singular matrix.
 * Source: N. J. Higham, FORTRAN codes for estimating the one-norm, ACM Trans. Math. Software 14, 381 (1988).
 */
export function reciprocalCondition(lu: LuFactors): number {
  const { n, norm } = lu;
  if (n === 0) return 1;
  if (lu.smallestPivot === 0) return 0;
  let x = new Float64Array(2 * n);
  for (let i = 0; i < n; i++) x[2 * i] = 1 / n;
  let estimate = 0;
  let last = -1;
  for (let turn = 0; turn < 5; turn++) {
    const y = luSolve(lu, x);
    const size = sumOfModuli(y);
    if (!Number.isFinite(size)) return 0;
    if (turn > 0 && size <= estimate) break;
    estimate = size;
    for (let i = 0; i < 2 * n; i += 2) {
      const r = Math.hypot(y[i], y[i + 1]);
      y[i] = r === 0 ? 1 : y[i] / r;
      y[i + 1] = r === 0 ? 0 : y[i + 1] / r;
    }
    luSolveAdjointInto(y, lu, y);
    const peak = largestEntry(y);
    if (peak === last) break;
    last = peak;
    x = new Float64Array(2 * n);
    x[2 * peak] = 1;
  }
  // A second, alternating trial vector guards against unlucky cancellation.
  const trial = new Float64Array(2 * n);
  for (let i = 0; i < n; i++) trial[2 * i] = (i & 1 ? -1 : 1) * (1 + i / Math.max(1, n - 1));
  estimate = Math.max(estimate, (2 * sumOfModuli(luSolve(lu, trial))) / (3 * n));
  return 1 / (norm * estimate);
}

/** Throws unless A holds an n × n complex matrix of finite numbers. */
export function checkSquare(who: string, A: ComplexArray, n: number): void {
  checkMatrix(who, A, n, n);
}

/** Throws unless A holds a rows × columns complex matrix of finite numbers. */
export function checkMatrix(who: string, A: ComplexArray, rows: number, columns: number): void {
  if (!(Number.isInteger(rows) && rows >= 0 && Number.isInteger(columns) && columns >= 0))
    throw new RangeError(`${who}: a matrix of ${rows} × ${columns}; expected whole numbers ≥ 0`);
  const length = 2 * rows * columns;
  if (A.length < length)
    throw new RangeError(`${who}: ${A.length} numbers for a complex ${rows} × ${columns} matrix; expected ${length}`);
  for (let i = 0; i < length; i++) {
    if (!Number.isFinite(A[i])) {
      const entry = i >> 1;
      throw new RangeError(
        `${who}: entry (${entry % rows}, ${Math.floor(entry / rows)}) is ${A[i]}; expected finite numbers`,
      );
    }
  }
}

function checkRightHandSide(out: ComplexArray, rhs: ComplexArray, n: number, columns: number): void {
  const length = 2 * n * columns;
  if (rhs.length < length || out.length < length)
    throw new RangeError(
      `luSolve: ${rhs.length} in, ${out.length} out for ${columns} columns of ${n}; expected ${length}`,
    );
}

function columnNorm(a: ComplexArray, n: number): number {
  let norm = 0;
  for (let j = 0; j < n; j++) norm = Math.max(norm, sumOfModuli(a.subarray(2 * n * j, 2 * n * (j + 1))));
  return norm;
}

function sumOfModuli(x: ComplexArray): number {
  let sum = 0;
  for (let i = 0; i < x.length; i += 2) sum += Math.hypot(x[i], x[i + 1]);
  return sum;
}

function largestEntry(x: ComplexArray): number {
  let best = -1;
  let at = 0;
  for (let i = 0; i < x.length; i += 2) {
    const size = Math.hypot(x[i], x[i + 1]);
    if (size > best) {
      best = size;
      at = i >> 1;
    }
  }
  return at;
}

function swapEntries(a: ComplexArray, p: number, q: number): void {
  const re = a[p];
  const im = a[p + 1];
  a[p] = a[q];
  a[p + 1] = a[q + 1];
  a[q] = re;
  a[q + 1] = im;
}

/** Column at `to` += (fr + i fi) · column at `from`, rows [first, last), within one array. */
const addMultiple = (
  a: ComplexArray,
  to: number,
  from: number,
  first: number,
  last: number,
  fr: number,
  fi: number,
): void => axpy(a, to, a, from, first, last, fr, fi);

function axpy(
  y: ComplexArray,
  to: number,
  x: ComplexArray,
  from: number,
  first: number,
  last: number,
  fr: number,
  fi: number,
): void {
  if (fr === 0 && fi === 0) return;
  const shift = from - to;
  for (let i = to + 2 * first, end = to + 2 * last; i < end; i += 2) {
    const re = x[i + shift];
    const im = x[i + shift + 1];
    y[i] += fr * re - fi * im;
    y[i + 1] += fr * im + fi * re;
  }
}

/** y[target] −= Σ conj(column entry) · y entry, rows [first, last). */
function subtractDot(
  y: ComplexArray,
  at: number,
  target: number,
  x: ComplexArray,
  from: number,
  first: number,
  last: number,
): void {
  let sr = 0;
  let si = 0;
  for (let i = first; i < last; i++) {
    const xr = x[from + 2 * i];
    const xi = x[from + 2 * i + 1];
    const yr = y[at + 2 * i];
    const yi = y[at + 2 * i + 1];
    sr += xr * yr + xi * yi;
    si += xr * yi - xi * yr;
  }
  y[target] -= sr;
  y[target + 1] -= si;
}

/** 1/(re + i im) without overflow of re² + im². */
function reciprocal(re: number, im: number): readonly [number, number] {
  if (Math.abs(re) >= Math.abs(im)) {
    const t = im / re;
    const d = re + im * t;
    return [1 / d, -t / d];
  }
  const t = re / im;
  const d = re * t + im;
  return [t / d, -1 / d];
}

function divideEntry(a: ComplexArray, at: number, dr: number, di: number): void {
  const [ir, ii] = reciprocal(dr, di);
  const re = a[at];
  const im = a[at + 1];
  a[at] = re * ir - im * ii;
  a[at + 1] = re * ii + im * ir;
}
