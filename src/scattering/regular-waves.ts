// How does a device couple to the regular waves J_m(κr) e^{imφ} about its center?

import type { Device } from '../device/model.ts';
import { tabulateBasis } from '../elements/basis.ts';
import { MAP_STRIDE, mapInto, tabulateMap } from '../elements/curved-map.ts';
import type { Space } from '../elements/space.ts';
import { besselJ } from '../numerics/cylinder-functions.ts';
import { type Complex, complex, type ComplexArray, multiply, scale, subtract } from '../numerics/complex.ts';
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
      // contrast-weighted value and gradient of w_m = (−1)^m J_{−m} e^{i(−m)φ}
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
}

const makeWaves = (order: number): Waves => ({
  order,
  plain: new Float64Array(2 * (2 * order + 3)),
  weighted: new Float64Array(6 * (2 * order + 1)),
  kappa: new Float64Array(2),
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

/** Value and gradient of J_n e^{inφ}: ∂x = κ/2 (R_{n−1} − R_{n+1}), ∂y = iκ/2 (R_{n−1} + R_{n+1}). */
function waveAt(waves: Waves, n: number): { v: Complex; x: Complex; y: Complex } {
  const { plain, kappa } = waves;
  const i = 2 * (n + waves.order + 1);
  const half = complex(kappa[0]! / 2, kappa[1]! / 2);
  const below = complex(plain[i - 2]!, plain[i - 1]!);
  const above = complex(plain[i + 2]!, plain[i + 3]!);
  const sum = multiply(half, complex(below.re + above.re, below.im + above.im));
  return {
    v: complex(plain[i]!, plain[i + 1]!),
    x: multiply(half, subtract(below, above)),
    y: complex(-sum.im, sum.re),
  };
}

function weightWave(waves: Waves, m: number, dp: Complex, dq: Complex, w: number): void {
  const sign = m % 2 === 0 ? w : -w;
  const { v, x, y } = waveAt(waves, -m);
  const o = 6 * (m + waves.order);
  const { weighted } = waves;
  weighted[o] = sign * (dq.re * v.re - dq.im * v.im);
  weighted[o + 1] = sign * (dq.re * v.im + dq.im * v.re);
  weighted[o + 2] = sign * (dp.re * x.re - dp.im * x.im);
  weighted[o + 3] = sign * (dp.re * x.im + dp.im * x.re);
  weighted[o + 4] = sign * (dp.re * y.re - dp.im * y.im);
  weighted[o + 5] = sign * (dp.re * y.im + dp.im * y.re);
}

function addBorn(born: ComplexArray, waves: Waves, order: number): void {
  const { weighted } = waves;
  const width = 2 * order + 1;
  for (let n = -order; n <= order; n++) {
    const { v, x, y } = waveAt(waves, n);
    for (let m = 0; m < width; m++) {
      const o = 6 * m;
      const s = 2 * (m + (n + order) * width);
      born[s] =
        born[s]! +
        weighted[o]! * v.re -
        weighted[o + 1]! * v.im +
        weighted[o + 2]! * x.re -
        weighted[o + 3]! * x.im +
        weighted[o + 4]! * y.re -
        weighted[o + 5]! * y.im;
      born[s + 1] =
        born[s + 1]! +
        weighted[o]! * v.im +
        weighted[o + 1]! * v.re +
        weighted[o + 2]! * x.im +
        weighted[o + 3]! * x.re +
        weighted[o + 4]! * y.im +
        weighted[o + 5]! * y.re;
    }
  }
}
