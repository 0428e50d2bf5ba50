// Does the rational fit give back the zeros and poles that its data were made with?

import { expect, test } from 'vitest';
import { complex, type Complex, divide, multiply, subtract } from '../../src/numerics/complex.ts';
import { evaluateFit, polesOfFit, rationalFit, zerosOfFit } from '../../src/numerics/rational-fit.ts';

const ZEROS: readonly Complex[] = [complex(2.1, 0.3), complex(2.5, 0), complex(2.72, -0.002)];
const POLES: readonly Complex[] = [complex(2.2, -0.1), complex(2.6, -0.04), complex(2.7, -0.01), complex(3.4, -0.2)];

function made(x: Complex): Complex {
  let value = complex(0.4, 0.3);
  for (const z of ZEROS) value = multiply(value, subtract(x, z));
  for (const p of POLES) value = divide(value, subtract(x, p));
  return value;
}

const XS = Float64Array.from({ length: 101 }, (_, i) => 2 + i / 100);
const VALUES = Float64Array.from([...XS].flatMap((x) => Object.values(made(complex(x))) as number[]));

const nearest = (list: readonly Complex[], to: Complex): number =>
  Math.min(...list.map((r) => Math.hypot(r.re - to.re, r.im - to.im)));

test('a rational function of degree 4 is found exactly, with all its zeros and poles', () => {
  const fit = rationalFit(XS, VALUES, { tolerance: 1e-12 });
  expect(fit.support.length - 1).toBe(4);
  for (const z of ZEROS) expect(nearest(zerosOfFit(fit), z)).toBeLessThan(1e-10);
  for (const p of POLES) expect(nearest(polesOfFit(fit), p)).toBeLessThan(1e-10);
  const x = complex(2.345, 0.1);
  const [a, b] = [evaluateFit(fit, x), made(x)];
  expect(Math.hypot(a.re - b.re, a.im - b.im)).toBeLessThan(1e-10);
});

test('noise of 1e-5 moves zeros near the axis by as much, not more', () => {
  const noisy = VALUES.map((v, i) => v + 1e-5 * Math.sin(37.3 * i * i));
  const fit = rationalFit(XS, noisy, { tolerance: 1e-4 });
  expect(fit.support.length - 1).toBeLessThan(8);
  expect(nearest(zerosOfFit(fit), ZEROS[1])).toBeLessThan(1e-3);
});

test('a constant, two points and wrong input', () => {
  const flat = rationalFit(XS, new Float64Array(202).fill(1));
  expect(flat.error).toBeLessThan(1e-14);
  expect(() => rationalFit(Float64Array.of(1), Float64Array.of(1, 0))).toThrow(/two or more/);
  expect(() => rationalFit(Float64Array.of(1, 2), Float64Array.of(1, 0, NaN, 0))).toThrow(/finite/);
});
