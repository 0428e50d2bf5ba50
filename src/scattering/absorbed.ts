// How much power do the bodies take from a field?

import type { Device } from '../device/model.ts';
import { tabulateBasis } from '../elements/basis.ts';
import { MAP_STRIDE, mapInto, tabulateMap } from '../elements/curved-map.ts';
import type { Space } from '../elements/space.ts';
import { BACKGROUND } from '../mesh/mesh.ts';
import { besselJ } from '../numerics/cylinder-functions.ts';
import { complex, type ComplexArray } from '../numerics/complex.ts';
import { triangleRule } from '../numerics/quadrature.ts';
import { type LevelSense, regionMaterial } from '../operator/device-family.ts';
import type { Multipoles } from './amplitudes.ts';

const EXTRA_DEGREE = 10;

/**
 * (1/4p_b) ∫ [k² Im q |u|² − Im p |∇u|²] per body, in the units of Σ|a|² (`Ez`: (k²/4)∫Im ε|u|²; `Hz`:
 * (ε_b/4)∫Im ε|∇u|²/|ε|²). Gain counts negative. u is the finite-element field plus, when a drive is given, its
 * regular incident field Σ a_m 2J_m(κr)e^{imφ}, exact at every quadrature point.
 */
export function absorbedPower(
  device: Device,
  space: Space,
  k: number,
  level: number,
  sense: LevelSense,
  field: ComplexArray,
  drive: Multipoles | null,
): Float64Array {
  const { mesh, starts, list, functions, signs } = space;
  const perBody = new Float64Array(device.bodies.length);
  const rule = triangleRule(2 * space.order + EXTRA_DEGREE);
  const basis = tabulateBasis(space.order, rule.points);
  const nb = basis.values.length / rule.weights.length;
  const table = tabulateMap(rule.points, mesh.curveOrder);
  const map = new Float64Array(MAP_STRIDE * rule.weights.length);
  const background = regionMaterial(device, BACKGROUND, 0, sense).p.re;
  const kappa = k * Math.sqrt(device.background.permittivity * device.background.permeability);
  const incident = new Float64Array(6);
  for (let t = 0; t + 1 < starts.length; t++) {
    const region = mesh.regions[t]!;
    if (region < 0) continue;
    const { p, q: mass } = regionMaterial(device, region, level, sense);
    if (p.im === 0 && mass.im === 0) continue;
    mapInto(map, mesh, t, table);
    let sum = 0;
    for (let q = 0; q < rule.weights.length; q++) {
      const at = MAP_STRIDE * q;
      const a = map[at + 2]!;
      const b = map[at + 3]!;
      const c = map[at + 4]!;
      const d = map[at + 5]!;
      const det = a * d - b * c;
      incident.fill(0);
      if (drive) incidentField(incident, drive, kappa, map[at]! - mesh.center[0], map[at + 1]! - mesh.center[1]);
      let [vr, vi, xr, xi, yr, yi] = incident as unknown as [number, number, number, number, number, number];
      for (let s = starts[t]!; s < starts[t + 1]!; s++) {
        const g = list[s]!;
        if (g < 0) continue;
        const f = nb * q + functions[s]!;
        const ur = signs[s]! * field[2 * g]!;
        const ui = signs[s]! * field[2 * g + 1]!;
        const gx = (d * basis.dx[f]! - c * basis.dy[f]!) / det;
        const gy = (a * basis.dy[f]! - b * basis.dx[f]!) / det;
        vr += ur * basis.values[f]!;
        vi += ui * basis.values[f]!;
        xr += ur * gx;
        xi += ui * gx;
        yr += ur * gy;
        yi += ui * gy;
      }
      const density = k * k * mass.im * (vr * vr + vi * vi) - p.im * (xr * xr + xi * xi + yr * yr + yi * yi);
      sum += rule.weights[q]! * det * density;
    }
    perBody[region] = perBody[region]! + sum / (4 * background);
  }
  return perBody;
}

/** Σ a_m 2J_m(κr) e^{imφ} and its gradient at (x, y): [Re, Im] of value, ∂x, ∂y. */
export function incidentField(out: Float64Array, drive: Multipoles, kappa: number, x: number, y: number): Float64Array {
  const order = (drive.length / 2 - 1) / 2;
  const r = Math.hypot(x, y);
  const c = r > 0 ? x / r : 1;
  const s = r > 0 ? y / r : 0;
  out.fill(0);
  if (r === 0) {
    // only J_0 has a value and only J_±1 a gradient: ∇J_±1 e^{±iφ} = ±κ/2 (1, ±i)
    out[0] = 2 * drive[2 * order]!;
    out[1] = 2 * drive[2 * order + 1]!;
    if (order < 1) return out;
    for (const sign of [1, -1]) {
      const ar = sign * kappa * drive[2 * (order + sign)]!;
      const ai = sign * kappa * drive[2 * (order + sign) + 1]!;
      out[2] = out[2]! + ar;
      out[3] = out[3]! + ai;
      out[4] = out[4]! - sign * ai;
      out[5] = out[5]! + sign * ar;
    }
    return out;
  }
  const j = besselJ(order + 1, complex(kappa * r));
  let radialRe = 0;
  let radialIm = 0;
  let turnRe = 0;
  let turnIm = 0;
  let er = 1;
  let ei = 0;
  for (let m = 0; m <= order; m++) {
    const value = j[2 * m]!;
    const slope = m === 0 ? -kappa * j[2]! : (kappa * (j[2 * (m - 1)]! - j[2 * (m + 1)]!)) / 2;
    for (const sign of m === 0 ? [1] : [1, -1]) {
      const parity = sign < 0 && m % 2 === 1 ? -2 : 2;
      const ar = parity * drive[2 * (order + sign * m)]!;
      const ai = parity * drive[2 * (order + sign * m) + 1]!;
      // a e^{±imφ}
      const wr = ar * er - sign * ai * ei;
      const wi = sign * ar * ei + ai * er;
      out[0] = out[0]! + value * wr;
      out[1] = out[1]! + value * wi;
      radialRe += slope * wr;
      radialIm += slope * wi;
      turnRe -= (sign * m * value * wi) / r;
      turnIm += (sign * m * value * wr) / r;
    }
    const next = er * c - ei * s;
    ei = er * s + ei * c;
    er = next;
  }
  out[2] = c * radialRe - s * turnRe;
  out[3] = c * radialIm - s * turnIm;
  out[4] = s * radialRe + c * turnRe;
  out[5] = s * radialIm + c * turnIm;
  return out;
}
