// Where does a projected model resonate sharply?

import { complex, type Complex, type ComplexArray, divide, modulus, multiply, subtract } from '../numerics/complex.ts';
import { hermitianEigen } from '../numerics/hermitian.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import { choleskyFactor } from '../numerics/real-columns.ts';
import { modelMatrix, termFactor, witnessResidual } from './dense-model.ts';
import { loadWeights, type WaveSource, waveSource } from './model-waves.ts';
import type { ModelPole, ScatteringModel } from './scattering-model.ts';

/** Poles whose first guess has a lower Q than this share of the limit are not followed. */
const DOUBT = 0.3;

const MOST_STEPS = 12;

/**
 * Poles with Q = Re k/2|Im k| at least `qMin` and Re k in the band, in order. Start: the real inside with Re y ≈ α + βs of
 * all waves, a symmetric eigenproblem; a sharp mode hardly reaches the openings, so that its first-order k by
 * uᵀA(k)u = 0 is close. Then inverse iteration on A(k)u = 0 itself.
 */
export function sharpPoles(model: ScatteringModel, qMin: number, source = waveSource(model)): ModelPole[] {
  const out: ModelPole[] = [];
  for (const { k: real, vector } of insideModes(model, source)) {
    const guess = firstOrder(model, source, real, vector);
    if (qOf(guess) < DOUBT * qMin) continue;
    const pole = polish(model, source, guess, vector);
    if (!pole || qOf(pole.k) < qMin) continue;
    if (!(pole.k.re >= model.kMin && pole.k.re <= model.kMax)) continue;
    if (!out.some((o) => isSame(o, pole))) out.push(pole);
  }
  return out.sort((a, b) => a.k.re - b.k.re);
}

export const qOf = (k: Complex): number => k.re / (2 * Math.abs(k.im));

/** The same k and, where the members of a pair cannot be told by k, the same field. */
function isSame(a: ModelPole, b: ModelPole): boolean {
  if (modulus(subtract(a.k, b.k)) > 1e-9 * a.k.re) return false;
  let product = 0;
  let x = 0;
  let y = 0;
  for (let i = 0; i < a.vector.length; i += 2) {
    product += a.vector[i] * b.vector[i] + a.vector[i + 1] * b.vector[i + 1];
    x += a.vector[i] ** 2 + a.vector[i + 1] ** 2;
    y += b.vector[i] ** 2 + b.vector[i + 1] ** 2;
  }
  return product * product > 0.5 * x * y;
}

/** Real modes of the inside near the band. */
function insideModes(model: ScatteringModel, source: WaveSource): { k: number; vector: ComplexArray }[] {
  const { size: r, terms, coupling, p } = model;
  const [sFrom, sTo] = [model.kMin ** 2, model.kMax ** 2];
  const middle = (sFrom + sTo) / 2;
  const [low, high] = [0.15, 0.85].map((x) => source.at(complex(Math.sqrt(sFrom + (sTo - sFrom) * x))).slopes);
  const K = new Float64Array(r * r);
  const M = new Float64Array(r * r);
  for (const term of terms) {
    // other powers of k by their line through the same two points
    const [a, b] = [0.15, 0.85].map((x) => termFactor(term, complex(Math.sqrt(sFrom + (sTo - sFrom) * x))).re);
    const slope = (b - a) / (0.7 * (sTo - sFrom));
    const constant = (a + b) / 2 - slope * middle;
    for (let i = 0; i < r * r; i++) {
      K[i] += constant * term.matrix[i];
      M[i] -= slope * term.matrix[i];
    }
  }
  for (let j = 0; j < low.length / 2; j++) {
    const slope = (high[2 * j] - low[2 * j]) / (0.7 * (sTo - sFrom));
    const constant = (low[2 * j] + high[2 * j]) / 2 - slope * middle;
    for (let b = 0; b < r; b++)
      for (let a = 0; a < r; a++) {
        const product = p * coupling[j * r + a] * coupling[j * r + b];
        K[a + b * r] -= constant * product;
        M[a + b * r] += slope * product;
      }
  }
  const X = K.map((v, i) => v + middle * M[i]);
  const L = choleskyFactor(X, r);
  if (!L) return [];
  lowerSolve(L, r, M);
  transposeInPlace(M, r);
  lowerSolve(L, r, M);
  const packed = new Float64Array(2 * r * r);
  for (let i = 0; i < r * r; i++) packed[2 * i] = M[i];
  const { values, vectors } = hermitianEigen(packed, r);
  const out: { k: number; vector: ComplexArray }[] = [];
  const room = 0.05 * middle;
  for (let i = 0; i < r; i++) {
    const s = 1 / values[i] - middle;
    if (!(s > sFrom - room && s < sTo + room)) continue;
    const v = Float64Array.from({ length: r }, (_, j) => vectors[2 * (j + i * r)]);
    upperSolve(L, r, v);
    const vector = new Float64Array(2 * r);
    for (let j = 0; j < r; j++) vector[2 * j] = v[j];
    out.push({ k: Math.sqrt(s), vector });
  }
  return out;
}

/** k of uᵀA(k)u = 0 with a fixed field. */
function firstOrder(model: ScatteringModel, source: WaveSource, k0: number, u: ComplexArray): Complex {
  const { size: r, terms, coupling, p } = model;
  const parts = terms.map((term) => ({ term, value: quadratic(term.matrix, u, r) }));
  const seen = Float64Array.from({ length: coupling.length / r }, (_, j) => {
    let sum = 0;
    for (let i = 0; i < r; i++) sum += coupling[j * r + i] * u[2 * i];
    return sum * sum;
  });
  const value = (k: Complex): Complex => {
    let re = 0;
    let im = 0;
    for (const part of parts) {
      const f = termFactor(part.term, k);
      re += f.re * part.value;
      im += f.im * part.value;
    }
    const { slopes } = source.at(k);
    for (let j = 0; j < seen.length; j++) {
      re -= p * slopes[2 * j] * seen[j];
      im -= p * slopes[2 * j + 1] * seen[j];
    }
    return complex(re, im);
  };
  let k = complex(k0);
  for (let step = 0; step < 3; step++) {
    const h = 1e-5 * k0;
    const rate = subtract(value({ re: k.re + h, im: k.im }), value({ re: k.re - h, im: k.im }));
    k = subtract(k, divide(value(k), complex(rate.re / (2 * h), rate.im / (2 * h))));
    if (!(k.re > 0.5 * k0 && k.re < 2 * k0)) return complex(k0, -k0);
  }
  return k;
}

/** uᵀPu of a real field. */
function quadratic(P: Float64Array, u: ComplexArray, r: number): number {
  let sum = 0;
  for (let b = 0; b < r; b++) {
    let row = 0;
    for (let a = 0; a < r; a++) row += P[a + b * r] * u[2 * a];
    sum += row * u[2 * b];
  }
  return sum;
}

/** Inverse iteration with Rayleigh quotients k ← k − uᵀAu/uᵀA′u; null when it does not settle near its start. */
function polish(model: ScatteringModel, source: WaveSource, start: Complex, from: ComplexArray): ModelPole | null {
  const { size: r, witnesses: l } = model;
  let k = start;
  let u = from;
  for (let step = 0; step < MOST_STEPS; step++) {
    const rate = modelMatrix(model, k, source.ratesAt(k).slopes, 'byK');
    const lu = luFactor(modelMatrix(model, k, source.at(k).slopes, 'value'), r);
    u = unit(luSolveInto(new Float64Array(2 * r), lu, times(rate, u, r)));
    const value = modelMatrix(model, k, source.at(k).slopes, 'value');
    const change = divide(dot(u, times(value, u, r)), dot(u, times(rate, u, r)));
    k = subtract(k, change);
    if (!(modulus(subtract(k, start)) < 0.02 * start.re)) return null;
    if (modulus(change) > 1e-13 * k.re && step + 1 < MOST_STEPS) continue;
    if (modulus(change) > 1e-9 * k.re) return null;
    const size = dot(u, times(rate, u, r));
    const scaled = scaleBy(u, divide(complex(1), rootOf(size)));
    let square = 0;
    for (const v of witnessResidual(model, k, source.at(k).slopes, scaled, 0)) square += v * v;
    return { k, vector: scaled, error: square / l, height: peakHeight(model, source, k, scaled) };
  }
  return null;
}

/** Σ_i 8p|b_iᵀu|²/|α_i|² over the channels, in units of |Im k|. */
function peakHeight(model: ScatteringModel, source: WaveSource, k: Complex, u: ComplexArray): number {
  const { size: r, coupling, p } = model;
  const weights = loadWeights(source.at(complex(k.re)), p);
  let sum = 0;
  source.places.forEach((j, c) => {
    let re = 0;
    let im = 0;
    for (let i = 0; i < r; i++) {
      re += coupling[j * r + i] * u[2 * i];
      im += coupling[j * r + i] * u[2 * i + 1];
    }
    sum += weights[c] * (re * re + im * im);
  });
  return sum / Math.abs(k.im);
}

function rootOf(a: Complex): Complex {
  const size = Math.sqrt(modulus(a));
  const half = Math.atan2(a.im, a.re) / 2;
  return complex(size * Math.cos(half), size * Math.sin(half));
}

function times(A: ComplexArray, u: ComplexArray, r: number): ComplexArray {
  const out = new Float64Array(2 * r);
  for (let b = 0; b < r; b++) {
    const ur = u[2 * b];
    const ui = u[2 * b + 1];
    for (let a = 0; a < r; a++) {
      const at = 2 * (a + b * r);
      out[2 * a] += A[at] * ur - A[at + 1] * ui;
      out[2 * a + 1] += A[at] * ui + A[at + 1] * ur;
    }
  }
  return out;
}

/** aᵀb. */
function dot(a: ComplexArray, b: ComplexArray): Complex {
  let re = 0;
  let im = 0;
  for (let i = 0; i < a.length; i += 2) {
    re += a[i] * b[i] - a[i + 1] * b[i + 1];
    im += a[i] * b[i + 1] + a[i + 1] * b[i];
  }
  return complex(re, im);
}

function unit(u: ComplexArray): ComplexArray {
  let square = 0;
  for (const v of u) square += v * v;
  const s = 1 / Math.sqrt(square);
  return u.map((v) => v * s);
}

function scaleBy(u: ComplexArray, by: Complex): ComplexArray {
  const out = new Float64Array(u.length);
  for (let i = 0; i < u.length; i += 2) {
    const v = multiply(complex(u[i], u[i + 1]), by);
    out[i] = v.re;
    out[i + 1] = v.im;
  }
  return out;
}

/** B ← L⁻¹B, r × r. */
function lowerSolve(L: Float64Array, r: number, B: Float64Array): void {
  for (let c = 0; c < r; c++) {
    const at = c * r;
    for (let j = 0; j < r; j++) {
      const x = (B[at + j] /= L[j + j * r]);
      for (let i = j + 1; i < r; i++) B[at + i] -= x * L[i + j * r];
    }
  }
}

/** v ← L⁻ᵀv. */
function upperSolve(L: Float64Array, r: number, v: Float64Array): void {
  for (let j = r - 1; j >= 0; j--) {
    let sum = v[j];
    for (let i = j + 1; i < r; i++) sum -= L[i + j * r] * v[i];
    v[j] = sum / L[j + j * r];
  }
}

function transposeInPlace(A: Float64Array, r: number): void {
  for (let j = 0; j < r; j++)
    for (let i = 0; i < j; i++) {
      const a = A[i + j * r];
      A[i + j * r] = A[j + i * r];
      A[j + i * r] = a;
    }
}
