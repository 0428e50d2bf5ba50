// How does an open device end: where, how thick, and with which stretched coefficients?

import { argument, complex, type Complex, type ComplexArray, modulus, multiply, scale } from '../numerics/complex.ts';
import { returnedAlong, straightCoefficients, type StraightLayer } from './straight-layer.ts';
import { logHankel } from '../numerics/cylinder-functions.ts';

/** A radial stretched layer R ≤ r ≤ R + L in which r̃ = R + (r − R) e^{iθ}: outgoing waves decay. */
export interface LayerPlan {
  readonly rimRadius: number;
  readonly endRadius: number;
  /** θ, radians. */
  readonly angle: number;
  /** n_b. */
  readonly backgroundIndex: number;
  /** Relative amplitude of what the end sends back: 2 exp(−2 |k| n_b L sin(θ − |arg k|)) at the worst k of the plan. */
  readonly returned: number;
  /** Devices with walls have straight layers along their guides instead of the radial one: possibly none. */
  readonly straight?: readonly StraightLayer[];
}

export interface LayerRequest {
  /** Radius of the circle that holds all bodies, length units. */
  readonly bodyRadius: number;
  /** Smallest and largest |k| asked for, 1/length unit. */
  readonly kMin: number;
  readonly kMax: number;
  /** Largest |arg k| of the window, radians: arctan(1/(2Q)) for the lowest Q asked for. */
  readonly largestArgument: number;
  readonly backgroundIndex: number;
  /** Relative amplitude that may return. */
  readonly tolerance: number;
  /** Multipoles |m| up to here keep the tolerance as well, of x = n_b k bodyRadius; by default those that radiate freely. */
  readonly highestOrder?: (x: number) => number;
}

/** Rotation of the layer. Above 60° no layer mode lies above the ray arg k = −θ; 75° keeps poles down to Q ≈ 0.5 clear of it. */
export const LAYER_ANGLE = (75 * Math.PI) / 180;

/** Step by which the layer is lengthened until high multipoles keep the tolerance. */
const LENGTHENING = 1.02;

/** Longest layer, in lengths that the law alone would give: multipoles that need more leave no power. */
const LONGEST_LAYER = 4;

/**
 * Chooses rim and layer. The rim keeps a gap of a quarter background wavelength to the bodies, but at least a tenth and
 * at most a half of their radius; the layer is as thick as the tolerance asks at the longest wavelength.
 * Error law: 2 exp(−2 k L sin θ), right within 16 % for θ from 45° to 80° (measured on disks, orders 4 to 8); then longer
 * until the exact return of each multipole keeps the tolerance at both ends of the band.
 * @throws RangeError when the window's argument reaches the layer's angle.
 */
export function planLayer(request: LayerRequest): LayerPlan {
  const { bodyRadius, kMin, kMax, largestArgument, backgroundIndex, tolerance } = request;
  if (!(kMin > 0 && kMax >= kMin))
    throw new RangeError(`the band came as k = ${kMin} to ${kMax}; expected 0 < kMin ≤ kMax`);
  const room = LAYER_ANGLE - largestArgument;
  if (!(room > 0.15))
    throw new RangeError(`arg k came as ${largestArgument} rad; the layer sees less than ${LAYER_ANGLE - 0.15}`);
  const wavelength = (2 * Math.PI) / (kMax * backgroundIndex);
  const gap = Math.min(Math.max(wavelength / 4, bodyRadius / 10), bodyRadius / 2);
  const rate = 2 * kMin * backgroundIndex * Math.sin(room);
  const rimRadius = bodyRadius + gap;
  const shortest = Math.log(2 / tolerance) / rate;
  const planOf = (length: number): LayerPlan => ({
    rimRadius,
    endRadius: rimRadius + length,
    angle: LAYER_ANGLE,
    backgroundIndex,
    returned: 2 * Math.exp(-rate * length),
  });
  const keepsAt = (plan: LayerPlan, k: number): boolean => {
    const x = backgroundIndex * k * bodyRadius;
    const M = Math.ceil(request.highestOrder?.(x) ?? x);
    return Math.max(...returnedOrders(plan, complex(k), M)) <= tolerance;
  };
  let length = shortest;
  let plan = planOf(length);
  while (length < LONGEST_LAYER * shortest && !(keepsAt(plan, kMin) && keepsAt(plan, kMax))) {
    length *= LENGTHENING;
    plan = planOf(length);
  }
  return plan;
}

/** What the layer's end returns at one k, relative amplitude. */
export function returnedAt(plan: LayerPlan, k: Complex): number {
  if (plan.straight)
    return Math.max(0, ...plan.straight.map((s) => returnedAlong(s, plan.angle, plan.backgroundIndex, k)));
  const room = plan.angle - Math.abs(argument(k));
  return 2 * Math.exp(-2 * modulus(k) * plan.backgroundIndex * (plan.endRadius - plan.rimRadius) * Math.sin(room));
}

/**
 * The same for each multipole |m| = 0 … M apart, exactly: the field that vanishes at the layer's end holds a_m H⁽²⁾_m and
 * b_m H⁽¹⁾_m with |a_m/b_m| = |H⁽¹⁾_m(z)/H⁽²⁾_m(z)|, z = n_b k (R + L e^{iθ}). High orders and low Q raise it above the law.
 * For incoming layers the roles change, which equals the conjugate k.
 */
export function returnedOrders(plan: LayerPlan, k: Complex, M: number): Float64Array {
  const factors = returnFactors(plan, complex(k.re, -Math.abs(k.im)), M);
  return Float64Array.from({ length: M + 1 }, (_, m) => Math.hypot(factors[2 * m], factors[2 * m + 1]));
}

/** a_m/b_m = −H⁽¹⁾_m(z)/H⁽²⁾_m(z) itself, |m| = 0 … M, interleaved, behind the outgoing layer. */
export function returnFactors(plan: LayerPlan, k: Complex, M: number): ComplexArray {
  const length = plan.endRadius - plan.rimRadius;
  const end = complex(plan.rimRadius + length * Math.cos(plan.angle), length * Math.sin(plan.angle));
  const z = scale(multiply(k, end), plan.backgroundIndex);
  const forth = logHankel(1, M, z);
  const back = logHankel(2, M, z);
  const factors = new Float64Array(2 * (M + 1));
  for (let m = 0; m <= M; m++) {
    const size = -Math.exp(forth[2 * m] - back[2 * m]);
    const phase = forth[2 * m + 1] - back[2 * m + 1];
    factors[2 * m] = size * Math.cos(phase);
    factors[2 * m + 1] = size * Math.sin(phase);
  }
  return factors;
}

/**
 * Coefficients of the outgoing layer for unit material: p[(ŝ/s) ∂ᵣu ∂ᵣv + (s/ŝ) r⁻² ∂_φu ∂_φv] − k² q s ŝ uv with
 * s = e^{iθ}, ŝ = r̃/r, as a Cartesian tensor. The incoming layer is the complex conjugate.
 */
export function layerCoefficients(
  plan: Pick<LayerPlan, 'rimRadius' | 'angle' | 'straight'>,
  center: readonly [number, number],
): (x: number, y: number, out: Float64Array) => void {
  if (plan.straight) return straightCoefficients(plan.straight, plan.angle);
  const { rimRadius: R, angle } = plan;
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return (x, y, out) => {
    const dx = x - center[0];
    const dy = y - center[1];
    const r = Math.hypot(dx, dy);
    const hr = (R + (r - R) * c) / r;
    const hi = ((r - R) * s) / r;
    // radial ŝ/s = ŝ e^{−iθ}; azimuthal s/ŝ = e^{iθ} conj(ŝ)/|ŝ|²; mass s ŝ
    const radialRe = hr * c + hi * s;
    const radialIm = hi * c - hr * s;
    const norm = hr * hr + hi * hi;
    const azimuthRe = (c * hr + s * hi) / norm;
    const azimuthIm = (s * hr - c * hi) / norm;
    const cc = (dx * dx) / (r * r);
    const cs = (dx * dy) / (r * r);
    const ss = (dy * dy) / (r * r);
    out[0] = radialRe * cc + azimuthRe * ss;
    out[1] = radialIm * cc + azimuthIm * ss;
    out[2] = (radialRe - azimuthRe) * cs;
    out[3] = (radialIm - azimuthIm) * cs;
    out[4] = radialRe * ss + azimuthRe * cc;
    out[5] = radialIm * ss + azimuthIm * cc;
    out[6] = c * hr - s * hi;
    out[7] = c * hi + s * hr;
  };
}
