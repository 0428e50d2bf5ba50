// How does a device with openings look in the span of its own driven fields?

import { type ContourProblem, randomBlock } from '../eigen/contour-search.ts';
import { COLUMNS, type ContourWindowAnswer, searchWedges } from '../eigen/contour-window.ts';
import { add, type Complex, complex, type ComplexArray, divide, multiply, subtract } from '../numerics/complex.ts';
import { luFactor, luSolve, luSolveInto } from '../numerics/lu.ts';
import type { ClosedOpenings } from '../operator/closed-openings.ts';
import type { Scope } from './prepare.ts';

/**
 * UᵀA(k)U with a real orthonormal U that holds the fields which each channel drives at a few real k: at real k the span of
 * A⁻¹C is real for lossless devices, and fields without reflection are sums of driven ones. A is complex symmetric, so
 * that errors of k are squares of what the span leaves out.
 */
export interface DrivenModel {
  /** Columns of U. */
  readonly size: number;
  /** size × channels, column-major, real: how each channel is seen. */
  readonly coupling: Float64Array;
  /** UᵀAU, all waves outgoing, on the sheet around the real k `from`; size × size. */
  matrix(k: Complex, from: number): ComplexArray;
  /** For each channel what is to be added times c cᵀ when its wave comes in instead; 0 where it carries no power. */
  turned(k: Complex, from: number): ComplexArray;
}

/** Fields at so many Chebyshev points of the band. */
const POINTS = 9;
/** Columns whose new part is below this share of themselves are left out. */
const NEW_PART = 1e-9;
/** Columns multiplied at a time. */
const BLOCK = 16;

export function drivenModel(
  closed: ClosedOpenings,
  level: number,
  kMin: number,
  kMax: number,
  points = POINTS,
): DrivenModel {
  const { family, functionals, channels } = closed;
  const N = family.size;
  const columns: Float64Array[] = [];
  for (let i = 0; i < points; i++) {
    const k = (kMin + kMax) / 2 - ((kMax - kMin) / 2) * Math.cos((Math.PI * (i + 0.5)) / points);
    const { fields } = closed.scatter(complex(k), level);
    for (let c = 0; c < channels.length; c++)
      for (const part of [0, 1]) {
        const column = new Float64Array(N);
        for (let g = 0; g < N; g++) column[g] = fields[2 * (g + c * N) + part];
        addOrthonormal(columns, column);
      }
  }
  const size = columns.length;
  const terms = Array.from({ length: family.terms }, (_, j) => projectTerm(closed, j, level, columns));
  // what each opening's functions see of each column: count × size
  const seen = functionals.map(({ unknowns, count, values }) => {
    const out = new Float64Array(count * size);
    columns.forEach((u, s) => {
      unknowns.forEach((g, i) => {
        for (let j = 0; j < count; j++) out[j + s * count] += values[j + i * count] * u[g];
      });
    });
    return out;
  });
  const coupling = new Float64Array(size * channels.length);
  channels.forEach(({ opening, index }, c) => {
    const { count } = functionals[opening];
    for (let s = 0; s < size; s++) coupling[s + c * size] = seen[opening][index + s * count];
  });
  const p = closed.p;
  return {
    size,
    coupling,
    matrix(k, from) {
      const out = new Float64Array(2 * size * size);
      terms.forEach((term, j) => {
        const { value } = family.termFactor(j, k);
        addScaled(out, term, value);
      });
      functionals.forEach(({ opening, count }, o) => {
        const slopes = opening.slopes(k, count, 'outgoing', from);
        const all = seen[o];
        for (let b = 0; b < size; b++)
          for (let a = 0; a <= b; a++) {
            let re = 0;
            let im = 0;
            for (let j = 0; j < count; j++) {
              const cc = all[j + a * count] * all[j + b * count];
              re += slopes[2 * j] * cc;
              im += slopes[2 * j + 1] * cc;
            }
            for (const at of a === b ? [a + b * size] : [a + b * size, b + a * size]) {
              out[2 * at] -= p * re;
              out[2 * at + 1] -= p * im;
            }
          }
      });
      return out;
    },
    turned(k, from) {
      const out = new Float64Array(2 * channels.length);
      channels.forEach(({ opening, index }, c) => {
        const { opening: own, count } = functionals[opening];
        const [go, come] = (['outgoing', 'incoming'] as const).map((way) => own.slopes(k, count, way, from));
        out[2 * c] = -p * (come[2 * index] - go[2 * index]);
        out[2 * c + 1] = -p * (come[2 * index + 1] - go[2 * index + 1]);
      });
      return out;
    },
  };
}

/** Reflectionless modes of each choice of inputs in the scope, as the model sees them. */
export function searchModel(
  model: DrivenModel,
  { branchPoints }: ClosedOpenings,
  choices: readonly (readonly boolean[])[],
  scope: Scope,
  expected: (a: number, b: number) => number,
): ContourWindowAnswer {
  const families = choiceSampler(model, choices, Math.min(COLUMNS, model.size), SEED);
  return searchWedges(families, { ...scope, branchPoints, expected, seed: SEED });
}

const SEED = 62;

/**
 * The model with each choice of inputs as one family of a contour search: one factorization with all waves outgoing serves
 * them all, since a choice changes A by C_I E C_Iᵀ (Woodbury).
 */
function choiceSampler(
  model: DrivenModel,
  choices: readonly (readonly boolean[])[],
  columns: number,
  seed: number,
): (from: number) => ContourProblem {
  const { size, coupling } = model;
  const n = coupling.length / size;
  const V = randomBlock(size, columns, seed);
  const rhs = new Float64Array(2 * size * (columns + n));
  rhs.set(V);
  for (let i = 0; i < coupling.length; i++) rhs[V.length + 2 * i] = coupling[i];
  return (from) => ({
    columns,
    sample(k) {
      const lu = luFactor(model.matrix(k, from), size);
      const x = luSolveInto(new Float64Array(rhs.length), lu, rhs, columns + n);
      const e = model.turned(k, from);
      // rows of V and of C times all solutions
      const products = realTimes(rhs, columns + n, x, size);
      return choices.map((inputs) => chosen(products, columns, n, e, inputs));
    },
  });
}

/** VᵀA_I⁻¹V = VᵀA⁻¹V − Q_Iᵀ (E_I⁻¹ + G_II)⁻¹ Q_I, Q = CᵀA⁻¹V, G = CᵀA⁻¹C; all of them blocks of `products`. */
function chosen(
  products: ComplexArray,
  columns: number,
  n: number,
  e: ComplexArray,
  inputs: readonly boolean[],
): ComplexArray {
  const width = columns + n;
  const entry = (i: number, j: number): Complex =>
    complex(products[2 * (i + j * width)], products[2 * (i + j * width) + 1]);
  const into = inputs.flatMap((input, c) => (input && (e[2 * c] !== 0 || e[2 * c + 1] !== 0) ? [c] : []));
  const m = into.length;
  const out = new Float64Array(2 * columns * columns);
  const M = new Float64Array(2 * m * m);
  const Q = new Float64Array(2 * m * columns);
  into.forEach((a, i) => {
    into.forEach((b, j) => {
      let v = entry(columns + a, columns + b);
      if (a === b) v = add(v, divide(complex(1), complex(e[2 * a], e[2 * a + 1])));
      put(M, i + j * m, v);
    });
    for (let j = 0; j < columns; j++) put(Q, i + j * m, entry(columns + a, j));
  });
  const R = m > 0 ? luSolve(luFactor(M, m), Q, columns) : Q;
  for (let j = 0; j < columns; j++)
    for (let i = 0; i < columns; i++) {
      let v = entry(i, j);
      for (let l = 0; l < m; l++) {
        const q = complex(Q[2 * (l + i * m)], Q[2 * (l + i * m) + 1]);
        v = subtract(v, multiply(q, complex(R[2 * (l + j * m)], R[2 * (l + j * m) + 1])));
      }
      put(out, i + j * columns, v);
    }
  return out;
}

/** XᵀY of real X (stored complex) and complex Y, both of `size` rows and `width` columns. */
function realTimes(x: ComplexArray, width: number, y: ComplexArray, size: number): ComplexArray {
  const out = new Float64Array(2 * width * width);
  for (let j = 0; j < width; j++)
    for (let i = 0; i < width; i++) {
      let re = 0;
      let im = 0;
      for (let s = 0; s < size; s++) {
        const v = x[2 * (s + i * size)];
        re += v * y[2 * (s + j * size)];
        im += v * y[2 * (s + j * size) + 1];
      }
      out[2 * (i + j * width)] = re;
      out[2 * (i + j * width) + 1] = im;
    }
  return out;
}

/** UᵀA_jU, a block of columns at a time. */
function projectTerm(
  { family }: ClosedOpenings,
  j: number,
  level: number,
  columns: readonly Float64Array[],
): ComplexArray {
  const N = family.size;
  const size = columns.length;
  const out = new Float64Array(2 * size * size);
  for (let first = 0; first < size; first += BLOCK) {
    const count = Math.min(BLOCK, size - first);
    const x = new Float64Array(2 * N * count);
    for (let b = 0; b < count; b++) for (let g = 0; g < N; g++) x[2 * (g + b * N)] = columns[first + b][g];
    const y = family.multiplyTermInto(new Float64Array(x.length), j, level, x, count);
    for (let b = 0; b < count; b++)
      for (let a = 0; a < size; a++) {
        const u = columns[a];
        let re = 0;
        let im = 0;
        for (let g = 0; g < N; g++) {
          re += u[g] * y[2 * (g + b * N)];
          im += u[g] * y[2 * (g + b * N) + 1];
        }
        out[2 * (a + (first + b) * size)] = re;
        out[2 * (a + (first + b) * size) + 1] = im;
      }
  }
  return out;
}

/** Gram–Schmidt, twice. */
function addOrthonormal(columns: Float64Array[], column: Float64Array): void {
  const whole = norm(column);
  for (let pass = 0; pass < 2; pass++)
    for (const u of columns) {
      let dot = 0;
      for (let g = 0; g < u.length; g++) dot += u[g] * column[g];
      for (let g = 0; g < u.length; g++) column[g] -= dot * u[g];
    }
  const rest = norm(column);
  if (!(rest > NEW_PART * whole)) return;
  for (let g = 0; g < column.length; g++) column[g] /= rest;
  columns.push(column);
}

function norm(u: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < u.length; i++) sum += u[i] * u[i];
  return Math.sqrt(sum);
}

function addScaled(out: ComplexArray, a: ComplexArray, w: Complex): void {
  for (let i = 0; i < a.length; i += 2) {
    out[i] += w.re * a[i] - w.im * a[i + 1];
    out[i + 1] += w.re * a[i + 1] + w.im * a[i];
  }
}

function put(out: ComplexArray, i: number, value: Complex): void {
  out[2 * i] = value.re;
  out[2 * i + 1] = value.im;
}
