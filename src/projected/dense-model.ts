// What is S of a projected model at one k, real or complex, by one dense solve?

import { complex, type Complex, type ComplexArray, exponential, logarithm, scale } from '../numerics/complex.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import type { ScatteringModel } from './scattering-model.ts';
import {
  loadWeights,
  type ModelWaves,
  scatteringOf,
  scatteringSlope,
  type WaveSource,
  waveSource,
} from './model-waves.ts';

/** S at one k with what was asked for beside it. */
export interface ModelPoint {
  /** n × n column-major interleaved. */
  readonly S: ComplexArray;
  /** dS/dk. */
  readonly slope: ComplexArray | null;
  /** Largest 8p ‖r_j‖²/|α_j|² over the channels, r the residual in the full space, ‖·‖ in X⁻¹; null when not asked for. */
  readonly estimate: number | null;
}

export interface Wanted {
  readonly slope?: boolean;
  readonly estimate?: boolean;
}

/** c k^e, or its derivative by k. */
export function termFactor({ coefficient, exponent }: { coefficient: Complex; exponent: number }, k: Complex): Complex {
  if (exponent === 0) return coefficient;
  if (exponent === 2 && k.im === 0) return scale(coefficient, k.re * k.re);
  const power = exponential(scale(logarithm(k), exponent));
  return times(coefficient, power);
}

export function termRate({ coefficient, exponent }: { coefficient: Complex; exponent: number }, k: Complex): Complex {
  if (exponent === 0) return complex(0);
  return termFactor({ coefficient: scale(coefficient, exponent), exponent: exponent - 1 }, k);
}

/** A(k) of the basis, or ∂A/∂k, r × r column-major interleaved. */
export function modelMatrix(
  model: ScatteringModel,
  k: Complex,
  slopes: ComplexArray,
  part: 'value' | 'byK',
): ComplexArray {
  const { size: r, terms, coupling, p } = model;
  const A = new Float64Array(2 * r * r);
  for (const term of terms) {
    const f = part === 'value' ? termFactor(term, k) : termRate(term, k);
    if (f.re === 0 && f.im === 0) continue;
    const { matrix } = term;
    for (let i = 0; i < r * r; i++) {
      A[2 * i] += f.re * matrix[i];
      A[2 * i + 1] += f.im * matrix[i];
    }
  }
  for (let j = 0; j < slopes.length / 2; j++) {
    const row = j * r;
    for (let b = 0; b < r; b++) {
      const re = -p * slopes[2 * j] * coupling[row + b];
      const im = -p * slopes[2 * j + 1] * coupling[row + b];
      if (re === 0 && im === 0) continue;
      const at = 2 * b * r;
      for (let a = 0; a <= b; a++) {
        A[at + 2 * a] += re * coupling[row + a];
        A[at + 2 * a + 1] += im * coupling[row + a];
      }
    }
  }
  // the waves filled the upper triangle only; the terms are symmetric
  for (let b = 0; b < r; b++)
    for (let a = 0; a < b; a++) {
      A[2 * (b + a * r)] = A[2 * (a + b * r)];
      A[2 * (b + a * r) + 1] = A[2 * (a + b * r) + 1];
    }
  return A;
}

/** One dense solve of r unknowns; any terms. */
export function solveDense(
  model: ScatteringModel,
  k: Complex,
  wanted: Wanted = {},
  source = waveSource(model),
): ModelPoint {
  const { size: r, channels, p } = model;
  const n = channels.length;
  const waves = source.at(k);
  const lu = luFactor(modelMatrix(model, k, waves.slopes, 'value'), r);
  const Z = new Float64Array(2 * r * n);
  for (let c = 0; c < n; c++) for (let i = 0; i < r; i++) Z[2 * (i + c * r)] = model.coupling[source.places[c] * r + i];
  luSolveInto(Z, lu, Z, n);
  const W = new Float64Array(2 * n * n);
  for (let c = 0; c < n; c++) for (let i = 0; i < n; i++) put(W, i + c * n, coupled(model, source.places[i], Z, c));
  const S = scatteringOf(W, waves, p);
  return {
    S,
    slope: wanted.slope ? slopeOf(model, source, k, waves, Z, W) : null,
    estimate: wanted.estimate ? residualOf(model, source, k, waves, Z) : null,
  };
}

function slopeOf(
  model: ScatteringModel,
  source: WaveSource,
  k: Complex,
  waves: ModelWaves,
  Z: ComplexArray,
  W: ComplexArray,
): ComplexArray {
  const { size: r, channels, p } = model;
  const n = channels.length;
  const rates = source.ratesAt(k);
  const D = modelMatrix(model, k, rates.slopes, 'byK');
  const slope = new Float64Array(2 * n * n);
  const work = new Float64Array(2 * r);
  for (let j = 0; j < n; j++) {
    work.fill(0);
    for (let b = 0; b < r; b++) {
      const zr = Z[2 * (b + j * r)];
      const zi = Z[2 * (b + j * r) + 1];
      for (let a = 0; a < r; a++) {
        const at = 2 * (a + b * r);
        work[2 * a] += D[at] * zr - D[at + 1] * zi;
        work[2 * a + 1] += D[at] * zi + D[at + 1] * zr;
      }
    }
    for (let i = 0; i < n; i++) {
      let re = 0;
      let im = 0;
      for (let a = 0; a < r; a++) {
        const zr = Z[2 * (a + i * r)];
        const zi = Z[2 * (a + i * r) + 1];
        re -= zr * work[2 * a] - zi * work[2 * a + 1];
        im -= zr * work[2 * a + 1] + zi * work[2 * a];
      }
      put(slope, i + j * n, complex(re, im));
    }
  }
  return scatteringSlope(W, slope, waves, rates, p);
}

function residualOf(
  model: ScatteringModel,
  source: WaveSource,
  k: Complex,
  waves: ModelWaves,
  Z: ComplexArray,
): number {
  const { channels, p, witnesses: l, witnessCoupling } = model;
  const weights = loadWeights(waves, p);
  let worst = 0;
  channels.forEach((_, c) => {
    const sum = witnessResidual(model, k, waves.slopes, Z, c);
    for (let w = 0; w < l; w++) sum[2 * w] += witnessCoupling[source.places[c] * l + w];
    let square = 0;
    for (const v of sum) square += v * v;
    worst = Math.max(worst, (weights[c] * square) / l);
  });
  return worst;
}

/** −WᵀA u for column c of fields in the basis. */
export function witnessResidual(
  model: ScatteringModel,
  k: Complex,
  slopes: ComplexArray,
  Z: ComplexArray,
  c: number,
): ComplexArray {
  const { size: r, terms, p, witnesses: l, witnessCoupling } = model;
  const out = new Float64Array(2 * l);
  for (const term of terms) {
    const f = termFactor(term, k);
    for (let b = 0; b < r; b++) {
      const zr = Z[2 * (b + c * r)];
      const zi = Z[2 * (b + c * r) + 1];
      const re = f.re * zr - f.im * zi;
      const im = f.re * zi + f.im * zr;
      for (let w = 0; w < l; w++) {
        out[2 * w] -= re * term.witness[b * l + w];
        out[2 * w + 1] -= im * term.witness[b * l + w];
      }
    }
  }
  for (let j = 0; j < slopes.length / 2; j++) {
    const t = coupled(model, j, Z, c);
    const g = times(t, complex(p * slopes[2 * j], p * slopes[2 * j + 1]));
    for (let w = 0; w < l; w++) {
      out[2 * w] += g.re * witnessCoupling[j * l + w];
      out[2 * w + 1] += g.im * witnessCoupling[j * l + w];
    }
  }
  return out;
}

/** b_jᵀ times column c of Z. */
function coupled({ size: r, coupling }: ScatteringModel, j: number, Z: ComplexArray, c: number): Complex {
  let re = 0;
  let im = 0;
  const row = j * r;
  const at = 2 * c * r;
  for (let i = 0; i < r; i++) {
    re += coupling[row + i] * Z[at + 2 * i];
    im += coupling[row + i] * Z[at + 2 * i + 1];
  }
  return complex(re, im);
}

const times = (a: Complex, b: Complex): Complex => complex(a.re * b.re - a.im * b.im, a.re * b.im + a.im * b.re);

function put(out: ComplexArray, i: number, { re, im }: Complex): void {
  out[2 * i] = re;
  out[2 * i + 1] = im;
}
