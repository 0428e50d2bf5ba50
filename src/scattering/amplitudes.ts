// Which multipoles does a mode send out or take in, and what does a drive do?

import { type Complex, complex, type ComplexArray, divide, modulus } from '../numerics/complex.ts';
import type { Factorization } from '../sparse/pattern.ts';
import type { RegularCoupling } from './regular-waves.ts';

/** Amplitudes for m = −M … M, interleaved, length 2(2M+1). */
export type Multipoles = ComplexArray;

/** b_m − a_m of a field given by its coefficients: outgoing amplitudes of a pole's mode, minus the incoming of a zero's. */
export function modeAmplitudes(coupling: RegularCoupling, field: ComplexArray): Multipoles {
  const { order, functionals, background } = coupling;
  const n = field.length / 2;
  const out = new Float64Array(2 * (2 * order + 1));
  for (let m = 0; m < 2 * order + 1; m++) {
    let re = 0;
    let im = 0;
    const at = 2 * m * n;
    for (let i = 0; i < 2 * n; i += 2) {
      const a = functionals[at + i]!;
      const b = functionals[at + i + 1]!;
      re += a * field[i]! - b * field[i + 1]!;
      im += a * field[i + 1]! + b * field[i]!;
    }
    // d / (4 i p_b)
    out[2 * m] = im / (4 * background);
    out[2 * m + 1] = -re / (4 * background);
  }
  return out;
}

export interface DrivenField {
  /** Scattered field's coefficients; the total is this plus Σ a_m 2 J_m(κr) e^{imφ}. */
  readonly scattered: ComplexArray;
  readonly outgoing: Multipoles;
}

/**
 * Drives the outgoing problem with Σ a_m H⁽²⁾_m e^{imφ}, that is with the regular field Σ a_m 2J_m e^{imφ}, in
 * scattered-field form: A_out u_s = −d(u_inc, ·); then b_m = a_m + d(u_inc + u_s, w_m) / (4i p_b).
 * `coupling` must be at the k of the factorization.
 */
export function driveMultipoles(coupling: RegularCoupling, outgoing: Factorization, drive: Multipoles): DrivenField {
  const { order, functionals, born, background } = coupling;
  const width = 2 * order + 1;
  const n = outgoing.unknowns;
  const rhs = new Float64Array(2 * n);
  for (let m = -order; m <= order; m++) {
    // J_m e^{imφ} = (−1)^m w_{−m}
    const sign = m % 2 === 0 ? -2 : 2;
    const re = sign * drive[2 * (m + order)]!;
    const im = sign * drive[2 * (m + order) + 1]!;
    if (re === 0 && im === 0) continue;
    const at = 2 * (order - m) * n;
    for (let i = 0; i < 2 * n; i += 2) {
      const a = functionals[at + i]!;
      const b = functionals[at + i + 1]!;
      rhs[i] = rhs[i]! + re * a - im * b;
      rhs[i + 1] = rhs[i + 1]! + re * b + im * a;
    }
  }
  const scattered = outgoing.solveInto(new Float64Array(2 * n), rhs, 1);
  const change = modeAmplitudes(coupling, scattered);
  const out = Float64Array.from(drive);
  for (let m = 0; m < width; m++) {
    let re = 0;
    let im = 0;
    for (let j = 0; j < width; j++) {
      const b = 2 * (m + j * width);
      const ar = 2 * drive[2 * j]!;
      const ai = 2 * drive[2 * j + 1]!;
      re += born[b]! * ar - born[b + 1]! * ai;
      im += born[b]! * ai + born[b + 1]! * ar;
    }
    out[2 * m] = out[2 * m]! + change[2 * m]! + im / (4 * background);
    out[2 * m + 1] = out[2 * m + 1]! + change[2 * m + 1]! - re / (4 * background);
  }
  return { scattered, outgoing: out };
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
      const a = outgoing[2 * (m + order)]!;
      const b = outgoing[2 * (m + order) + 1]!;
      re += a * c - b * s;
      im += a * s + b * c;
    }
    out[d] = re * re + im * im;
    total += out[d]!;
  }
  for (let d = 0; d < directions; d++) out[d] = (out[d]! * directions) / total;
  return out;
}

/** Scales to unit total power with the largest amplitude real and positive: the rule that fixes a drive's phase. */
export function normaliseDrive(amplitudes: Multipoles): { readonly drive: Multipoles; readonly factor: Complex } {
  let largest = 0;
  for (let m = 0; m < amplitudes.length; m += 2) {
    // the first of equals wins, so that rounding does not choose
    if (modulusAt(amplitudes, m) > modulusAt(amplitudes, largest) * (1 + 1e-6)) largest = m;
  }
  const lead = complex(amplitudes[largest]!, amplitudes[largest + 1]!);
  const norm = Math.sqrt(power(amplitudes));
  const factor = divide(complex(modulus(lead) / norm), lead);
  const drive = new Float64Array(amplitudes.length);
  for (let m = 0; m < drive.length; m += 2) {
    drive[m] = factor.re * amplitudes[m]! - factor.im * amplitudes[m + 1]!;
    drive[m + 1] = factor.re * amplitudes[m + 1]! + factor.im * amplitudes[m]!;
  }
  return { drive, factor };
}

const modulusAt = (a: Multipoles, i: number): number => Math.hypot(a[i]!, a[i + 1]!);
