// How do the bodies of a device couple to regular waves: loads, amplitudes, absorbed power?

import type { Device } from '../device/model.ts';
import { functionCount, tabulateBasis } from '../elements/basis.ts';
import { MAP_STRIDE, mapInto, tabulateMap } from '../elements/curved-map.ts';
import type { Space } from '../elements/space.ts';
import { BACKGROUND } from '../mesh/mesh.ts';
import { type Complex, type ComplexArray, modulus, scale, subtract } from '../numerics/complex.ts';
import { triangleRule } from '../numerics/quadrature.ts';
import { type LevelSense, regionMaterial } from '../operator/device-family.ts';
import { addIncident, evaluateWaves, regularWaves, type RegularWaves, waveInto } from './regular-waves.ts';

/**
 * The contrast form d(u, v) = ∫ (p − p_b) ∇u·∇v − k² (q − q_b) u v over the bodies, at real k. With the regular waves
 * w_m = J_m(κr) e^{−imφ}, κ = n_b k, Green's second identity gives for a field Σ [a_m H⁽²⁾_m + b_m H⁽¹⁾_m] e^{imφ} outside
 *
 *     d(u, w_m) = 4i p_b (b_m − a_m):
 *
 * amplitudes from the bodies, with squared (dual) accuracy and no rim.
 */
export interface ContrastProblem {
  readonly device: Device;
  readonly space: Space;
  readonly k: number;
  readonly level: number;
  readonly sense: LevelSense;
  /** Highest |m| of drives and amplitudes. */
  readonly order: number;
}

/** Amplitudes for m = −M … M, interleaved, length 2(2M+1). */
export type Multipoles = ComplexArray;

/** Quadrature degree beyond 2p: curved maps and the waves themselves. */
const EXTRA_DEGREE = 8;

/** −d(u_inc, N_i) for each drive: right-hand sides of the scattered-field form, unknowns × drives. */
export function incidentLoads(problem: ContrastProblem, drives: readonly Multipoles[]): ComplexArray {
  const { space } = problem;
  const n = space.unknowns;
  const out = new Float64Array(2 * n * drives.length);
  const u = new Float64Array(6);
  visitPoints(problem, (point, waves) => {
    drives.forEach((drive, j) => {
      u.fill(0);
      addIncident(u, waves, drive);
      weigh(u, point);
      for (let i = 0; i < point.count; i++) {
        const g = space.list[point.start + i];
        if (g < 0) continue;
        const f = point.basis[3 * i];
        const gx = point.basis[3 * i + 1];
        const gy = point.basis[3 * i + 2];
        const s = 2 * (g + j * n);
        out[s] = out[s] - (f * u[0] + gx * u[2] + gy * u[4]);
        out[s + 1] = out[s + 1] - (f * u[1] + gx * u[3] + gy * u[5]);
      }
    });
  });
  return out;
}

/**
 * b_m − a_m = d(u, w_m) / (4i p_b) of each field; u is the finite-element field plus, where drives are given, the
 * regular incident field of its drive, exact at every quadrature point.
 */
export function multipoleJumps(
  problem: ContrastProblem,
  fields: readonly ComplexArray[],
  drives: readonly Multipoles[] | null,
): Multipoles[] {
  const { order } = problem;
  const width = 2 * order + 1;
  const sums = fields.map(() => new Float64Array(2 * width));
  const u = new Float64Array(6);
  const w = new Float64Array(6);
  visitPoints(problem, (point, waves) => {
    fields.forEach((field, j) => {
      fieldInto(u, problem.space, point, field);
      if (drives) addIncident(u, waves, drives[j]);
      weigh(u, point);
      const sum = sums[j];
      for (let m = -order; m <= order; m++) {
        // w_m = (−1)^m R_{−m}
        waveInto(w, waves, -m);
        const sign = m % 2 === 0 ? 1 : -1;
        let re = 0;
        let im = 0;
        for (let c = 0; c < 6; c += 2) {
          re += u[c] * w[c] - u[c + 1] * w[c + 1];
          im += u[c] * w[c + 1] + u[c + 1] * w[c];
        }
        const i = 2 * (m + order);
        sum[i] = sum[i] + sign * re;
        sum[i + 1] = sum[i + 1] + sign * im;
      }
    });
  });
  const p = regionMaterial(problem.device, BACKGROUND, 0, problem.sense).p.re;
  for (const sum of sums) {
    for (let i = 0; i < sum.length; i += 2) {
      const re = sum[i];
      sum[i] = sum[i + 1] / (4 * p);
      sum[i + 1] = -re / (4 * p);
    }
  }
  return sums;
}

/**
 * (1/4p_b) ∫ [k² Im q |u|² − Im p |∇u|²] per body for each field, in the units of Σ|a|² (`Ez`: (k²/4)∫Im ε|u|²; `Hz`:
 * (ε_b/4)∫Im ε|∇u|²/|ε|²). Gain counts negative. Fields and drives as in `multipoleJumps`.
 */
export function absorbedPower(
  problem: ContrastProblem,
  fields: readonly ComplexArray[],
  drives: readonly Multipoles[] | null,
): Float64Array[] {
  const { device, k, level, sense } = problem;
  const out = fields.map(() => new Float64Array(device.bodies.length));
  const background = regionMaterial(device, BACKGROUND, 0, sense).p.re;
  const u = new Float64Array(6);
  visitPoints(problem, (point, waves) => {
    const { p, q } = regionMaterial(device, point.region, level, sense);
    if (p.im === 0 && q.im === 0) return;
    fields.forEach((field, j) => {
      fieldInto(u, problem.space, point, field);
      if (drives) addIncident(u, waves, drives[j]);
      const value = u[0] * u[0] + u[1] * u[1];
      const slope = u[2] * u[2] + u[3] * u[3] + u[4] * u[4] + u[5] * u[5];
      const sum = out[j];
      sum[point.region] = sum[point.region] + (point.weight * (k * k * q.im * value - p.im * slope)) / (4 * background);
    });
  });
  return out;
}

/** Highest multipole that the bodies see: beyond the largest index × kr by a margin. */
export function multipoleOrder(device: Device, bodyRadius: number, k: number): number {
  let index = Math.sqrt(device.background.permittivity * device.background.permeability);
  for (const b of device.bodies) {
    index = Math.max(index, Math.sqrt(modulus(b.permittivity) * modulus(b.permeability)));
  }
  const x = index * k * bodyRadius;
  return Math.min(200, Math.ceil(x + 3 * Math.cbrt(x)) + 6);
}

/** A quadrature point in a body that differs from the background. */
interface ContrastPoint {
  region: number;
  /** Quadrature weight × det J. */
  weight: number;
  /** First entry of the triangle in the space's lists, and how many. */
  start: number;
  count: number;
  /** Value, ∂x, ∂y of each shape function, signs folded in. */
  readonly basis: Float64Array;
  /** p − p_b and −k²(q − q_b), not weighted. */
  dp: Complex;
  dq: Complex;
}

function visitPoints(problem: ContrastProblem, visit: (point: ContrastPoint, waves: RegularWaves) => void): void {
  const { device, space, k, level, sense, order } = problem;
  const { mesh, starts, functions, signs } = space;
  const tables = new Map<number, PointTable>();
  const outside = regionMaterial(device, BACKGROUND, 0, sense);
  const waves = regularWaves(order, k * Math.sqrt(device.background.permittivity * device.background.permeability));
  const zero = { re: 0, im: 0 };
  const point: ContrastPoint = {
    region: 0,
    weight: 0,
    start: 0,
    count: 0,
    basis: new Float64Array(3 * functionCount(space.order)),
    dp: zero,
    dq: zero,
  };
  for (let t = 0; t + 1 < starts.length; t++) {
    const region = mesh.regions[t];
    if (region < 0) continue;
    const inside = regionMaterial(device, region, level, sense);
    point.dp = subtract(inside.p, outside.p);
    point.dq = scale(subtract(inside.q, outside.q), -k * k);
    if (point.dp.re === 0 && point.dp.im === 0 && point.dq.re === 0 && point.dq.im === 0) continue;
    const degree = localDegree(space, t);
    let table = tables.get(degree);
    if (!table) tables.set(degree, (table = tableFor(degree, mesh.curveOrder)));
    const { rule, basis, map, functions: nb } = table;
    mapInto(map, mesh, t, table.table);
    point.region = region;
    point.start = starts[t]!;
    point.count = starts[t + 1] - starts[t];
    for (let q = 0; q < rule.weights.length; q++) {
      const at = MAP_STRIDE * q;
      const a = map[at + 2];
      const b = map[at + 3];
      const c = map[at + 4];
      const d = map[at + 5];
      const det = a * d - b * c;
      point.weight = rule.weights[q] * det;
      for (let i = 0; i < point.count; i++) {
        const f = nb * q + functions[point.start + i];
        const sign = signs[point.start + i];
        const dx = basis.dx[f];
        const dy = basis.dy[f];
        point.basis[3 * i] = sign * basis.values[f];
        point.basis[3 * i + 1] = (sign * (d * dx - c * dy)) / det;
        point.basis[3 * i + 2] = (sign * (a * dy - b * dx)) / det;
      }
      evaluateWaves(waves, map[at] - mesh.center[0], map[at + 1] - mesh.center[1]);
      visit(point, waves);
    }
  }
}

/** What the triangles of one degree share. */
interface PointTable {
  readonly rule: ReturnType<typeof triangleRule>;
  readonly basis: ReturnType<typeof tabulateBasis>;
  readonly functions: number;
  readonly table: ReturnType<typeof tabulateMap>;
  readonly map: Float64Array;
}

function tableFor(degree: number, curveOrder: number): PointTable {
  const rule = triangleRule(2 * degree + EXTRA_DEGREE);
  return {
    rule,
    basis: tabulateBasis(degree, rule.points),
    functions: functionCount(degree),
    table: tabulateMap(rule.points, curveOrder),
    map: new Float64Array(MAP_STRIDE * rule.weights.length),
  };
}

/** Highest degree of a shape function on triangle t: edges have the order of their higher neighbour. */
function localDegree({ mesh, orders }: Space, t: number): number {
  let degree = orders[t];
  for (let i = 3 * t; i < 3 * t + 3; i++) {
    const e = mesh.triangleEdges[i];
    for (const side of [mesh.edgeTriangles[2 * e], mesh.edgeTriangles[2 * e + 1]])
      if (side >= 0) degree = Math.max(degree, orders[side]);
  }
  return degree;
}

/** Value and gradient of a finite-element field at the point. */
function fieldInto(u: Float64Array, space: Space, point: ContrastPoint, field: ComplexArray): void {
  u.fill(0);
  const { basis } = point;
  for (let i = 0; i < point.count; i++) {
    const g = space.list[point.start + i];
    if (g < 0) continue;
    const re = field[2 * g];
    const im = field[2 * g + 1];
    for (let c = 0; c < 3; c++) {
      u[2 * c] = u[2 * c] + basis[3 * i + c] * re;
      u[2 * c + 1] = u[2 * c + 1] + basis[3 * i + c] * im;
    }
  }
}

/** Multiplies value by −k²(q − q_b), gradient by p − p_b, all by the quadrature weight. */
function weigh(u: Float64Array, point: ContrastPoint): void {
  for (let c = 0; c < 6; c += 2) {
    const by = c === 0 ? point.dq : point.dp;
    const re = u[c];
    const im = u[c + 1];
    u[c] = point.weight * (by.re * re - by.im * im);
    u[c + 1] = point.weight * (by.re * im + by.im * re);
  }
}
