// How much of a mode's own wave does the end of the layer send back to it?

import { type LayerPlan, returnedOrders } from '../boundary/stretched-layer.ts';
import type { Complex } from '../numerics/complex.ts';
import type { Multipoles } from '../scattering/contrast.ts';

/**
 * Mean of |a_m/b_m| over the multipoles m = −M … M of the members, weighted by their power. A pole moves by that share of
 * twice its radiation half width, since near it b/a ≈ 2i Im k/(k − pole).
 *
 * Measured on disks n = 1.5, Q = 2 … 11, m = 3, 4, 6, where this part rules: true error over estimate 0.55 to 0.63.
 */
export function returnedToMode(layer: LayerPlan, k: Complex, members: readonly Multipoles[]): number {
  const M = (members[0].length / 2 - 1) / 2;
  const returned = returnedOrders(layer, k, M);
  let sum = 0;
  let total = 0;
  for (const amplitudes of members) {
    for (let m = -M; m <= M; m++) {
      const i = 2 * (m + M);
      const power = amplitudes[i] ** 2 + amplitudes[i + 1] ** 2;
      total += power;
      sum += power * returned[Math.abs(m)];
    }
  }
  return total > 0 ? sum / total : 0;
}
