// Are the layer's coefficients those of the stretch, and does it return what its law says?

import { describe, expect, test } from 'vitest';
import {
  LAYER_ANGLE,
  layerCoefficients,
  planLayer,
  returnedAt,
  returnedOrders,
} from '../../src/boundary/stretched-layer.ts';
import { complex, type Complex, divide, exponential, multiply } from '../../src/numerics/complex.ts';

const center = [0.7, -1.3] as const;
const plan = { rimRadius: 2, angle: 1.1 };

/** [radial, azimuthal, mass] at a distance and direction from the center. */
function coefficients(r: number, phi: number, angle = plan.angle): { t: Complex[]; mass: Complex } {
  const out = new Float64Array(8);
  layerCoefficients({ ...plan, angle }, center)(center[0] + r * Math.cos(phi), center[1] + r * Math.sin(phi), out);
  const at = (i: number): Complex => complex(out[2 * i], out[2 * i + 1]);
  return { t: [at(0), at(1), at(2)], mass: at(3) };
}

/** eᵀ T e for a unit vector at an angle. */
const along = ([a, b, c]: Complex[], phi: number): Complex => {
  const [x, y] = [Math.cos(phi), Math.sin(phi)];
  return complex(x * x * a.re + 2 * x * y * b.re + y * y * c.re, x * x * a.im + 2 * x * y * b.im + y * y * c.im);
};

function expectClose(a: Complex, b: Complex, digits = 13): void {
  expect(a.re).toBeCloseTo(b.re, digits);
  expect(a.im).toBeCloseTo(b.im, digits);
}

describe('coefficients', () => {
  const s = exponential(complex(0, plan.angle));

  test.each([0, 0.4, 2, 4, 5.5])('at the rim, direction %f: radial 1/s, azimuthal and mass s', (phi) => {
    const { t, mass } = coefficients(2, phi);
    expectClose(along(t, phi), divide(complex(1), s));
    expectClose(along(t, phi + Math.PI / 2), s);
    expectClose(mass, s);
  });

  test.each([
    [2.5, 0.3],
    [4, 3],
    [7, 5],
  ])('at r = %f: radial ŝ/s, azimuthal s/ŝ, mass sŝ with ŝ = r̃/r, principal axes along and across', (r, phi) => {
    const stretched = complex(2 + (r - 2) * Math.cos(plan.angle), (r - 2) * Math.sin(plan.angle));
    const hat = divide(stretched, complex(r));
    const { t, mass } = coefficients(r, phi);
    expectClose(along(t, phi), divide(hat, s));
    expectClose(along(t, phi + Math.PI / 2), divide(s, hat));
    expectClose(mass, multiply(s, hat));
    // no mixed term: e_rᵀ T e_φ = 0
    const [c, d] = [Math.cos(phi), Math.sin(phi)];
    const mixed = (part: 're' | 'im'): number =>
      -c * d * t[0][part] + (c * c - d * d) * t[1][part] + c * d * t[2][part];
    expect(mixed('re')).toBeCloseTo(0, 13);
    expect(mixed('im')).toBeCloseTo(0, 13);
    // the determinant of a plane map's tensor is 1
    expectClose(multiply(along(t, phi), along(t, phi + Math.PI / 2)), complex(1));
  });

  test('no stretch is the identity; the opposite stretch is the conjugate', () => {
    const plain = coefficients(3, 1, 0);
    expectClose(plain.t[0], complex(1));
    expectClose(plain.t[1], complex(0));
    expectClose(plain.t[2], complex(1));
    expectClose(plain.mass, complex(1));
    const [there, back] = [coefficients(3, 1), coefficients(3, 1, -plan.angle)];
    [...there.t, there.mass].forEach((value, i) => {
      const other = [...back.t, back.mass][i];
      expectClose(other, complex(value.re, -value.im));
    });
  });
});

describe('plan', () => {
  const request = {
    bodyRadius: 1.5,
    kMin: 2,
    kMax: 3,
    largestArgument: 0.05,
    backgroundIndex: 1.444,
    tolerance: 1e-7,
  };

  test('returns the tolerance at the longest wavelength and widest argument, less elsewhere', () => {
    const made = planLayer({ ...request, highestOrder: () => 0 });
    expect(made.angle).toBe(LAYER_ANGLE);
    expect(made.returned).toBeCloseTo(1e-7, 15);
    expect(returnedAt(made, complex(2 * Math.cos(0.05), -2 * Math.sin(0.05)))).toBeCloseTo(1e-7, 15);
    expect(returnedAt(made, complex(3, 0))).toBeLessThan(1e-7);
    expect(made.rimRadius).toBeGreaterThan(1.5);
    expect(made.endRadius).toBeGreaterThan(made.rimRadius);
  });

  test.each([0, 5, 12, 20])('is long enough for the multipoles up to %i', (M) => {
    const made = planLayer({ ...request, highestOrder: () => M });
    for (const k of [2, 3]) expect(Math.max(...returnedOrders(made, complex(k), M))).toBeLessThanOrEqual(1e-7);
    expect(made.endRadius).toBeGreaterThanOrEqual(planLayer({ ...request, highestOrder: () => 0 }).endRadius);
  });

  test('scaling: lengths by s and k by 1/s, or index by n and k by 1/n', () => {
    const made = planLayer(request);
    const far = planLayer({ ...request, bodyRadius: 1500, kMin: 0.002, kMax: 0.003 });
    expect(far.endRadius / 1000).toBeCloseTo(made.endRadius, 10);
    const vacuum = planLayer({ ...request, kMin: 2 * 1.444, kMax: 3 * 1.444, backgroundIndex: 1 });
    expect(vacuum.endRadius).toBeCloseTo(made.endRadius, 10);
    expect(vacuum.rimRadius).toBeCloseTo(made.rimRadius, 10);
  });

  test('the multipoles of low order follow the law, those of high order return more; zeros like poles', () => {
    const made = planLayer({ ...request, tolerance: 1e-5 });
    const k = complex(2.4, -0.05);
    const orders = returnedOrders(made, k, 12);
    const law = returnedAt(made, k) / 2;
    expect(orders[0] / law).toBeGreaterThan(0.5);
    expect(orders[0] / law).toBeLessThan(2);
    for (let m = 1; m < orders.length; m++) expect(orders[m]).toBeGreaterThan(orders[m - 1]);
    expect(returnedOrders(made, complex(2.4, 0.05), 12)).toEqual(orders);
  });

  test.each([
    [{ kMin: 0 }, 'kMin'],
    [{ kMin: 4 }, 'kMin'],
    [{ largestArgument: 1.3 }, 'arg k'],
    [{ kMax: NaN }, 'kMin'],
  ])('refuses %o', (change, says) => {
    expect(() => planLayer({ ...request, ...change })).toThrow(says);
  });
});
