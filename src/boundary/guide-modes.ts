// Which waves does a guide between parallel perfect walls carry?

import { type Complex, complex, multiply } from '../numerics/complex.ts';
import type { Polarization } from '../numerics/conventions.ts';

/** The field out of the plane is zero on the walls (`Ez` on an electric wall), or its slope is. */
export type GuideEnds = 'zero' | 'free';

export const guideEnds = (polarization: Polarization, wall: 'electric' | 'magnetic'): GuideEnds =>
  (polarization === 'Ez') === (wall === 'electric') ? 'zero' : 'free';

/** Transverse wavenumber of mode j = 0, 1, …: (j + 1)π/w between zeros, jπ/w between free ends. */
export const transverseWavenumber = (ends: GuideEnds, width: number, j: number): number =>
  ((ends === 'zero' ? j + 1 : j) * Math.PI) / width;

/** Orthonormal transverse function of mode j at t ∈ [−w/2, w/2]: ∫φ² dt = 1. */
export function transverseFunction(ends: GuideEnds, width: number, j: number, t: number): number {
  const x = t + width / 2;
  const q = transverseWavenumber(ends, width, j);
  if (ends === 'zero') return Math.sqrt(2 / width) * Math.sin(q * x);
  return j === 0 ? Math.sqrt(1 / width) : Math.sqrt(2 / width) * Math.cos(q * x);
}

/**
 * β = √(κ² − q²), κ = n_b k: positive above cutoff, +i|β| below it (decaying), continued analytically from the real κ
 * `from`: √(κ − q)√(κ + q) from above the cutoff, i√(q − κ)√(q + κ) from below. With `from` = Re κ the branch cut runs
 * from the cutoff downward.
 */
export function propagation(kappa: Complex, q: number, from = kappa.re): Complex {
  const sum = principalRoot({ re: kappa.re + q, im: kappa.im });
  if (from > q) return multiply(principalRoot({ re: kappa.re - q, im: kappa.im }), sum);
  const below = principalRoot({ re: q - kappa.re, im: -kappa.im });
  return multiply(complex(-below.im, below.re), sum);
}

function principalRoot(a: Complex): Complex {
  const r = Math.hypot(a.re, a.im);
  if (r === 0) return complex(0);
  const s = Math.sqrt((Math.abs(a.re) + r) / 2);
  return a.re >= 0 ? complex(s, a.im / (2 * s)) : complex(Math.abs(a.im) / (2 * s), a.im < 0 ? -s : s);
}

/** Modes whose cutoff lies below κ. */
export function propagatingModes(ends: GuideEnds, width: number, kappa: number): number {
  const highest = (kappa * width) / Math.PI;
  return ends === 'zero' ? Math.max(0, Math.ceil(highest - 1e-12) - 1) : Math.max(1, Math.ceil(highest - 1e-12));
}
