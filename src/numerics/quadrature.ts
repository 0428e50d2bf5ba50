// At which points, with which weights, is a polynomial integrated exactly?

import { diagonaliseTridiagonal } from './hermitian.ts';
import { jacobiDerivativesInto, jacobiInto, legendreInto } from './polynomials.ts';

/** Nodes in increasing order and their weights: ∫ f ≈ Σ weights[i] f(nodes[i]). */
export interface LineRule {
  readonly nodes: Float64Array;
  readonly weights: Float64Array;
}

/** ∫ f over the reference triangle (0,0), (1,0), (0,1) ≈ Σ weights[i] f(points[2i], points[2i+1]); weights sum to 1/2. */
export interface TriangleRule {
  readonly points: Float64Array; // [x0,y0,x1,y1,…]
  readonly weights: Float64Array;
}

/**
 * Gauss–Legendre rule on [−1, 1]: n points, exact to degree 2n − 1. Memoised: do not write to the result.
 *
 * Largest absolute error against mpmath (60 digits; test/checks/gauss-rules.py), all rules of this file, n ≤ 64:
 *
 *     rule                       nodes    weights   weights, relative
 *     Legendre                   2.3e-16  2.3e-16   1.4e-14
 *     Lobatto                    1.2e-16  1.7e-16   3.8e-15
 *     Jacobi, whole exponents    1.2e-16  2.3e-16   2.6e-14
 *     Jacobi, broken exponents   1.2e-16  3.1e-15   6.4e-15
 *
 * Formula: Newton on P_n from Tricomi's estimate; w = 2 / ((1 − x²) P_n′²) (DLMF 3.5.v).
 */
export function gaussLegendre(n: number): LineRule {
  checkCount('gaussLegendre', n, 1);
  return memoised(legendreRules, String(n), () => {
    const nodes = new Float64Array(n);
    const weights = new Float64Array(n);
    const values = new Float64Array(n + 1);
    for (let i = 0; i < (n + 1) >> 1; i++) {
      // Half of the rule, x > 0, the other half by symmetry.
      const angle = (Math.PI * (4 * i + 3)) / (4 * n + 2);
      let x = 2 * i + 1 === n ? 0 : (1 - (n - 1) / (8 * n ** 3)) * Math.cos(angle);
      let slope = 0;
      let step = 0;
      for (let turn = 0; turn < 50; turn++) {
        legendreInto(values, n, x);
        slope = (n * (values[n - 1] - x * values[n])) / ((1 - x) * (1 + x));
        step = values[n] / slope;
        if (Math.abs(step) <= 2e-16 || 2 * i + 1 === n) break;
        x -= step;
      }
      // The root lies at x − step, which x alone cannot hold: (1 − x²) P′² changes by 2x P′² per unit of x there.
      const q = (1 - x) * (1 + x);
      const weight = (2 / (q * slope * slope)) * (1 + (2 * x * step) / q);
      nodes[n - 1 - i] = x;
      nodes[i] = x === 0 ? 0 : -x;
      weights[n - 1 - i] = weights[i] = weight;
    }
    return { nodes, weights };
  });
}

/**
 * Gauss–Lobatto rule on [−1, 1]: n ≥ 2 points with both ends, exact to degree 2n − 3. Memoised: do not write to it.
 * Inner nodes are the zeros of P′_{n−1}, that is of P^{(1,1)}_{n−2}; w = 2 / (n (n−1) P_{n−1}(x)²) (Abramowitz & Stegun 25.4.32).
 */
export function gaussLobatto(n: number): LineRule {
  checkCount('gaussLobatto', n, 2);
  return memoised(lobattoRules, String(n), () => {
    const nodes = new Float64Array(n);
    const weights = new Float64Array(n);
    const inner = n > 2 ? jacobiZeros(n - 2, 1, 1) : new Float64Array(0);
    const values = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      const j = n - 1 - i;
      // Symmetrised: the two halves agree to the last bit.
      const x = i === 0 ? -1 : j === 0 ? 1 : i === j ? 0 : (inner[i - 1] - inner[j - 1]) / 2;
      nodes[i] = x;
      const p = legendreInto(values, n - 1, x)[n - 1];
      weights[i] = 2 / (n * (n - 1) * p * p);
    }
    return { nodes, weights };
  });
}

/**
 * Gauss–Jacobi rule: ∫_{−1}^{1} (1−x)^a (1+x)^b f(x) dx ≈ Σ w f, n points, exact to degree 2n − 1; a, b > −1.
 * Memoised: do not write to it.
 *
 *     w = 2^{a+b+1} Γ(n+a+1) Γ(n+b+1) / (n! Γ(n+a+b+1)) / ((1−x²) P_n′²)          (DLMF 3.5.v)
 */
export function gaussJacobi(n: number, a: number, b: number): LineRule {
  checkCount('gaussJacobi', n, 1);
  if (!(a > -1 && b > -1)) throw new RangeError(`gaussJacobi: exponents a = ${a}, b = ${b}; both must exceed -1`);
  return memoised(jacobiRules, `${n} ${a} ${b}`, () => {
    const nodes = jacobiZeros(n, a, b);
    const weights = new Float64Array(n);
    const values = new Float64Array(n + 1);
    const slopes = new Float64Array(n + 1);
    // C_1 = 2^{a+b+1} (a+1)(b+1) B(a+1, b+1), then C_{j+1} / C_j = (j+a+1)(j+b+1) / ((j+1)(j+a+b+1)).
    let c = 2 ** (a + b + 1) * (a + 1) * (b + 1) * beta(a + 1, b + 1);
    for (let j = 1; j < n; j++) c *= ((j + a + 1) * (j + b + 1)) / ((j + 1) * (j + a + b + 1));
    for (let i = 0; i < n; i++) {
      const x = nodes[i];
      const q = (1 - x) * (1 + x);
      const slope = jacobiDerivativesInto(slopes, n, a, b, x)[n];
      const step = jacobiInto(values, n, a, b, x)[n] / slope;
      // First-order correction for the root at x − step: (1−x²)P″ = (a − b + (a+b+2)x) P′ at a root.
      const relative = (2 * (a - b) + 2 * (a + b + 1) * x) / q;
      weights[i] = (c / (q * slope * slope)) * (1 + relative * step);
    }
    return { nodes, weights };
  });
}

/**
 * A rule on the reference triangle exact for every polynomial of total degree ≤ `degree` (0 … 100), all weights
 * positive, all points inside; ⌈(degree+1)/2⌉² points. Memoised: do not write to it.
 *
 * Collapsed square (Duffy 1982; Stroud 1971): x = (1+u)(1−v)/4, y = (1+v)/2 with Gauss–Legendre in u and
 * Gauss–Jacobi (1,0) in v.
 */
export function triangleRule(degree: number): TriangleRule {
  if (!Number.isInteger(degree) || degree < 0 || degree > 100)
    throw new RangeError(`triangleRule: degree ${degree}; expected a whole number from 0 to 100`);
  const n = (degree >> 1) + 1;
  return memoised(triangleRules, String(n), () => {
    const along = gaussLegendre(n);
    const across = gaussJacobi(n, 1, 0);
    const points = new Float64Array(2 * n * n);
    const weights = new Float64Array(n * n);
    let at = 0;
    for (let j = 0; j < n; j++) {
      const v = across.nodes[j];
      for (let i = 0; i < n; i++) {
        points[2 * at] = ((1 + along.nodes[i]) * (1 - v)) / 4;
        points[2 * at + 1] = (1 + v) / 2;
        weights[at++] = (along.weights[i] * across.weights[j]) / 8;
      }
    }
    return { points, weights };
  });
}

const legendreRules = new Map<string, LineRule>();
const lobattoRules = new Map<string, LineRule>();
const jacobiRules = new Map<string, LineRule>();
const triangleRules = new Map<string, TriangleRule>();

function memoised<T>(store: Map<string, T>, key: string, make: () => T): T {
  let rule = store.get(key);
  if (rule === undefined) store.set(key, (rule = make()));
  return rule;
}

function checkCount(who: string, n: number, least: number): void {
  if (!Number.isInteger(n) || n < least)
    throw new RangeError(`${who}: ${n} points; expected a whole number of at least ${least}`);
}

/**
 * Zeros of P_n^{(a,b)}, increasing: eigenvalues of the recurrence's symmetric matrix, then two Newton steps.
 * Source: G. H. Golub, J. H. Welsch, Math. Comp. 23, 221 (1969).
 */
function jacobiZeros(n: number, a: number, b: number): Float64Array {
  const zeros = new Float64Array(n);
  const couplings = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    const s = 2 * j + a + b;
    // j = 0, and j = 1 below, with the factor a + b (+ 1) that cancels taken out.
    zeros[j] = j === 0 ? (b - a) / (a + b + 2) : ((b - a) * (b + a)) / (s * (s + 2));
    const t = s + 2;
    const common = (4 * (j + 1) * (j + 1 + a) * (j + 1 + b)) / (t * t * (t + 1));
    couplings[j] = Math.sqrt(j === 0 ? common : (common * (j + 1 + a + b)) / (t - 1));
  }
  diagonaliseTridiagonal(zeros, couplings, new Float64Array(0), 0);
  zeros.sort();
  const values = new Float64Array(n + 1);
  const slopes = new Float64Array(n + 1);
  return zeros.map((start) => {
    let x = start;
    for (let turn = 0; turn < 2; turn++)
      x -= jacobiInto(values, n, a, b, x)[n] / jacobiDerivativesInto(slopes, n, a, b, x)[n];
    return x;
  });
}

/** Euler's beta function; a product where one argument is a whole number, else by `logGamma`. */
function beta(p: number, q: number): number {
  if (Number.isInteger(p) && !Number.isInteger(q)) return beta(q, p);
  if (!Number.isInteger(q) || q > 1000) return Math.exp(logGamma(p) + logGamma(q) - logGamma(p + q));
  let result = 1 / p;
  for (let k = 1; k < q; k++) result *= k / (p + k);
  return result;
}

/** log Γ(x), x > 0, relative error about 1e-15: Stirling's series (DLMF 5.11.1) after shifting the argument above 15. */
function logGamma(x: number): number {
  let shift = 1;
  let y = x;
  while (y < 15) shift *= y++;
  const r = 1 / (y * y);
  const tail = (1 / 12 - r * (1 / 360 - r * (1 / 1260 - r * (1 / 1680 - r / 1188)))) / y;
  return (y - 0.5) * Math.log(y) - y + 0.5 * Math.log(2 * Math.PI) + tail - Math.log(shift);
}
