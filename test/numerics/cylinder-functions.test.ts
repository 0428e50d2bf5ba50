// Are the cylinder functions right, at every order, over the whole right half plane?

import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  besselJ,
  besselJDerivatives,
  besselLogarithmicDerivatives,
  besselRatios,
  hankel,
  hankelDerivatives,
  hankelRatios,
  logBesselJ,
  logHankel,
  logarithmicDerivatives,
  scaledCylinderFunctions,
  scaledDerivatives,
  type ScaledSequence,
} from '../../src/numerics/cylinder-functions.ts';
import { randomStream } from '../../src/numerics/random.ts';

type Packed = readonly [re: number, im: number, exponent: number];
type Row = Readonly<Record<'m' | 're' | 'im', number> & Record<'J' | 'dJ' | 'H1' | 'dH1' | 'H2' | 'dH2', Packed>>;

// Made by test/checks/cylinder-functions.py (mpmath, 200 digits).
const rows = JSON.parse(
  readFileSync(new URL('../checks/cylinder-functions.json', import.meta.url), 'utf8'),
) as readonly Row[];

describe('laws', () => {
  it('Wronskians J H1′ − J′ H1 = 2i/(πz), H1 H2′ − H1′ H2 = −4i/(πz) hold at every order (DLMF 10.5.3, 10.5.5)', () => {
    for (const z of randomArguments(300, 1)) {
      const M = 3 + Math.ceil(1.5 * Math.hypot(z.re, z.im));
      const all = scaledCylinderFunctions(M, z);
      const dJ = scaledDerivatives(all.besselJ);
      const d1 = scaledDerivatives(all.hankel1);
      const d2 = scaledDerivatives(all.hankel2);
      const r2 = z.re * z.re + z.im * z.im;
      const unit = [(2 / Math.PI) * (z.im / r2), (2 / Math.PI) * (z.re / r2)] as const; // 2i/(πz)
      for (let m = 0; m <= M; m++) {
        checkWronskian(all.besselJ, dJ, all.hankel1, d1, m, unit);
        checkWronskian(all.hankel1, d1, all.hankel2, d2, m, [-2 * unit[0], -2 * unit[1]]);
      }
    }
  });

  it('H2(z̄) is the conjugate of H1(z), J(z̄) of J(z)', () => {
    for (const z of randomArguments(50, 2)) {
      const conjugate = { re: z.re, im: -z.im };
      const a = scaledCylinderFunctions(40, z);
      const b = scaledCylinderFunctions(40, conjugate);
      for (let i = 0; i < 80; i += 2) {
        expect(b.hankel2.mantissas[i]).toBe(a.hankel1.mantissas[i]);
        expect(b.hankel2.mantissas[i + 1] + a.hankel1.mantissas[i + 1]).toBe(0);
        expect(b.besselJ.mantissas[i]).toBe(a.besselJ.mantissas[i]);
        expect(b.besselJ.mantissas[i + 1] + a.besselJ.mantissas[i + 1]).toBe(0);
      }
    }
  });

  it('a real argument gives a real J', () => {
    for (const x of [0.3, 2, 17.2, 200]) {
      const J = besselJ(60, { re: x, im: 0 });
      for (let m = 0; m <= 60; m++) expect(Math.abs(J[2 * m + 1])).toBeLessThan(2e-15);
    }
  });

  it('derivatives, logarithmic derivatives, logarithms and ratios agree with the plain values', () => {
    const z = { re: 7.3, im: -0.8 };
    const w = { re: 9.1, im: -1 };
    const M = 30;
    for (const kind of [1, 2] as const) {
      const H = hankel(kind, M, z);
      expectProducts(logarithmicDerivatives(kind, M, z), H, hankelDerivatives(kind, M, z));
      expectProducts(hankelRatios(kind, M, w, z), H, hankel(kind, M, w));
      expectExponentials(logHankel(kind, M, z), H);
    }
    const J = besselJ(M, z);
    expectProducts(besselLogarithmicDerivatives(M, z), J, besselJDerivatives(M, z));
    expectProducts(besselRatios(M, w, z), J, besselJ(M, w));
    expectExponentials(logBesselJ(M, z), J);
  });

  it('orders of many hundreds at small arguments stay finite', () => {
    const z = { re: 1e-6, im: -1e-7 };
    const slopes = logarithmicDerivatives(1, 800, z);
    for (let m = 2; m <= 800; m++) {
      // H′/H → −m/z
      const re = (-m * z.re) / (z.re * z.re + z.im * z.im);
      const im = (m * z.im) / (z.re * z.re + z.im * z.im);
      expect(Math.hypot(slopes[2 * m] - re, slopes[2 * m + 1] - im) / Math.hypot(re, im)).toBeLessThan(1e-11);
    }
    expect(logHankel(1, 800, z).every(Number.isFinite)).toBe(true);
    expect(logBesselJ(800, z).every(Number.isFinite)).toBe(true);
    expect(besselRatios(800, { re: 2e-6, im: -2e-7 }, z)[1600] / 2 ** 800).toBeCloseTo(1, 9);
    expect(Math.abs(besselJ(800, z)[1600])).toBe(0);
  });

  it('order M = 0 alone works; what is outside the domain is refused', () => {
    expect(besselJ(0, { re: 1, im: 0 })).toHaveLength(2);
    expect(() => hankel(1, 3, { re: 0, im: 1 })).toThrow(/real part ≤ 0/);
    expect(() => hankel(1, 3, { re: -2, im: 1 })).toThrow(/Re z > 0/);
    expect(() => hankel(1, 3, { re: NaN, im: 1 })).toThrow(RangeError);
    expect(() => hankel(1, 3, { re: 1, im: 700 })).toThrow(RangeError);
    expect(() => besselJ(-1, { re: 1, im: 0 })).toThrow(/order -1/);
    expect(() => besselJ(1.5, { re: 1, im: 0 })).toThrow(/order 1.5/);
  });
});

describe('published and multiprecision values', () => {
  it('zeros of J_m and J_m′ (Abramowitz & Stegun 1964, table 9.5; DLMF 10.21, 10.75; to 13 digits by mpmath)', () => {
    const zeros = [
      [2.4048255576958, 5.5200781102863, 8.653727912911, 11.791534439014, 14.930917708488],
      [3.8317059702075, 7.0155866698156, 10.173468135063, 13.323691936314, 16.470630050878],
      [5.1356223018407, 8.4172441403999, 11.619841172149, 14.795951782351, 17.959819494988],
      [6.380161895924, 9.7610231299817, 13.015200721698, 16.223466160319, 19.409415226435],
      [7.5883424345038, 11.064709488501, 14.372536671618, 17.615966049805, 20.826932956962],
      [8.77148381596, 12.338604197467, 15.700174079712, 18.98013387518, 22.217799896561],
    ];
    zeros.forEach((list, m) => {
      for (const z of list) expect(Math.abs(besselJ(m, { re: z, im: 0 })[2 * m])).toBeLessThan(5e-13);
    });
    const flat = [
      [3.8317059702075, 7.0155866698156, 10.173468135063, 13.323691936314],
      [1.8411837813407, 5.331442773525, 8.5363163663463, 11.706004902592, 14.863588633909],
      [3.0542369282271, 6.7061331941585, 9.9694678230876, 13.170370856016, 16.347522318322],
      [4.2011889412105, 8.015236598376, 11.345924310743, 14.585848286167, 17.788747866066],
      [5.317553126084, 9.2823962852416, 12.681908442639, 15.964107037732, 19.196028800049],
      [6.4156163757002, 10.519860873772, 13.98718863014, 17.312842487885, 20.575514521387],
    ];
    flat.forEach((list, m) => {
      for (const z of list) expect(Math.abs(besselJDerivatives(m, { re: z, im: 0 })[2 * m])).toBeLessThan(5e-13);
    });
  });

  it('Hankel functions at complex arguments (mpmath, 20 digits, printed to 15)', () => {
    const table: readonly (readonly [m: number, re: number, im: number, a: number, b: number, c: number, d: number])[] =
      [
        [0, 1, 0, 0.765197686557967, 0.088256964215677, 0.765197686557967, -0.088256964215677],
        [1, 1, 0, 0.440050585744934, -0.781212821300289, 0.440050585744934, 0.781212821300289],
        [0, 1, -0.1, 0.844801986836936, 0.136649932874036, 0.688846772861197, -0.0485313885265351],
        [1, 1, -0.1, 0.528080372390953, -0.809480147354889, 0.355274511871855, 0.744374093908166],
        [0, 2, -0.5, 0.264997130755791, 0.878079402535799, 0.166203218681982, -0.284507273529406],
        [3, 5, -0.2, 0.425016760692128, 0.18384965158007, 0.312630372278134, -0.114674104557317],
        [10, 8, -0.01, 0.0663465103796562, -0.907175636694188, 0.0551847545380476, 0.906168395100018],
        [0, 10, -3, -4.95991886294329, 0.378615698171094, -0.0114310123753827, -0.00439462700395647],
        [20, 10, -0.001, 2.73781299328984, -1597.48131517469, -2.73778996658387, 1597.48131513445],
        [5, 0.5, -0.05, 3682.79539571664, -6818.87207893858, -3682.7953811941, 6818.87207107532],
      ];
    for (const [m, re, im, a, b, c, d] of table) {
      const h1 = hankel(1, m, { re, im });
      const h2 = hankel(2, m, { re, im });
      expect(Math.hypot(h1[2 * m] - a, h1[2 * m + 1] - b) / Math.hypot(a, b)).toBeLessThan(2e-14);
      expect(Math.hypot(h2[2 * m] - c, h2[2 * m + 1] - d) / Math.hypot(c, d)).toBeLessThan(2e-14);
    }
  });

  it('J, H1, H2 and their derivatives agree with 200-digit values to 1e-13', () => {
    for (const row of rows) {
      const all = scaledCylinderFunctions(row.m, row);
      const where = `m = ${row.m}, z = ${row.re} + ${row.im}i`;
      expect(relativeError(all.besselJ, row.m, row.J), `J ${where}`).toBeLessThan(1e-13);
      expect(relativeError(all.hankel1, row.m, row.H1), `H1 ${where}`).toBeLessThan(1e-13);
      expect(relativeError(all.hankel2, row.m, row.H2), `H2 ${where}`).toBeLessThan(1e-13);
      expect(relativeError(scaledDerivatives(all.besselJ), row.m, row.dJ), `J′ ${where}`).toBeLessThan(1e-13);
      expect(relativeError(scaledDerivatives(all.hankel1), row.m, row.dH1), `H1′ ${where}`).toBeLessThan(1e-13);
      expect(relativeError(scaledDerivatives(all.hankel2), row.m, row.dH2), `H2′ ${where}`).toBeLessThan(1e-13);
    }
  });
});

/** Points over the whole domain: log-uniform radius up to 200, any |Im z| ≤ 60. */
function randomArguments(count: number, seed: number): { re: number; im: number }[] {
  const random = randomStream(seed);
  return Array.from({ length: count }, () => {
    const r = 10 ** (-3 + 5.3 * random.uniform());
    const im = (2 * random.uniform() - 1) * Math.min(60, 0.999 * r);
    return { re: Math.sqrt(r * r - im * im), im };
  });
}

function relativeError(sequence: ScaledSequence, m: number, [re, im, exponent]: Packed): number {
  const factor = 2 ** (sequence.exponents[m] - exponent);
  const a = sequence.mantissas[2 * m] * factor - re;
  const b = sequence.mantissas[2 * m + 1] * factor - im;
  return Math.hypot(a, b) / Math.hypot(re, im);
}

/** a b′ − a′ b against `expected`, relative to the products. */
function checkWronskian(
  a: ScaledSequence,
  da: ScaledSequence,
  b: ScaledSequence,
  db: ScaledSequence,
  m: number,
  expected: readonly [number, number],
): void {
  const [pr, pi] = product(a, db, m);
  const [qr, qi] = product(da, b, m);
  const error = Math.hypot(pr - qr - expected[0], pi - qi - expected[1]);
  const size = Math.hypot(pr, pi) + Math.hypot(qr, qi);
  if (!(error < 1e-13 * size)) expect.fail(`order ${m}: Wronskian off by ${error}, products of size ${size}`);
}

function product(a: ScaledSequence, b: ScaledSequence, m: number): readonly [number, number] {
  const factor = 2 ** (a.exponents[m] + b.exponents[m]);
  const [ar, ai, br, bi] = [a.mantissas[2 * m], a.mantissas[2 * m + 1], b.mantissas[2 * m], b.mantissas[2 * m + 1]];
  return [(ar * br - ai * bi) * factor, (ar * bi + ai * br) * factor];
}

function expectProducts(factor: Float64Array, value: Float64Array, result: Float64Array): void {
  for (let i = 0; i < factor.length; i += 2) {
    const re = factor[i] * value[i] - factor[i + 1] * value[i + 1] - result[i];
    const im = factor[i] * value[i + 1] + factor[i + 1] * value[i] - result[i + 1];
    expect(Math.hypot(re, im) / Math.hypot(result[i], result[i + 1])).toBeLessThan(1e-14);
  }
}

function expectExponentials(log: Float64Array, value: Float64Array): void {
  for (let i = 0; i < log.length; i += 2) {
    const size = Math.exp(log[i]);
    const error = Math.hypot(size * Math.cos(log[i + 1]) - value[i], size * Math.sin(log[i + 1]) - value[i + 1]);
    expect(error / size).toBeLessThan(5e-15 + 2e-15 * Math.abs(log[i]));
  }
}
