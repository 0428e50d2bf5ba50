// How much of a mode's own wave does the end of the layer send back to it?

import { type LayerPlan, returnedOrders, returnFactors } from '../boundary/stretched-layer.ts';
import { transposeProduct } from '../eigen/columns.ts';
import { type Complex, complex, type ComplexArray, divide, multiply } from '../numerics/complex.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import type { DeviceFamily } from '../operator/device-family.ts';
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

/** A group of modes at real k, found with the layer. */
export interface LayeredGroup {
  readonly k: number;
  readonly level: number;
  /** p_b: 1/μ_b in `Ez`, 1/ε_b in `Hz`. */
  readonly background: number;
  /** size × multiplicity. */
  readonly vectors: ComplexArray;
  readonly multiplicity: number;
  /** b_m − a_m of each member, m = −M … M. */
  readonly jumps: readonly Multipoles[];
}

/**
 * What the end of the layer has moved the mean of a group by, first order: k without the layer's end is k + δk.
 * Green's second identity between the mode that returns a_m = ρ_m b_m and the one that does not gives
 *
 *     δk = ± 8i p_b tr[(UᵀA_kU)⁻¹ P], P_ij = Σ (−1)^m ρ_m j_m^i j_{−m}^j / (1 − ρ_m), j = b − a,
 *
 * + behind the outgoing layer, − with conjugate ρ_m behind the incoming one. Exact to the square of ρ.
 */
export function layerShift(family: DeviceFamily, layer: LayerPlan, mode: LayeredGroup): Complex {
  const { k, level, background, vectors, multiplicity, jumps } = mode;
  const n = family.size;
  const incoming = family.operator.direction === 'incoming';
  const M = (jumps[0].length / 2 - 1) / 2;
  const factors = returnFactors(layer, complex(k), M);
  const P = new Float64Array(2 * multiplicity * multiplicity);
  for (let m = -M; m <= M; m++) {
    const at = 2 * Math.abs(m);
    const rho = complex(factors[at], incoming ? -factors[at + 1] : factors[at + 1]);
    const share = divide(rho, complex(m % 2 === 0 ? 1 - rho.re : rho.re - 1, m % 2 === 0 ? -rho.im : rho.im));
    for (let i = 0; i < multiplicity; i++) {
      for (let j = 0; j < multiplicity; j++) {
        const forth = complex(jumps[i][2 * (m + M)], jumps[i][2 * (m + M) + 1]);
        const back = complex(jumps[j][2 * (M - m)], jumps[j][2 * (M - m) + 1]);
        const term = multiply(share, multiply(forth, back));
        P[2 * (i + multiplicity * j)] += term.re;
        P[2 * (i + multiplicity * j) + 1] += term.im;
      }
    }
  }
  const slope = new Float64Array(2 * n * multiplicity);
  family.multiplyInto(slope, complex(k), level, 'byK', vectors, multiplicity);
  luSolveInto(
    P,
    luFactor(transposeProduct(vectors, multiplicity, slope, multiplicity, n), multiplicity),
    P,
    multiplicity,
  );
  let trace = complex(0);
  for (let i = 0; i < multiplicity; i++) {
    const at = 2 * i * (multiplicity + 1);
    trace = complex(trace.re + P[at], trace.im + P[at + 1]);
  }
  const scale = ((incoming ? -8 : 8) * background) / multiplicity;
  return complex(-scale * trace.im, scale * trace.re);
}
