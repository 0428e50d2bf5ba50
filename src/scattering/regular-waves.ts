// What are the regular waves J_m(κr) e^{imφ} and their gradients at a point, and a drive made of them?

import { besselJRealInto } from '../numerics/bessel-real.ts';

/** Regular waves R_n = J_n(κr) e^{inφ}, n = −M−1 … M+1, at one point; filled by `evaluateWaves`. */
export interface RegularWaves {
  readonly order: number;
  readonly kappa: number;
  /** Interleaved, R_n at n + M + 1. */
  readonly values: Float64Array;
  readonly bessel: Float64Array;
}

/** Room for the waves up to |m| = order at real κ = n_b k. */
export const regularWaves = (order: number, kappa: number): RegularWaves => ({
  order,
  kappa,
  values: new Float64Array(2 * (2 * order + 3)),
  bessel: new Float64Array(order + 2),
});

/** Evaluates all waves at (x, y) relative to the center. */
export function evaluateWaves(waves: RegularWaves, x: number, y: number): void {
  const { order, kappa, values, bessel } = waves;
  const r = Math.hypot(x, y);
  const top = order + 1;
  besselJRealInto(bessel, top, kappa * r);
  const c = r > 0 ? x / r : 1;
  const s = r > 0 ? y / r : 0;
  let er = 1;
  let ei = 0;
  for (let m = 0; m <= top; m++) {
    const re = bessel[m] * er;
    const im = bessel[m] * ei;
    const sign = m % 2 === 0 ? 1 : -1;
    values[2 * (top + m)] = re;
    values[2 * (top + m) + 1] = im;
    values[2 * (top - m)] = sign * re;
    values[2 * (top - m) + 1] = -sign * im;
    const next = er * c - ei * s;
    ei = er * s + ei * c;
    er = next;
  }
}

/**
 * Value and gradient of R_n into out[0 … 5] = [Re, Im] of value, ∂x, ∂y:
 * ∂x = κ/2 (R_{n−1} − R_{n+1}), ∂y = iκ/2 (R_{n−1} + R_{n+1}).
 */
export function waveInto(out: Float64Array, waves: RegularWaves, n: number): void {
  const { values, kappa, order } = waves;
  const i = 2 * (n + order + 1);
  const half = kappa / 2;
  out[0] = values[i]!;
  out[1] = values[i + 1]!;
  out[2] = half * (values[i - 2] - values[i + 2]);
  out[3] = half * (values[i - 1] - values[i + 3]);
  out[4] = -half * (values[i - 1] + values[i + 3]);
  out[5] = half * (values[i - 2] + values[i + 2]);
}

/** Adds the regular incident field Σ a_m 2R_m of a drive (a_m for m = −M … M) to out[0 … 5] = value, ∂x, ∂y. */
export function addIncident(out: Float64Array, waves: RegularWaves, drive: Float64Array): void {
  const { values, kappa, order } = waves;
  for (let n = -order; n <= order; n++) {
    const ar = 2 * drive[2 * (n + order)];
    const ai = 2 * drive[2 * (n + order) + 1];
    if (ar === 0 && ai === 0) continue;
    const i = 2 * (n + order + 1);
    const half = kappa / 2;
    const vr = values[i];
    const vi = values[i + 1];
    const xr = half * (values[i - 2] - values[i + 2]);
    const xi = half * (values[i - 1] - values[i + 3]);
    const yr = -half * (values[i - 1] + values[i + 3]);
    const yi = half * (values[i - 2] + values[i + 2]);
    out[0] = out[0] + ar * vr - ai * vi;
    out[1] = out[1] + ar * vi + ai * vr;
    out[2] = out[2] + ar * xr - ai * xi;
    out[3] = out[3] + ar * xi + ai * xr;
    out[4] = out[4] + ar * yr - ai * yi;
    out[5] = out[5] + ar * yi + ai * yr;
  }
}
