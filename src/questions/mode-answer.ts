// What is asked about the modes of a device, and what is answered?

import type { Completeness } from '../accuracy/completeness.ts';
import type { Limits, Stop } from '../accuracy/memory.ts';
import type { ErrorParts } from '../accuracy/mode-ladder.ts';
import type { Strategy } from '../accuracy/refinement-plan.ts';
import type { Device } from '../device/model.ts';
import type { Complex, ComplexArray } from '../numerics/complex.ts';
import type { Multipoles } from '../scattering/contrast.ts';
import type { Prepared } from './prepare.ts';
import type { Progress } from './progress.ts';

export type Assignment = 'poles' | 'zeros';

export interface ModesRequest {
  readonly digits?: number;
  /** `poles`: all waves go out; `zeros`: all come in. */
  readonly assignment?: Assignment;
  /** Lowest Q = Re k / 2|Im k| asked for; default 10. */
  readonly qMin?: number;
  readonly limits?: Limits;
  /** Where order ends and size begins; by default order leads except at corners. */
  readonly strategy?: Strategy;
  readonly progress?: Progress;
}

export interface Mode {
  readonly k: Complex;
  readonly error: ErrorParts;
  readonly kError: number;
  readonly q: number;
  readonly qError: number;
  readonly multiplicity: number;
  /** "m = 5" where the rim shows one azimuthal order only, else "". */
  readonly label: string;
  readonly layerShare: number;
  readonly layerSensitivity: number;
  /** Coefficients in the space of `prepared` at `order`, one array a member. */
  readonly vectors: readonly ComplexArray[];
  /** Amplitudes of the first member outside: outgoing for poles, incoming for zeros; m = −M … M. */
  readonly multipoles: Multipoles;
  /** Far-field power density at 0 … 359°, mean 1 (of the first member); empty where the rim is not a full one. */
  readonly farField: Float64Array;
}

export interface ModesAnswer {
  readonly modes: readonly Mode[];
  readonly assignment: Assignment;
  readonly dropped: readonly { readonly k: Complex; readonly reason: string }[];
  /** The search covered the whole window. */
  readonly covered: boolean;
  /** What the independent count says of the list. */
  readonly complete: Completeness | null;
  /** All modes have the digits. */
  readonly reached: boolean;
  /** What kept it from that. */
  readonly stopped: Stop | null;
  readonly digits: number;
  readonly qMin: number;
  /** Highest order among the triangles; `prepared` knows those of the others. */
  readonly order: number;
  readonly prepared: Prepared;
}

export const DEFAULT_Q_MIN = 10;

/** Highest Q that is told from infinity: |Im k| below this share of Re k is rounding. */
export const HIGHEST_Q = 1e13;

/** The parity that each symmetry line forces on every mode. */
export const parityLabels = (device: Device): string[] =>
  (device.symmetry ?? []).map(({ across, parity }) => `${parity} in ${across}`);
