// What does a drive do to a device, and what do amplitudes tell?

import { type Complex, complex, type ComplexArray, divide, modulus } from '../numerics/complex.ts';
import type { Factorization } from '../sparse/pattern.ts';
import { type ContrastProblem, incidentLoads, multipoleJumps, type Multipoles } from './contrast.ts';

export interface DrivenField {
  /** Scattered field's coefficients; the total is this plus Σ a_m 2J_m(κr) e^{imφ}. */
  readonly scattered: ComplexArray;
  readonly outgoing: Multipoles;
}

/**
 * Drives the outgoing problem with Σ a_m H⁽²⁾_m e^{imφ}, that is with the regular field Σ a_m 2J_m e^{imφ}, in
 * scattered-field form: A_out u_s = −d(u_inc, ·); then b_m = a_m + d(u_inc + u_s, w_m) / (4i p_b).
 * `outgoing` is A_out factored at the problem's k and level.
 */
export function driveMultipoles(
  problem: ContrastProblem,
  outgoing: Factorization,
  drives: readonly Multipoles[],
): DrivenField[] {
  const n = problem.space.unknowns;
  const loads = incidentLoads(problem, drives);
  const all = outgoing.solveInto(loads, loads, drives.length);
  const fields = drives.map((_, j) => all.slice(2 * n * j, 2 * n * (j + 1)));
  const jumps = multipoleJumps(problem, fields, drives);
  return fields.map((scattered, j) => ({ scattered, outgoing: jumps[j].map((v, i) => v + drives[j][i]) }));
}

/** Σ |a_m|². */
export function power(amplitudes: Multipoles): number {
  let sum = 0;
  for (const v of amplitudes) sum += v * v;
  return sum;
}

/**
 * Far-field power density at `directions` equally spaced angles from 0, mean 1: |Σ b_m (−i)^m e^{imφ}|² from
 * H⁽¹⁾_m(z) → √(2/πz) e^{i(z − π/4)} (−i)^m.
 */
export function farField(outgoing: Multipoles, directions = 360): Float64Array {
  const order = (outgoing.length / 2 - 1) / 2;
  const out = new Float64Array(directions);
  let total = 0;
  for (let d = 0; d < directions; d++) {
    const phi = (2 * Math.PI * d) / directions;
    let re = 0;
    let im = 0;
    for (let m = -order; m <= order; m++) {
      const angle = m * phi - (m * Math.PI) / 2;
      const c = Math.cos(angle);
      const s = Math.sin(angle);
      const a = outgoing[2 * (m + order)];
      const b = outgoing[2 * (m + order) + 1];
      re += a * c - b * s;
      im += a * s + b * c;
    }
    out[d] = re * re + im * im;
    total += out[d];
  }
  for (let d = 0; d < directions; d++) out[d] = (out[d] * directions) / total;
  return out;
}

/** Scales to unit total power with the largest amplitude real and positive: the rule that fixes a drive's phase. */
export function normaliseDrive(amplitudes: Multipoles): { readonly drive: Multipoles; readonly factor: Complex } {
  let largest = 0;
  for (let m = 0; m < amplitudes.length; m += 2) {
    // the first of equals wins, so that rounding does not choose
    if (modulusAt(amplitudes, m) > modulusAt(amplitudes, largest) * (1 + 1e-6)) largest = m;
  }
  const lead = complex(amplitudes[largest], amplitudes[largest + 1]);
  const norm = Math.sqrt(power(amplitudes));
  const factor = divide(complex(modulus(lead) / norm), lead);
  const drive = new Float64Array(amplitudes.length);
  for (let m = 0; m < drive.length; m += 2) {
    drive[m] = factor.re * amplitudes[m] - factor.im * amplitudes[m + 1];
    drive[m + 1] = factor.re * amplitudes[m + 1] + factor.im * amplitudes[m];
  }
  return { drive, factor };
}

const modulusAt = (a: Multipoles, i: number): number => Math.hypot(a[i], a[i + 1]);
