// What is S of a projected model at thousands of k: the poles of its inside once, then a small system of channels a point?

import { complex, type Complex, type ComplexArray } from '../numerics/complex.ts';
import { eigenGeneral } from '../numerics/eigenvalues.ts';
import { hermitianEigen } from '../numerics/hermitian.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import { qrOrthonormalise } from '../numerics/qr.ts';
import { type ModelPoint, solveDense, type Wanted } from './dense-model.ts';
import { loadWeights, scatteringOf, scatteringSlope, type WaveSource, waveSource } from './model-waves.ts';
import type { ScatteringModel } from './scattering-model.ts';

export interface ModelSolver {
  readonly model: ScatteringModel;
  readonly source: WaveSource;
  at(k: number, wanted?: Wanted): ModelPoint;
}

/** What functions outside the small system may change in S. */
const TAIL_TOLERANCE = 1e-12;

/** Largest departure from diagonal form, relative; beyond, every point takes a dense solve. */
const DIAGONAL = 1e-11;

/** Poles of the inside nearer than this share of k² stay in the small system as they are. */
const NEAR = 0.05;

/**
 * The band in `pieces` equal parts of s = k². In each, the functions that matter least are closed by y = α + βs, whatever
 * changes S by less than 1e-12; then with K̂ = K − pΣ α b bᵀ, M̂ = M + pΣ β b bᵀ, X̂ = K̂ + s_cM̂ = LLᵀ and the symmetric
 * eigenproblem L⁻¹M̂L⁻ᵀ = Q diag(μ) Qᵀ
 *
 *     A(k) = L Q [D(s) − p Σ_head y_j b̃_j b̃_jᵀ] Qᵀ Lᵀ,   D = 1 − (s + s_c) μ,   b̃_j = QᵀL⁻¹b_j.
 *
 * A point costs Σ_i b̃_i b̃_iᵀ/D_i and a solve of the size of the head. Poles of the inside close to s, where D_i vanishes
 * without any resonance of the open device, are kept as unknowns of their own, so that nothing cancels.
 *
 * Models with terms that are not affine in k² (surface impedance) take the dense solve at every point.
 */
export function modelSolver(model: ScatteringModel, pieces = 1): ModelSolver {
  const source = waveSource(model);
  if (!model.terms.every((t) => t.exponent === 0 || t.exponent === 2))
    return { model, source, at: (k, wanted = {}) => solveDense(model, complex(k), wanted, source) };
  const from = model.kMin ** 2;
  const width = (model.kMax ** 2 - from) / pieces;
  const made = new Map<number, Piece | null>();
  return {
    model,
    source,
    at(k, wanted = {}) {
      const i = Math.max(0, Math.min(pieces - 1, Math.floor((k * k - from) / width)));
      let piece = made.get(i);
      if (piece === undefined) {
        piece = makePiece(model, source, from + i * width, from + (i + 1) * width);
        made.set(i, piece);
      }
      return piece ? solvePiece(model, source, piece, k, wanted) : solveDense(model, complex(k), wanted, source);
    },
  };
}

/** The model in the eigenbasis of its inside. */
export interface Piece {
  readonly real: boolean;
  /** s_c. */
  readonly center: number;
  /** μ, interleaved. */
  readonly mu: ComplexArray;
  /** Functions of the small system, and where each channel is among them. */
  readonly head: Int32Array;
  readonly places: Int32Array;
  /** b̃ of the head: r × head, row by row (all functions of pole i side by side), Re and Im apart; Im null where real. */
  readonly re: Float64Array;
  readonly im: Float64Array | null;
  /** WᵀK̂ and WᵀM̂ in the eigenbasis: r × l row by row, Re and Im apart. */
  readonly witness: readonly Planar[];
}

interface Planar {
  readonly re: Float64Array;
  readonly im: Float64Array | null;
}

function makePiece(model: ScatteringModel, source: WaveSource, sFrom: number, sTo: number): Piece | null {
  const { size: r, terms, coupling, p, witnesses: l, witnessCoupling } = model;
  const fits = affineFits(source, sFrom, sTo);
  const inHead = headOf(model, source, fits.deviations);
  const functions = inHead.length;
  const head = Int32Array.from(Array.from({ length: functions }, (_, j) => j).filter((j) => inHead[j]));
  const tail = Array.from({ length: functions }, (_, j) => j).filter((j) => !inHead[j]);
  // K̂ and M̂, and what the witnesses see of them
  const K = new Float64Array(2 * r * r);
  const M = new Float64Array(2 * r * r);
  const seenK = new Float64Array(2 * r * l);
  const seenM = new Float64Array(2 * r * l);
  for (const { coefficient, exponent, matrix, witness } of terms) {
    const sign = exponent === 0 ? 1 : -1;
    addScaled(exponent === 0 ? K : M, matrix, complex(sign * coefficient.re, sign * coefficient.im));
    addScaled(exponent === 0 ? seenK : seenM, witness, complex(sign * coefficient.re, sign * coefficient.im));
  }
  for (const j of tail) {
    const b = coupling.subarray(j * r, (j + 1) * r);
    const w = witnessCoupling.subarray(j * l, (j + 1) * l);
    addOuter(K, b, b, -p * fits.constant[j]);
    addOuter(M, b, b, p * fits.slope[j]);
    addOuter(seenK, w, b, -p * fits.constant[j]);
    addOuter(seenM, w, b, p * fits.slope[j]);
  }
  const real = terms.every((t) => t.coefficient.im === 0);
  const center = (sFrom + sTo) / 2;
  const X = new Float64Array(2 * r * r);
  for (let i = 0; i < X.length; i++) X[i] = K[i] + center * M[i];
  const L = symmetricFactor(X, r);
  const half = solveLower(L, r, M, r);
  const T = solveLower(L, r, transposed(half, r, r), r);
  const { mu, Q } = real ? realPairs(T, r) : symmetricPairs(T, r);
  // close to an exceptional point of the inside no eigenbasis will do
  if (!real && !(distanceFromDiagonal(T, Q, mu, r) < DIAGONAL)) return null;
  // rows b_jᵀ L⁻ᵀ Q
  const columns = new Float64Array(2 * r * head.length);
  head.forEach((j, a) => {
    for (let i = 0; i < r; i++) columns[2 * (i + a * r)] = coupling[j * r + i];
  });
  const inEigenbasis = (B: ComplexArray, m: number): Planar => planarRows(solveLower(L, r, B, m), r, m, Q, real);
  const { re, im } = inEigenbasis(columns, head.length);
  return {
    real,
    center,
    mu,
    head,
    places: Int32Array.from(source.places, (j) => head.indexOf(j)),
    re,
    im,
    witness: [inEigenbasis(transposed(seenK, l, r), l), inEigenbasis(transposed(seenM, l, r), l)],
  };
}

/** y ≈ α + βs through the two Chebyshev points (β real, α real: what decays), and the largest |y − α − βs| of each. */
function affineFits(source: WaveSource, sFrom: number, sTo: number) {
  const middle = (sFrom + sTo) / 2;
  const half = (sTo - sFrom) / 2;
  const y = (x: number): ComplexArray => source.at(complex(Math.sqrt(middle + half * x))).slopes;
  const [low, high] = [y(-Math.SQRT1_2), y(Math.SQRT1_2)];
  const n = low.length / 2;
  const slope = Float64Array.from({ length: n }, (_, j) => (high[2 * j] - low[2 * j]) / (Math.SQRT2 * half));
  const constant = Float64Array.from({ length: n }, (_, j) => (low[2 * j] + high[2 * j]) / 2 - slope[j] * middle);
  const deviations = new Float64Array(n);
  for (const x of [-1, -0.5, 0, 0.5, 1]) {
    const at = y(x);
    const s = middle + half * x;
    for (let j = 0; j < n; j++) {
      const d = Math.hypot(at[2 * j] - constant[j] - slope[j] * s, at[2 * j + 1]);
      if (d > deviations[j]) deviations[j] = d;
    }
  }
  return { slope, constant, deviations };
}

/** Channels, and all functions but those that together change S by less than the tolerance: |δS| = |t|²|δy|/8. */
function headOf({ reach }: ScatteringModel, { places }: WaveSource, deviations: Float64Array): boolean[] {
  const weight = Array.from(deviations, (d, j) => (d * reach[j]) / 8);
  const order = weight.map((_, j) => j).sort((a, b) => weight[a] - weight[b]);
  const inHead = weight.map(() => true);
  let sum = 0;
  const channels = new Set(places);
  for (const j of order) {
    sum += weight[j];
    if (sum > TAIL_TOLERANCE) break;
    if (!channels.has(j)) inHead[j] = false;
  }
  return inHead;
}

function solvePiece(model: ScatteringModel, source: WaveSource, piece: Piece, k: number, wanted: Wanted): ModelPoint {
  const { size: r, p, channels } = model;
  const { head, places, mu, re, im, center } = piece;
  const n = channels.length;
  const h = head.length;
  const s = k * k;
  const waves = source.at(complex(k));
  // D and the poles kept as unknowns
  const D = new Float64Array(2 * r);
  const inverse = new Float64Array(2 * r);
  const near: number[] = [];
  for (let i = 0; i < r; i++) {
    D[2 * i] = 1 - (s + center) * mu[2 * i];
    D[2 * i + 1] = -(s + center) * mu[2 * i + 1];
    const size = D[2 * i] ** 2 + D[2 * i + 1] ** 2;
    if (size < NEAR * NEAR) near.push(i);
    else {
      inverse[2 * i] = D[2 * i] / size;
      inverse[2 * i + 1] = -D[2 * i + 1] / size;
    }
  }
  const F = im ? complexPoles(re, im, inverse, r, h) : realPoles(re, inverse, r, h);
  const m = h + near.length;
  const A = new Float64Array(2 * m * m);
  const py = (a: number): Complex => complex(p * waves.slopes[2 * head[a]], p * waves.slopes[2 * head[a] + 1]);
  for (let b = 0; b < h; b++) {
    const y = py(b);
    for (let a = 0; a < h; a++) {
      const fr = F[2 * (a + b * h)];
      const fi = F[2 * (a + b * h) + 1];
      A[2 * (a + b * m)] = -(fr * y.re - fi * y.im);
      A[2 * (a + b * m) + 1] = -(fr * y.im + fi * y.re);
    }
    A[2 * (b + b * m)] += 1;
    near.forEach((i, c) => {
      const br = re[i * h + b];
      const bi = im ? im[i * h + b] : 0;
      A[2 * (h + c + b * m)] = -(br * y.re - bi * y.im);
      A[2 * (h + c + b * m) + 1] = -(br * y.im + bi * y.re);
      A[2 * (b + (h + c) * m)] = -br;
      A[2 * (b + (h + c) * m) + 1] = -bi;
    });
  }
  near.forEach((i, c) => {
    A[2 * (h + c + (h + c) * m)] = D[2 * i];
    A[2 * (h + c + (h + c) * m) + 1] = D[2 * i + 1];
  });
  const t = new Float64Array(2 * m * n);
  for (let c = 0; c < n; c++) {
    const f = places[c];
    for (let a = 0; a < h; a++) {
      t[2 * (a + c * m)] = F[2 * (a + f * h)];
      t[2 * (a + c * m) + 1] = F[2 * (a + f * h) + 1];
    }
    near.forEach((i, q) => {
      t[2 * (h + q + c * m)] = re[i * h + f];
      t[2 * (h + q + c * m) + 1] = im ? im[i * h + f] : 0;
    });
  }
  luSolveInto(t, luFactor(A, m), t, n);
  const W = new Float64Array(2 * n * n);
  for (let c = 0; c < n; c++)
    for (let i = 0; i < n; i++) {
      W[2 * (i + c * n)] = t[2 * (places[i] + c * m)];
      W[2 * (i + c * n) + 1] = t[2 * (places[i] + c * m) + 1];
    }
  const S = scatteringOf(W, waves, p);
  if (!wanted.slope && !wanted.estimate) return { S, slope: null, estimate: null };

  // g = pYt + f, and the fields x = D⁻¹b̃g in the eigenbasis (planar, r × n row by row)
  const gr = new Float64Array(h * n);
  const gi = new Float64Array(h * n);
  for (let a = 0; a < h; a++) {
    const y = py(a);
    for (let c = 0; c < n; c++) {
      const tr = t[2 * (a + c * m)];
      const ti = t[2 * (a + c * m) + 1];
      gr[a * n + c] = y.re * tr - y.im * ti;
      gi[a * n + c] = y.re * ti + y.im * tr;
    }
  }
  for (let c = 0; c < n; c++) gr[places[c] * n + c] += 1;
  const xr = new Float64Array(r * n);
  const xi = new Float64Array(r * n);
  addPlanar(xr, xi, re, im, gr, gi, r, h, n);
  for (let i = 0; i < r; i++) {
    const dr = inverse[2 * i];
    const di = inverse[2 * i + 1];
    for (let c = i * n; c < (i + 1) * n; c++) {
      const a = xr[c];
      xr[c] = dr * a - di * xi[c];
      xi[c] = dr * xi[c] + di * a;
    }
  }
  near.forEach((i, q) => {
    for (let c = 0; c < n; c++) {
      xr[i * n + c] = t[2 * (h + q + c * m)];
      xi[i * n + c] = t[2 * (h + q + c * m) + 1];
    }
  });
  let slope: ComplexArray | null = null;
  if (wanted.slope) {
    const rates = source.ratesAt(complex(k));
    const dW = slopeOfW(piece, k, p, rates.slopes, t, m, xr, xi, r, n);
    slope = scatteringSlope(W, dW, waves, rates, p);
  }
  const estimate = wanted.estimate ? residual(model, piece, s, loadWeights(waves, p), gr, gi, xr, xi) : null;
  return { S, slope, estimate };
}

/** W′ = −Zᵀ(∂A/∂k)Z = Σ_i 2kμ_i x_i x_iᵀ + p Σ_j y′_j t_j t_jᵀ. */
function slopeOfW(
  { mu, head }: Piece,
  k: number,
  p: number,
  rates: ComplexArray,
  t: ComplexArray,
  m: number,
  xr: Float64Array,
  xi: Float64Array,
  r: number,
  n: number,
): ComplexArray {
  const sumR = new Float64Array(n * n);
  const sumI = new Float64Array(n * n);
  const add = (wr: number, wi: number, ar: Float64Array, ai: Float64Array, at: number): void => {
    for (let b = 0; b < n; b++) {
      const cr = wr * ar[at + b] - wi * ai[at + b];
      const ci = wr * ai[at + b] + wi * ar[at + b];
      for (let a = 0, to = b * n; a <= b; a++, to++) {
        sumR[to] += cr * ar[at + a] - ci * ai[at + a];
        sumI[to] += cr * ai[at + a] + ci * ar[at + a];
      }
    }
  };
  for (let i = 0; i < r; i++) add(2 * k * mu[2 * i], 2 * k * mu[2 * i + 1], xr, xi, i * n);
  const ar = new Float64Array(n);
  const ai = new Float64Array(n);
  for (let a = 0; a < head.length; a++) {
    for (let c = 0; c < n; c++) {
      ar[c] = t[2 * (a + c * m)];
      ai[c] = t[2 * (a + c * m) + 1];
    }
    add(p * rates[2 * head[a]], p * rates[2 * head[a] + 1], ar, ai, 0);
  }
  const out = new Float64Array(2 * n * n);
  for (let b = 0; b < n; b++)
    for (let a = 0; a <= b; a++)
      for (const to of [a + b * n, b + a * n]) {
        out[2 * to] = sumR[a + b * n];
        out[2 * to + 1] = sumI[a + b * n];
      }
  return out;
}

/** Largest weight × mean square of what the witnesses see of the residual C g − (K̂ − sM̂)x. */
function residual(
  { witnesses: l, witnessCoupling, size: r, channels }: ScatteringModel,
  { witness: [K, M], head }: Piece,
  s: number,
  weights: Float64Array,
  gr: Float64Array,
  gi: Float64Array,
  xr: Float64Array,
  xi: Float64Array,
): number {
  const n = channels.length;
  const h = head.length;
  const C = new Float64Array(l * h);
  head.forEach((j, a) => {
    for (let w = 0; w < l; w++) C[w * h + a] = witnessCoupling[j * l + w];
  });
  const B = new Float64Array(l * r);
  const Bi = K.im || M.im ? new Float64Array(l * r) : null;
  for (let i = 0; i < r; i++)
    for (let w = 0; w < l; w++) {
      B[w * r + i] = s * M.re[i * l + w] - K.re[i * l + w];
      if (Bi) Bi[w * r + i] = s * (M.im?.[i * l + w] ?? 0) - (K.im?.[i * l + w] ?? 0);
    }
  const outR = new Float64Array(l * n);
  const outI = new Float64Array(l * n);
  addPlanar(outR, outI, C, null, gr, gi, l, h, n);
  addPlanar(outR, outI, B, Bi, xr, xi, l, r, n);
  let worst = 0;
  for (let c = 0; c < n; c++) {
    let square = 0;
    for (let w = 0; w < l; w++) square += outR[w * n + c] ** 2 + outI[w * n + c] ** 2;
    worst = Math.max(worst, (weights[c] * square) / l);
  }
  return worst;
}

/** out += B g: B rows × inner (row by row), g inner × n and out rows × n (row by row), planar. */
function addPlanar(
  outR: Float64Array,
  outI: Float64Array,
  B: Float64Array,
  Bi: Float64Array | null,
  gr: Float64Array,
  gi: Float64Array,
  rows: number,
  inner: number,
  n: number,
): void {
  for (let i = 0; i < rows; i++) {
    const to = i * n;
    let a = 0;
    for (; a + 2 <= inner; a += 2) {
      const b0 = B[i * inner + a];
      const b1 = B[i * inner + a + 1];
      const g0 = a * n;
      const g1 = g0 + n;
      for (let c = 0; c < n; c++) {
        outR[to + c] += b0 * gr[g0 + c] + b1 * gr[g1 + c];
        outI[to + c] += b0 * gi[g0 + c] + b1 * gi[g1 + c];
      }
    }
    if (a < inner) {
      const b0 = B[i * inner + a];
      for (let c = 0; c < n; c++) {
        outR[to + c] += b0 * gr[a * n + c];
        outI[to + c] += b0 * gi[a * n + c];
      }
    }
    if (!Bi) continue;
    for (a = 0; a < inner; a++) {
      const b = Bi[i * inner + a];
      if (b === 0) continue;
      for (let c = 0; c < n; c++) {
        outR[to + c] -= b * gi[a * n + c];
        outI[to + c] += b * gr[a * n + c];
      }
    }
  }
}

/** Σ_i b̃_i b̃_iᵀ/D_i, h × h interleaved; b̃ real and D real. Four poles at a time. */
function realPoles(b: Float64Array, inverse: ComplexArray, r: number, h: number): ComplexArray {
  const sum = new Float64Array(h * h);
  for (let i = 0; i < r; i += 4) {
    const rows = [0, 1, 2, 3].map((o) => Math.min(i + o, r - 1) * h);
    const [x0, x1, x2, x3] = rows;
    const [d0, d1, d2, d3] = [0, 1, 2, 3].map((o) => (i + o < r ? inverse[2 * (i + o)] : 0));
    for (let a = 0; a < h; a++) {
      const c0 = d0 * b[x0 + a];
      const c1 = d1 * b[x1 + a];
      const c2 = d2 * b[x2 + a];
      const c3 = d3 * b[x3 + a];
      const to = a * h;
      for (let e = 0; e <= a; e++) sum[to + e] += c0 * b[x0 + e] + c1 * b[x1 + e] + c2 * b[x2 + e] + c3 * b[x3 + e];
    }
  }
  const out = new Float64Array(2 * h * h);
  for (let a = 0; a < h; a++) for (let e = 0; e <= a; e++) out[2 * (a * h + e)] = out[2 * (e * h + a)] = sum[a * h + e];
  return out;
}

function complexPoles(re: Float64Array, im: Float64Array, inverse: ComplexArray, r: number, h: number): ComplexArray {
  const sumR = new Float64Array(h * h);
  const sumI = new Float64Array(h * h);
  for (let i = 0; i < r; i++) {
    const dr = inverse[2 * i];
    const di = inverse[2 * i + 1];
    if (dr === 0 && di === 0) continue;
    const x = i * h;
    for (let a = 0; a < h; a++) {
      const cr = dr * re[x + a] - di * im[x + a];
      const ci = dr * im[x + a] + di * re[x + a];
      const to = a * h;
      for (let e = 0; e <= a; e++) {
        sumR[to + e] += cr * re[x + e] - ci * im[x + e];
        sumI[to + e] += cr * im[x + e] + ci * re[x + e];
      }
    }
  }
  const out = new Float64Array(2 * h * h);
  for (let a = 0; a < h; a++)
    for (let e = 0; e <= a; e++)
      for (const to of [a * h + e, e * h + a]) {
        out[2 * to] = sumR[a * h + e];
        out[2 * to + 1] = sumI[a * h + e];
      }
  return out;
}

function addScaled(out: ComplexArray, matrix: Float64Array, factor: Complex): void {
  for (let i = 0; i < matrix.length; i++) {
    out[2 * i] += factor.re * matrix[i];
    out[2 * i + 1] += factor.im * matrix[i];
  }
}

/** out (a.length rows, column-major) += factor a bᵀ. */
function addOuter(out: ComplexArray, a: Float64Array, b: Float64Array, factor: number): void {
  const rows = a.length;
  for (let j = 0; j < b.length; j++) {
    const c = factor * b[j];
    for (let i = 0; i < rows; i++) out[2 * (i + j * rows)] += c * a[i];
  }
}

/** X = LLᵀ without conjugation, for a complex symmetric matrix with positive definite real part: no pivoting is needed. */
function symmetricFactor(X: ComplexArray, r: number): ComplexArray {
  const L = Float64Array.from(X);
  for (let j = 0; j < r; j++) {
    for (let q = 0; q < j; q++) {
      const cr = L[2 * (j + q * r)];
      const ci = L[2 * (j + q * r) + 1];
      for (let i = j; i < r; i++) {
        const lr = L[2 * (i + q * r)];
        const li = L[2 * (i + q * r) + 1];
        L[2 * (i + j * r)] -= cr * lr - ci * li;
        L[2 * (i + j * r) + 1] -= cr * li + ci * lr;
      }
    }
    const dr = L[2 * (j + j * r)];
    const di = L[2 * (j + j * r) + 1];
    const size = Math.hypot(dr, di);
    const sr = Math.sqrt((size + dr) / 2);
    const si = di / (2 * sr);
    const back = sr * sr + si * si;
    for (let i = j; i < r; i++) {
      const lr = L[2 * (i + j * r)];
      const li = L[2 * (i + j * r) + 1];
      L[2 * (i + j * r)] = (lr * sr + li * si) / back;
      L[2 * (i + j * r) + 1] = (li * sr - lr * si) / back;
    }
  }
  return L;
}

/** L⁻¹B for m columns. */
function solveLower(L: ComplexArray, r: number, B: ComplexArray, m: number): ComplexArray {
  const out = Float64Array.from(B);
  for (let c = 0; c < m; c++) {
    const at = 2 * c * r;
    for (let j = 0; j < r; j++) {
      const dr = L[2 * (j + j * r)];
      const di = L[2 * (j + j * r) + 1];
      const size = dr * dr + di * di;
      const xr = (out[at + 2 * j] * dr + out[at + 2 * j + 1] * di) / size;
      const xi = (out[at + 2 * j + 1] * dr - out[at + 2 * j] * di) / size;
      out[at + 2 * j] = xr;
      out[at + 2 * j + 1] = xi;
      for (let i = j + 1; i < r; i++) {
        const lr = L[2 * (i + j * r)];
        const li = L[2 * (i + j * r) + 1];
        out[at + 2 * i] -= xr * lr - xi * li;
        out[at + 2 * i + 1] -= xr * li + xi * lr;
      }
    }
  }
  return out;
}

/** Columns-by-rows of a rows × columns matrix. */
function transposed(A: ComplexArray, rows: number, columns: number): ComplexArray {
  const out = new Float64Array(A.length);
  for (let j = 0; j < columns; j++)
    for (let i = 0; i < rows; i++) {
      out[2 * (j + i * columns)] = A[2 * (i + j * rows)];
      out[2 * (j + i * columns) + 1] = A[2 * (i + j * rows) + 1];
    }
  return out;
}

/** (BᵀQ)ᵀ of m columns B: r × m row by row, planar. */
function planarRows(B: ComplexArray, r: number, m: number, Q: ComplexArray, real: boolean): Planar {
  const re = new Float64Array(r * m);
  const im = real ? null : new Float64Array(r * m);
  for (let i = 0; i < r; i++)
    for (let c = 0; c < m; c++) {
      let sr = 0;
      let si = 0;
      const q = 2 * i * r;
      const b = 2 * c * r;
      if (real) for (let j = 0; j < 2 * r; j += 2) sr += Q[q + j] * B[b + j];
      else
        for (let j = 0; j < 2 * r; j += 2) {
          sr += Q[q + j] * B[b + j] - Q[q + j + 1] * B[b + j + 1];
          si += Q[q + j] * B[b + j + 1] + Q[q + j + 1] * B[b + j];
        }
      re[i * m + c] = sr;
      if (im) im[i * m + c] = si;
    }
  return { re, im };
}

function realPairs(T: ComplexArray, r: number): { mu: ComplexArray; Q: ComplexArray } {
  const { values, vectors } = hermitianEigen(T, r);
  const mu = new Float64Array(2 * r);
  values.forEach((v, i) => (mu[2 * i] = v));
  return { mu, Q: vectors };
}

/** Eigenvalues that are one to rounding, relative to the largest. */
const SAME = 1e-12;

/**
 * Pairs of a complex symmetric matrix with QᵀQ = 1. Eigenvectors of equal eigenvalues come in any mixture, even one with
 * qᵀq = 0: each such group is made orthonormal anew. What is left of QᵀQ − 1 belongs to close eigenvalues, since
 * (μ_i − μ_j) q_iᵀq_j vanishes to rounding, and goes by QᵀQ = RᵀR, Q ← QR⁻¹, which moves T's diagonal form by rounding only.
 */
function symmetricPairs(T: ComplexArray, r: number): { mu: ComplexArray; Q: ComplexArray } {
  const { values, vectors } = eigenGeneral(T, r);
  const order = Array.from({ length: r }, (_, i) => i).sort((a, b) => values[2 * a] - values[2 * b]);
  const mu = new Float64Array(2 * r);
  const Q = new Float64Array(2 * r * r);
  order.forEach((from, to) => {
    mu.set(values.subarray(2 * from, 2 * from + 2), 2 * to);
    Q.set(vectors.subarray(2 * r * from, 2 * r * (from + 1)), 2 * r * to);
  });
  let top = 0;
  for (let i = 0; i < r; i++) top = Math.max(top, Math.hypot(mu[2 * i], mu[2 * i + 1]));
  for (let first = 0; first < r;) {
    let end = first + 1;
    while (end < r && Math.hypot(mu[2 * end] - mu[2 * end - 2], mu[2 * end + 1] - mu[2 * end - 1]) < SAME * top) end++;
    if (end - first > 1) untangle(Q.subarray(2 * r * first, 2 * r * end), r, end - first);
    first = end;
  }
  for (let i = 0; i < r; i++) scaleColumn(Q, i, r);
  const R = symmetricFactor(bilinearGram(Q, r, r), r);
  divideByUpper(Q, r, R);
  return { mu, Q };
}

/** Columns ← a basis of their span, orthonormal with conjugation, turned until no q has a small qᵀq, then without. */
function untangle(columns: ComplexArray, r: number, c: number): void {
  const { basis, rank } = qrOrthonormalise(columns, r, c, 1e-10);
  if (rank < c) return;
  let best = { pivot: -1, columns: basis };
  for (let turn = 0; turn < 6; turn++) {
    const turned = Float64Array.from(basis);
    for (let i = 0; i + 1 < c; i++) rotatePair(turned, i, i + 1, r, 0.5 * turn);
    const factor = symmetricFactor(bilinearGram(turned, r, c), c);
    let pivot = Infinity;
    for (let i = 0; i < c; i++)
      pivot = Math.min(pivot, Math.hypot(factor[2 * (i + i * c)], factor[2 * (i + i * c) + 1]));
    if (pivot > best.pivot) best = { pivot, columns: turned };
  }
  const factor = symmetricFactor(bilinearGram(best.columns, r, c), c);
  columns.set(best.columns);
  divideByUpper(columns, r, factor, c);
}

function rotatePair(a: ComplexArray, i: number, j: number, r: number, angle: number): void {
  const [c, s] = [Math.cos(angle), Math.sin(angle)];
  for (let x = 2 * r * i, y = 2 * r * j; x < 2 * r * (i + 1); x++, y++) {
    const v = a[x];
    a[x] = c * v - s * a[y];
    a[y] = s * v + c * a[y];
  }
}

/** q ← q/√(qᵀq). */
function scaleColumn(Q: ComplexArray, i: number, r: number): void {
  const q = Q.subarray(2 * i * r, 2 * (i + 1) * r);
  let re = 0;
  let im = 0;
  for (let j = 0; j < 2 * r; j += 2) {
    re += q[j] * q[j] - q[j + 1] * q[j + 1];
    im += 2 * q[j] * q[j + 1];
  }
  const size = Math.hypot(re, im);
  const half = Math.atan2(im, re) / 2;
  const c = Math.cos(half) / Math.sqrt(size);
  const s = -Math.sin(half) / Math.sqrt(size);
  for (let j = 0; j < 2 * r; j += 2) {
    const a = q[j];
    q[j] = c * a - s * q[j + 1];
    q[j + 1] = c * q[j + 1] + s * a;
  }
}

/** QᵀQ of c columns. */
function bilinearGram(Q: ComplexArray, r: number, c: number): ComplexArray {
  return bilinear(Q, Q, r, c);
}

/** AᵀB of c columns each. */
function bilinear(A: ComplexArray, B: ComplexArray, r: number, c: number): ComplexArray {
  const out = new Float64Array(2 * c * c);
  for (let j = 0; j < c; j++)
    for (let i = 0; i < c; i++) {
      let re = 0;
      let im = 0;
      for (let x = 2 * r * i, y = 2 * r * j; x < 2 * r * (i + 1); x += 2, y += 2) {
        re += A[x] * B[y] - A[x + 1] * B[y + 1];
        im += A[x] * B[y + 1] + A[x + 1] * B[y];
      }
      out[2 * (i + j * c)] = re;
      out[2 * (i + j * c) + 1] = im;
    }
  return out;
}

/** Q ← Q L⁻ᵀ for c columns. */
function divideByUpper(Q: ComplexArray, r: number, L: ComplexArray, c = r): void {
  for (let j = 0; j < c; j++) {
    const to = 2 * r * j;
    for (let i = 0; i < j; i++) {
      const lr = L[2 * (j + i * c)];
      const li = L[2 * (j + i * c) + 1];
      if (lr === 0 && li === 0) continue;
      for (let k = 0, x = 2 * r * i; k < 2 * r; k += 2, x += 2) {
        Q[to + k] -= lr * Q[x] - li * Q[x + 1];
        Q[to + k + 1] -= lr * Q[x + 1] + li * Q[x];
      }
    }
    const dr = L[2 * (j + j * c)];
    const di = L[2 * (j + j * c) + 1];
    const size = dr * dr + di * di;
    for (let k = to; k < to + 2 * r; k += 2) {
      const a = Q[k];
      Q[k] = (a * dr + Q[k + 1] * di) / size;
      Q[k + 1] = (Q[k + 1] * dr - a * di) / size;
    }
  }
}

/** Largest |QᵀTQ − diag μ|, relative to the largest μ. */
function distanceFromDiagonal(T: ComplexArray, Q: ComplexArray, mu: ComplexArray, r: number): number {
  const TQ = new Float64Array(2 * r * r);
  for (let j = 0; j < r; j++)
    for (let k = 0; k < r; k++) {
      const qr = Q[2 * (k + j * r)];
      const qi = Q[2 * (k + j * r) + 1];
      for (let i = 0; i < r; i++) {
        const at = 2 * (i + k * r);
        TQ[2 * (i + j * r)] += T[at] * qr - T[at + 1] * qi;
        TQ[2 * (i + j * r) + 1] += T[at] * qi + T[at + 1] * qr;
      }
    }
  const D = bilinear(Q, TQ, r, r);
  let worst = 0;
  let top = 0;
  for (let j = 0; j < r; j++) {
    D[2 * (j + j * r)] -= mu[2 * j];
    D[2 * (j + j * r) + 1] -= mu[2 * j + 1];
    top = Math.max(top, Math.hypot(mu[2 * j], mu[2 * j + 1]));
  }
  for (let i = 0; i < 2 * r * r; i += 2) worst = Math.max(worst, Math.hypot(D[i], D[i + 1]));
  return worst / top;
}
