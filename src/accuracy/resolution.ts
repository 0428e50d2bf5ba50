// Which order, mesh size and layer do the wanted digits ask for?

/** What the discretisation is built with. */
export interface Resolution {
  readonly order: number;
  /** Largest triangle side in local wavelengths at the top of the band. */
  readonly sizeInWavelengths: number;
  /** Smallest side at corners, as a share of the local size. */
  readonly cornerGrading: number;
  /** Relative amplitude that the stretched layer may send back. */
  readonly layerTolerance: number;
}

/** Digits that can be asked for. */
export const FEWEST_DIGITS = 2;
export const MOST_DIGITS = 11;
export const DEFAULT_DIGITS = 5;

/** Highest order the ladder climbs to. */
export const HIGHEST_ORDER = 16;

/**
 * Rule of the start; the error from one order more decides whether the order is raised.
 *
 * Measured on disks n = 1.5 … 3.3, both polarizations (largest relative error of all poles with Q ≥ 2 in an octave) at
 * sides of about half a wavelength: order 4: 1e-4, 5: 1e-5, 6: 1e-6, 8: 1e-9.
 * Corners are graded geometrically, by a factor 4 a digit, since p-refinement alone converges algebraically there.
 */
export function resolutionFor(digits: number): Resolution {
  if (!(digits >= FEWEST_DIGITS && digits <= MOST_DIGITS)) {
    throw new RangeError(`digits came as ${digits}; expected ${FEWEST_DIGITS} to ${MOST_DIGITS}`);
  }
  return {
    order: Math.ceil(digits * 0.8) + 2,
    sizeInWavelengths: 0.6,
    cornerGrading: Math.max(2 ** (1 - digits), 1e-3),
    layerTolerance: 10 ** -(digits + 2.3),
  };
}

/** What refinement begins with: corners are graded as the modes ask for, not by rule. */
export const startResolution = (digits: number): Resolution => ({ ...resolutionFor(digits), cornerGrading: 0.25 });
