// What does a checked device hold?

import type { Shape } from '../geometry/curves.ts';
import type { Complex } from '../numerics/complex.ts';
import type { Polarization } from '../numerics/conventions.ts';

export type LengthUnit = 'none' | 'nm' | 'um' | 'mm' | 'cm' | 'm';

/** In which quantity the file gives its band; CLI options `--band A,B` use the same one. */
export type BandQuantity = 'wavelength' | 'frequency' | 'energy' | 'wavenumber';

export interface Band {
  readonly quantity: BandQuantity;
  /** As written, in `unit` ('GHz', 'THz', 'eV', 'um', '1/um', or '' when dimensionless). */
  readonly limits: readonly [number, number];
  readonly unit: string;
  /** Real vacuum wavenumber limits, 1/length unit, kMin < kMax. */
  readonly kMin: number;
  readonly kMax: number;
}

export interface Knob {
  readonly name: string;
  readonly value: number;
  readonly range?: readonly [number, number];
  /** ± limit of a uniform spread, or the standard deviation of a normal one. */
  readonly tolerance?: { readonly kind: 'limit' | 'sigma'; readonly value: number };
}

export interface Body {
  readonly name: string;
  readonly material: string;
  /** Relative permittivity and permeability without pump; Im > 0 is loss. */
  readonly permittivity: Complex;
  readonly permeability: Complex;
  readonly shape: Shape;
  /** Pump weight w: active permittivity is ε − i D w for gain, ε + i D w for loss. 0 = passive. */
  readonly pumpWeight: number;
  /** Name shared by the members of an array or scatter; equals `name` for single bodies. */
  readonly group: string;
}

export interface Device {
  readonly title: string;
  readonly lengthUnit: LengthUnit;
  /** Metres per length unit; null when dimensionless. */
  readonly metres: number | null;
  readonly polarization: Polarization;
  readonly band: Band;
  readonly knobs: readonly Knob[];
  /** Real relative permittivity and permeability of everything outside the bodies. */
  readonly background: { readonly material: string; readonly permittivity: number; readonly permeability: number };
  /** In file order: a later body covers an earlier one. */
  readonly bodies: readonly Body[];
}
