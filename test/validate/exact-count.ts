// How many modes does the exact equation of layered disks or of a cluster of disks have in a wedge?

import type { Wedge } from '../../src/eigen/window.ts';
import {
  add,
  argument,
  type Complex,
  complex,
  divide,
  exponential,
  modulus,
  multiply,
  scale,
  squareRoot,
  subtract,
} from '../../src/numerics/complex.ts';
import type { Polarization } from '../../src/numerics/conventions.ts';
import { besselJ, besselJDerivatives, hankel, hankelDerivatives } from '../../src/numerics/cylinder-functions.ts';
import { luFactor } from '../../src/numerics/lu.ts';

/** Concentric disks in vacuum, from the centre outwards. */
export interface ExactLayers {
  readonly radii: readonly number[];
  readonly eps: readonly Complex[];
}

export interface ExactCylinder {
  readonly x: number;
  readonly y: number;
  readonly radius: number;
  readonly eps: Complex;
}

/** A wave goes out (H⁽¹⁾, poles) or comes in (H⁽²⁾, zeros). */
export type Kind = 1 | 2;

/** Number of zeros of all azimuthal orders, orders m ≥ 1 twice: argument principle on each one's own equation. */
export function countLayered(layers: ExactLayers, polarization: Polarization, kind: Kind, wedge: Wedge): number {
  const outer = layers.radii[layers.radii.length - 1];
  const index = Math.max(1, ...layers.eps.map((e) => Math.sqrt(modulus(e))));
  const orders = Math.ceil(1.2 * index * wedge.kMax * outer) + 6;
  let count = 0;
  for (let m = 0; m <= orders; m++) {
    const turns = windingOf((k) => argument(layeredFunction(layers, polarization, kind, m, k)), wedge, index * outer);
    count += (m === 0 ? 1 : 2) * turns;
  }
  return count;
}

/**
 * p u′ H_m − p_b u k H_m′ at the rim, u regular at the centre and carried through the layers by J and Y; every function is
 * analytic for Re k > 0, so that its zeros are counted by its turns.
 */
function layeredFunction(
  { radii, eps }: ExactLayers,
  polarization: Polarization,
  kind: Kind,
  m: number,
  k: Complex,
): Complex {
  const last = radii.length - 1;
  const first = medium(eps[0], polarization, k);
  let z = scale(first.kappa, radii[0]);
  // J_m over z^m does not vanish with it
  const small = scale(complex(1), modulus(z) ** -m);
  let u = multiply(at(besselJ(m, z), m), small);
  let flux = multiply(multiply(first.pKappa, at(besselJDerivatives(m, z), m)), small);
  for (let i = 1; i <= last; i++) {
    const { kappa, pKappa } = medium(eps[i], polarization, k);
    z = scale(kappa, radii[i - 1]);
    const w = scale(kappa, radii[i]);
    const j0 = pair(m, z);
    const j1 = pair(m, w);
    // u = a J + b H⁽¹⁾, J H′ − J′ H = 2i/πz
    const wronskian = divide(complex(0, 2 / Math.PI), z);
    const slope = divide(flux, pKappa);
    const a = divide(subtract(multiply(u, j0.dh), multiply(slope, j0.h)), wronskian);
    const b = divide(subtract(multiply(slope, j0.j), multiply(u, j0.dj)), wronskian);
    u = add(multiply(a, j1.j), multiply(b, j1.h));
    flux = multiply(pKappa, add(multiply(a, j1.dj), multiply(b, j1.dh)));
  }
  const rim = scale(k, radii[last]);
  const h = at(hankel(kind, m, rim), m);
  const dh = multiply(k, at(hankelDerivatives(kind, m, rim), m));
  // |H_m| is large where k R is below m; only the phase counts
  const size = 1 / Math.max(modulus(h), 1e-300);
  return subtract(multiply(flux, scale(h, size)), multiply(u, scale(dh, size)));
}

const medium = (eps: Complex, polarization: Polarization, k: Complex): { kappa: Complex; pKappa: Complex } => {
  const kappa = multiply(squareRoot(eps), k);
  return { kappa, pKappa: polarization === 'Ez' ? kappa : divide(kappa, eps) };
};

const at = (values: Float64Array, m: number): Complex => complex(values[2 * m], values[2 * m + 1]);

const pair = (m: number, z: Complex): { j: Complex; dj: Complex; h: Complex; dh: Complex } => ({
  j: at(besselJ(m, z), m),
  dj: at(besselJDerivatives(m, z), m),
  h: at(hankel(1, m, z), m),
  dh: at(hankelDerivatives(1, m, z), m),
});

/**
 * Number of zeros of the addition theorem's determinant, D x − G N x = 0 in the inner amplitudes x_m of every disk:
 * a = D x comes in, b = N x goes out, G translates H to J (Graf; DLMF 10.23.7). No entry has a pole for Re k > 0.
 */
export function countCluster(
  cylinders: readonly ExactCylinder[],
  polarization: Polarization,
  kind: Kind,
  wedge: Wedge,
): number {
  const index = Math.max(1, ...cylinders.map((c) => Math.sqrt(modulus(c.eps))));
  const widest = Math.max(...cylinders.map((c) => c.radius));
  const M = Math.ceil(1.1 * index * wedge.kMax * widest) + 6;
  const middle = complex((wedge.kMin + wedge.kMax) / 2, 1e-3 * wedge.kMin);
  const scales = cylinders.map((c) => {
    const own = oneCylinder(c, polarization, kind, M, middle);
    const j = besselJ(M, scale(middle, c.radius));
    return Array.from({ length: M + 1 }, (_, m) => ({ d: modulus(own.d[m]), j: Math.max(modulus(at(j, m)), 1e-250) }));
  });
  const phase = (k: Complex): number => {
    const width = 2 * M + 1;
    const n = width * cylinders.length;
    const matrix = new Float64Array(2 * n * n);
    const parts = cylinders.map((c) => oneCylinder(c, polarization, kind, M, k));
    cylinders.forEach((to, p) => {
      cylinders.forEach((from, q) => {
        const dx = to.x - from.x;
        const dy = to.y - from.y;
        const h = p === q ? null : hankel(kind, 2 * M, scale(k, Math.hypot(dx, dy)));
        const phi = Math.atan2(dy, dx);
        for (let c = -M; c <= M; c++) {
          for (let r = -M; r <= M; r++) {
            let value: Complex;
            if (p === q) {
              if (r !== c) continue;
              value = scale(parts[p].d[Math.abs(r)], 1 / scales[p][Math.abs(r)].d);
            } else {
              const order = c - r;
              const sign = order < 0 && order % 2 !== 0 ? -1 : 1;
              const wave = multiply(at(h!, Math.abs(order)), exponential(complex(0, order * phi)));
              const row = scales[p][Math.abs(r)].j;
              const column = scales[q][Math.abs(c)];
              value = scale(multiply(wave, parts[q].n[Math.abs(c)]), (-sign * row) / column.j / column.d);
            }
            const i = 2 * (r + M + p * width + (c + M + q * width) * n);
            matrix[i] = value.re;
            matrix[i + 1] = value.im;
          }
        }
      });
    });
    return luFactor(matrix, n).logDeterminant.im;
  };
  const span = Math.max(...cylinders.map((c) => Math.hypot(c.x, c.y) + index * c.radius));
  return windingOf(phase, wedge, span * cylinders.length);
}

/** a_m = D_m x_m and b_m = N_m x_m of one disk, m = 0 … M, both times the Wronskian's z. */
function oneCylinder(
  { radius, eps }: ExactCylinder,
  polarization: Polarization,
  kind: Kind,
  M: number,
  k: Complex,
): { d: Complex[]; n: Complex[] } {
  const { kappa, pKappa } = medium(eps, polarization, k);
  const inside = scale(kappa, radius);
  const outside = scale(k, radius);
  const ji = besselJ(M, inside);
  const dji = besselJDerivatives(M, inside);
  const j = besselJ(M, outside);
  const dj = besselJDerivatives(M, outside);
  const h = hankel(kind, M, outside);
  const dh = hankelDerivatives(kind, M, outside);
  const d: Complex[] = [];
  const n: Complex[] = [];
  for (let m = 0; m <= M; m++) {
    const u = at(ji, m);
    const flux = multiply(pKappa, at(dji, m));
    d.push(subtract(multiply(u, multiply(k, at(dh, m))), multiply(flux, at(h, m))));
    n.push(subtract(multiply(flux, at(j, m)), multiply(u, multiply(k, at(dj, m)))));
  }
  return { d, n };
}

/** Turns of a phase around the wedge: steps are halved until they are small and their halves add up. */
function windingOf(phase: (k: Complex) => number, { kMin, kMax, low, high }: Wedge, rate: number): number {
  const corners = [
    complex(kMin, -low * kMin),
    complex(kMax, -low * kMax),
    complex(kMax, high * kMax),
    complex(kMin, high * kMin),
  ];
  let total = 0;
  const wrap = (x: number): number => x - 2 * Math.PI * Math.round(x / (2 * Math.PI));
  const walk = (a: Complex, b: Complex, fa: number, fb: number, depth: number): void => {
    const step = wrap(fb - fa);
    const middle = scale(add(a, b), 0.5);
    const fm = phase(middle);
    const first = wrap(fm - fa);
    const second = wrap(fb - fm);
    if (depth > 40 || (Math.abs(step) < 0.8 && Math.abs(first + second - step) < 0.05)) {
      total += first + second;
      return;
    }
    walk(a, middle, fa, fm, depth + 1);
    walk(middle, b, fm, fb, depth + 1);
  };
  corners.forEach((from, i) => {
    const to = corners[(i + 1) % 4];
    const steps = Math.max(24, Math.ceil(2 * rate * modulus(subtract(to, from))));
    let before = from;
    let value = phase(from);
    for (let s = 1; s <= steps; s++) {
      const here = add(from, scale(subtract(to, from), s / steps));
      const next = phase(here);
      walk(before, here, value, next, 0);
      before = here;
      value = next;
    }
  });
  return Math.round(total / (2 * Math.PI));
}
