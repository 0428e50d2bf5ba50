// Are these all the eigenvalues inside a circle?

import { add, type Complex, complex, modulus, multiply, scale, squareRoot, subtract } from '../numerics/complex.ts';
import { eigenGeneral } from '../numerics/eigenvalues.ts';

/** A circle in the plane of k², on the sheet Re k > 0: the discs that the search works with. */
export interface Circle {
  readonly center: Complex;
  readonly radius: number;
}

/** log det A at equally spaced points of a circle. */
export interface Contour {
  readonly circle: Circle;
  /** Angle of the first point, radians. */
  readonly start: number;
  /** Re = log|det A|, Im = its phase on any branch, one a point. */
  readonly logs: readonly Complex[];
}

/** log det A(k) on some branch: all that the count knows of a problem. */
export type LogDeterminant = (k: Complex) => Complex;

export interface Verdict {
  /** The candidates are all there is inside the circle, and each is there. */
  readonly proven: boolean;
  /** Eigenvalues inside beyond the candidates; negative when candidates are too many. */
  readonly missing: number;
  /** Largest |log det − Σ log(λ − λ_j) − analytic fit| over the points; below 0.5 when the contour is resolved. */
  readonly deviation: number;
  /** Candidates inside the circle. */
  readonly inside: number;
  /** Where the missing ones lie, as far as the moments tell; as many as `missing`, none when that is negative. */
  readonly places: readonly Complex[];
}

/** A deviation up to this is the smooth rest; a dropped or added candidate gives more, or a winding. */
export const LARGEST_DEVIATION = 0.5;

/** Share of the harmonics of the real part that the fit may use. */
const FIT_SHARE = 0.75;

/** Factors A at `points` points of the circle. */
export function sampleContour(logDeterminant: LogDeterminant, circle: Circle, points: number, start = 0): Contour {
  const logs = Array.from({ length: points }, (_, q) => logDeterminant(pointOf(circle, start, q, points)));
  return { circle, start, logs };
}

/** The same circle with twice the points, the old ones kept. */
export function doubleContour(logDeterminant: LogDeterminant, { circle, start, logs }: Contour): Contour {
  const points = 2 * logs.length;
  const doubled = Array.from({ length: points }, (_, q) =>
    q % 2 === 0 ? logs[q / 2] : logDeterminant(pointOf(circle, start, q, points)),
  );
  return { circle, start, logs: doubled };
}

/** k of the q-th of the points. */
function pointOf({ center, radius }: Circle, start: number, q: number, points: number): Complex {
  const angle = start + (2 * Math.PI * q) / points;
  return squareRoot(add(center, complex(radius * Math.cos(angle), radius * Math.sin(angle))));
}

/**
 * Judges candidates k_j, one a member, those outside the circle included: they only smooth.
 *
 * f = log det A − Σ log(λ − λ_j), λ = k², is analytic inside exactly when the candidates are right. Re f needs no branch;
 * its harmonics a_n cos nθ + b_n sin nθ on the circle belong to an analytic function with the imaginary part
 * Σ a_n sin nθ − b_n cos nθ, which takes the large smooth phase of det A away. What is left of Re f and Im f must vanish;
 * each missing eigenvalue turns Im f once around. Moments of what is left, the coefficients −Σ ζ_i^n/n of e^{−inθ},
 * tell where the missing ones ζ_i lie (Newton's identities).
 */
export function judge(contour: Contour, candidates: readonly Complex[]): Verdict {
  const { circle, start, logs } = contour;
  const { center, radius } = circle;
  const points = logs.length;
  const places = candidates.map((k) => scale(subtract(multiply(k, k), center), 1 / radius));
  const real = new Float64Array(points);
  const phase = new Float64Array(points);
  for (let q = 0; q < points; q++) {
    const angle = start + (2 * Math.PI * q) / points;
    const zeta = complex(Math.cos(angle), Math.sin(angle));
    real[q] = logs[q].re;
    phase[q] = logs[q].im;
    for (const place of places) {
      const way = subtract(zeta, place);
      real[q] -= Math.log(Math.max(modulus(way), 1e-300));
      phase[q] -= Math.atan2(way.im, way.re);
    }
  }
  removeAnalytic(real, phase, start, Math.floor((FIT_SHARE * points) / 2));
  const winding = unwrap(phase);
  let deviation = 0;
  for (let q = 0; q < points; q++) deviation = Math.max(deviation, Math.abs(real[q]), Math.abs(phase[q]));
  const found = winding > 0 ? missingPlaces(phase, start, winding) : [];
  return {
    proven: winding === 0 && deviation < LARGEST_DEVIATION,
    missing: winding,
    deviation,
    inside: places.filter((p) => modulus(p) < 1).length,
    places: found.map((zeta) => squareRoot(add(center, scale(zeta, radius)))),
  };
}

/** Subtracts the analytic function that fits the real part in harmonics 0 … degree. */
function removeAnalytic(real: Float64Array, phase: Float64Array, start: number, degree: number): void {
  const points = real.length;
  const before = Float64Array.from(real);
  for (let n = 0; n <= degree; n++) {
    let a = 0;
    let b = 0;
    for (let q = 0; q < points; q++) {
      const angle = n * (start + (2 * Math.PI * q) / points);
      a += before[q] * Math.cos(angle);
      b += before[q] * Math.sin(angle);
    }
    a *= (n === 0 ? 1 : 2) / points;
    b *= 2 / points;
    for (let q = 0; q < points; q++) {
      const angle = n * (start + (2 * Math.PI * q) / points);
      real[q] -= a * Math.cos(angle) + b * Math.sin(angle);
      phase[q] -= a * Math.sin(angle) - b * Math.cos(angle);
    }
  }
}

/** Makes the phase continuous, takes its turns and its mean away; returns the turns. */
function unwrap(phase: Float64Array): number {
  const points = phase.length;
  const wrap = (x: number): number => x - 2 * Math.PI * Math.round(x / (2 * Math.PI));
  const first = phase[0];
  let at = first;
  for (let q = 1; q < points; q++) {
    at += wrap(phase[q] - at);
    phase[q] = at;
  }
  const winding = Math.round((at + wrap(first - at) - first) / (2 * Math.PI));
  for (let q = 0; q < points; q++) phase[q] -= (2 * Math.PI * winding * q) / points;
  const mean = phase.reduce((sum, x) => sum + x, 0) / points;
  for (let q = 0; q < points; q++) phase[q] -= mean;
  return winding;
}

/** Most missing eigenvalues whose places are computed: beyond, the moments' polynomial loses its digits. */
const MOST_PLACES = 12;

/**
 * The ζ_i from the power sums s_n = Σ ζ_i^n, n = 1 … W. log(ζ − ζ_i) = log ζ − Σ ζ_i^n e^{−inθ}/n on the circle; the fit
 * of the real part takes the cosines, so that the phase holds the whole moment: its coefficient of e^{−inθ} is i s_n/n.
 */
function missingPlaces(phase: Float64Array, start: number, winding: number): Complex[] {
  if (winding > MOST_PLACES) return [];
  const points = phase.length;
  const sums: Complex[] = [];
  for (let n = 1; n <= winding; n++) {
    let re = 0;
    let im = 0;
    for (let q = 0; q < points; q++) {
      // the turns were taken as 2πWq/points, from angle `start` on: no harmonic in it
      const angle = n * (start + (2 * Math.PI * q) / points);
      re += (phase[q] * Math.cos(angle)) / points;
      im += (phase[q] * Math.sin(angle)) / points;
    }
    sums.push(complex(n * im, -n * re));
  }
  // elementary symmetric functions: n e_n = Σ_{i=1..n} (−1)^{i−1} e_{n−i} s_i
  const e: Complex[] = [complex(1)];
  for (let n = 1; n <= winding; n++) {
    let sum = complex(0);
    for (let i = 1; i <= n; i++) sum = add(sum, scale(multiply(e[n - i], sums[i - 1]), i % 2 === 1 ? 1 : -1));
    e.push(scale(sum, 1 / n));
  }
  // companion matrix of ζ^W − e_1 ζ^{W−1} + e_2 ζ^{W−2} − …
  const matrix = new Float64Array(2 * winding * winding);
  for (let i = 0; i < winding; i++) {
    const sign = i % 2 === 0 ? 1 : -1;
    matrix[2 * i * winding] = sign * e[i + 1].re;
    matrix[2 * i * winding + 1] = sign * e[i + 1].im;
    if (i + 1 < winding) matrix[2 * (i + 1 + i * winding)] = 1;
  }
  const { values } = eigenGeneral(matrix, winding);
  return Array.from({ length: winding }, (_, i) => complex(values[2 * i], values[2 * i + 1]));
}
