// Through which openings does a device exchange waves, and how is each closed exactly, wave by wave?

import {
  type Complex,
  complex,
  type ComplexArray,
  divide,
  exponential,
  multiply,
  scale,
  squareRoot,
} from '../numerics/complex.ts';
import { hankel, logarithmicDerivatives } from '../numerics/cylinder-functions.ts';
import { type GuideEnds, propagation, transverseFunction, transverseWavenumber } from './guide-modes.ts';

/**
 * A line (port of a guide) or circle (rim of open space) with orthonormal real functions φ_j on it. Beyond it the field is
 * Σ_j (a_j α⁻_j + b_j α⁺_j) φ_j with p φ_j carrying 4p of ∫Im(ū p ∂ₙu) for unit amplitude, so that power in is Σ|a|²,
 * power out Σ|b|² (both times 4p_b), and S = Sᵀ.
 */
export interface Opening {
  readonly name: string;
  /** What it was made from: `makeOpening` makes it again. */
  readonly spec: OpeningSpec;
  /** Tag of its edges in `Mesh.edgeFree`. */
  readonly tag: number;
  /** Values of functions 0 … count − 1 at a point of the opening. */
  functionsInto(out: Float64Array, x: number, y: number, count: number): Float64Array;
  /** Functions needed for `unknowns` unknowns on the opening to be closed completely. */
  functionsFor(unknowns: number): number;
  /** How fast function j varies, radians a length unit. */
  variation(j: number): number;
  /** Name of the channel of function j. */
  channelName(j: number): string;
  /** Whether the wave of function j carries power at real k. */
  propagates(j: number, k: number): boolean;
  /** Real k at which the wave of function j begins to carry power: a branch point of its slope. 0 where it always does. */
  cutoff(j: number): number;
  /**
   * Logarithmic derivatives α⁺′/α⁺ (outgoing) or α⁻′/α⁻, outward, of functions 0 … count − 1, continued from the real
   * k `from` (Re k if absent). What does not carry power there decays outward in either direction.
   */
  slopes(k: Complex, count: number, direction: 'outgoing' | 'incoming', from?: number): ComplexArray;
  /** α⁺_j and α⁻_j on the opening. */
  waves(k: Complex, count: number): { readonly outgoing: ComplexArray; readonly incoming: ComplexArray };
}

/** Numbers and words only, so that it can be stored. */
export type OpeningSpec =
  ({ readonly kind: 'guide' } & GuideOpeningInput) | ({ readonly kind: 'rim' } & RimOpeningInput);

export const makeOpening = (spec: OpeningSpec): Opening =>
  spec.kind === 'guide' ? guideOpening(spec) : rimOpening(spec);

export interface GuideOpeningInput {
  readonly name: string;
  readonly tag: number;
  /** Middle of the cross-section where the guide begins. */
  readonly from: readonly [number, number];
  readonly direction: readonly [number, number];
  readonly width: number;
  readonly ends: GuideEnds;
  /** From the beginning to the port line, and to the reference plane. */
  readonly length: number;
  readonly reference: number;
  readonly index: number;
  /** Of a guide whose axis is a symmetry line: only the modes of this parity exist, on half of the line. */
  readonly parity: 'even' | 'odd' | null;
}

/** The port of a guide with perfect walls. */
export function guideOpening(input: GuideOpeningInput): Opening {
  const { name, tag, from, direction, width, ends, length, reference, index, parity } = input;
  const modeOf = (j: number): number => (parity === null ? j : parity === 'even' ? 2 * j : 2 * j + 1);
  const share = parity === null ? 1 : Math.SQRT2;
  const propagates = (j: number, k: number): boolean => index * k > transverseWavenumber(ends, width, modeOf(j));
  const beta = (j: number, k: Complex, from = k.re): Complex =>
    propagation(scale(k, index), transverseWavenumber(ends, width, modeOf(j)), index * from);
  return {
    name,
    tag,
    spec: { ...input, kind: 'guide' },
    functionsInto(out, x, y, count) {
      const t = (y - from[1]) * direction[0] - (x - from[0]) * direction[1];
      for (let j = 0; j < count; j++) out[j] = share * transverseFunction(ends, width, modeOf(j), t);
      return out;
    },
    functionsFor: (unknowns) => Math.min(MOST_FUNCTIONS, unknowns + 2),
    variation: (j) => transverseWavenumber(ends, width, modeOf(j)),
    channelName: (j) => `${name}.${modeOf(j)}`,
    propagates,
    cutoff: (j) => transverseWavenumber(ends, width, modeOf(j)) / index,
    slopes(k, count, way, from = k.re) {
      const out = new Float64Array(2 * count);
      for (let j = 0; j < count; j++) {
        const b = beta(j, k, from);
        const sign = way === 'incoming' && propagates(j, from) ? -1 : 1;
        out[2 * j] = -sign * b.im;
        out[2 * j + 1] = sign * b.re;
      }
      return out;
    },
    waves(k, count) {
      const outgoing = new Float64Array(2 * count);
      const incoming = new Float64Array(2 * count);
      for (let j = 0; j < count; j++) {
        const b = beta(j, k);
        const size = divide(complex(2), squareRoot(b));
        const way = multiply(complex(0, length - reference), b);
        put(outgoing, j, multiply(size, exponential(way)));
        put(incoming, j, multiply(size, exponential(scale(way, -1))));
      }
      return { outgoing, incoming };
    },
  };
}

export interface RimOpeningInput {
  readonly tag: number;
  readonly center: readonly [number, number];
  readonly radius: number;
  readonly index: number;
  /** Symmetry lines through the center: parity in x (mirror x → −x) and in y. */
  readonly parity: { readonly x?: 'even' | 'odd'; readonly y?: 'even' | 'odd' };
}

/** The rim of open space: cos mφ and sin mφ, α^± = √(2πR) H^(1,2)_m(n_b kr); names cos0, cos1, sin1, cos2, … */
export function rimOpening({ tag, center, radius, index, parity }: RimOpeningInput): Opening {
  const lines = (parity.x ? 1 : 0) + (parity.y ? 1 : 0);
  const share = Math.SQRT2 ** lines;
  const kept: { m: number; sine: boolean }[] = [];
  for (let m = 0; kept.length < MOST_FUNCTIONS; m++)
    for (const sine of m === 0 ? [false] : [false, true]) {
      // φ → −φ (y → −y) keeps cos; φ → π − φ (x → −x) keeps cos of even m and sin of odd m
      const evenY = !sine;
      const evenX = (m % 2 === 0) !== sine;
      if (parity.y && (parity.y === 'even') !== evenY) continue;
      if (parity.x && (parity.x === 'even') !== evenX) continue;
      kept.push({ m, sine });
    }
  const size = Math.sqrt(2 * Math.PI * radius);
  return {
    name: 'open',
    tag,
    spec: { kind: 'rim', tag, center, radius, index, parity },
    functionsInto(out, x, y, count) {
      const phi = Math.atan2(y - center[1], x - center[0]);
      for (let j = 0; j < count; j++) {
        const { m, sine } = kept[j];
        const norm = (share * (m === 0 ? 1 : Math.SQRT2)) / size;
        out[j] = norm * (sine ? Math.sin(m * phi) : Math.cos(m * phi));
      }
      return out;
    },
    functionsFor: (unknowns) => Math.min(MOST_FUNCTIONS, unknowns),
    variation: (j) => kept[j].m / radius,
    channelName: (j) => `open.${kept[j].sine ? 'sin' : 'cos'}${kept[j].m}`,
    propagates: () => true,
    cutoff: () => 0,
    slopes(k, count, way) {
      const kappa = scale(k, index);
      const most = kept[count - 1]?.m ?? 0;
      const all = logarithmicDerivatives(way === 'outgoing' ? 1 : 2, most, scale(kappa, radius));
      const out = new Float64Array(2 * count);
      for (let j = 0; j < count; j++) {
        const { m } = kept[j];
        put(out, j, multiply(kappa, complex(all[2 * m], all[2 * m + 1])));
      }
      return out;
    },
    waves(k, count) {
      const most = kept[count - 1]?.m ?? 0;
      const z = scale(k, index * radius);
      const [h1, h2] = [hankel(1, most, z), hankel(2, most, z)];
      const pick = (h: ComplexArray): ComplexArray => {
        const out = new Float64Array(2 * count);
        for (let j = 0; j < count; j++) {
          const { m } = kept[j];
          put(out, j, complex(size * h[2 * m], size * h[2 * m + 1]));
        }
        return out;
      };
      return { outgoing: pick(h1), incoming: pick(h2) };
    },
  };
}

/** More functions than this on one opening are not made. */
const MOST_FUNCTIONS = 400;

function put(out: ComplexArray, i: number, value: Complex): void {
  out[2 * i] = value.re;
  out[2 * i + 1] = value.im;
}
