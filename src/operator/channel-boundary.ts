// How does a device end without a layer: exactly, channel by channel, on the rim?

import type { Device } from '../device/model.ts';
import { LAYER } from '../mesh/mesh.ts';
import { hankel, type HankelKind, logarithmicDerivatives, logHankel } from '../numerics/cylinder-functions.ts';
import {
  type Complex,
  complex,
  type ComplexArray,
  divide,
  logarithm,
  multiply,
  scale,
  subtract,
} from '../numerics/complex.ts';
import type { Direction } from '../numerics/conventions.ts';
import { analyse } from '../sparse/analyse.ts';
import type { Analysis, Factorization } from '../sparse/pattern.ts';
import type { DeviceFamily } from './device-family.ts';
import { fillElement, type OpenOperator } from './open-operator.ts';
import { type RimFunctionals, rimFunctionals } from './rim-functionals.ts';

/**
 * The inside of the rim closed by every channel's own logarithmic derivative:
 *
 *     A = K − k²M − 2πR Σ_m y_m F̄_m F_mᵀ,   y_m = p_b κ H⁽¹⁾′_m(κR)/H⁽¹⁾_m(κR),   κ = n_b k,
 *
 * all channels outgoing. No layer, so nothing returns: what it says is independent of the stretched layer. On the
 * discrete problem S is unitary and power balanced to rounding. Unknowns keep the numbers of the full space.
 */
export interface ChannelOperator {
  readonly rim: RimFunctionals;
  /** All channels outgoing. */
  factorize(k: Complex, level: number): ChannelFactor;
  /**
   * log [det A(k) Π_m (κR)^|m| H_m(κR)] on some branch, each channel |m| closed in its own direction (outgoing if absent).
   * The Hankel functions take away the poles that y_m has at their zeros, so that what is left is analytic for Re k > 0
   * and vanishes at the modes only.
   */
  logDeterminant(k: Complex, level: number, direction?: (m: number) => Direction): Complex;
}

export interface ChannelFactor {
  /**
   * The total field (full numbering, zero in the layer) and outgoing amplitudes b_m for incoming amplitudes a_m,
   * m = −M … M: A u = −8i p_b Σ F̄_m a_m / H⁽¹⁾_m, b_m = (F_m u − a_m H⁽²⁾_m) / H⁽¹⁾_m.
   */
  drive(incoming: ComplexArray): { readonly field: ComplexArray; readonly outgoing: ComplexArray };
  release(): void;
}

/** Builds the closed problem from an assembled family; `order` is the highest channel |m|. */
export function closeByChannels(device: Device, family: DeviceFamily, order: number): ChannelOperator {
  const { operator } = family;
  const rim = rimFunctionals(operator.space, order);
  const inner = innerPattern(operator, rim);
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const background = device.polarization === 'Ez' ? device.background.permeability : device.background.permittivity;
  const radius = operator.space.mesh.rimRadius;
  const factorClosed = (k: Complex, level: number, kinds: readonly HankelKind[]): Factorization => {
    const weights = family.weights(k, level, 'value');
    const block = rimBlock(rim, scale(k, index), radius, 1 / background, kinds);
    return inner.analysis.factorize((e, into) => {
      if (e === inner.triangles.length) into.set(block);
      else {
        const t = inner.triangles[e];
        fillElement(into, t, operator.space.mesh.regions[t], operator.elements, 'outgoing', weights);
      }
    });
  };
  const outgoing = Array.from({ length: order + 1 }, (): HankelKind => 1);
  return {
    rim,
    logDeterminant(k, level, direction = () => 'outgoing') {
      const kinds = outgoing.map((_, m): HankelKind => (direction(m) === 'outgoing' ? 1 : 2));
      const factor = factorClosed(k, level, kinds);
      factor.release();
      const z = scale(k, index * radius);
      const waves = { 1: logHankel(1, order, z), 2: logHankel(2, order, z) };
      let { re, im } = factor.logDeterminant;
      kinds.forEach((kind, m) => {
        const power = scale(logarithm(z), m);
        re += (m === 0 ? 1 : 2) * (waves[kind][2 * m] + power.re);
        im += (m === 0 ? 1 : 2) * (waves[kind][2 * m + 1] + power.im);
      });
      return complex(re, im);
    },
    factorize(k, level) {
      const factor = factorClosed(k, level, outgoing);
      const waves = rimWaves(order, scale(k, index * radius));
      return {
        drive: (incoming) => driveRim(operator, rim, inner, factor, waves, 1 / background, incoming),
        release: () => {
          factor.release();
        },
      };
    },
  };
}

interface Inner {
  readonly triangles: Int32Array;
  readonly analysis: Analysis;
  /** Inner number of each unknown of the full space, -1 in the layer. */
  readonly number: Int32Array;
  readonly unknowns: number;
}

/** The triangles inside the rim and, last, one element that joins all unknowns on it. */
function innerPattern(operator: OpenOperator, rim: RimFunctionals): Inner {
  const { space } = operator;
  const { mesh } = space;
  const inside: number[] = [];
  for (let t = 0; t + 1 < space.starts.length; t++) if (mesh.regions[t] !== LAYER) inside.push(t);
  const number = new Int32Array(space.unknowns).fill(-1);
  let unknowns = 0;
  const starts = new Int32Array(inside.length + 2);
  const list: number[] = [];
  const centroids = new Float64Array(2 * inside.length + 2);
  inside.forEach((t, e) => {
    for (let i = space.starts[t]; i < space.starts[t + 1]; i++) {
      const g = space.list[i];
      if (g >= 0 && number[g] < 0) number[g] = unknowns++;
      list.push(g < 0 ? -1 : number[g]);
    }
    starts[e + 1] = list.length;
    for (let i = 0; i < 3; i++) {
      const v = mesh.triangles[3 * t + i];
      centroids[2 * e] += mesh.vertices[2 * v] / 3;
      centroids[2 * e + 1] += mesh.vertices[2 * v + 1] / 3;
    }
  });
  for (const g of rim.unknowns) list.push(number[g]);
  starts[inside.length + 1] = list.length;
  centroids[2 * inside.length] = mesh.center[0];
  centroids[2 * inside.length + 1] = mesh.center[1];
  const analysis = analyse({ unknowns, starts, list: Int32Array.from(list), centroids });
  return { triangles: Int32Array.from(inside), analysis, number, unknowns };
}

/** −2πR Σ_m y_m F̄_m F_mᵀ: complex symmetric since y_{−m} = y_m and F_{−m} = F̄_m. */
function rimBlock(
  rim: RimFunctionals,
  kappa: Complex,
  radius: number,
  p: number,
  kinds: readonly HankelKind[],
): ComplexArray {
  const { order, values, unknowns } = rim;
  const width = 2 * order + 1;
  const n = unknowns.length;
  const z = scale(kappa, radius);
  const slopes = { 1: logarithmicDerivatives(1, order, z), 2: logarithmicDerivatives(2, order, z) };
  const out = new Float64Array(2 * n * n);
  for (let m = 0; m <= order; m++) {
    const own = slopes[kinds[m]];
    const y = multiply(scale(kappa, -2 * Math.PI * radius * p), complex(own[2 * m], own[2 * m + 1]));
    for (let j = 0; j < n; j++) {
      const c = values[2 * (order + m + j * width)];
      const d = values[2 * (order + m + j * width) + 1];
      for (let i = 0; i < n; i++) {
        const a = values[2 * (order + m + i * width)];
        const b = values[2 * (order + m + i * width) + 1];
        // m and −m together: 2 Re(F̄_mi F_mj); m = 0 once
        const pair = (m === 0 ? 1 : 2) * (a * c + b * d);
        out[2 * (i + j * n)] += y.re * pair;
        out[2 * (i + j * n) + 1] += y.im * pair;
      }
    }
  }
  return out;
}

interface RimWaves {
  readonly outgoing: readonly Complex[];
  readonly incoming: readonly Complex[];
}

/** H⁽¹⁾_m and H⁽²⁾_m for m = −M … M. */
function rimWaves(order: number, z: Complex): RimWaves {
  const all = ([1, 2] as const).map((kind) => {
    const h = hankel(kind, order, z);
    return Array.from({ length: 2 * order + 1 }, (_, i) => {
      const m = i - order;
      const a = Math.abs(m);
      const sign = m < 0 && a % 2 === 1 ? -1 : 1;
      return complex(sign * h[2 * a], sign * h[2 * a + 1]);
    });
  });
  return { outgoing: all[0], incoming: all[1] };
}

function driveRim(
  operator: OpenOperator,
  rim: RimFunctionals,
  inner: Inner,
  factor: Factorization,
  waves: RimWaves,
  p: number,
  drive: ComplexArray,
): { field: ComplexArray; outgoing: ComplexArray } {
  const width = 2 * rim.order + 1;
  const driveOrder = (drive.length / 2 - 1) / 2;
  const amplitude = (m: number): Complex =>
    Math.abs(m - rim.order) > driveOrder
      ? complex(0)
      : complex(drive[2 * (m - rim.order + driveOrder)], drive[2 * (m - rim.order + driveOrder) + 1]);
  const rhs = new Float64Array(2 * inner.unknowns);
  for (let m = 0; m < width; m++) {
    const a = amplitude(m);
    if (a.re === 0 && a.im === 0) continue;
    const load = multiply(complex(0, -8 * p), divide(a, waves.outgoing[m]));
    rim.unknowns.forEach((g, j) => {
      const fr = rim.values[2 * (m + j * width)];
      const fi = -rim.values[2 * (m + j * width) + 1];
      const i = 2 * inner.number[g];
      rhs[i] += fr * load.re - fi * load.im;
      rhs[i + 1] += fr * load.im + fi * load.re;
    });
  }
  factor.solveInto(rhs, rhs, 1);
  const field = new Float64Array(2 * operator.space.unknowns);
  inner.number.forEach((i, g) => {
    if (i < 0) return;
    field[2 * g] = rhs[2 * i];
    field[2 * g + 1] = rhs[2 * i + 1];
  });
  const outgoing = new Float64Array(2 * width);
  for (let m = 0; m < width; m++) {
    let seen = complex(0);
    rim.unknowns.forEach((g, j) => {
      const f = complex(rim.values[2 * (m + j * width)], rim.values[2 * (m + j * width) + 1]);
      const u = multiply(f, complex(field[2 * g], field[2 * g + 1]));
      seen = { re: seen.re + u.re, im: seen.im + u.im };
    });
    const b = divide(subtract(seen, multiply(amplitude(m), waves.incoming[m])), waves.outgoing[m]);
    // where H⁽¹⁾ overflows nothing goes out
    outgoing[2 * m] = Number.isFinite(b.re) ? b.re : 0;
    outgoing[2 * m + 1] = Number.isFinite(b.im) ? b.im : 0;
  }
  return { field, outgoing };
}
