// What does a checked device hold?

import type { Point, Shape } from '../geometry/curves.ts';
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

/** What a metal or a perfect wall does to the field at its surface. */
export type Wall =
  | { readonly kind: 'electric' }
  | { readonly kind: 'magnetic' }
  /** Surface impedance (1 − i)√(ωμ₀/2σ) of a good conductor; S/m. */
  | { readonly kind: 'conductor'; readonly conductivity: number };

/** Walls all around the union of some hollow shapes. */
export interface Enclosure {
  readonly wall: Wall;
  readonly spaces: readonly Shape[];
}

/** A guide between parallel perfect walls that runs to infinity, filled with the background. */
export interface Guide {
  readonly name: string;
  /** Middle of the cross-section where it begins. */
  readonly from: Point;
  /** Direction towards infinity, radians. */
  readonly angle: number;
  readonly width: number;
  /** Meshed stretch before the guide is closed exactly. */
  readonly length: number;
  /** Reference plane of its amplitudes, measured along the guide from `from`. */
  readonly reference: number;
  readonly wall: 'electric' | 'magnetic';
  /** Channels, or null: as many as propagate at the top of the band. */
  readonly modes: number | null;
  /** Name of the standard size, or ''. */
  readonly size: string;
}

/** A wall without thickness. */
export interface Sheet {
  readonly name: string;
  readonly wall: Wall;
  readonly points: readonly Point[];
}

/** The line x = at (or y = at); the side of larger x (y) is kept. */
export interface SymmetryLine {
  readonly across: 'x' | 'y';
  readonly at: number;
  readonly parity: 'even' | 'odd';
}

export interface Body {
  readonly name: string;
  readonly material: string;
  /** Relative permittivity and permeability without pump; Im > 0 is loss. */
  readonly permittivity: Complex;
  readonly permeability: Complex;
  readonly shape: Shape;
  /** A body of metal: no field inside, this on its surface. Its permittivity and permeability are 1 and mean nothing. */
  readonly wall?: Wall;
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
  /** With an enclosure or a guide there is no open space around the device. */
  readonly enclosure?: Enclosure;
  readonly guides?: readonly Guide[];
  readonly sheets?: readonly Sheet[];
  readonly symmetry?: readonly SymmetryLine[];
}

/** Whether walls close the space, guides apart. */
export const isWalled = (device: Pick<Device, 'enclosure' | 'guides'>): boolean =>
  device.enclosure !== undefined || (device.guides ?? []).length > 0;
