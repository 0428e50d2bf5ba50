// How strong is a pump D, in the numbers a laser designer uses?

import { complex, multiply, squareRoot } from '../numerics/complex.ts';
import type { Complex } from '../numerics/complex.ts';
import { DECIBELS_PER_NEPER_POWER } from '../numerics/conventions.ts';

/** Of the pumped material as a whole (its own loss included). */
export interface GainReport {
  /** Im of the total permittivity ε − iD; below 0 the material amplifies. */
  readonly imEps: number;
  /** Im of the refractive index √((ε − iD) μ). */
  readonly imIndex: number;
  /** Power gain coefficient g = −2k Im n, 1/cm; above 0 amplifies, below 0 absorbs. Null without a length unit. */
  readonly perCentimetre: number | null;
  /** The same, dB/cm: 10 log₁₀(e) g. */
  readonly decibelPerCentimetre: number | null;
}

/**
 * Pump D (loss: −D) in a material of permittivity ε at vacuum wavenumber k.
 * A power grows as e^{gz} with g = −2k Im n (field e^{inkz}).
 *
 * @param pump D times the body's weight.
 * @param k 1/length unit.
 * @param metres metres per length unit, or null.
 * @example gainReport(0.0863416, complex(12.25), 2 * Math.PI / 1.55, 1e-6).perCentimetre // 1000
 */
export function gainReport(
  pump: number,
  permittivity: Complex,
  k: number,
  metres: number | null,
  permeability: Complex = complex(1),
): GainReport {
  const active = complex(permittivity.re, permittivity.im - pump);
  const imIndex = squareRoot(multiply(active, permeability)).im;
  const perCentimetre = metres === null ? null : (-2 * k * imIndex) / (100 * metres);
  return {
    imEps: active.im,
    imIndex,
    perCentimetre,
    decibelPerCentimetre: perCentimetre === null ? null : DECIBELS_PER_NEPER_POWER * perCentimetre,
  };
}

/** The pump D that gives a lossless material of real permittivity the power gain g (1/cm): the inverse of `gainReport`. */
export function pumpOfGain(perCentimetre: number, permittivity: number, k: number, metres: number): number {
  // (n + iκ)² = ε − iD with real part ε: n = √(ε + κ²), D = −2nκ, κ = −g/(2k).
  const kappa = (-perCentimetre * 100 * metres) / (2 * k);
  return -2 * Math.sqrt(permittivity + kappa * kappa) * kappa;
}
