// Do the polynomials have the values, slopes and symmetries of their definitions?

import { describe, expect, it } from 'vitest';
import {
  integratedLegendreInto,
  jacobiDerivativesInto,
  jacobiInto,
  lagrangeBasis,
  lagrangeDerivativesInto,
  lagrangeInto,
  legendreDerivativesInto,
  legendreInto,
  scaledIntegratedLegendreInto,
  scaledLegendreInto,
} from '../../src/numerics/polynomials.ts';
import { gaussLegendre, gaussLobatto } from '../../src/numerics/quadrature.ts';

const points = [-1, -0.77, -0.2, 0, 0.31, 0.999, 1];

describe('Legendre', () => {
  it('P_5 and its slope by their coefficients; ends P_n(±1) = (±1)^n, P_n′(1) = n(n+1)/2', () => {
    for (const x of points) {
      const p = legendreInto(new Float64Array(6), 5, x);
      expect(p[5]).toBeCloseTo((63 * x ** 5 - 70 * x ** 3 + 15 * x) / 8, 14);
      const d = legendreDerivativesInto(new Float64Array(6), p, 5);
      expect(d[5]).toBeCloseTo((315 * x ** 4 - 210 * x ** 2 + 15) / 8, 13);
    }
    const p = legendreInto(new Float64Array(31), 30, 1);
    const d = legendreDerivativesInto(new Float64Array(31), p, 30);
    for (let n = 0; n <= 30; n++) {
      expect(p[n]).toBe(1);
      expect(d[n]).toBe((n * (n + 1)) / 2);
    }
  });

  it('scaled ones are t^j P_j(x/t), also at t = 0', () => {
    const scaled = scaledLegendreInto(new Float64Array(9), 8, 0.3, 0.7);
    const plain = legendreInto(new Float64Array(9), 8, 0.3 / 0.7);
    for (let j = 0; j <= 8; j++) expect(scaled[j]).toBeCloseTo(0.7 ** j * plain[j], 15);
    expect(scaledLegendreInto(new Float64Array(5), 4, 0, 0)).toEqual(Float64Array.of(1, 0, 0, 0, 0));
    expect(legendreInto(new Float64Array(1), 0, 0.4)[0]).toBe(1);
  });

  it('integrated ones vanish at both ends and are (P_j − P_{j−2})/(2j−1)', () => {
    const n = 25;
    const L = new Float64Array(n + 1);
    const dL = new Float64Array(n + 1);
    for (const x of points) {
      integratedLegendreInto(L, dL, n, x);
      const p = legendreInto(new Float64Array(n + 1), n, x);
      for (let j = 2; j <= n; j++) {
        expect(L[j]).toBeCloseTo((p[j] - p[j - 2]) / (2 * j - 1), 15);
        expect(dL[j]).toBeCloseTo(p[j - 1], 14);
        if (Math.abs(x) === 1) expect(Math.abs(L[j])).toBe(0);
      }
      expect(L[0] + L[1] + dL[0] + dL[1]).toBe(0);
    }
  });

  it('scaled integrated ones are homogeneous, with Euler’s x ∂x + t ∂t = j, and slopes as differences say', () => {
    const n = 12;
    const make = (x: number, t: number) => {
      const [v, dx, dt] = [new Float64Array(n + 1), new Float64Array(n + 1), new Float64Array(n + 1)];
      scaledIntegratedLegendreInto(v, dx, dt, n, x, t);
      return { v, dx, dt };
    };
    const h = 1e-5;
    for (const [x, t] of [
      [0.2, 0.9],
      [-0.5, 0.6],
      [0.1, 0.1],
      [0, 0.4],
    ] as const) {
      const { v, dx, dt } = make(x, t);
      const plain = new Float64Array(n + 1);
      integratedLegendreInto(plain, new Float64Array(n + 1), n, x / t);
      for (let j = 2; j <= n; j++) {
        expect(v[j]).toBeCloseTo(t ** j * plain[j], 15);
        expect(x * dx[j] + t * dt[j]).toBeCloseTo(j * v[j], 14);
        expect(dx[j]).toBeCloseTo((make(x + h, t).v[j] - make(x - h, t).v[j]) / (2 * h), 8);
        expect(dt[j]).toBeCloseTo((make(x, t + h).v[j] - make(x, t - h).v[j]) / (2 * h), 8);
      }
    }
  });
});

describe('Jacobi', () => {
  it('a = b = 0 gives Legendre; value at 1 is a binomial; P^{(a,b)}(−x) = (−1)^n P^{(b,a)}(x)', () => {
    for (const x of points) {
      const a = jacobiInto(new Float64Array(21), 20, 0, 0, x);
      const p = legendreInto(new Float64Array(21), 20, x);
      const left = jacobiInto(new Float64Array(9), 8, 3, 1, -x);
      const right = jacobiInto(new Float64Array(9), 8, 1, 3, x);
      for (let j = 0; j <= 20; j++) expect(a[j]).toBeCloseTo(p[j], 14);
      for (let j = 0; j <= 8; j++) expect(left[j]).toBeCloseTo((j & 1 ? -1 : 1) * right[j], 11);
    }
    const at1 = jacobiInto(new Float64Array(4), 3, 2, 5, 1);
    expect([...at1]).toEqual([1, 3, 6, 10]);
  });

  it('orthogonal under their weight, slopes as differences say', () => {
    const rule = gaussLegendre(20);
    const n = 9;
    const gram = new Float64Array(100);
    const p = new Float64Array(n + 1);
    rule.nodes.forEach((x, i) => {
      jacobiInto(p, n, 3, 2, x);
      for (let j = 0; j <= n; j++)
        for (let k = 0; k <= n; k++) gram[10 * j + k] += rule.weights[i] * (1 - x) ** 3 * (1 + x) ** 2 * p[j] * p[k];
    });
    for (let j = 0; j <= n; j++) for (let k = 0; k < j; k++) expect(Math.abs(gram[10 * j + k])).toBeLessThan(1e-13);
    const d = jacobiDerivativesInto(new Float64Array(n + 1), n, 1.5, 0, 0.3);
    const h = 1e-5;
    const above = jacobiInto(new Float64Array(n + 1), n, 1.5, 0, 0.3 + h);
    const below = jacobiInto(new Float64Array(n + 1), n, 1.5, 0, 0.3 - h);
    for (let j = 0; j <= n; j++) expect(d[j]).toBeCloseTo((above[j] - below[j]) / (2 * h), 6);
    expect(jacobiDerivativesInto(new Float64Array(1), 0, 1, 1, 0.5)[0]).toBe(0);
  });
});

describe('Lagrange', () => {
  it('1 at its own node, 0 at the others, exactly; sums to 1; slopes sum to 0', () => {
    for (const n of [1, 2, 5, 13, 30]) {
      const nodes = n === 1 ? Float64Array.of(0.4) : gaussLobatto(n).nodes;
      const basis = lagrangeBasis(nodes);
      const values = new Float64Array(n);
      const slopes = new Float64Array(n);
      nodes.forEach((x, i) => {
        lagrangeInto(values, basis, x);
        values.forEach((v, j) => (i === j ? expect(v).toBeCloseTo(1, 13) : expect(Math.abs(v)).toBe(0)));
      });
      for (const x of points) {
        lagrangeInto(values, basis, x);
        lagrangeDerivativesInto(slopes, values, basis);
        expect(values.reduce((s, v) => s + v, 0)).toBeCloseTo(1, 13);
        expect(slopes.reduce((s, v) => s + v, 0)).toBeCloseTo(0, 10);
      }
    }
  });

  it('reproduces a polynomial and its slope, beside nodes and on them', () => {
    const basis = lagrangeBasis(gaussLobatto(9).nodes);
    const f = (x: number) => x ** 8 - 3 * x ** 5 + x - 2;
    const df = (x: number) => 8 * x ** 7 - 15 * x ** 4 + 1;
    const values = new Float64Array(9);
    const slopes = new Float64Array(9);
    for (const x of [...points, basis.nodes[3], basis.nodes[3] + 1e-12]) {
      lagrangeInto(values, basis, x);
      lagrangeDerivativesInto(slopes, values, basis);
      let v = 0;
      let d = 0;
      basis.nodes.forEach((t, j) => {
        v += values[j] * f(t);
        d += slopes[j] * f(t);
      });
      expect(v).toBeCloseTo(f(x), 13);
      expect(d).toBeCloseTo(df(x), 11);
    }
  });

  it('refuses equal nodes', () => {
    expect(() => lagrangeBasis(Float64Array.of(0, 1, 0))).toThrow(/comes twice/);
  });
});
