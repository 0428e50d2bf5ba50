// How do wavelength, frequency, photon energy and wavenumber turn into each other?

import { ELECTRONVOLT_METRES, SPEED_OF_LIGHT } from '../numerics/conventions.ts';

/** Vacuum wavelength, frequency, photon energy or vacuum wavenumber. */
export type SpectralQuantity = 'wavelength' | 'frequency' | 'energy' | 'wavenumber';

/** Hertz per unit. */
export const FREQUENCY_UNITS = { Hz: 1, kHz: 1e3, MHz: 1e6, GHz: 1e9, THz: 1e12 } as const;

/** Electronvolts per unit. */
export const ENERGY_UNITS = { meV: 1e-3, eV: 1 } as const;

/** Metres per length unit; null when lengths carry no unit. */
export const METRES: Readonly<Record<'none' | 'nm' | 'um' | 'mm' | 'cm' | 'm', number | null>> = {
  none: null,
  nm: 1e-9,
  um: 1e-6,
  mm: 1e-3,
  cm: 1e-2,
  m: 1,
};

/**
 * Vacuum wavenumber k, 1/length unit, of a value in its unit: 2π/λ, 2πf/c, 2πE/(hc) or k itself. Wavelength and wavenumber take
 * no unit of their own: they are in the length unit and its inverse.
 *
 * @param metres metres per length unit; null (no unit) is possible for wavelength and wavenumber only.
 * @throws RangeError for an unknown unit, or frequency and energy without a length unit.
 */
export function toWavenumber(quantity: SpectralQuantity, value: number, unit: string, metres: number | null): number {
  if (quantity === 'wavenumber') return value;
  if (quantity === 'wavelength') return (2 * Math.PI) / value;
  return value * wavenumberPerUnit(quantity, unit, metres);
}

/** The inverse of `toWavenumber`. */
export function fromWavenumber(quantity: SpectralQuantity, k: number, unit: string, metres: number | null): number {
  if (quantity === 'wavenumber') return k;
  if (quantity === 'wavelength') return (2 * Math.PI) / k;
  return k / wavenumberPerUnit(quantity, unit, metres);
}

function wavenumberPerUnit(quantity: 'frequency' | 'energy', unit: string, metres: number | null): number {
  if (metres === null) throw new RangeError(`expected a length unit to turn ${quantity} into a wavenumber, got none`);
  const units: Readonly<Record<string, number>> = quantity === 'frequency' ? FREQUENCY_UNITS : ENERGY_UNITS;
  if (!Object.hasOwn(units, unit))
    throw new RangeError(`expected one of ${Object.keys(units).join(', ')}, got ${unit}`);
  return (2 * Math.PI * units[unit] * metres) / (quantity === 'frequency' ? SPEED_OF_LIGHT : ELECTRONVOLT_METRES);
}
