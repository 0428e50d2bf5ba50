// Are quadrature rules exact to the degree they promise?

import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  gaussJacobi,
  gaussLegendre,
  gaussLobatto,
  triangleRule,
  type LineRule,
} from '../../src/numerics/quadrature.ts';
import { legendreInto } from '../../src/numerics/polynomials.ts';

interface Row extends LineRule {
  readonly rule: 'legendre' | 'lobatto' | 'jacobi';
  readonly n: number;
  readonly a: number;
  readonly b: number;
}

// Made by test/checks/gauss-rules.py (mpmath, 60 digits).
const rows = JSON.parse(readFileSync(new URL('../checks/gauss-rules.json', import.meta.url), 'utf8')) as readonly Row[];

describe('line rules', () => {
  it('integrate P_j to 0 for every degree they promise', () => {
    for (let n = 1; n <= 64; n++) {
      expectLegendreExact(gaussLegendre(n), 2 * n - 1);
      if (n > 1) expectLegendreExact(gaussLobatto(n), 2 * n - 3);
    }
  });

  it('do not integrate one degree more (∫ P_n² by n points, by n+1 Lobatto points)', () => {
    const p = new Float64Array(6);
    const square = (rule: LineRule): number =>
      rule.nodes.reduce((sum, x, i) => sum + rule.weights[i] * legendreInto(p, 5, x)[5] ** 2, 0);
    expect(Math.abs(square(gaussLegendre(5)) - 2 / 11)).toBeGreaterThan(0.1);
    expect(square(gaussLegendre(6))).toBeCloseTo(2 / 11, 14);
    expect(Math.abs(square(gaussLobatto(6)) - 2 / 11)).toBeGreaterThan(0.1);
    expect(square(gaussLobatto(7))).toBeCloseTo(2 / 11, 14);
  });

  it('nodes increase strictly and weights are positive, for many exponents', () => {
    for (const [a, b] of [
      [0, 0],
      [1, 0],
      [0, 1],
      [5, 0],
      [2, 7],
      [-0.9, 0.3],
      [12.5, 0],
    ] as const) {
      for (const n of [1, 2, 3, 10, 33, 60]) {
        const { nodes, weights } = gaussJacobi(n, a, b);
        for (let i = 0; i < n; i++) {
          expect(weights[i]).toBeGreaterThan(0);
          expect(Math.abs(nodes[i])).toBeLessThan(1);
          if (i > 0) expect(nodes[i]).toBeGreaterThan(nodes[i - 1]);
        }
      }
    }
  });

  it('Gauss–Jacobi (a, b) integrates (1+x)^k: 2^{a+b+k+1} B(a+1, b+k+1)', () => {
    for (let k = 0; k <= 19; k++) {
      // a = 2, b = 1: B(3, k+2) = 2 / ((k+2)(k+3)(k+4))
      const exact = (2 ** (4 + k) * 2) / ((k + 2) * (k + 3) * (k + 4));
      const { nodes, weights } = gaussJacobi(10, 2, 1);
      const sum = nodes.reduce((total, x, i) => total + weights[i] * (1 + x) ** k, 0);
      expect(Math.abs(sum / exact - 1)).toBeLessThan(5e-15);
    }
  });

  it('agree with 60-digit nodes and weights', () => {
    for (const { rule, n, a, b, nodes, weights } of rows) {
      const made = rule === 'legendre' ? gaussLegendre(n) : rule === 'lobatto' ? gaussLobatto(n) : gaussJacobi(n, a, b);
      for (let i = 0; i < n; i++) {
        expect(Math.abs(made.nodes[i] - nodes[i]), `${rule} ${n} node ${i}`).toBeLessThan(2.3e-16);
        const tolerance = Number.isInteger(a) && Number.isInteger(b) ? 4e-16 : 4e-15;
        expect(Math.abs(made.weights[i] - weights[i]), `${rule} ${n} weight ${i}`).toBeLessThan(tolerance);
      }
    }
  });

  it('refuse counts and exponents that make no sense', () => {
    expect(() => gaussLegendre(0)).toThrow(/0 points/);
    expect(() => gaussLegendre(2.5)).toThrow(RangeError);
    expect(() => gaussLobatto(1)).toThrow(/at least 2/);
    expect(() => gaussJacobi(3, -1, 0)).toThrow(/exceed -1/);
  });
});

describe('triangle rules', () => {
  it('integrate every monomial x^i y^j, i + j ≤ degree: i! j! / (i+j+2)!', () => {
    for (const degree of [0, 1, 2, 3, 4, 7, 10, 15, 22, 30, 41, 60]) {
      const { points, weights } = triangleRule(degree);
      for (let i = 0; i <= degree; i++) {
        const j = degree - i;
        for (const [p, q] of [
          [i, j],
          [i, j >> 1],
          [i >> 1, 0],
        ] as const) {
          let sum = 0;
          for (let k = 0; k < weights.length; k++) sum += weights[k] * points[2 * k] ** p * points[2 * k + 1] ** q;
          expect(Math.abs(sum / monomial(p, q) - 1), `x^${p} y^${q} at degree ${degree}`).toBeLessThan(5e-14);
        }
      }
    }
  });

  it('points lie inside, weights are positive and sum to 1/2, one rule is kept', () => {
    for (let degree = 0; degree <= 60; degree++) {
      const { points, weights } = triangleRule(degree);
      let sum = 0;
      for (let k = 0; k < weights.length; k++) {
        expect(
          weights[k] > 0 && points[2 * k] > 0 && points[2 * k + 1] > 0 && points[2 * k] + points[2 * k + 1] < 1,
        ).toBe(true);
        sum += weights[k];
      }
      expect(Math.abs(sum - 0.5)).toBeLessThan(1e-15);
    }
    expect(triangleRule(8)).toBe(triangleRule(8));
    expect(() => triangleRule(-1)).toThrow(/degree -1/);
    expect(() => triangleRule(101)).toThrow(RangeError);
  });
});

function expectLegendreExact(rule: LineRule, degree: number): void {
  const sums = new Float64Array(degree + 1);
  const p = new Float64Array(degree + 1);
  rule.nodes.forEach((x, i) => {
    legendreInto(p, degree, x);
    for (let j = 0; j <= degree; j++) sums[j] += rule.weights[i] * p[j];
  });
  sums[0] -= 2;
  for (let j = 0; j <= degree; j++) expect(Math.abs(sums[j])).toBeLessThan(2e-15);
}

function monomial(i: number, j: number): number {
  let value = 1 / ((i + j + 1) * (i + j + 2));
  for (let k = 1; k <= j; k++) value *= k / (i + k); // i! j! / (i+j)!
  return value;
}
