// What can a measured S-matrix absorb, how little need it reflect, and where are its zeros?

import { complex, type Complex, type ComplexArray, modulus, subtract } from '../numerics/complex.ts';
import { luFactor } from '../numerics/lu.ts';
import { evaluateFit, polesOfFit, rationalFit, type RationalFit, zerosOfFit } from '../numerics/rational-fit.ts';
import { singularForm } from '../numerics/singular-values.ts';
import type { MeasuredScattering } from '../results/touchstone.ts';

export interface MeasuredRequest {
  /** Ports that waves come in through, from 0; all if absent. */
  readonly inputs?: readonly number[];
  /** Of the fit, relative to the largest value; 1e-6 if absent. */
  readonly tolerance?: number;
}

/** What drives on the inputs can do at one frequency. */
export interface MeasuredPoint {
  readonly hertz: number;
  /** Largest and smallest share of the power that is lost in the device. */
  readonly best: number;
  readonly worst: number;
  /** Share lost of unit power into each input alone. */
  readonly single: Float64Array;
  /** Smallest singular value of S between the inputs: the least amplitude that must come back into them. */
  readonly reflection: number;
  /** Amplitudes on the inputs for the largest loss, and for the least reflection: unit power, the strongest real. */
  readonly bestDrive: ComplexArray;
  readonly reflectionDrive: ComplexArray;
}

/** A zero of det S between the inputs, or a pole, under exp(−iωt), in Hz. */
export interface MeasuredRoot {
  readonly hertz: Complex;
  /** Distance to the root of a fit through every other point; Infinity where that has none nearby. */
  readonly error: number;
}

export interface MeasuredAnswer {
  readonly inputs: readonly number[];
  readonly points: readonly MeasuredPoint[];
  /** Number of the point with the largest loss, and with the least reflection. */
  readonly bestAt: number;
  readonly reflectionAt: number;
  /** Largest singular value of S over all points, all ports: above 1 the data are not passive. */
  readonly gain: number;
  /** Largest |S_ij − S_ji|. */
  readonly reciprocity: number;
  readonly zeros: readonly MeasuredRoot[];
  readonly poles: readonly MeasuredRoot[];
  /** Largest error of the fit of det S at the points, and, of a fit through every other point, at the points between. */
  readonly fit: { readonly degree: number; readonly error: number; readonly between: number };
}

/** Roots are listed when no farther outside the band than this share of its width, on all sides. */
const MARGIN = 0.1;
const FARTHEST = 1;
/** Pairs of pole and zero that cancel within this share of the band's width belong to noise. */
const CANCELLED = 1e-6;

/**
 * Best and worst drives from the singular values of the columns of S that belong to the inputs, the least reflection from
 * those of its square part; zeros and poles from a rational fit of det S between the inputs.
 *
 * @throws RangeError for inputs that are no ports.
 */
export function analyseMeasured(measured: MeasuredScattering, request: MeasuredRequest = {}): MeasuredAnswer {
  const { ports: n, hertz, matrices } = measured;
  const inputs = request.inputs ?? Array.from({ length: n }, (_, i) => i);
  const wrong = inputs.find((i) => !(Number.isInteger(i) && i >= 0 && i < n));
  if (wrong !== undefined || inputs.length === 0 || new Set(inputs).size < inputs.length)
    throw new RangeError(`inputs ${inputs.map((i) => i + 1).join(', ')}; expected different ports from 1 to ${n}`);
  const points = Array.from(hertz, (f, i) => pointOf(f, at(matrices, n, i), n, inputs));
  const determinants = new Float64Array(2 * hertz.length);
  hertz.forEach((_, i) => determinants.set(determinant(at(matrices, n, i), n, inputs), 2 * i));
  let gain = 0;
  let reciprocity = 0;
  for (let f = 0; f < hertz.length; f++) {
    const S = at(matrices, n, f);
    gain = Math.max(gain, singularForm(S, n, n).values[0]);
    for (let j = 0; j < n; j++)
      for (let i = 0; i < j; i++) {
        const [x, y] = [2 * (i + j * n), 2 * (j + i * n)];
        reciprocity = Math.max(reciprocity, Math.hypot(S[x] - S[y], S[x + 1] - S[y + 1]));
      }
  }
  return {
    inputs,
    points,
    bestAt: points.reduce((b, p, i) => (p.best > points[b].best ? i : b), 0),
    reflectionAt: points.reduce((b, p, i) => (p.reflection < points[b].reflection ? i : b), 0),
    gain,
    reciprocity,
    ...rootsOf(hertz, determinants, request.tolerance ?? 1e-6),
  };
}

const at = (matrices: ComplexArray, n: number, i: number): ComplexArray =>
  matrices.subarray(2 * n * n * i, 2 * n * n * (i + 1));

function pointOf(hertz: number, S: ComplexArray, n: number, inputs: readonly number[]): MeasuredPoint {
  const m = inputs.length;
  const columns = new Float64Array(2 * n * m);
  const square = new Float64Array(2 * m * m);
  inputs.forEach((j, b) => {
    columns.set(S.subarray(2 * n * j, 2 * n * (j + 1)), 2 * n * b);
    inputs.forEach((i, a) => square.set(S.subarray(2 * (i + j * n), 2 * (i + j * n) + 2), 2 * (a + b * m)));
  });
  const whole = singularForm(columns, n, m);
  const back = singularForm(square, m, m);
  const single = Float64Array.from(inputs, (_, b) => {
    let sum = 0;
    for (let i = 2 * n * b; i < 2 * n * (b + 1); i++) sum += columns[i] ** 2;
    return 1 - sum;
  });
  return {
    hertz,
    best: 1 - whole.values[m - 1] ** 2,
    worst: 1 - whole.values[0] ** 2,
    single,
    reflection: back.values[m - 1],
    bestDrive: strongestReal(whole.right.subarray(2 * m * (m - 1), 2 * m * m)),
    reflectionDrive: strongestReal(back.right.subarray(2 * m * (m - 1), 2 * m * m)),
  };
}

/** The phase that makes the strongest amplitude real and positive. */
function strongestReal(drive: ComplexArray): ComplexArray {
  let top = 0;
  for (let i = 2; i < drive.length; i += 2)
    if (drive[i] ** 2 + drive[i + 1] ** 2 > drive[top] ** 2 + drive[top + 1] ** 2 + 1e-12) top = i;
  const size = Math.hypot(drive[top], drive[top + 1]) || 1;
  const [c, s] = [drive[top] / size, -drive[top + 1] / size];
  const out = new Float64Array(drive.length);
  for (let i = 0; i < drive.length; i += 2) {
    out[i] = c * drive[i] - s * drive[i + 1];
    out[i + 1] = c * drive[i + 1] + s * drive[i];
  }
  return out;
}

function determinant(S: ComplexArray, n: number, inputs: readonly number[]): [number, number] {
  const m = inputs.length;
  const part = new Float64Array(2 * m * m);
  inputs.forEach((j, b) => {
    inputs.forEach((i, a) => part.set(S.subarray(2 * (i + j * n), 2 * (i + j * n) + 2), 2 * (a + b * m)));
  });
  const { logDeterminant, smallestPivot } = luFactor(part, m);
  if (smallestPivot === 0) return [0, 0];
  const size = Math.exp(logDeterminant.re);
  return [size * Math.cos(logDeterminant.im), size * Math.sin(logDeterminant.im)];
}

function rootsOf(
  hertz: Float64Array,
  values: ComplexArray,
  tolerance: number,
): Pick<MeasuredAnswer, 'zeros' | 'poles' | 'fit'> {
  const n = hertz.length;
  if (n < 8) return { zeros: [], poles: [], fit: { degree: 0, error: Infinity, between: Infinity } };
  const width = hertz[n - 1] - hertz[0];
  const xs = hertz.map((f) => (f - hertz[0]) / width);
  const whole = rationalFit(xs, values, { tolerance });
  const every = [0, 1].map((odd) => Array.from({ length: n }, (_, i) => i).filter((i) => i % 2 === odd));
  const half = rationalFit(
    Float64Array.from(every[0], (i) => xs[i]),
    Float64Array.from(every[0].flatMap((i) => [values[2 * i], values[2 * i + 1]])),
    { tolerance },
  );
  let between = 0;
  for (const i of every[1]) {
    const { re, im } = evaluateFit(half, complex(xs[i]));
    between = Math.max(between, Math.hypot(re - values[2 * i], im - values[2 * i + 1]));
  }
  const list = (roots: (fit: RationalFit) => Complex[], others: (fit: RationalFit) => Complex[]): MeasuredRoot[] => {
    const [mine, theirs, partners] = [roots(whole), roots(half), others(whole)];
    return mine
      .filter((z) => z.re > -MARGIN && z.re < 1 + MARGIN && Math.abs(z.im) < FARTHEST)
      .filter((z) => partners.every((p) => modulus(subtract(p, z)) > CANCELLED))
      .map((z) => ({
        hertz: { re: hertz[0] + width * z.re, im: width * z.im },
        error: width * Math.min(Infinity, ...theirs.map((t) => modulus(subtract(t, z)))),
      }))
      .sort((a, b) => Math.abs(a.hertz.im) - Math.abs(b.hertz.im));
  };
  return {
    zeros: list(zerosOfFit, polesOfFit),
    poles: list(polesOfFit, zerosOfFit),
    fit: { degree: whole.support.length - 1, error: whole.error, between },
  };
}
