// How is a complex number, and an array of them, laid out?

/** One complex number. Used outside inner loops; inner loops hold (re, im) in locals. */
export interface Complex {
  readonly re: number;
  readonly im: number;
}

/**
 * n complex numbers, interleaved: [re0, im0, re1, im1, …], length 2n. The one layout of the project; dense matrices
 * are column-major in it: entry (i, j) of an r-row matrix sits at 2(i + j r). Kernels may repack inside.
 */
export type ComplexArray = Float64Array;

export const complex = (re: number, im = 0): Complex => ({ re, im });
export const add = (a: Complex, b: Complex): Complex => ({ re: a.re + b.re, im: a.im + b.im });
export const subtract = (a: Complex, b: Complex): Complex => ({ re: a.re - b.re, im: a.im - b.im });
export const multiply = (a: Complex, b: Complex): Complex => ({
  re: a.re * b.re - a.im * b.im,
  im: a.re * b.im + a.im * b.re,
});
export const scale = (a: Complex, factor: number): Complex => ({ re: a.re * factor, im: a.im * factor });
export const conjugate = (a: Complex): Complex => ({ re: a.re, im: -a.im });
export const modulus = (a: Complex): number => Math.hypot(a.re, a.im);
export const argument = (a: Complex): number => Math.atan2(a.im, a.re);

/** a / b by Smith's scaling, so that neither |b|² overflows nor underflows. */
export function divide(a: Complex, b: Complex): Complex {
  if (Math.abs(b.re) >= Math.abs(b.im)) {
    const t = b.im / b.re;
    const d = b.re + b.im * t;
    return { re: (a.re + a.im * t) / d, im: (a.im - a.re * t) / d };
  }
  const t = b.re / b.im;
  const d = b.re * t + b.im;
  return { re: (a.re * t + a.im) / d, im: (a.im * t - a.re) / d };
}

/** Principal square root, Re ≥ 0; no cancellation near the negative axis. */
export function squareRoot(a: Complex): Complex {
  const r = Math.hypot(a.re, a.im);
  if (r === 0) return { re: 0, im: 0 };
  const s = Math.sqrt((Math.abs(a.re) + r) / 2);
  if (a.re >= 0) return { re: s, im: a.im / (2 * s) };
  return { re: Math.abs(a.im) / (2 * s), im: a.im < 0 ? -s : s };
}

/** e^a. */
export function exponential(a: Complex): Complex {
  const r = Math.exp(a.re);
  return { re: r * Math.cos(a.im), im: r * Math.sin(a.im) };
}

/** Principal logarithm, Im in (−π, π]. */
export const logarithm = (a: Complex): Complex => ({ re: Math.log(modulus(a)), im: argument(a) });
