// Which eigenvalues of a family that is nonlinear in k lie in an ellipse?

import { add, type Complex, complex, type ComplexArray, modulus, multiply, scale } from '../numerics/complex.ts';
import { eigenGeneral } from '../numerics/eigenvalues.ts';
import { randomStream } from '../numerics/random.ts';
import { singularForm } from '../numerics/singular-values.ts';
import { transposeProduct } from './columns.ts';
import type { Inverse } from './problem.ts';

/** One family, or several over the same contour, seen through the same random columns V. */
export interface ContourProblem {
  /** Random columns; more than the eigenvalues expected. */
  readonly columns: number;
  /** VᵀA(k)⁻¹V of each family, columns × columns. */
  sample(k: Complex): readonly ComplexArray[];
}

/** One family by its factorizations. */
export function sampledInverse(
  size: number,
  columns: number,
  seed: number,
  factorize: (k: Complex) => Inverse,
): ContourProblem {
  const V = randomBlock(size, columns, seed);
  const x = new Float64Array(V.length);
  return {
    columns,
    sample(k) {
      const inverse = factorize(k);
      inverse.solveInto(x, V, columns);
      inverse.release();
      return [transposeProduct(V, columns, x, columns, size)];
    },
  };
}

/** Real normal numbers, as complex columns. */
export function randomBlock(size: number, columns: number, seed: number): ComplexArray {
  const random = randomStream(seed);
  const V = new Float64Array(2 * size * columns);
  for (let i = 0; i < V.length; i += 2) V[i] = random.normal();
  return V;
}

export interface ContourRequest {
  readonly center: Complex;
  /** Half axes along Re k and Im k. */
  readonly halfWidth: number;
  readonly halfHeight: number;
  readonly points: number;
}

export interface ContourAnswer {
  readonly ks: readonly Complex[];
  /** False when as many showed as the columns can tell: the ellipse must be cut. */
  readonly told: boolean;
}

/** Singular values below this share of the largest are noise of the trapezoid rule. */
const RANK = 1e-9;
/** So are those below this share of what was added up: an ellipse that holds nothing leaves only that. */
const CANCELLED = 1e-10;

/**
 * Moments VᵀA(k)⁻¹V and V ᵀ(k − center)A⁻¹V over the ellipse by the trapezoid rule, whose error falls geometrically with
 * the points; eigenvalues of their pencil on the numerical range. Candidates outside the ellipse by up to a fifth are kept:
 * they are to be polished and judged by the caller.
 * Source: W.-J. Beyn, Linear Algebra Appl. 436, 3839 (2012), with one random block on both sides.
 */
export function searchContour(problem: ContourProblem, request: ContourRequest): readonly ContourAnswer[] {
  const { center, halfWidth, halfHeight, points } = request;
  const { columns } = problem;
  let sums: Sums[] = [];
  for (let q = 0; q < points; q++) {
    const t = (2 * Math.PI * (q + 0.5)) / points;
    const offset = complex(halfWidth * Math.cos(t), halfHeight * Math.sin(t));
    // dk/dt / (i points): weights of (1/2πi)∮
    const weight = scale(complex(halfHeight * Math.cos(t), halfWidth * Math.sin(t)), 1 / points);
    const samples = problem.sample(add(center, offset));
    if (q === 0) sums = samples.map(({ length }) => emptySums(length));
    const unit = multiply(weight, scale(offset, 1 / halfWidth));
    samples.forEach((small, f) => {
      sums[f].added += modulus(weight) * Math.sqrt(small.reduce((sum, v) => sum + v * v, 0));
      addScaled(sums[f].zeroth, small, weight);
      addScaled(sums[f].first, small, unit);
    });
  }
  return sums.map((sum) => tell(sum, columns, request));
}

/** Moments of one family, and what was added up to make the zeroth. */
interface Sums {
  readonly zeroth: ComplexArray;
  readonly first: ComplexArray;
  added: number;
}

const emptySums = (length: number): Sums => ({
  zeroth: new Float64Array(length),
  first: new Float64Array(length),
  added: 0,
});

function tell({ zeroth, first, added }: Sums, columns: number, request: ContourRequest): ContourAnswer {
  const { center, halfWidth, halfHeight } = request;
  const { values, left, right } = singularForm(zeroth, columns, columns);
  let rank = 0;
  const least = Math.max(RANK * values[0], CANCELLED * added);
  while (rank < columns && values[rank] > least) rank++;
  if (rank === 0) return { ks: [], told: true };
  // B = Uᴴ M₁ W diag(1/σ)
  const B = new Float64Array(2 * rank * rank);
  for (let j = 0; j < rank; j++) {
    const w = new Float64Array(2 * columns);
    for (let l = 0; l < columns; l++) {
      const [re, im] = [right[2 * (l + j * columns)], right[2 * (l + j * columns) + 1]];
      for (let i = 0; i < columns; i++) {
        const at = 2 * (i + l * columns);
        w[2 * i] += first[at] * re - first[at + 1] * im;
        w[2 * i + 1] += first[at] * im + first[at + 1] * re;
      }
    }
    for (let i = 0; i < rank; i++) {
      let re = 0;
      let im = 0;
      for (let l = 0; l < columns; l++) {
        const [a, b] = [left[2 * (l + i * columns)], -left[2 * (l + i * columns) + 1]];
        re += a * w[2 * l] - b * w[2 * l + 1];
        im += a * w[2 * l + 1] + b * w[2 * l];
      }
      B[2 * (i + j * rank)] = re / values[j];
      B[2 * (i + j * rank) + 1] = im / values[j];
    }
  }
  const { values: roots } = eigenGeneral(B, rank);
  const ks: Complex[] = [];
  for (let i = 0; i < rank; i++) {
    const offset = complex(roots[2 * i] * halfWidth, roots[2 * i + 1] * halfWidth);
    if ((offset.re / halfWidth) ** 2 + (offset.im / halfHeight) ** 2 <= 1.44) ks.push(add(center, offset));
  }
  return { ks, told: rank < columns };
}

function addScaled(out: ComplexArray, a: ComplexArray, w: Complex): void {
  for (let i = 0; i < a.length; i += 2) {
    out[i] += w.re * a[i] - w.im * a[i + 1];
    out[i + 1] += w.re * a[i + 1] + w.im * a[i];
  }
}
