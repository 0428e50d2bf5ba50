// How large is a device, in wavelengths and in bytes?

import { areaOf } from '../geometry/area.ts';
import type { Circle } from '../geometry/bounding-circle.ts';
import { modulus, multiply } from '../numerics/complex.ts';
import type { Device } from './model.ts';
import { deviceCircle } from './reach.ts';

export interface DeviceSize {
  readonly circle: Circle;
  /** Diameter of the device over the shortest wavelength of the band in its background. */
  readonly wavelengthsAcross: number;
  /** Unknowns of a solve at the usual five digits, and bytes of its factorization: orders of magnitude. */
  readonly unknowns: number;
  readonly bytes: number;
}

/**
 * Unknowns left per square of one local wavelength at five digits once element interiors are condensed: sixth-order triangles of a
 * wavelength's side have 3 × 5 + 1 shared unknowns for two triangles of area √3/4.
 */
const UNKNOWNS_PER_SQUARE_WAVELENGTH = 37;

/**
 * Memory of a factorization in nested dissection order: 7.75 n log₂ n entries of 16 bytes. (A. George, SIAM J. Numer. Anal. 10, 345
 * (1973), for a square grid, from memory.)
 */
export function deviceSize(
  device: Pick<Device, 'background' | 'band' | 'bodies' | 'enclosure' | 'guides' | 'sheets' | 'symmetry'>,
): DeviceSize {
  const circle = deviceCircle(device);
  const { permittivity, permeability } = device.background;
  const perLength = device.band.kMax / (2 * Math.PI);
  // Bodies may cover each other: their whole area is counted, the background's too, so that the figure is on the safe side.
  let squares = Math.PI * (circle.radius * perLength) ** 2 * permittivity * permeability;
  for (const body of device.bodies)
    squares += areaOf(body.shape) * perLength ** 2 * modulus(multiply(body.permittivity, body.permeability));
  const unknowns = Math.ceil(UNKNOWNS_PER_SQUARE_WAVELENGTH * squares) + 100;
  return {
    circle,
    wavelengthsAcross: 2 * circle.radius * perLength * Math.sqrt(permittivity * permeability),
    unknowns,
    bytes: 16 * 7.75 * unknowns * Math.log2(unknowns),
  };
}
