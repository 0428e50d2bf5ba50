// What does a file of network parameters hold?

import { type Complex, complex, type ComplexArray } from '../numerics/complex.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';

export const TOUCHSTONE_UNITS = { Hz: 1, kHz: 1e3, MHz: 1e6, GHz: 1e9 } as const;
export type TouchstoneUnit = keyof typeof TOUCHSTONE_UNITS;
export type TouchstoneFormat = 'RI' | 'MA' | 'DB';
export type TouchstoneParameter = 'S' | 'Y' | 'Z' | 'G' | 'H';

/**
 * Network parameters as such a file holds them: under the engineers' exp(+jωt), the conjugate of ours.
 *
 * Source: Touchstone File Format Specification 1.1 and 2.0 (IBIS Open Forum, 2009), with its later clarifications.
 */
export interface TouchstoneNetwork {
  readonly version: 1 | 2;
  readonly unit: TouchstoneUnit;
  readonly parameter: TouchstoneParameter;
  readonly format: TouchstoneFormat;
  readonly ports: number;
  /** Ohm, one a port; real and positive. */
  readonly reference: readonly number[];
  /** In the unit; increasing. */
  readonly frequencies: Float64Array;
  /** n × n column-major interleaved for each frequency, one after the other; Y, Z, G, H as written. */
  readonly matrices: ComplexArray;
  /** Two-ports: rows of frequency, minimum noise figure in dB, source reflection (modulus, degrees), resistance. */
  readonly noise: readonly (readonly number[])[];
}

/** The file breaks a rule: where, what came, what was expected, what to do. */
export class TouchstoneError extends Error {
  override readonly name = 'TouchstoneError';
  readonly line: number;
  readonly came: string;
  readonly expected: string;
  readonly mend: string;

  constructor(line: number, came: string, expected: string, mend: string) {
    super(`line ${line}: came ${came}, expected ${expected}: ${mend}`);
    this.line = line;
    this.came = came;
    this.expected = expected;
    this.mend = mend;
  }
}

/** Measured waves in our conventions: S under exp(−iωt), frequencies in Hz. */
export interface MeasuredScattering {
  readonly ports: number;
  readonly hertz: Float64Array;
  /** n × n column-major interleaved for each frequency. */
  readonly matrices: ComplexArray;
}

/**
 * S of the network under exp(−iωt). With v = (a + b), i = (a − b) in units of √R and 1/√R, y = P x of any two of them gives
 * b = Σ (1 + P)⁻¹ (P − 1) a, Σ = +1 where y is a voltage, −1 where it is a current.
 */
export function scatteringOfNetwork(network: TouchstoneNetwork): MeasuredScattering {
  const { ports: n, frequencies, matrices, parameter, unit } = network;
  const out = new Float64Array(matrices.length);
  for (let f = 0; f < frequencies.length; f++) {
    const from = matrices.subarray(2 * n * n * f, 2 * n * n * (f + 1));
    const S = parameter === 'S' ? from : scatteringOfMatrix(network, from);
    for (let i = 0; i < 2 * n * n; i += 2) {
      out[2 * n * n * f + i] = S[i];
      out[2 * n * n * f + i + 1] = -S[i + 1];
    }
  }
  return { ports: n, hertz: frequencies.map((v) => v * TOUCHSTONE_UNITS[unit]), matrices: out };
}

function scatteringOfMatrix(
  { ports: n, parameter, reference, version }: TouchstoneNetwork,
  P: ComplexArray,
): ComplexArray {
  const isVoltage = (k: number): boolean => parameter === 'Z' || (parameter === 'H' && k === 0) || (parameter === 'G' && k === 1); // prettier-ignore
  // version 1 files are normalised to R already; version 2 holds ohms and siemens
  const root = (k: number): number => (version === 1 ? 1 : Math.sqrt(reference[k]));
  const plus = new Float64Array(2 * n * n);
  const minus = new Float64Array(2 * n * n);
  for (let j = 0; j < n; j++)
    for (let i = 0; i < n; i++) {
      const by = (isVoltage(i) ? 1 / root(i) : root(i)) / (isVoltage(j) ? root(j) : 1 / root(j));
      const at = 2 * (i + j * n);
      plus[at] = by * P[at] + (i === j ? 1 : 0);
      minus[at] = by * P[at] - (i === j ? 1 : 0);
      plus[at + 1] = minus[at + 1] = by * P[at + 1];
    }
  luSolveInto(minus, luFactor(plus, n), minus, n);
  for (let i = 0; i < n; i++) if (!isVoltage(i)) for (let j = 0; j < n; j++) negate(minus, i + j * n);
  return minus;
}

function negate(a: ComplexArray, i: number): void {
  a[2 * i] = -a[2 * i];
  a[2 * i + 1] = -a[2 * i + 1];
}

/** The pair of numbers as a complex number; angles in degrees, dB = 20 log₁₀. */
export function fromPair(format: TouchstoneFormat, a: number, b: number): Complex {
  if (format === 'RI') return complex(a, b);
  const size = format === 'DB' ? 10 ** (a / 20) : a;
  return complex(size * Math.cos((b * Math.PI) / 180), size * Math.sin((b * Math.PI) / 180));
}

/** The two numbers that a file of that format holds. */
export function toPair(format: TouchstoneFormat, re: number, im: number): readonly [number, number] {
  if (format === 'RI') return [re, im];
  const size = Math.hypot(re, im);
  const angle = (Math.atan2(im, re) * 180) / Math.PI;
  // a file holds no minus infinity
  return format === 'MA' ? [size, angle] : [Math.max(-400, 20 * Math.log10(size)), angle];
}

/**
 * Entry places of the pairs of one frequency in the order of the file: two-ports 11 21 12 22 (version 1, order 21_12) or
 * 11 12 21 22; else row by row, of a triangle only the part that stands there.
 */
export function pairOrder(
  ports: number,
  columnFirst: boolean,
  part: 'Full' | 'Lower' | 'Upper' = 'Full',
): readonly (readonly [row: number, column: number])[] {
  const out: [number, number][] = [];
  for (let i = 0; i < ports; i++)
    for (let j = 0; j < ports; j++) {
      if (part === 'Lower' && j > i) continue;
      if (part === 'Upper' && j < i) continue;
      out.push(ports === 2 && columnFirst && part === 'Full' ? [j, i] : [i, j]);
    }
  return out;
}
