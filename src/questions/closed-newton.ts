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
