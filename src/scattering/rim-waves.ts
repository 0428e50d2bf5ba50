// Which cylindrical waves does a field show on the rim?

import type { Device } from '../device/model.ts';
import type { Space } from '../elements/space.ts';
import { hankel } from '../numerics/cylinder-functions.ts';
import { type Complex, complex, type ComplexArray, divide, scale } from '../numerics/complex.ts';
import { projectRim, rimFunctionals } from '../operator/rim-functionals.ts';
import type { Multipoles } from './contrast.ts';

/**
 * Amplitudes of H⁽¹⁾_m (kind 1) or H⁽²⁾_m (kind 2), m = −M … M, of a field that holds only these outside:
 * (1/2π) ∮ u e^{−imφ} dφ / H_m(κR). As accurate as the field itself; `multipoleJumps` squares that at more cost.
 */
export function rimMultipoles(
  device: Device,
  space: Space,
  k: Complex,
  kind: 1 | 2,
  order: number,
  fields: readonly ComplexArray[],
): Multipoles[] {
  const rim = rimFunctionals(space, order);
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const h = hankel(kind, order, scale(k, index * space.mesh.rimRadius));
  return fields.map((field) => {
    const out = projectRim(rim, field);
    for (let m = -order; m <= order; m++) {
      const i = 2 * (m + order);
      const a = Math.abs(m);
      // H_{−m} = (−1)^m H_m
      const sign = m < 0 && a % 2 === 1 ? -1 : 1;
      const value = divide(complex(out[i], out[i + 1]), complex(sign * h[2 * a], sign * h[2 * a + 1]));
      out[i] = Number.isFinite(value.re) ? value.re : 0;
      out[i + 1] = Number.isFinite(value.im) ? value.im : 0;
    }
    return out;
  });
}
