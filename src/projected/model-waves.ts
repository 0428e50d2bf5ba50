// What do the waves of a model's openings contribute at one k: slopes of all functions, amplitudes of the channels?

import { makeOpening, type Opening } from '../boundary/openings.ts';
import { complex, type Complex, type ComplexArray, divide, subtract } from '../numerics/complex.ts';
import type { ScatteringModel } from './scattering-model.ts';

/** At one k. */
export interface ModelWaves {
  /** y_j of all functions. */
  readonly slopes: ComplexArray;
  /** α⁺ and α⁻ of the channels. */
  readonly outgoing: ComplexArray;
  readonly incoming: ComplexArray;
}

/** Their derivatives by k. */
export type WaveRates = ModelWaves;

export interface WaveSource {
  readonly openings: readonly Opening[];
  /** Place of each channel's function among all functions. */
  readonly places: Int32Array;
  at(k: Complex): ModelWaves;
  /** Richardson's central difference; relative error about 1e-11. */
  ratesAt(k: Complex): WaveRates;
  propagates(k: number): boolean[];
}

/** Functions are numbered opening by opening. */
export function waveSource(model: Pick<ScatteringModel, 'openings' | 'channels'>): WaveSource {
  const openings = model.openings.map(({ spec }) => makeOpening(spec));
  const counts = model.openings.map(({ count }) => count);
  const first = counts.map((_, o) => counts.slice(0, o).reduce((a, b) => a + b, 0));
  const total = counts.reduce((a, b) => a + b, 0);
  const { channels } = model;
  const most = openings.map((_, o) => channels.reduce((m, c) => (c.opening === o ? Math.max(m, c.index + 1) : m), 0));
  const at = (k: Complex): ModelWaves => {
    const slopes = new Float64Array(2 * total);
    openings.forEach((opening, o) => {
      slopes.set(opening.slopes(k, counts[o], 'outgoing'), 2 * first[o]);
    });
    const own = openings.map((opening, o) => opening.waves(k, most[o]));
    const outgoing = new Float64Array(2 * channels.length);
    const incoming = new Float64Array(2 * channels.length);
    channels.forEach(({ opening, index }, c) => {
      outgoing.set(own[opening].outgoing.subarray(2 * index, 2 * index + 2), 2 * c);
      incoming.set(own[opening].incoming.subarray(2 * index, 2 * index + 2), 2 * c);
    });
    return { slopes, outgoing, incoming };
  };
  const cutoffs = model.openings.flatMap(({ spec }, o) =>
    spec.kind === 'guide' ? Array.from({ length: counts[o] }, (_, j) => openings[o].variation(j) / spec.index) : [],
  );
  return {
    openings,
    places: Int32Array.from(channels, ({ opening, index }) => first[opening] + index),
    at,
    ratesAt(k) {
      // a cutoff is a branch point: stay clear of it
      const clear = cutoffs.reduce((d, c) => Math.min(d, Math.hypot(k.re - c, k.im)), Infinity);
      const h = Math.min(2e-4 * Math.hypot(k.re, k.im), Math.max(0.02 * clear, 1e-9 * k.re));
      const [wide, narrow] = [h, h / 2].map((step) => {
        const [up, down] = [at({ re: k.re + step, im: k.im }), at({ re: k.re - step, im: k.im })];
        const difference = (a: ComplexArray, b: ComplexArray): ComplexArray => a.map((v, i) => (v - b[i]) / (2 * step));
        return {
          slopes: difference(up.slopes, down.slopes),
          outgoing: difference(up.outgoing, down.outgoing),
          incoming: difference(up.incoming, down.incoming),
        };
      });
      const better = (part: keyof ModelWaves): ComplexArray => narrow[part].map((v, i) => (4 * v - wide[part][i]) / 3);
      return { slopes: better('slopes'), outgoing: better('outgoing'), incoming: better('incoming') };
    },
    propagates: (k) => channels.map(({ opening, index }) => openings[opening].propagates(index, k)),
  };
}

/**
 * S_ij = −8ip W_ij/(α⁺_i α⁺_j) − δ_ij α⁻_j/α⁺_j from W = CᵀA⁻¹C of n channels, n × n column-major. Where α⁺ overflows
 * nothing enters or leaves: the entry is that of an empty channel.
 */
export function scatteringOf(W: ComplexArray, { outgoing, incoming }: ModelWaves, p: number): ComplexArray {
  const n = outgoing.length / 2;
  const S = new Float64Array(2 * n * n);
  for (let j = 0; j < n; j++) {
    const aj = entry(outgoing, j);
    for (let i = 0; i < n; i++) {
      const w = entry(W, i + j * n);
      let s = divide(divide(complex(8 * p * w.im, -8 * p * w.re), aj), entry(outgoing, i));
      if (!Number.isFinite(s.re + s.im)) s = complex(0);
      if (i === j) {
        const mirror = divide(entry(incoming, j), aj);
        s = Number.isFinite(mirror.re + mirror.im) ? subtract(s, mirror) : complex(1);
      }
      S[2 * (i + j * n)] = s.re;
      S[2 * (i + j * n) + 1] = s.im;
    }
  }
  return S;
}

/** dS/dk from W, W′ = dW/dk, and the waves with their rates. */
export function scatteringSlope(
  W: ComplexArray,
  slope: ComplexArray,
  waves: ModelWaves,
  rates: WaveRates,
  p: number,
): ComplexArray {
  const n = waves.outgoing.length / 2;
  const growth = Array.from({ length: n }, (_, j) => divide(entry(rates.outgoing, j), entry(waves.outgoing, j)));
  const out = new Float64Array(2 * n * n);
  for (let j = 0; j < n; j++) {
    const aj = entry(waves.outgoing, j);
    for (let i = 0; i < n; i++) {
      const w = entry(W, i + j * n);
      const d = entry(slope, i + j * n);
      const g = { re: growth[i].re + growth[j].re, im: growth[i].im + growth[j].im };
      const sum = { re: d.re - (w.re * g.re - w.im * g.im), im: d.im - (w.re * g.im + w.im * g.re) };
      let s = divide(divide(complex(8 * p * sum.im, -8 * p * sum.re), aj), entry(waves.outgoing, i));
      if (i === j) {
        const back = entry(waves.incoming, j);
        const rate = divide(entry(rates.incoming, j), aj);
        const mirror = divide(back, aj);
        const turn = { re: mirror.re * growth[j].re - mirror.im * growth[j].im, im: mirror.re * growth[j].im + mirror.im * growth[j].re }; // prettier-ignore
        s = subtract(s, subtract(rate, turn));
      }
      const finite = Number.isFinite(s.re + s.im);
      out[2 * (i + j * n)] = finite ? s.re : 0;
      out[2 * (i + j * n) + 1] = finite ? s.im : 0;
    }
  }
  return out;
}

/** Trace of the delay matrix −iS†dS/dk over the channels that propagate: its real part, in length units. */
export function delayTrace(S: ComplexArray, slope: ComplexArray, propagates: readonly boolean[]): number {
  const n = propagates.length;
  let sum = 0;
  for (let j = 0; j < n; j++)
    for (let i = 0; i < n; i++) {
      if (!propagates[i] || !propagates[j]) continue;
      const at = 2 * (i + j * n);
      sum += S[at] * slope[at + 1] - S[at + 1] * slope[at];
    }
  return sum;
}

/** 8p/|α⁺|² of each channel: what ‖r‖² in X⁻¹ of a unit load is worth in S. */
export function loadWeights({ outgoing }: ModelWaves, p: number): Float64Array {
  return Float64Array.from({ length: outgoing.length / 2 }, (_, j) => {
    const size = Math.hypot(outgoing[2 * j], outgoing[2 * j + 1]);
    return Number.isFinite(size) ? (8 * p) / size / size : 0;
  });
}

const entry = (a: ComplexArray, i: number): Complex => complex(a[2 * i], a[2 * i + 1]);
