// At which complex k, or real k and level, is a device with openings singular near a start?

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
import { combine, normaliseColumns, orthonormalBasis, transposeProduct } from '../eigen/columns.ts';
import { eigenGeneral } from '../numerics/eigenvalues.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import { randomStream } from '../numerics/random.ts';
import type { Assignment, ClosedOpenings } from '../operator/closed-openings.ts';
import type { Part } from '../operator/device-family.ts';

/** Most steps of inverse iteration with the Rayleigh functional: each squares the error, so few are ever taken. */
const MOST_STEPS = 12;

/** k with A(k)u = 0 near a start, by inverse iteration: u ← A⁻¹A_k u, k ← k − uᵀAu/uᵀA_ku. Null without convergence. */
export function refineClosed(
  closed: ClosedOpenings,
  level: number,
  assignment: Assignment,
  near: Complex,
  start: ComplexArray | null,
): { k: Complex; vector: ComplexArray } | null {
  const n = closed.family.size;
  let u = start ?? randomVector(n);
  const work = new Float64Array(2 * n);
  let k = near;
  for (let step = 0; step < MOST_STEPS; step++) {
    closed.multiplyInto(work, k, level, 'byK', u, assignment);
    const factor = closed.factorize(k, level, assignment);
    const next = new Float64Array(2 * n);
    factor.solveInto(next, work, 1);
    factor.release();
    u = unit(next);
    const moved = divide(form(closed, k, level, 'value', u, assignment), form(closed, k, level, 'byK', u, assignment));
    if (!Number.isFinite(moved.re + moved.im)) return null;
    k = subtract(k, moved);
    if (!(k.re > 0)) return null;
    if (modulus(moved) <= 1e-13 * modulus(k)) return { k, vector: u };
    if (step > 5 && modulus(moved) <= 1e-11 * modulus(k)) return { k, vector: u };
  }
  return null;
}

/** A mode with all others at the same k. */
export interface ClosedGroup {
  readonly k: Complex;
  /** Largest distance of a member from the mean k. */
  readonly spread: number;
  readonly multiplicity: number;
  /** size × multiplicity. */
  readonly vectors: ComplexArray;
}

/** Columns of the block that looks for companions: groups of so many less one are told. */
const BLOCK = 4;
/** Members lie within this share of k. */
const COMPANION = 1e-6;
/** The block is factored at this distance from the mode, relative: at the mode itself its columns would all become one. */
const BESIDE = 1e-5;
const BLOCK_STEPS = 4;

/** The mode near a start with its companions: modes that symmetry puts at the same k. Null where none is found. */
export function refineClosedGroup(
  closed: ClosedOpenings,
  level: number,
  assignment: Assignment,
  near: Complex,
  start: ComplexArray | null,
): ClosedGroup | null {
  const one = refineClosed(closed, level, assignment, near, start);
  if (!one) return null;
  const n = closed.family.size;
  const columns = Math.min(BLOCK, n);
  const shift = multiply(one.k, complex(1 + BESIDE));
  const factor = closed.factorize(shift, level, assignment, one.k.re);
  const random = randomStream(SEED);
  let U: ComplexArray = Float64Array.from({ length: 2 * n * columns }, () => random.normal());
  U.set(one.vector);
  const times = (part: Part, k: Complex): ComplexArray => {
    const out = new Float64Array(U.length);
    for (let j = 0; j < columns; j++)
      closed.multiplyInto(out.subarray(2 * n * j, 2 * n * (j + 1)), k, level, part, U.subarray(2 * n * j, 2 * n * (j + 1)), assignment); // prettier-ignore
    return out;
  };
  for (let step = 0; step < BLOCK_STEPS; step++) {
    const slope = times('byK', one.k);
    factor.solveInto(slope, slope, columns);
    U = orthonormalBasis(slope, columns, n);
  }
  factor.release();
  const byK = transposeProduct(U, columns, times('byK', one.k), columns, n);
  const value = transposeProduct(U, columns, times('value', one.k), columns, n);
  const lu = luFactor(byK, columns);
  luSolveInto(value, lu, value, columns);
  const { values, vectors } = eigenGeneral(value, columns);
  const members = Array.from({ length: columns }, (_, i) => complex(-values[2 * i], -values[2 * i + 1]))
    .map((offset, i) => ({ offset, i }))
    .filter(({ offset }) => modulus(offset) <= COMPANION * modulus(one.k));
  if (members.length <= 1) return { k: one.k, spread: 0, multiplicity: 1, vectors: one.vector };
  const y = new Float64Array(2 * columns * members.length);
  members.forEach(({ i }, j) => y.set(vectors.subarray(2 * columns * i, 2 * columns * (i + 1)), 2 * columns * j));
  const mean = divide(
    members.reduce((sum, { offset }) => add(sum, offset), complex(0)),
    complex(members.length),
  );
  return {
    k: add(one.k, mean),
    spread: Math.max(...members.map(({ offset }) => modulus(subtract(offset, mean)))),
    multiplicity: members.length,
    vectors: normaliseColumns(combine(U, columns, y, members.length, n), members.length, n),
  };
}

/** uᵀAu, uᵀA_ku or uᵀA_Du, not conjugated. */
function form(
  closed: ClosedOpenings,
  k: Complex,
  level: number,
  part: Part,
  u: ComplexArray,
  assignment: Assignment,
): Complex {
  const work = closed.multiplyInto(new Float64Array(u.length), k, level, part, u, assignment);
  let re = 0;
  let im = 0;
  for (let i = 0; i < u.length; i += 2) {
    re += u[i] * work[i] - u[i + 1] * work[i + 1];
    im += u[i] * work[i + 1] + u[i + 1] * work[i];
  }
  return complex(re, im);
}

/** Real k and level from a complex mode: along its tangent to the axis, then Newton in both with inverse iteration. */
export function crossClosed(
  closed: ClosedOpenings,
  assignment: Assignment,
  start: { readonly k: Complex; readonly vector: ComplexArray; readonly level: number },
): { k: number; level: number; vector: ComplexArray } | null {
  const n = closed.family.size;
  let u = start.vector;
  let { level } = start;
  let k = start.k.re;
  let here = start.k;
  const work = new Float64Array(2 * n);
  for (let step = 0; step < 4 * MOST_STEPS; step++) {
    const byK = form(closed, here, level, 'byK', u, assignment);
    const byLevel = form(closed, here, level, 'byLevel', u, assignment);
    const value = form(closed, here, level, 'value', u, assignment);
    // value + byK (δk + here → real) + byLevel δD = 0 with real δk, δD
    const target = subtract(complex(k), here);
    const rest = add(value, multiply(byK, target));
    const det = byK.re * byLevel.im - byK.im * byLevel.re;
    const dk = -(rest.re * byLevel.im - rest.im * byLevel.re) / det;
    const dLevel = -(byK.re * rest.im - byK.im * rest.re) / det;
    if (!Number.isFinite(dk + dLevel)) return null;
    k += dk;
    level += dLevel;
    if (!(k > 0)) return null;
    here = complex(k);
    closed.multiplyInto(work, here, level, 'byK', u, assignment);
    const factor = closed.factorize(here, level, assignment);
    const next = new Float64Array(2 * n);
    factor.solveInto(next, work, 1);
    factor.release();
    u = unit(next);
    if (step > 1 && Math.abs(dk) <= 1e-13 * k && Math.abs(dLevel) <= 1e-12 * Math.abs(level) + 1e-15)
      return { k, level, vector: u };
  }
  return null;
}

const SEED = 4711;

function unit(u: ComplexArray): ComplexArray {
  const norm = Math.sqrt(u.reduce((sum, v) => sum + v * v, 0));
  return u.map((v) => v / norm);
}

function randomVector(n: number): ComplexArray {
  const random = randomStream(SEED);
  return unit(Float64Array.from({ length: 2 * n }, () => random.normal()));
}
