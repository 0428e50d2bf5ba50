// Does the count accept the right list of eigenvalues and no other?

import { describe, expect, test } from 'vitest';
import { doubleContour, judge, LARGEST_DEVIATION, type LogDeterminant, sampleContour } from '../../src/eigen/count.ts';
import { add, type Complex, complex, modulus, multiply, squareRoot, subtract } from '../../src/numerics/complex.ts';
import { randomStream } from '../../src/numerics/random.ts';

const CIRCLE = { center: complex(20, -1), radius: 8 };

/** k at a place of the circle in units of its radius. */
const at = (r: number, phi: number): Complex =>
  squareRoot(add(CIRCLE.center, complex(CIRCLE.radius * r * Math.cos(phi), CIRCLE.radius * r * Math.sin(phi))));

/** Π (λ − λ_j) times a function without zeros whose phase turns by many radians on the circle. */
const determinant =
  (zeros: readonly Complex[]): LogDeterminant =>
  (k) => {
    const lambda = multiply(k, k);
    let re = 30 * Math.log(modulus(k)) - 3 * lambda.re + 0.05 * (lambda.re ** 2 - lambda.im ** 2);
    let im = 30 * Math.atan2(k.im, k.re) - 3 * lambda.im + 0.1 * lambda.re * lambda.im;
    for (const z of zeros) {
      const d = subtract(lambda, multiply(z, z));
      re += Math.log(modulus(d));
      im += Math.atan2(d.im, d.re);
    }
    // any branch will do
    return complex(re, im - 2 * Math.PI * Math.round(im / 2));
  };

const without = <T>(list: readonly T[], i: number): T[] => list.filter((_, j) => j !== i);

/** Some inside, some outside, none within 3 % of the circle; a few twice. */
function randomZeros(seed: number): { zeros: Complex[]; inside: number } {
  const random = randomStream(seed);
  const zeros: Complex[] = [];
  let inside = 0;
  const count = 1 + Math.floor(20 * random.uniform());
  for (let i = 0; i < count; i++) {
    let r = 1.6 * Math.sqrt(random.uniform());
    if (Math.abs(r - 1) < 0.03) r += 0.06;
    const copies = random.uniform() < 0.3 ? 2 : 1;
    const k = at(r, 2 * Math.PI * random.uniform());
    for (let c = 0; c < copies; c++) zeros.push(k);
    if (r < 1) inside += copies;
  }
  return { zeros, inside };
}

describe('with exact candidates', () => {
  test.each(Array.from({ length: 40 }, (_, i) => i))('list %i is proven, and no list with one more or less', (seed) => {
    const { zeros, inside } = randomZeros(seed);
    const contour = sampleContour(determinant(zeros), CIRCLE, 32, 0.1);
    const whole = judge(contour, zeros);
    expect([whole.proven, whole.missing, whole.inside]).toEqual([true, 0, inside]);
    // 15 log λ has the harmonic 15 · 0.4¹³/13 beyond the fit
    expect(whole.deviation).toBeLessThan(2e-5);
    zeros.forEach((k, i) => {
      const zeta = modulus(subtract(multiply(k, k), CIRCLE.center)) / CIRCLE.radius;
      if (zeta > 1) return;
      const less = judge(contour, without(zeros, i));
      const more = judge(contour, [...zeros, k]);
      expect(less.proven || more.proven).toBe(false);
      if (zeta > 0.9) return;
      expect([less.missing, more.missing]).toEqual([1, -1]);
      expect(modulus(subtract(less.places[0], k))).toBeLessThan(0.02 * modulus(k));
      // in its place nothing is left
      expect(judge(contour, [...without(zeros, i), ...less.places]).proven).toBe(true);
    });
  });

  test('an empty circle is proven empty; one zero in it is not', () => {
    expect(judge(sampleContour(determinant([]), CIRCLE, 16), []).proven).toBe(true);
    const verdict = judge(sampleContour(determinant([at(0.4, 2)]), CIRCLE, 16), []);
    expect([verdict.proven, verdict.missing]).toEqual([false, 1]);
  });
});

test('unknown zeros outside only smooth: accepted once the points suffice', () => {
  const inside = [at(0.3, 1), at(0.7, 4)];
  const outside = [at(1.15, 0.3), at(1.2, 2), at(1.3, 5), at(1.3, 5.2), at(1.6, 3)];
  const f = determinant([...inside, ...outside]);
  expect(judge(doubleContour(f, sampleContour(f, CIRCLE, 16)), inside).proven).toBe(true);
});

test('a zero on the very edge: in the list it does not matter on which side, out of it the list is refused', () => {
  for (const r of [0.999, 1.001]) {
    const edge = at(r, 0.77);
    const rest = [at(0.5, 3), at(0.5, 3)];
    const f = determinant([...rest, edge]);
    const contour = sampleContour(f, CIRCLE, 32);
    expect(judge(contour, [...rest, edge]).proven).toBe(true);
    expect(judge(contour, rest).proven).toBe(false);
    expect(judge(contour, [...rest, edge, edge]).proven).toBe(false);
  }
});

test('candidates of another discretisation: off by 1e-3 they prove as well', () => {
  const { zeros, inside } = randomZeros(3);
  const contour = sampleContour(determinant(zeros), CIRCLE, 32);
  const moved = zeros.map((k, i) => multiply(k, complex(1 + 1e-3 * Math.cos(i), 1e-3 * Math.sin(i))));
  const verdict = judge(contour, moved);
  expect(verdict.proven).toBe(true);
  expect(Math.abs(verdict.inside - inside)).toBeLessThanOrEqual(0);
  expect(verdict.deviation).toBeLessThan(LARGEST_DEVIATION / 2);
});

test('several missing at once, two of them in one place: each is placed', () => {
  const missing = [at(0.6, 1), at(0.6, 1), at(0.3, 4), at(0.8, 5)];
  const rest = [at(0.2, 2), at(1.1, 0)];
  const verdict = judge(sampleContour(determinant([...rest, ...missing]), CIRCLE, 64), rest);
  expect(verdict.missing).toBe(4);
  for (const k of missing) expect(Math.min(...verdict.places.map((p) => modulus(subtract(p, k))))).toBeLessThan(1e-3);
});
