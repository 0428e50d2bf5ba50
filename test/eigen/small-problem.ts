// A dense family with known modes, as the eigen room sees a device.

import type { EigenProblem } from '../../src/eigen/problem.ts';
import { type Complex, complex, type ComplexArray, multiply, scale, squareRoot } from '../../src/numerics/complex.ts';
import { luFactor, luSolveInto } from '../../src/numerics/lu.ts';
import { randomStream } from '../../src/numerics/random.ts';

/** κ_j at level 0, and how strongly the level acts on it. */
export interface SmallMode {
  readonly k: Complex;
  readonly weight: number;
}

/**
 * A(k, D) = Q [K − k²(1 − iD W)] Qᵀ, Q a reflection, K = diag(κ_j²) plus couplings c at (0, 1) and (1, 0): modes at
 * k_j = κ_j/√(1 − iD w_j) where nothing couples.
 */
export function smallProblem(modes: readonly SmallMode[], coupling = complex(0)): EigenProblem & { factored: number } {
  const n = modes.length;
  const v = reflection(n);
  const squares = modes.map((m) => multiply(m.k, m.k));
  /** x ↦ x − 2v(vᵀx): its own inverse and transpose. */
  const turn = (x: ComplexArray, columns: number): ComplexArray => {
    for (let j = 0; j < columns; j++) {
      let re = 0;
      let im = 0;
      for (let i = 0; i < n; i++) {
        re += v[i] * x[2 * (i + j * n)];
        im += v[i] * x[2 * (i + j * n) + 1];
      }
      for (let i = 0; i < n; i++) {
        x[2 * (i + j * n)] -= 2 * v[i] * re;
        x[2 * (i + j * n) + 1] -= 2 * v[i] * im;
      }
    }
    return x;
  };
  /** Diagonal of each part, then the coupling times c. */
  const apply = (
    out: ComplexArray,
    x: ComplexArray,
    columns: number,
    diagonal: (i: number) => Complex,
    c: Complex,
  ): ComplexArray => {
    const y = turn(x.slice(0, 2 * n * columns), columns);
    for (let j = 0; j < columns; j++) {
      const at = (i: number): Complex => complex(y[2 * (i + j * n)], y[2 * (i + j * n) + 1]);
      for (let i = 0; i < n; i++) {
        const own = multiply(diagonal(i), at(i));
        const other = i < 2 && n > 1 ? multiply(c, at(1 - i)) : complex(0);
        out[2 * (i + j * n)] = own.re + other.re;
        out[2 * (i + j * n) + 1] = own.im + other.im;
      }
    }
    return turn(out, columns);
  };
  const mass = (level: number) => (i: number) => complex(1, -level * modes[i].weight);
  const none = complex(0);
  const problem = {
    size: n,
    factored: 0,
    terms: 2,
    termFactor: (j: number, k: Complex) =>
      j === 0 ? { value: complex(1), byK: none } : { value: scale(multiply(k, k), -1), byK: scale(k, -2) },
    multiplyTermInto: (out: ComplexArray, j: number, level: number, x: ComplexArray, columns: number) =>
      j === 0 ? apply(out, x, columns, (i) => squares[i], coupling) : apply(out, x, columns, mass(level), none),
    multiplyInto(
      out: ComplexArray,
      k: Complex,
      level: number,
      part: 'value' | 'byK' | 'byLevel',
      x: ComplexArray,
      columns: number,
    ) {
      const k2 = multiply(k, k);
      if (part === 'byK') return apply(out, x, columns, (i) => multiply(scale(k, -2), mass(level)(i)), none);
      if (part === 'byLevel') return apply(out, x, columns, (i) => multiply(k2, complex(0, modes[i].weight)), none);
      return apply(out, x, columns, (i) => sub(squares[i], multiply(k2, mass(level)(i))), coupling);
    },
    factorize(k: Complex, level: number) {
      problem.factored++;
      const dense = new Float64Array(2 * n * n);
      for (let i = 0; i < n; i++) dense[2 * (i + i * n)] = 1;
      const lu = luFactor(problem.multiplyInto(dense, k, level, 'value', dense.slice(), n), n);
      return {
        solveInto: (out: ComplexArray, rhs: ComplexArray, columns: number) => luSolveInto(out, lu, rhs, columns),
        release: () => undefined,
      };
    },
  };
  return problem;
}

/** Where a mode stands that couples to none. */
export const smallMode = ({ k, weight }: SmallMode, level: number): Complex => {
  const d = squareRoot(complex(1, -level * weight));
  const norm = d.re * d.re + d.im * d.im;
  return multiply(k, complex(d.re / norm, -d.im / norm));
};

/** Where it meets the real axis: arg κ + ½ arctan(D w) = 0. */
export function smallCrossing({ k, weight }: SmallMode): { readonly k: number; readonly level: number } {
  const level = Math.tan(-2 * Math.atan2(k.im, k.re)) / weight;
  return { k: Math.hypot(k.re, k.im) / (1 + (level * weight) ** 2) ** 0.25, level };
}

/** Vectors of the first `columns` modes at level 0 when nothing couples: columns of Q. */
export function firstVectors(n: number, columns: number): ComplexArray {
  const v = reflection(n);
  const out = new Float64Array(2 * n * columns);
  for (let j = 0; j < columns; j++) {
    for (let i = 0; i < n; i++) out[2 * (i + j * n)] = (i === j ? 1 : 0) - 2 * v[i] * v[j];
  }
  return out;
}

/** Modes far from everything: the rest of a spectrum. */
export const farModes = (count: number, from = 8): SmallMode[] =>
  Array.from({ length: count }, (_, i) => ({ k: complex(from + 0.37 * i, -0.2 - 0.01 * i), weight: 0.3 }));

function reflection(n: number): Float64Array {
  const random = randomStream(11);
  const v = Float64Array.from({ length: n }, () => random.normal());
  const norm = Math.hypot(...v);
  return v.map((x) => x / norm);
}

const sub = (a: Complex, b: Complex): Complex => complex(a.re - b.re, a.im - b.im);
