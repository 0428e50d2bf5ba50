// How many modes are to be expected in a band?

import type { Device } from '../device/model.ts';
import { walledSpaces } from '../device/guides.ts';
import { areaOf } from '../geometry/area.ts';

/**
 * Weyl's law with the bodies' optical area: N(k) ≈ k² Σ |ε μ| A / 4π, plus one for a body smaller than a wavelength.
 * Covered parts count twice, which only makes tiles smaller.
 */
export function expectedModes(device: Device): (a: number, b: number) => number {
  const { permittivity, permeability } = device.background;
  let optical = 0;
  for (const space of walledSpaces(device)) optical += Math.abs(areaOf(space)) * permittivity * permeability;
  for (const body of device.bodies) {
    const { permittivity: e, permeability: m } = body;
    optical += Math.abs(areaOf(body.shape)) * Math.hypot(e.re, e.im) * Math.hypot(m.re, m.im);
  }
  return (a, b) => (optical * (b * b - a * a)) / (4 * Math.PI);
}
