// How does a device couple to the regular waves J_m(κr) e^{imφ} about its center?

import type { Device } from '../device/model.ts';
import { tabulateBasis } from '../elements/basis.ts';
import { MAP_STRIDE, mapInto, tabulateMap } from '../elements/curved-map.ts';
import type { Space } from '../elements/space.ts';
import { besselJ } from '../numerics/cylinder-functions.ts';
import { type Complex, type ComplexArray, multiply, scale, subtract } from '../numerics/complex.ts';
import { triangleRule } from '../numerics/quadrature.ts';
import { type LevelSense, regionMaterial } from '../operator/device-family.ts';
import { BACKGROUND } from '../mesh/mesh.ts';

/**
 * The contrast form d(u, v) = ∫ (p − p_b) ∇u·∇v − k² (q − q_b) u v over the bodies, against the regular waves
 * w_m = J_m(κr) e^{−imφ}, m = −M … M, κ = n_b k. By Green's second identity a field Σ [a_m H⁽²⁾_m + b_m H⁽¹⁾_m] e^{imφ}
 * outside has d(u, w_m) = 4i p_b (b_m − a_m): amplitudes from the bodies, with squared (dual) accuracy and no rim.
 */
export interface RegularCoupling {
  readonly k: Complex;
  readonly order: number;
  /** unknowns × (2M+1): column m + M holds d(N_i, w_m) for every basis function N_i. */
  readonly functionals: ComplexArray;
  /** (2M+1) × (2M+1): entry (m + M, n + M) is d(J_n e^{inφ}, w_m). */
  readonly born: ComplexArray;
  /** p_b. */
  readonly background: number;
}

/** Quadrature degree beyond 2p: curved maps and the waves themselves. */
const EXTRA_DEGREE = 10;

/** Assembles the coupling at any k with Re k > 0. */
export function coupleRegular(
  device: Device,
  space: Space,
  k: Complex,
  level: number,
  sense: LevelSense,
  order: number,
): RegularCoupling {
  const { mesh, starts, list, functions, signs } = space;
  const n = space.unknowns;
  const width = 2 * order + 1;
  const functionals = new Float64Array(2 * n * width);
  const born = new Float64Array(2 * width * width);
  const rule = triangleRule(2 * space.order + EXTRA_DEGREE);
  const basis = tabulateBasis(space.order, rule.points);
  const nb = basis.values.length / rule.weights.length;
  const table = tabulateMap(rule.points, mesh.curveOrder);
  const map = new Float64Array(MAP_STRIDE * rule.weights.length);
  const outside = regionMaterial(device, BACKGROUND, 0, sense);
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const kappa = scale(k, index);
  const k2 = multiply(k, k);
  const waves = makeWaves(order);
  for (let t = 0; t + 1 < starts.length; t++) {
    const region = mesh.regions[t]!;
    if (region < 0) continue;
    const inside = regionMaterial(device, region, level, sense);
    const dp = subtract(inside.p, outside.p);
    const dq = scale(multiply(k2, subtract(inside.q, outside.q)), -1);
    if (dp.re === 0 && dp.im === 0 && dq.re === 0 && dq.im === 0) continue;
    mapInto(map, mesh, t, table);
    const start = starts[t]!;
    const nd = starts[t + 1]! - start;
    for (let q = 0; q < rule.weights.length; q++) {
      const at = MAP_STRIDE * q;
      const a = map[at + 2]!;
      const b = map[at + 3]!;
      const c = map[at + 4]!;
      const d = map[at + 5]!;
      const det = a * d - b * c;
      const w = rule.weights[q]! * det;
      evaluateWaves(waves, kappa, map[at]! - mesh.center[0], map[at + 1]! - mesh.center[1]);
      for (let m = -order; m <= order; m++) weightWave(waves, m, dp, dq, w);
      for (let i = 0; i < nd; i++) {
        const g = list[start + i]!;
        if (g < 0) continue;
        const f = nb * q + functions[start + i]!;
        const sign = signs[start + i]!;
        const dx = basis.dx[f]!;
        const dy = basis.dy[f]!;
        const value = sign * basis.values[f]!;
        const gx = (sign * (d * dx - c * dy)) / det;
        const gy = (sign * (a * dy - b * dx)) / det;
        const { weighted } = waves;
        for (let m = 0; m < width; m++) {
          const o = 6 * m;
          const s = 2 * (g + m * n);
          functionals[s] = functionals[s]! + weighted[o]! * value + weighted[o + 2]! * gx + weighted[o + 4]! * gy;
          functionals[s + 1] =
            functionals[s + 1]! + weighted[o + 1]! * value + weighted[o + 3]! * gx + weighted[o + 5]! * gy;
        }
      }
      addBorn(born, waves, order);
    }
  }
  return { k, order, functionals, born, background: outside.p.re };
}

/**
 * b_m − a_m = d(u, w_m) / (4i p_b), m = −M … M, of given fields without forming the functionals: outgoing amplitudes of
 * a pole's mode, minus the incoming ones of a zero's.
 */
export function modeMultipoles(
  device: Device,
  space: Space,
  k: Complex,
  level: number,
  sense: LevelSense,
  order: number,
  fields: readonly ComplexArray[],
): Float64Array[] {
  const { mesh, starts, list, functions, signs } = space;
  const width = 2 * order + 1;
  const sums = fields.map(() => new Float64Array(2 * width));
  const rule = triangleRule(2 * space.order + EXTRA_DEGREE);
  const basis = tabulateBasis(space.order, rule.points);
  const nb = basis.values.length / rule.weights.length;
  const table = tabulateMap(rule.points, mesh.curveOrder);
  const map = new Float64Array(MAP_STRIDE * rule.weights.length);
  const outside = regionMaterial(device, BACKGROUND, 0, sense);
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const kappa = scale(k, index);
  const k2 = multiply(k, k);
  const waves = makeWaves(order);
  for (let t = 0; t + 1 < starts.length; t++) {
    const region = mesh.regions[t]!;
    if (region < 0) continue;
    const inside = regionMaterial(device, region, level, sense);
    const dp = subtract(inside.p, outside.p);
    const dq = scale(multiply(k2, subtract(inside.q, outside.q)), -1);
    if (dp.re === 0 && dp.im === 0 && dq.re === 0 && dq.im === 0) continue;
    mapInto(map, mesh, t, table);
    for (let q = 0; q < rule.weights.length; q++) {
      const at = MAP_STRIDE * q;
      const a = map[at + 2]!;
      const b = map[at + 3]!;
      const c = map[at + 4]!;
      const d = map[at + 5]!;
      const det = a * d - b * c;
      evaluateWaves(waves, kappa, map[at]! - mesh.center[0], map[at + 1]! - mesh.center[1]);
      for (let m = -order; m <= order; m++) weightWave(waves, m, dp, dq, rule.weights[q]! * det);
      const { weighted } = waves;
      for (let j = 0; j < fields.length; j++) {
        const field = fields[j]!;
        let vr = 0;
        let vi = 0;
        let xr = 0;
        let xi = 0;
        let yr = 0;
        let yi = 0;
        for (let i = starts[t]!; i < starts[t + 1]!; i++) {
          const g = list[i]!;
          if (g < 0) continue;
          const f = nb * q + functions[i]!;
          const ur = signs[i]! * field[2 * g]!;
          const ui = signs[i]! * field[2 * g + 1]!;
          const gx = (d * basis.dx[f]! - c * basis.dy[f]!) / det;
          const gy = (a * basis.dy[f]! - b * basis.dx[f]!) / det;
          vr += ur * basis.values[f]!;
          vi += ui * basis.values[f]!;
          xr += ur * gx;
          xi += ui * gx;
          yr += ur * gy;
          yi += ui * gy;
        }
        const sum = sums[j]!;
        for (let m = 0; m < width; m++) {
          const o = 6 * m;
          sum[2 * m] =
            sum[2 * m]! +
            weighted[o]! * vr -
            weighted[o + 1]! * vi +
            weighted[o + 2]! * xr -
            weighted[o + 3]! * xi +
            weighted[o + 4]! * yr -
            weighted[o + 5]! * yi;
          sum[2 * m + 1] =
            sum[2 * m + 1]! +
            weighted[o]! * vi +
            weighted[o + 1]! * vr +
            weighted[o + 2]! * xi +
            weighted[o + 3]! * xr +
            weighted[o + 4]! * yi +
            weighted[o + 5]! * yr;
        }
      }
    }
  }
  const p = outside.p.re;
  for (const sum of sums) {
    for (let m = 0; m < 2 * width; m += 2) {
      const re = sum[m]!;
      sum[m] = sum[m + 1]! / (4 * p);
      sum[m + 1] = -re / (4 * p);
    }
  }
  return sums;
}

/** Highest multipole that the bodies see: beyond both κr and the largest index × kr by a margin. */
export function multipoleOrder(device: Device, bodyRadius: number, k: number): number {
  let index = Math.sqrt(device.background.permittivity * device.background.permeability);
  for (const b of device.bodies) {
    index = Math.max(index, Math.sqrt(Math.hypot(b.permittivity.re, b.permittivity.im) * Math.abs(b.permeability.re)));
  }
  const x = index * k * bodyRadius;
  return Math.min(200, Math.ceil(x + 3 * Math.cbrt(x)) + 6);
}

interface Waves {
  readonly order: number;
  /** J_n e^{inφ}, n = −M−1 … M+1. */
  readonly plain: ComplexArray;
  /** Six numbers a wave w_m: weighted value, weighted ∂x, weighted ∂y. */
  readonly weighted: Float64Array;
  readonly kappa: Float64Array;
  /** One wave's value and gradient, scratch. */
  readonly here: Float64Array;
}

const makeWaves = (order: number): Waves => ({
  order,
  plain: new Float64Array(2 * (2 * order + 3)),
  weighted: new Float64Array(6 * (2 * order + 1)),
  kappa: new Float64Array(2),
  here: new Float64Array(6),
});

function evaluateWaves(waves: Waves, kappa: Complex, x: number, y: number): void {
  const { order, plain } = waves;
  waves.kappa[0] = kappa.re;
  waves.kappa[1] = kappa.im;
  const r = Math.hypot(x, y);
  const top = order + 1;
  if (r === 0) {
    plain.fill(0);
    plain[2 * top] = 1;
    return;
  }
  const j = besselJ(top, scale(kappa, r));
  const c = x / r;
  const s = y / r;
  let er = 1;
  let ei = 0;
  for (let m = 0; m <= top; m++) {
    const jr = j[2 * m]!;
    const ji = j[2 * m + 1]!;
    const sign = m % 2 === 0 ? 1 : -1;
    plain[2 * (top + m)] = jr * er - ji * ei;
    plain[2 * (top + m) + 1] = jr * ei + ji * er;
    plain[2 * (top - m)] = sign * (jr * er + ji * ei);
    plain[2 * (top - m) + 1] = sign * (ji * er - jr * ei);
    const next = er * c - ei * s;
    ei = er * s + ei * c;
    er = next;
  }
}

/** Value and gradient of J_n e^{inφ} into waves.here: ∂x = κ/2 (R_{n−1} − R_{n+1}), ∂y = iκ/2 (R_{n−1} + R_{n+1}). */
function waveAt(waves: Waves, n: number): void {
  const { plain, kappa, here } = waves;
  const i = 2 * (n + waves.order + 1);
  const hr = kappa[0]! / 2;
  const hi = kappa[1]! / 2;
  const dr = plain[i - 2]! - plain[i + 2]!;
  const di = plain[i - 1]! - plain[i + 3]!;
  const sr = plain[i - 2]! + plain[i + 2]!;
  const si = plain[i - 1]! + plain[i + 3]!;
  here[0] = plain[i]!;
  here[1] = plain[i + 1]!;
  here[2] = hr * dr - hi * di;
  here[3] = hr * di + hi * dr;
  here[4] = -(hr * si + hi * sr);
  here[5] = hr * sr - hi * si;
}

/** Contrast-weighted value and gradient of w_m = (−1)^m J_{−m} e^{i(−m)φ}. */
function weightWave(waves: Waves, m: number, dp: Complex, dq: Complex, w: number): void {
  const sign = m % 2 === 0 ? w : -w;
  waveAt(waves, -m);
  const o = 6 * (m + waves.order);
  const { weighted, here } = waves;
  for (let c = 0; c < 6; c += 2) {
    const by = c === 0 ? dq : dp;
    weighted[o + c] = sign * (by.re * here[c]! - by.im * here[c + 1]!);
    weighted[o + c + 1] = sign * (by.re * here[c + 1]! + by.im * here[c]!);
  }
}

function addBorn(born: ComplexArray, waves: Waves, order: number): void {
  const { weighted, here } = waves;
  const width = 2 * order + 1;
  for (let n = -order; n <= order; n++) {
    waveAt(waves, n);
    for (let m = 0; m < width; m++) {
      const s = 2 * (m + (n + order) * width);
      for (let c = 0; c < 6; c += 2) {
        const a = weighted[6 * m + c]!;
        const b = weighted[6 * m + c + 1]!;
        born[s] = born[s]! + a * here[c]! - b * here[c + 1]!;
        born[s + 1] = born[s + 1]! + a * here[c + 1]! + b * here[c]!;
      }
    }
  }
}
