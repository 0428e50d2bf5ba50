// Which wavelength, frequency or energy is a wavenumber, in the units of the device file?

import type { RunRecord } from '../../src/results/format.ts';
import { ELECTRONVOLT_METRES, SPEED_OF_LIGHT } from '../../src/numerics/conventions.ts';
import { perUnit, properUnit } from './numbers.ts';

export interface BandScale {
  /** "wavelength (µm)" and the like, for the axis. */
  readonly title: string;
  readonly unit: string;
  /** From k to the quantity of the file, and back. */
  of(k: number): number;
  back(value: number): number;
}

/** Hertz for each unit of frequency that a file may use. */
const HERTZ: Readonly<Record<string, number>> = { Hz: 1, kHz: 1e3, MHz: 1e6, GHz: 1e9, THz: 1e12 };
/** Electronvolts. */
const ENERGY: Readonly<Record<string, number>> = { eV: 1, meV: 1e-3, keV: 1e3 };

/** The scale of the band's own quantity; wavenumber where its unit is not known. */
export function bandScale({ band, metres, lengthUnit }: RunRecord['device']): BandScale {
  const unit = properUnit(band.unit);
  const title = unit ? `${band.quantity} (${unit})` : band.quantity;
  if (band.quantity === 'wavelength')
    return { title, unit, of: (k) => (2 * Math.PI) / k, back: (value) => (2 * Math.PI) / value };
  if (band.quantity === 'frequency' && metres !== null && HERTZ[band.unit]) {
    const factor = SPEED_OF_LIGHT / (2 * Math.PI * metres * HERTZ[band.unit]);
    return { title, unit, of: (k) => k * factor, back: (value) => value / factor };
  }
  if (band.quantity === 'energy' && metres !== null && ENERGY[band.unit]) {
    const factor = ELECTRONVOLT_METRES / (2 * Math.PI * metres * ENERGY[band.unit]);
    return { title, unit, of: (k) => k * factor, back: (value) => value / factor };
  }
  const per = perUnit(lengthUnit);
  return { title: `wavenumber k${per && ` (${per})`}`, unit: per, of: (k) => k, back: (value) => value };
}
