// How does a guide end in a stretched layer along its axis?

import { complex, type Complex, multiply, scale } from '../numerics/complex.ts';
import { type GuideEnds, propagation, transverseWavenumber } from './guide-modes.ts';

/** A stretch of guide from `from`, along `direction`, in which s̃ = s e^{iθ}. */
export interface StraightLayer {
  /** Middle of the cross-section where the layer begins. */
  readonly from: readonly [number, number];
  /** Unit vector towards infinity. */
  readonly direction: readonly [number, number];
  readonly width: number;
  readonly length: number;
  readonly ends: GuideEnds;
}

/** Layers longer than this many guide widths are not made: so near to a cutoff the layer says what it returns instead. */
const LONGEST = 12;

/**
 * Length for which 2 exp(−2 L Im(β e^{iθ})) stays below the tolerance for every mode and every k of the scope; k bends by
 * the largest argument towards the layer's blind side.
 */
export function straightLength(
  guide: Pick<StraightLayer, 'width' | 'ends'>,
  index: number,
  scope: { readonly kMin: number; readonly kMax: number; readonly largestArgument: number },
  angle: number,
  tolerance: number,
): number {
  let rate = Infinity;
  for (let i = 0; i <= 40; i++) {
    const k = scope.kMin + ((scope.kMax - scope.kMin) * i) / 40;
    rate = Math.min(rate, decay(guide, index, complex(k, -k * Math.tan(scope.largestArgument)), angle));
  }
  return Math.min(LONGEST * guide.width, Math.log(2 / tolerance) / (2 * Math.max(rate, 1e-300)));
}

/** Relative amplitude that the end of one layer returns at k, the slowest of its modes. */
export const returnedAlong = (layer: StraightLayer, angle: number, index: number, k: Complex): number =>
  2 * Math.exp(-2 * layer.length * decay(layer, index, { re: k.re, im: -Math.abs(k.im) }, angle));

/** Smallest Im(β e^{iθ}) of all modes. Beyond the first few below cutoff it only grows. */
function decay(guide: Pick<StraightLayer, 'width' | 'ends'>, index: number, k: Complex, angle: number): number {
  let least = Infinity;
  const kappa = scale(k, index);
  const modes = Math.ceil((kappa.re * guide.width) / Math.PI) + 3;
  for (let j = 0; j < modes; j++) {
    const beta = propagation(kappa, transverseWavenumber(guide.ends, guide.width, j));
    least = Math.min(least, multiply(beta, complex(Math.cos(angle), Math.sin(angle))).im);
  }
  return Math.max(0, least);
}

/** Coefficients of the outgoing layers for unit material: p[(1/S) ∂ₛu ∂ₛv + S ∂ₜu ∂ₜv] − k² q S uv, S = e^{iθ}. */
export function straightCoefficients(
  layers: readonly StraightLayer[],
  angle: number,
): (x: number, y: number, out: Float64Array) => void {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return (x, y, out) => {
    const [dx, dy] = layerAt(layers, x, y).direction;
    // along: conj(S) since |S| = 1; across: S
    out[0] = c * dx * dx + c * dy * dy;
    out[1] = -s * dx * dx + s * dy * dy;
    out[2] = 0;
    out[3] = -2 * s * dx * dy;
    out[4] = c * dy * dy + c * dx * dx;
    out[5] = -s * dy * dy + s * dx * dx;
    out[6] = c;
    out[7] = s;
  };
}

/** The layer that holds the point: the one it lies deepest in. */
function layerAt(layers: readonly StraightLayer[], x: number, y: number): StraightLayer {
  let best = layers[0];
  let depth = -Infinity;
  for (const layer of layers) {
    const dx = x - layer.from[0];
    const dy = y - layer.from[1];
    const along = dx * layer.direction[0] + dy * layer.direction[1];
    const across = Math.abs(dy * layer.direction[0] - dx * layer.direction[1]);
    const inside = Math.min(along, layer.length - along, layer.width / 2 - across);
    if (inside > depth) [best, depth] = [layer, inside];
  }
  return best;
}
