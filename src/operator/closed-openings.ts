// How does a device with openings scatter: each closed exactly, wave by wave?

import type { Device } from '../device/model.ts';
import {
  add,
  type Complex,
  complex,
  type ComplexArray,
  divide,
  modulus,
  multiply,
  subtract,
} from '../numerics/complex.ts';
import { analyse } from '../sparse/analyse.ts';
import type { Factorization } from '../sparse/pattern.ts';
import type { DeviceFamily, Part } from './device-family.ts';
import { fillElement, fillSurface } from './open-operator.ts';
import type { OpeningFunctionals } from './opening-functionals.ts';

/** A channel: function `index` of opening `opening`. */
export interface ChannelPlace {
  readonly opening: number;
  readonly index: number;
}

/** Direction of a wave of an opening; outgoing where absent. */
export type Assignment = (opening: number, index: number) => 'outgoing' | 'incoming';

/**
 * A(k) = K − k²M − p_b Σ_j y_j(k) c_j c_jᵀ, every opening closed by the logarithmic derivatives of its own waves. Complex
 * symmetric whatever the assignment, since the functions φ_j are real.
 */
export interface ClosedOpenings {
  readonly family: DeviceFamily;
  readonly functionals: readonly OpeningFunctionals[];
  readonly channels: readonly ChannelPlace[];
  /** 1/μ (`Ez`) or 1/ε (`Hz`) of the background, which carries the openings. */
  readonly p: number;
  /** Real k at which a wave of an opening begins to carry power. */
  readonly branchPoints: readonly number[];
  /** Waves are continued from the real k `from`, Re k if absent. */
  factorize(k: Complex, level: number, assignment?: Assignment, from?: number): Factorization;
  /** out = A x, or ∂A/∂k x (of the waves by a central difference of their slopes). */
  multiplyInto(
    out: ComplexArray,
    k: Complex,
    level: number,
    part: Part,
    x: ComplexArray,
    assignment?: Assignment,
  ): ComplexArray;
  /**
   * S between the channels, n × n column-major (S_ij at i + j n), and the fields that each unit input drives. Further loads
   * (columns) are replaced by their solutions with the same factorization.
   */
  scatter(
    k: Complex,
    level: number,
    loads?: ComplexArray,
  ): { readonly matrix: ComplexArray; readonly fields: ComplexArray };
  /** Amplitudes of all channels in a field closed by the assignment: coefficient of φ_j over its own wave. */
  amplitudes(k: Complex, x: ComplexArray, side: (channel: number) => 'outgoing' | 'incoming'): ComplexArray;
}

/** Closes the openings of a family whose mesh ends on them. `channels` are those that S speaks of. */
export function closeOpenings(
  device: Device,
  family: DeviceFamily,
  functionals: readonly OpeningFunctionals[],
  channels: readonly ChannelPlace[],
): ClosedOpenings {
  const { operator } = family;
  const { space, surfaces } = operator;
  const triangles = space.starts.length - 1;
  const p = 1 / (device.polarization === 'Ez' ? device.background.permeability : device.background.permittivity);
  const analysis = analyse(patternOf(family, functionals));
  const outgoing: Assignment = () => 'outgoing';
  const slopesOf = (o: number, k: Complex, assignment: Assignment, from = k.re): ComplexArray => {
    const { opening, count } = functionals[o];
    const out = opening.slopes(k, count, 'outgoing', from);
    let back: ComplexArray | null = null;
    for (let j = 0; j < count; j++) {
      if (assignment(o, j) === 'outgoing') continue;
      back ??= opening.slopes(k, count, 'incoming', from);
      out.set(back.subarray(2 * j, 2 * j + 2), 2 * j);
    }
    return out;
  };
  const factorize = (
    k: Complex,
    level: number,
    assignment: Assignment = outgoing,
    from: number = k.re,
  ): Factorization => {
    const weights = family.weights(k, level, 'value');
    return analysis.factorize((e, into) => {
      if (e >= triangles) {
        fillOpening(into, functionals[e - triangles], slopesOf(e - triangles, k, assignment, from), -p);
        return;
      }
      fillElement(into, e, space.mesh.regions[e], operator.elements, 'outgoing', weights);
      if (surfaces && weights.surface) fillSurface(into, e, space, surfaces, weights.surface);
    });
  };
  const project = (o: number, j: number, x: ComplexArray, at = 0): Complex => {
    const { unknowns, count, values } = functionals[o];
    let re = 0;
    let im = 0;
    unknowns.forEach((g, i) => {
      const c = values[j + i * count];
      re += c * x[at + 2 * g];
      im += c * x[at + 2 * g + 1];
    });
    return complex(re, im);
  };
  const waves = (k: Complex) =>
    functionals.map(({ opening }, o) => {
      const most = channels.reduce((m, c) => (c.opening === o ? Math.max(m, c.index + 1) : m), 0);
      return opening.waves(k, most);
    });
  return {
    family,
    functionals,
    channels,
    p,
    branchPoints: functionals.flatMap(({ opening, count }) =>
      Array.from({ length: count }, (_, j) => opening.cutoff(j)).filter((c) => c > 0),
    ),
    factorize,
    multiplyInto(out, k, level, part, x, assignment = outgoing) {
      family.multiplyInto(out, k, level, part, x, 1);
      if (part === 'byLevel') return out;
      functionals.forEach(({ unknowns, count, values }, o) => {
        const slopes =
          part === 'value' ? slopesOf(o, k, assignment) : slopeRates(k, (at) => slopesOf(o, at, assignment, k.re));
        const load = new Float64Array(2 * count);
        for (let j = 0; j < count; j++) {
          const u = project(o, j, x);
          const f = multiply(u, complex(-p * slopes[2 * j], -p * slopes[2 * j + 1]));
          load[2 * j] = f.re;
          load[2 * j + 1] = f.im;
        }
        unknowns.forEach((g, i) => {
          for (let j = 0; j < count; j++) {
            out[2 * g] += values[j + i * count] * load[2 * j];
            out[2 * g + 1] += values[j + i * count] * load[2 * j + 1];
          }
        });
      });
      return out;
    },
    scatter(k, level, loads) {
      const n = channels.length;
      const N = space.unknowns;
      const own = waves(k);
      const fields = new Float64Array(2 * N * n);
      channels.forEach(({ opening, index }, c) => {
        const { unknowns, count, values } = functionals[opening];
        const load = divide(complex(0, -8 * p), at(own[opening].outgoing, index));
        unknowns.forEach((g, i) => {
          const v = values[index + i * count];
          fields[2 * (g + c * N)] = v * load.re;
          fields[2 * (g + c * N) + 1] = v * load.im;
        });
      });
      const factor = factorize(k, level);
      factor.solveInto(fields, fields, n);
      if (loads) factor.solveInto(loads, loads, loads.length / (2 * N));
      factor.release();
      const matrix = new Float64Array(2 * n * n);
      for (let c = 0; c < n; c++)
        channels.forEach(({ opening, index }, i) => {
          const u = project(opening, index, fields, 2 * c * N);
          const a = i === c ? at(own[opening].incoming, index) : complex(0);
          const b = divide(subtract(u, a), at(own[opening].outgoing, index));
          matrix[2 * (i + c * n)] = b.re;
          matrix[2 * (i + c * n) + 1] = b.im;
        });
      return { matrix, fields };
    },
    amplitudes(k, x, side) {
      const own = waves(k);
      const out = new Float64Array(2 * channels.length);
      channels.forEach(({ opening, index }, c) => {
        const wave = side(c) === 'outgoing' ? own[opening].outgoing : own[opening].incoming;
        const b = divide(project(opening, index, x), at(wave, index));
        out[2 * c] = b.re;
        out[2 * c + 1] = b.im;
      });
      return out;
    },
  };
}

/** The triangles and, last, one element an opening that joins all unknowns on it. */
function patternOf({ operator: { space } }: DeviceFamily, functionals: readonly OpeningFunctionals[]) {
  const { mesh } = space;
  const triangles = space.starts.length - 1;
  const starts = new Int32Array(triangles + functionals.length + 1);
  starts.set(space.starts);
  const list = Array.from(space.list);
  const centroids = new Float64Array(2 * (triangles + functionals.length));
  for (let t = 0; t < triangles; t++)
    for (let i = 0; i < 3; i++) {
      const v = mesh.triangles[3 * t + i];
      centroids[2 * t] += mesh.vertices[2 * v] / 3;
      centroids[2 * t + 1] += mesh.vertices[2 * v + 1] / 3;
    }
  functionals.forEach(({ unknowns, opening }, o) => {
    for (const g of unknowns) list.push(g);
    starts[triangles + o + 1] = list.length;
    // middle of the opening
    let n = 0;
    mesh.edgeFree?.forEach((tag, e) => {
      if (tag !== opening.tag) return;
      n++;
      centroids[2 * (triangles + o)] += mesh.vertices[2 * mesh.edges[2 * e]];
      centroids[2 * (triangles + o) + 1] += mesh.vertices[2 * mesh.edges[2 * e] + 1];
    });
    for (let i = 0; i < 2; i++) centroids[2 * (triangles + o) + i] /= Math.max(1, n);
  });
  return { unknowns: space.unknowns, starts, list: Int32Array.from(list), centroids };
}

/** factor Σ_j y_j c_j c_jᵀ, dense. */
function fillOpening(
  into: ComplexArray,
  { unknowns, count, values }: OpeningFunctionals,
  slopes: ComplexArray,
  factor: number,
): void {
  const n = unknowns.length;
  into.fill(0, 0, 2 * n * n);
  for (let b = 0; b < n; b++)
    for (let a = 0; a <= b; a++) {
      let re = 0;
      let im = 0;
      for (let j = 0; j < count; j++) {
        const c = values[j + a * count] * values[j + b * count];
        re += slopes[2 * j] * c;
        im += slopes[2 * j + 1] * c;
      }
      for (const i of [a + b * n, b + a * n]) {
        into[2 * i] = factor * re;
        into[2 * i + 1] = factor * im;
      }
    }
}

/** ∂y/∂k by Richardson's central difference: relative error about 1e-11. */
function slopeRates(k: Complex, slopes: (k: Complex) => ComplexArray): ComplexArray {
  const h = 2e-4 * modulus(k);
  const difference = (step: number): Float64Array => {
    const up = slopes(add(k, complex(step)));
    const down = slopes(subtract(k, complex(step)));
    return up.map((v, i) => (v - down[i]) / (2 * step));
  };
  const [wide, narrow] = [difference(h), difference(h / 2)];
  return narrow.map((v, i) => (4 * v - wide[i]) / 3);
}

const at = (a: ComplexArray, i: number): Complex => complex(a[2 * i], a[2 * i + 1]);
