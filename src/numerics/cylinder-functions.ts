// What are the Bessel and Hankel functions of all whole orders at one complex argument?

import type { Complex, ComplexArray } from './complex.ts';

/** 1 = H⁽¹⁾ (outgoing under exp(−iωt)), 2 = H⁽²⁾ (incoming). */
export type HankelKind = 1 | 2;

/**
 * A sequence of cylinder functions of orders 0 … n−1 without overflow: value m is
 * mantissas[m] · 2^exponents[m].
 */
export interface ScaledSequence {
  readonly mantissas: ComplexArray;
  readonly exponents: Int32Array;
}

/** J_m, H⁽¹⁾_m and H⁽²⁾_m of one argument, orders 0 … M+1 (one more than asked, for the derivatives). */
export interface ScaledCylinderFunctions {
  readonly argument: Complex;
  readonly besselJ: ScaledSequence;
  readonly hankel1: ScaledSequence;
  readonly hankel2: ScaledSequence;
}

/**
 * J_0(z) … J_M(z). Orders too high for a double underflow to 0; see `logBesselJ`.
 *
 * Domain of every function in this file: Re z > 0, |z| ≥ 1e-150, |Im z| ≤ 600, whole M ≥ 0. RangeError outside.
 *
 * Largest relative error against mpmath (200 digits) at the 105 points of test/checks/cylinder-functions.py,
 * orders to 600, |Im z| ≤ 60, of the function or its derivative:
 *
 *     |z|       J         H decaying, growing with |Im z|
 *     < 2       1.3e-14   1.3e-14   1.3e-14
 *     2 – 20    1.8e-14   1.4e-14   1.4e-14
 *     20 – 200  2.7e-14   1.2e-14   1.9e-14
 *
 * (Near a zero of a function its error is this times the neighbouring order, not times the value.) All orders to 60 at
 * one argument take about 0.05 ms.
 */
export const besselJ = (M: number, z: Complex): ComplexArray =>
  plainValues(scaledCylinderFunctions(M, z).besselJ, M + 1);

/** J_0′(z) … J_M′(z), derivatives with respect to z; see `besselJ`. */
export const besselJDerivatives = (M: number, z: Complex): ComplexArray =>
  plainValues(scaledDerivatives(scaledCylinderFunctions(M, z).besselJ), M + 1);

/** log J_0(z) … log J_M(z), principal branch (Im in (−π, π]); no underflow. −∞ at an exact zero. */
export const logBesselJ = (M: number, z: Complex): ComplexArray =>
  logarithms(scaledCylinderFunctions(M, z).besselJ, M + 1);

/** J′_m(z)/J_m(z), m = 0…M; see `besselJ`. */
export function besselLogarithmicDerivatives(M: number, z: Complex): ComplexArray {
  const sequence = scaledCylinderFunctions(M, z).besselJ;
  return quotients(scaledDerivatives(sequence), sequence, M + 1);
}

/** H_0(z) … H_M(z) of the kind; overflows to ±∞ where a double does, see `logHankel`. Accuracy as for `besselJ`. */
export const hankel = (kind: HankelKind, M: number, z: Complex): ComplexArray =>
  plainValues(hankelSequence(kind, M, z), M + 1);

/** H_0′(z) … H_M′(z) of the kind, derivatives with respect to z. */
export const hankelDerivatives = (kind: HankelKind, M: number, z: Complex): ComplexArray =>
  plainValues(scaledDerivatives(hankelSequence(kind, M, z)), M + 1);

/** log H_0(z) … log H_M(z), principal branch (Im in (−π, π]); no overflow. */
export const logHankel = (kind: HankelKind, M: number, z: Complex): ComplexArray =>
  logarithms(hankelSequence(kind, M, z), M + 1);

/** H′_m(z)/H_m(z), m = 0…M, no overflow; what closes a channel of order ±m on a circle (H_{−m} = (−1)^m H_m). */
export function logarithmicDerivatives(kind: HankelKind, M: number, z: Complex): ComplexArray {
  const sequence = hankelSequence(kind, M, z);
  return quotients(scaledDerivatives(sequence), sequence, M + 1);
}

/** H_m(z) / H_m(reference), m = 0…M, no overflow: how a channel wave grows or falls from one radius to another. */
export const hankelRatios = (kind: HankelKind, M: number, z: Complex, reference: Complex): ComplexArray =>
  quotients(hankelSequence(kind, M, z), hankelSequence(kind, M, reference), M + 1);

/** J_m(z) / J_m(reference), m = 0…M, no underflow. */
export const besselRatios = (M: number, z: Complex, reference: Complex): ComplexArray =>
  quotients(scaledCylinderFunctions(M, z).besselJ, scaledCylinderFunctions(M, reference).besselJ, M + 1);

/**
 * All three functions at once, scaled, orders 0 … M+1.
 *
 * In the upper half plane H⁽¹⁾ decays and J ≈ H⁽²⁾/2 grows, so each sequence is built where it is stable:
 * J downward (Miller), normalised by e^{−iz} = J_0 + 2 Σ (−i)^m J_m whose terms do not cancel there;
 * H⁽¹⁾ upward from H⁽¹⁾_0 and H⁽¹⁾_1; H⁽²⁾ = 2J − H⁽¹⁾. The lower half plane follows by conjugation.
 * Source: W. Gautschi, SIAM Review 9, 24 (1967) for Miller's recurrence; DLMF 10.12.1, 10.6.1, 10.4.4.
 */
export function scaledCylinderFunctions(M: number, z: Complex): ScaledCylinderFunctions {
  checkOrderAndArgument(M, z);
  const lower = z.im < 0;
  const x = z.re;
  const y = Math.abs(z.im);
  const J = millerSequence(M + 2, x, y);
  const decaying = upwardSequence(M + 2, x, y, decayingStart(x, y, J));
  const growing = twiceMinus(J, decaying);
  if (lower) for (const sequence of [J, decaying, growing]) conjugateInPlace(sequence);
  return {
    argument: z,
    besselJ: J,
    hankel1: lower ? growing : decaying,
    hankel2: lower ? decaying : growing,
  };
}

/**
 * Derivatives of a scaled sequence of n orders, orders 0 … n−2: C_0′ = −C_1, C_m′ = (C_{m−1} − C_{m+1})/2
 * (DLMF 10.6.1); neither difference cancels where the sequence is monotone.
 */
export function scaledDerivatives(sequence: ScaledSequence): ScaledSequence {
  const { mantissas, exponents } = sequence;
  const n = exponents.length - 1;
  const slopes = new Float64Array(2 * n);
  const powers = new Int32Array(n);
  for (let m = 0; m < n; m++) {
    const up = m + 1;
    const down = Math.max(m - 1, 0);
    const power = Math.max(exponents[up], exponents[down]);
    const a = m === 0 ? 0 : 0.5 * 2 ** (exponents[down] - power);
    const b = (m === 0 ? 1 : 0.5) * 2 ** (exponents[up] - power);
    slopes[2 * m] = a * mantissas[2 * down] - b * mantissas[2 * up];
    slopes[2 * m + 1] = a * mantissas[2 * down + 1] - b * mantissas[2 * up + 1];
    powers[m] = power;
  }
  return { mantissas: slopes, exponents: powers };
}

// Mantissas are brought back by this power of two when they exceed it; one step of a recurrence may then grow by
// 2^767 before a double overflows, which |z| ≥ 1e-150 and orders below 2^200 guarantee.
const STEP = 256;
const BIG = 2 ** STEP;
const SMALL = 2 ** -STEP;

const EULER_GAMMA = 0.5772156649015329; // DLMF 5.2.3

function checkOrderAndArgument(M: number, z: Complex): void {
  if (!Number.isInteger(M) || M < 0)
    throw new RangeError(`cylinder functions: order ${M}; expected a whole number ≥ 0`);
  const r = Math.hypot(z.re, z.im);
  if (!(z.re > 0)) {
    throw new RangeError(
      `cylinder functions: argument ${z.re} ${z.im < 0 ? '-' : '+'} ${Math.abs(z.im)}i has real part ≤ 0; ` +
        'expected Re z > 0 (the branch cut lies along the negative axis)',
    );
  }
  if (!(r >= 1e-150 && r <= 1e6 && Math.abs(z.im) <= 600))
    throw new RangeError(`cylinder functions: argument ${z.re}, ${z.im}; expected 1e-150 ≤ |z| ≤ 1e6, |Im z| ≤ 600`);
}

function hankelSequence(kind: HankelKind, M: number, z: Complex): ScaledSequence {
  if (kind !== 1 && kind !== 2) throw new RangeError(`hankel: kind ${String(kind)}; expected 1 or 2`);
  const all = scaledCylinderFunctions(M, z);
  return kind === 1 ? all.hankel1 : all.hankel2;
}

/** J_0 … J_{n−1} at x + iy, y ≥ 0. */
function millerSequence(n: number, x: number, y: number): ScaledSequence {
  const [ux, uy, ux2, uy2] = reciprocalTwofold(x, y);

  // Where to start: the recurrence run upward from rest at the last order (or the turning point) must grow by 1e17;
  // what is wrong at the start then shows at the wanted orders as its square.
  let top = Math.max(n - 1, Math.floor(Math.hypot(x, y)));
  for (let pr = 0, pi = 0, qr = 1, qi = 0; Math.abs(qr) + Math.abs(qi) < 1e17; top++) {
    const cr = 2 * (top + 1) * ux;
    const ci = 2 * (top + 1) * uy;
    const tr = cr * qr - ci * qi - pr;
    const ti = cr * qi + ci * qr - pi;
    pr = qr;
    pi = qi;
    qr = tr;
    qi = ti;
  }

  const mantissas = new Float64Array(2 * n);
  const exponents = new Int32Array(n);
  let exponent = 0;
  let aboveR = 0; // order m+1
  let aboveI = 0;
  let hereR = 1; // order m
  let hereI = 0;
  let sumR = 0; // Σ' (−i)^m f_m
  let sumI = 0;
  for (let m = top; ; m--) {
    if (m < n) {
      mantissas[2 * m] = hereR;
      mantissas[2 * m + 1] = hereI;
      exponents[m] = exponent;
    }
    const weight = m === 0 ? 1 : 2;
    switch (m & 3) {
      case 0:
        sumR += weight * hereR;
        sumI += weight * hereI;
        break;
      case 1: // −i
        sumR += weight * hereI;
        sumI -= weight * hereR;
        break;
      case 2:
        sumR -= weight * hereR;
        sumI -= weight * hereI;
        break;
      default: // +i
        sumR -= weight * hereI;
        sumI += weight * hereR;
    }
    if (m === 0) break;
    const cr = 2 * m * ux + 2 * m * ux2;
    const ci = 2 * m * uy + 2 * m * uy2;
    const tr = cr * hereR - ci * hereI - aboveR;
    const ti = cr * hereI + ci * hereR - aboveI;
    aboveR = hereR;
    aboveI = hereI;
    hereR = tr;
    hereI = ti;
    while (Math.abs(hereR) + Math.abs(hereI) > BIG) {
      hereR *= SMALL;
      hereI *= SMALL;
      aboveR *= SMALL;
      aboveI *= SMALL;
      sumR *= SMALL;
      sumI *= SMALL;
      exponent += STEP;
    }
  }

  // J = f · e^{−iz} / Σ. The sum is brought near 1 first, by a power of two.
  const power = Math.ceil(Math.log2(Math.abs(sumR) + Math.abs(sumI)));
  sumR *= 2 ** -power;
  sumI *= 2 ** -power;
  const growth = Math.exp(y);
  const er = growth * Math.cos(x);
  const ei = -growth * Math.sin(x);
  const q = sumR * sumR + sumI * sumI;
  const fr = (er * sumR + ei * sumI) / q;
  const fi = (ei * sumR - er * sumI) / q;
  for (let m = 0; m < n; m++) {
    // Powers of two only, and large mantissas are halved in size first, so neither product overflows.
    const a = mantissas[2 * m] * SMALL;
    const b = mantissas[2 * m + 1] * SMALL;
    mantissas[2 * m] = a * fr - b * fi;
    mantissas[2 * m + 1] = a * fi + b * fr;
    exponents[m] += STEP - exponent - power;
  }
  return { mantissas, exponents };
}

/**
 * H_0 and H_1 of the first kind at x + iy, y ≥ 0, [re0, im0, re1, im1]. Neither way subtracts large from large:
 * H_0′/H_0 = w is known or H_0 is, and the Wronskian J_1 H_0 − J_0 H_1 = 2i/(πz) (DLMF 10.5.3) with H_1 = −H_0′ gives the rest.
 */
function decayingStart(x: number, y: number, J: ScaledSequence): readonly [number, number, number, number] {
  const r2 = x * x + y * y;
  // 2i/(πz)
  const wr = (2 / Math.PI) * (y / r2);
  const wi = (2 / Math.PI) * (x / r2);
  const [a, b, c, d] = plainValues(J, 2); // J_0, J_1
  if (r2 < 4) {
    const [hr, hi] = hankelZeroBySeries(x, y);
    // H_1 = (J_1 H_0 − 2i/(πz)) / J_0
    const tr = c * hr - d * hi - wr;
    const ti = c * hi + d * hr - wi;
    const q = a * a + b * b;
    return [hr, hi, (tr * a + ti * b) / q, (ti * a - tr * b) / q];
  }
  const [pr, pi] = hankelZeroSlope(x, y);
  // H_0 = 2i/(πz) / (J_0 w + J_1), scaled by |denominator|'s larger part: it grows like e^y
  const dr = a * pr - b * pi + c;
  const di = a * pi + b * pr + d;
  const size = Math.max(Math.abs(dr), Math.abs(di));
  const er = dr / size;
  const ei = di / size;
  const q = (er * er + ei * ei) * size;
  const hr = (wr * er + wi * ei) / q;
  const hi = (wi * er - wr * ei) / q;
  return [hr, hi, -(pr * hr - pi * hi), -(pr * hi + pi * hr)];
}

/**
 * H_0 = J_0 + iY_0 for |z| < 2 from Neumann's series (Abramowitz & Stegun 9.1.89)
 *     π Y_0 / 2 = (ln(z/2) + γ) J_0 − 2 Σ_{k≥1} (−1)^k J_{2k} / k .
 * The sum J + iY loses a factor e^{2y} ≤ 55 of a unit in the last place.
 */
function hankelZeroBySeries(x: number, y: number): readonly [number, number] {
  const terms = 14; // J_28(2) = 1e-30
  const J = plainValues(millerSequence(2 * terms + 1, x, y), 2 * terms + 1);
  let sr = 0;
  let si = 0;
  for (let k = terms; k >= 1; k--) {
    const weight = (k & 1 ? 2 : -2) / k;
    sr += weight * J[4 * k];
    si += weight * J[4 * k + 1];
  }
  const lr = Math.log(Math.hypot(x, y) / 2) + EULER_GAMMA;
  const li = Math.atan2(y, x);
  sr += lr * J[0] - li * J[1];
  si += lr * J[1] + li * J[0];
  return [J[0] - (2 / Math.PI) * si, J[1] + (2 / Math.PI) * sr];
}

/**
 * H_0′/H_0 for |z| ≥ 2, Im z ≥ 0 by Steed's second continued fraction
 *     −1/(2z) + i + (i/z) K_{j≥1} ( (j − ½)² / (2(z + ij)) ),
 * evaluated by the modified Lentz method. Source: A. R. Barnett, D. H. Feng, J. W. Steed, L. J. B. Goldfarb, Comput.
 * Phys. Commun. 8, 377 (1974); W. J. Lentz, Appl. Opt. 15, 668 (1976). About 80/|z| terms.
 */
function hankelZeroSlope(x: number, y: number): readonly [number, number] {
  // f = b_1 + a_2/(b_2 + a_3/(…)), b_j = 2(z + ij), a_j = (j − ½)²; the fraction is a_1/f.
  let fr = 2 * x;
  let fi = 2 * (y + 1);
  let cr = fr;
  let ci = fi;
  let dr = 0;
  let di = 0;
  for (let j = 2; j < 1000; j++) {
    const a = (j - 0.5) * (j - 0.5);
    const br = 2 * x;
    const bi = 2 * (y + j);
    // D = 1/(b + a D)
    let tr = br + a * dr;
    let ti = bi + a * di;
    let q = tr * tr + ti * ti;
    dr = tr / q;
    di = -ti / q;
    // C = b + a/C
    q = cr * cr + ci * ci;
    cr = br + (a * cr) / q;
    ci = bi - (a * ci) / q;
    tr = cr * dr - ci * di;
    ti = cr * di + ci * dr;
    const gr = fr * tr - fi * ti;
    fi = fr * ti + fi * tr;
    fr = gr;
    if (Math.abs(tr - 1) + Math.abs(ti) < 1.5e-16) break;
  }
  const q = fr * fr + fi * fi;
  const kr = (0.25 * fr) / q;
  const ki = (-0.25 * fi) / q;
  // (i k − ½) / z + i
  const r2 = x * x + y * y;
  const nr = -ki - 0.5;
  const ni = kr;
  return [(nr * x + ni * y) / r2, (ni * x - nr * y) / r2 + 1];
}

/** C_{m+1} = (2m/z) C_m − C_{m−1} upward from C_0, C_1: stable for the function that decays in the half plane of z. */
function upwardSequence(
  n: number,
  x: number,
  y: number,
  start: readonly [number, number, number, number],
): ScaledSequence {
  const [ux, uy, ux2, uy2] = reciprocalTwofold(x, y);
  const mantissas = new Float64Array(2 * n);
  const exponents = new Int32Array(n);
  let [belowR, belowI, hereR, hereI] = start;
  let exponent = 0;
  mantissas[0] = belowR;
  mantissas[1] = belowI;
  for (let m = 1; m < n; m++) {
    mantissas[2 * m] = hereR;
    mantissas[2 * m + 1] = hereI;
    exponents[m] = exponent;
    const cr = 2 * m * ux + 2 * m * ux2;
    const ci = 2 * m * uy + 2 * m * uy2;
    const tr = cr * hereR - ci * hereI - belowR;
    const ti = cr * hereI + ci * hereR - belowI;
    belowR = hereR;
    belowI = hereI;
    hereR = tr;
    hereI = ti;
    while (Math.abs(hereR) + Math.abs(hereI) > BIG) {
      hereR *= SMALL;
      hereI *= SMALL;
      belowR *= SMALL;
      belowI *= SMALL;
      exponent += STEP;
    }
  }
  return { mantissas, exponents };
}

/**
 * 1/z as an unevaluated sum [re, im, re₂, im₂] of twice a double's digits: a recurrence multiplies by it once an order,
 * and one rounding, the same every time, would add up.
 */
function reciprocalTwofold(x: number, y: number): readonly [number, number, number, number] {
  // A power of two keeps squares and split products in range.
  const scale = 2 ** -Math.round(Math.log2(Math.max(x, y)));
  const a = x * scale;
  const b = y * scale;
  const q = a * a + b * b;
  const ur = a / q;
  const ui = -b / q;
  // One Newton step, u₂ = u (1 − z u), with the residual formed exactly.
  const er = exactSum(1, -a, ur, b, ui);
  const ei = exactSum(0, -a, ui, -b, ur);
  return [ur * scale, ui * scale, (ur * er - ui * ei) * scale, (ur * ei + ui * er) * scale];
}

/** s + a b + c d with the rounding errors of the products and sums added back (T. J. Dekker, Numer. Math. 18, 224 (1971)). */
function exactSum(s: number, a: number, b: number, c: number, d: number): number {
  const p = a * b;
  const q = c * d;
  const first = s + p;
  const shift = first - s;
  const firstError = s - (first - shift) + (p - shift);
  const second = first + q;
  const move = second - first;
  const secondError = first - (second - move) + (q - move);
  return second + (firstError + secondError + productError(a, b, p) + productError(c, d, q));
}

/** a b − p exactly, p the rounded product, by Veltkamp's splitting. */
function productError(a: number, b: number, p: number): number {
  const ta = 134217729 * a; // 2^27 + 1
  const ah = ta - (ta - a);
  const al = a - ah;
  const tb = 134217729 * b;
  const bh = tb - (tb - b);
  const bl = b - bh;
  return al * bl - (p - ah * bh - al * bh - ah * bl);
}

/** 2J − H, order by order. */
function twiceMinus(J: ScaledSequence, H: ScaledSequence): ScaledSequence {
  const n = J.exponents.length;
  const mantissas = new Float64Array(2 * n);
  const exponents = new Int32Array(n);
  for (let m = 0; m < n; m++) {
    const power = Math.max(J.exponents[m], H.exponents[m]);
    const a = 2 * 2 ** (J.exponents[m] - power);
    const b = 2 ** (H.exponents[m] - power);
    mantissas[2 * m] = a * J.mantissas[2 * m] - b * H.mantissas[2 * m];
    mantissas[2 * m + 1] = a * J.mantissas[2 * m + 1] - b * H.mantissas[2 * m + 1];
    exponents[m] = power;
  }
  return { mantissas, exponents };
}

function conjugateInPlace(sequence: ScaledSequence): void {
  const { mantissas } = sequence;
  for (let i = 1; i < mantissas.length; i += 2) mantissas[i] = -mantissas[i];
}

/** The first n values as plain doubles. */
function plainValues(sequence: ScaledSequence, n: number): ComplexArray {
  const { mantissas, exponents } = sequence;
  const values = new Float64Array(2 * n);
  for (let m = 0; m < n; m++) {
    // In two steps: 2^exponent alone may overflow where the product does not.
    const half = 2 ** Math.trunc(exponents[m] / 2);
    const rest = 2 ** (exponents[m] - Math.trunc(exponents[m] / 2));
    values[2 * m] = mantissas[2 * m] * half * rest;
    values[2 * m + 1] = mantissas[2 * m + 1] * half * rest;
  }
  return values;
}

function logarithms(sequence: ScaledSequence, n: number): ComplexArray {
  const { mantissas, exponents } = sequence;
  const plain = plainValues(sequence, n);
  const logs = new Float64Array(2 * n);
  for (let m = 0; m < n; m++) {
    const size = Math.hypot(plain[2 * m], plain[2 * m + 1]);
    // Through the plain value where there is one: a sum with exponent · log 2 could cancel.
    logs[2 * m] =
      size > 1e-290 && size < Infinity
        ? Math.log(size)
        : Math.log(Math.hypot(mantissas[2 * m], mantissas[2 * m + 1])) + exponents[m] * Math.LN2;
    logs[2 * m + 1] = Math.atan2(mantissas[2 * m + 1], mantissas[2 * m]);
  }
  return logs;
}

/** a/b, order by order. */
function quotients(a: ScaledSequence, b: ScaledSequence, n: number): ComplexArray {
  const values = new Float64Array(2 * n);
  for (let m = 0; m < n; m++) {
    const size = Math.max(Math.abs(b.mantissas[2 * m]), Math.abs(b.mantissas[2 * m + 1]));
    const br = b.mantissas[2 * m] / size;
    const bi = b.mantissas[2 * m + 1] / size;
    const ar = a.mantissas[2 * m] / size;
    const ai = a.mantissas[2 * m + 1] / size;
    const factor = 2 ** (a.exponents[m] - b.exponents[m]) / (br * br + bi * bi);
    values[2 * m] = (ar * br + ai * bi) * factor;
    values[2 * m + 1] = (ai * br - ar * bi) * factor;
  }
  return values;
}
