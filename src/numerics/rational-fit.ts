// Which rational function runs through given values on the real axis, and where are its zeros and poles?

import { complex, type Complex, type ComplexArray, divide, multiply, subtract } from './complex.ts';
import { eigenGeneral } from './eigenvalues.ts';
import { luFactor, luSolveInto } from './lu.ts';
import { singularForm } from './singular-values.ts';

/** r(x) = Σ w_j f_j/(x − x_j) / Σ w_j/(x − x_j): barycentric form, degree one below the number of support points. */
export interface RationalFit {
  readonly support: Float64Array;
  readonly values: ComplexArray;
  readonly weights: ComplexArray;
  /** Largest |f − r| over the given points. */
  readonly error: number;
}

/**
 * Support points join where the fit is worst, weights minimise the linearised error at the others, until the largest error
 * is `tolerance` times the largest value or the degree is at its limit.
 *
 * Source: Y. Nakatsukasa, O. Sète, L. N. Trefethen, The AAA algorithm for rational approximation, SIAM J. Sci. Comput. 40,
 * A1494 (2018).
 *
 * @throws RangeError for fewer than two points or values that are not finite.
 */
export function rationalFit(
  xs: Float64Array,
  values: ComplexArray,
  { tolerance = 1e-10, mostDegree = 60 }: { readonly tolerance?: number; readonly mostDegree?: number } = {},
): RationalFit {
  const n = xs.length;
  if (n < 2 || values.length < 2 * n || !values.every(Number.isFinite))
    throw new RangeError(`rationalFit: ${n} points; expected two or more with finite values`);
  let top = 0;
  for (let i = 0; i < n; i++) top = Math.max(top, Math.hypot(values[2 * i], values[2 * i + 1]));
  const chosen: number[] = [];
  const free = new Set(Array.from({ length: n }, (_, i) => i));
  const fitted = new Float64Array(2 * n);
  const mean = averageOf(values, n);
  for (let i = 0; i < n; i++) fitted.set(mean, 2 * i);
  let weights: ComplexArray = new Float64Array(0);
  let error = Infinity;
  while (chosen.length <= Math.min(mostDegree, (n >> 1) - 1)) {
    chosen.push(worstOf(values, fitted, free).at);
    free.delete(chosen[chosen.length - 1]);
    const rows = [...free];
    const m = chosen.length;
    const L = new Float64Array(2 * rows.length * m);
    chosen.forEach((j, c) => {
      rows.forEach((i, r) => {
        const d = 1 / (xs[i] - xs[j]);
        L[2 * (r + c * rows.length)] = (values[2 * i] - values[2 * j]) * d;
        L[2 * (r + c * rows.length) + 1] = (values[2 * i + 1] - values[2 * j + 1]) * d;
      });
    });
    weights = smallestVector(L, rows.length, m);
    for (const i of rows) {
      const { re, im } = evaluateAt(xs, values, chosen, weights, complex(xs[i]));
      fitted[2 * i] = re;
      fitted[2 * i + 1] = im;
    }
    error = worstOf(values, fitted, free).error;
    if (error <= tolerance * top) break;
  }
  return {
    support: Float64Array.from(chosen, (j) => xs[j]),
    values: Float64Array.from(chosen.flatMap((j) => [values[2 * j], values[2 * j + 1]])),
    weights,
    error,
  };
}

function averageOf(values: ComplexArray, n: number): ComplexArray {
  const out = new Float64Array(2);
  for (let i = 0; i < 2 * n; i++) out[i & 1] += values[i] / n;
  return out;
}

function worstOf(values: ComplexArray, fitted: ComplexArray, free: ReadonlySet<number>): { at: number; error: number } {
  let worst = { at: 0, error: -1 };
  for (const i of free) {
    const error = Math.hypot(values[2 * i] - fitted[2 * i], values[2 * i + 1] - fitted[2 * i + 1]);
    if (!(error <= worst.error)) worst = { at: i, error };
  }
  return worst;
}

/** Unit vector of the smallest singular value; of wide matrices one that the matrix takes to zero. */
function smallestVector(L: ComplexArray, rows: number, m: number): ComplexArray {
  if (rows < m) return smallestVector(padded(L, rows, m), m, m);
  return singularForm(L, rows, m).right.slice(2 * m * (m - 1), 2 * m * m);
}

function padded(L: ComplexArray, rows: number, m: number): ComplexArray {
  const out = new Float64Array(2 * m * m);
  for (let c = 0; c < m; c++) out.set(L.subarray(2 * rows * c, 2 * rows * (c + 1)), 2 * m * c);
  return out;
}

function evaluateAt(
  xs: ArrayLike<number>,
  values: ComplexArray,
  chosen: readonly number[],
  weights: ComplexArray,
  x: Complex,
): Complex {
  let above = complex(0);
  let below = complex(0);
  for (let c = 0; c < chosen.length; c++) {
    const j = chosen[c];
    const d = { re: x.re - xs[j], im: x.im };
    if (d.re === 0 && d.im === 0) return complex(values[2 * j], values[2 * j + 1]);
    const w = divide(complex(weights[2 * c], weights[2 * c + 1]), d);
    const f = multiply(w, complex(values[2 * j], values[2 * j + 1]));
    above = { re: above.re + f.re, im: above.im + f.im };
    below = { re: below.re + w.re, im: below.im + w.im };
  }
  return divide(above, below);
}

/** The fit at any complex x. */
export function evaluateFit({ support, values, weights }: RationalFit, x: Complex): Complex {
  return evaluateAt(support, values, Array.from(support, (_, i) => i), weights, x); // prettier-ignore
}

/** Zeros of the fit: of Σ w_j f_j/(x − x_j). */
export const zerosOfFit = (fit: RationalFit): Complex[] => arrowRoots(fit.support, products(fit));

/** Poles of the fit: zeros of Σ w_j/(x − x_j). */
export const polesOfFit = (fit: RationalFit): Complex[] => arrowRoots(fit.support, fit.weights);

function products({ values, weights }: RationalFit): ComplexArray {
  const out = new Float64Array(weights.length);
  for (let i = 0; i < weights.length; i += 2) {
    const { re, im } = multiply(complex(weights[i], weights[i + 1]), complex(values[i], values[i + 1]));
    out[i] = re;
    out[i + 1] = im;
  }
  return out;
}

/**
 * Finite x with Σ c_j/(x − x_j) = 0: eigenvalues of the arrow pencil E = [0 cᵀ; 1 diag x], B = diag(0, 1, …), shifted and
 * inverted, and polished by two steps of Newton's method.
 */
function arrowRoots(support: Float64Array, c: ComplexArray): Complex[] {
  const m = support.length;
  const n = m + 1;
  const low = support.reduce((a, b) => Math.min(a, b));
  const high = support.reduce((a, b) => Math.max(a, b));
  const width = Math.max(high - low, Number.MIN_VALUE);
  // in units of the width about the middle; the shift is no likely root
  const x = support.map((v) => (v - (low + high) / 2) / width);
  const shift = complex(0.0371, 0.0419);
  const E = new Float64Array(2 * n * n);
  for (let j = 0; j < m; j++) {
    E[2 * ((j + 1) * n)] = c[2 * j];
    E[2 * ((j + 1) * n) + 1] = c[2 * j + 1];
    E[2 * (j + 1)] = 1;
    E[2 * (j + 1 + (j + 1) * n)] = x[j] - shift.re;
    E[2 * (j + 1 + (j + 1) * n) + 1] = -shift.im;
  }
  const B = new Float64Array(2 * n * n);
  for (let j = 1; j < n; j++) B[2 * (j + j * n)] = 1;
  const lu = luFactor(E, n);
  if (lu.smallestPivot === 0) return [];
  const { values, convergence } = eigenGeneral(luSolveInto(B, lu, B, n), n);
  if (!convergence.converged) return [];
  const out: Complex[] = [];
  for (let i = 0; i < n; i++) {
    const mu = complex(values[2 * i], values[2 * i + 1]);
    // two eigenvalues are infinite: mu = 0 to rounding
    if (Math.hypot(mu.re, mu.im) < 1e-7) continue;
    const inverse = divide(complex(1), mu);
    let root = { re: shift.re + inverse.re, im: shift.im + inverse.im };
    for (let step = 0; step < 2; step++) root = newton(x, c, root);
    out.push({ re: (low + high) / 2 + width * root.re, im: width * root.im });
  }
  return out;
}

/** One step on Σ c_j/(x − x_j), where it leads no farther than a hundredth. */
function newton(x: Float64Array, c: ComplexArray, root: Complex): Complex {
  let value = complex(0);
  let slope = complex(0);
  for (let j = 0; j < x.length; j++) {
    const d = { re: root.re - x[j], im: root.im };
    if (d.re === 0 && d.im === 0) return root;
    const f = divide(complex(c[2 * j], c[2 * j + 1]), d);
    const g = divide(f, d);
    value = { re: value.re + f.re, im: value.im + f.im };
    slope = { re: slope.re - g.re, im: slope.im - g.im };
  }
  const change = divide(value, slope);
  return Math.hypot(change.re, change.im) < 0.01 ? subtract(root, change) : root;
}
