// Does a mode belong to the device or to the stretched layer that ends it?

import type { LayerPlan } from '../boundary/stretched-layer.ts';
import { layerCoefficients } from '../boundary/stretched-layer.ts';
import { tabulateBasis } from '../elements/basis.ts';
import { MAP_STRIDE, mapInto, tabulateMap } from '../elements/curved-map.ts';
import { LAYER } from '../mesh/mesh.ts';
import { transposeProduct } from '../eigen/columns.ts';
import { add, complex, type Complex, type ComplexArray, modulus, multiply } from '../numerics/complex.ts';
import { luFactor, luSolveInto } from '../numerics/lu.ts';
import { triangleRule } from '../numerics/quadrature.ts';
import type { DeviceFamily } from '../operator/device-family.ts';

/** What tells a true mode from a layer mode. */
export interface LayerCheck {
  /** Share of Σ|q||u|² that lies in the layer. */
  readonly share: number;
  /** |dk/dθ| / |k|: below the discretisation error for a mode of the device, of order 1 for one of the layer. */
  readonly sensitivity: number;
}

/** Above this sensitivity a mode is the layer's own. True poles stay below 1e-4, layer modes above 0.1 (measured on disks). */
export const LAYER_MODE_SENSITIVITY = 1e-2;

const ANGLE_STEP = 1e-5;

/**
 * First-order shift of k by turning the layer: dk/dθ = −(uᵀ ∂A/∂θ u)/(uᵀ A_k u), integrated point by point over the
 * layer. For a group of modes the mean, −tr[(UᵀA_kU)⁻¹ UᵀA_θU]/μ.
 */
export function checkLayer(
  family: DeviceFamily,
  layer: LayerPlan,
  k: Complex,
  level: number,
  vectors: ComplexArray,
  columns: number,
): LayerCheck {
  const { space, elements } = family.operator;
  const { mesh, starts, list, functions, signs } = space;
  const n = space.unknowns;
  const rule = triangleRule(2 * space.order);
  const basis = tabulateBasis(space.order, rule.points);
  const nb = basis.values.length / rule.weights.length;
  const table = tabulateMap(rule.points, mesh.curveOrder);
  const map = new Float64Array(MAP_STRIDE * rule.weights.length);
  const here = layerCoefficients(layer, mesh.center);
  const turned = layerCoefficients({ rimRadius: layer.rimRadius, angle: layer.angle + ANGLE_STEP }, mesh.center);
  const flip = family.operator.direction === 'incoming' ? -1 : 1;
  const weights = family.weights(k, level, 'value');
  const p = complex(weights.stiffness[0], weights.stiffness[1]);
  const q = complex(weights.mass[0], weights.mass[1]);
  const c0 = new Float64Array(8);
  const c1 = new Float64Array(8);
  const moved = new Float64Array(2 * columns * columns);
  const u = new Float64Array(6 * columns);
  let inLayer = 0;
  for (let t = 0; t + 1 < starts.length; t++) {
    if (mesh.regions[t] !== LAYER) continue;
    mapInto(map, mesh, t, table);
    for (let s = 0; s < rule.weights.length; s++) {
      const at = MAP_STRIDE * s;
      const a = map[at + 2];
      const b = map[at + 3];
      const c = map[at + 4];
      const d = map[at + 5];
      const det = a * d - b * c;
      // values and gradients of all columns: [Re u, Im u, Re u_x, Im u_x, Re u_y, Im u_y]
      u.fill(0);
      for (let i = starts[t]; i < starts[t + 1]; i++) {
        const g = list[i];
        if (g < 0) continue;
        const f = nb * s + functions[i];
        const value = signs[i] * basis.values[f];
        const gx = (signs[i] * (d * basis.dx[f] - c * basis.dy[f])) / det;
        const gy = (signs[i] * (a * basis.dy[f] - b * basis.dx[f])) / det;
        for (let j = 0; j < columns; j++) {
          const vr = vectors[2 * (g + j * n)];
          const vi = vectors[2 * (g + j * n) + 1];
          const o = 6 * j;
          u[o] = u[o] + value * vr;
          u[o + 1] = u[o + 1] + value * vi;
          u[o + 2] = u[o + 2] + gx * vr;
          u[o + 3] = u[o + 3] + gx * vi;
          u[o + 4] = u[o + 4] + gy * vr;
          u[o + 5] = u[o + 5] + gy * vi;
        }
      }
      here(map[at], map[at + 1], c0);
      turned(map[at], map[at + 1], c1);
      const w = (rule.weights[s] * det) / ANGLE_STEP;
      const slope = (i: number, by: Complex): Complex =>
        multiply(by, complex(w * (c1[i] - c0[i]), flip * w * (c1[i + 1] - c0[i + 1])));
      const t11 = slope(0, p);
      const t12 = slope(2, p);
      const t22 = slope(4, p);
      const mass = slope(6, q);
      for (let j = 0; j < columns; j++) {
        const uj = complex(u[6 * j], u[6 * j + 1]);
        const xj = complex(u[6 * j + 2], u[6 * j + 3]);
        const yj = complex(u[6 * j + 4], u[6 * j + 5]);
        const fluxX = add(multiply(t11, xj), multiply(t12, yj));
        const fluxY = add(multiply(t12, xj), multiply(t22, yj));
        const load = multiply(mass, uj);
        for (let i = 0; i < columns; i++) {
          const term = add(
            add(
              multiply(complex(u[6 * i + 2], u[6 * i + 3]), fluxX),
              multiply(complex(u[6 * i + 4], u[6 * i + 5]), fluxY),
            ),
            multiply(complex(u[6 * i], u[6 * i + 1]), load),
          );
          const o = 2 * (i + j * columns);
          moved[o] = moved[o] + term.re;
          moved[o + 1] = moved[o + 1] + term.im;
        }
        inLayer += rule.weights[s] * det * (uj.re * uj.re + uj.im * uj.im) * modulus(q);
      }
    }
  }
  const work = family.multiplyInto(new Float64Array(2 * n * columns), k, level, 'byK', vectors, columns);
  const lu = luFactor(transposeProduct(vectors, columns, work, columns, n), columns);
  luSolveInto(moved, lu, moved, columns);
  let trace = complex(0);
  for (let i = 0; i < columns; i++) {
    trace = add(trace, complex(moved[2 * (i + i * columns)], moved[2 * (i + i * columns) + 1]));
  }
  const inside = energyInside(family, elements.mass, weights.mass, vectors, columns);
  return { share: inLayer / (inLayer + inside), sensitivity: modulus(trace) / columns / modulus(k) };
}

/** Σ |q| uᴴMu over everything but the layer. */
function energyInside(
  family: DeviceFamily,
  masses: readonly Float64Array[],
  weights: ComplexArray,
  vectors: ComplexArray,
  columns: number,
): number {
  const { space } = family.operator;
  const { starts, list, mesh, unknowns: n } = space;
  let sum = 0;
  for (let t = 0; t + 1 < starts.length; t++) {
    const region = mesh.regions[t];
    if (region === LAYER) continue;
    const w = Math.hypot(weights[2 * (region + 2)], weights[2 * (region + 2) + 1]);
    const m = masses[t];
    const nd = starts[t + 1] - starts[t];
    for (let c = 0; c < columns; c++) {
      for (let j = 0; j < nd; j++) {
        const gj = list[starts[t] + j];
        if (gj < 0) continue;
        const ur = vectors[2 * (gj + c * n)];
        const ui = vectors[2 * (gj + c * n) + 1];
        let vr = 0;
        let vi = 0;
        for (let i = 0; i < nd; i++) {
          const gi = list[starts[t] + i];
          if (gi < 0) continue;
          vr += m[j * nd + i] * vectors[2 * (gi + c * n)];
          vi += m[j * nd + i] * vectors[2 * (gi + c * n) + 1];
        }
        sum += w * (ur * vr + ui * vi);
      }
    }
  }
  return sum;
}
