// What matrices is the direct solver timed on?

import type { ElementFill, ElementPattern } from '../../src/sparse/pattern.ts';

/** K − k²M on a square of jittered triangles, Lagrange elements, coordinates stretched into the complex near the rim. */
export interface BenchMatrix {
  readonly pattern: ElementPattern;
  /** Element matrices one after the other, nd × nd interleaved. */
  readonly values: Float64Array;
  readonly nodesPerElement: number;
  readonly fill: ElementFill;
  readonly multiplyInto: (out: Float64Array, x: Float64Array, columns: number) => Float64Array;
}

export interface SquareChoice {
  readonly perWavelength?: number;
  readonly jitter?: number;
  readonly seed?: number;
  /** Permittivity at a point. */
  readonly epsilon?: (x: number, y: number) => Pair;
  /** Ez: ε multiplies the mass; Hz: 1/ε the stiffness. */
  readonly polarization?: 'Ez' | 'Hz';
  /** k² instead of the one that follows from perWavelength. */
  readonly k2?: Pair;
  /** Leaves the rim free instead of fixing u = 0 there. */
  readonly natural?: boolean;
}

/** (re, im) */
type Pair = readonly [number, number];
const ONE: Pair = [1, 0];

/**
 * Unit square cut into cells × cells squares of two triangles, inner vertices moved by up to `jitter` of a cell;
 * equispaced Lagrange elements of the given order with u = 0 on the rim, `perWavelength` unknowns a wavelength along a
 * side: ∫ p (s_y/s_x) u_x v_x + p (s_x/s_y) u_y v_y − k² q s_x s_y u v, the stretches and ε taken at the centroids.
 */
export function layeredSquare(
  cells: number,
  order: number,
  {
    perWavelength = 8,
    jitter = 0.2,
    seed = 1,
    epsilon = () => [1, 0],
    polarization = 'Ez',
    k2,
    natural = false,
  }: SquareChoice = {},
): BenchMatrix {
  const h = 1 / cells;
  const squared = k2 ?? [((2 * Math.PI * cells * order) / perWavelength) ** 2, 0];
  const random = mulberry(seed);
  const vx = new Float64Array((cells + 1) ** 2);
  const vy = new Float64Array((cells + 1) ** 2);
  for (let j = 0; j <= cells; j++) {
    for (let i = 0; i <= cells; i++) {
      const inner = i > 0 && j > 0 && i < cells && j < cells;
      vx[j * (cells + 1) + i] = h * (i + (inner ? jitter * (2 * random() - 1) : 0));
      vy[j * (cells + 1) + i] = h * (j + (inner ? jitter * (2 * random() - 1) : 0));
    }
  }
  const nd = ((order + 1) * (order + 2)) / 2;
  const side = cells * order + 1;
  const total = 2 * cells * cells;
  const numberAt = new Int32Array(side * side).fill(-1);
  let unknowns = 0;
  const margin = natural ? 0 : 1;
  for (let j = margin; j < side - margin; j++)
    for (let i = margin; i < side - margin; i++) numberAt[j * side + i] = unknowns++;
  const starts = Int32Array.from({ length: total + 1 }, (_, e) => e * nd);
  const list = new Int32Array(total * nd);
  const centroids = new Float64Array(2 * total);
  const values = new Float64Array(2 * nd * nd * total);
  const reference = referenceMatrices(order);
  let e = 0;
  for (let j = 0; j < cells; j++) {
    for (let i = 0; i < cells; i++) {
      for (let half = 0; half < 2; half++, e++) {
        const corners = half === 0 ? [[i, j], [i + 1, j], [i, j + 1]] : [[i + 1, j + 1], [i, j + 1], [i + 1, j]]; // prettier-ignore
        let at = e * nd;
        for (let b = 0; b <= order; b++) {
          for (let a = 0; a + b <= order; a++) {
            const gx = half === 0 ? i * order + a : (i + 1) * order - a;
            const gy = half === 0 ? j * order + b : (j + 1) * order - b;
            list[at++] = numberAt[gy * side + gx];
          }
        }
        const [p, q, r] = corners.map(([ci, cj]) => cj * (cells + 1) + ci);
        const cx = (vx[p] + vx[q] + vx[r]) / 3;
        const cy = (vy[p] + vy[q] + vy[r]) / 3;
        centroids[2 * e] = cx;
        centroids[2 * e + 1] = cy;
        const [ax, ay, bx, by] = [vx[q] - vx[p], vy[q] - vy[p], vx[r] - vx[p], vy[r] - vy[p]];
        const det = ax * by - ay * bx;
        // ∇a = (by, −bx)/det, ∇b = (−ay, ax)/det
        const sx = stretch(cx);
        const sy = stretch(cy);
        const eps = epsilon(cx, cy);
        const p1 = polarization === 'Ez' ? ONE : divide(ONE, eps);
        const ratio = times(p1, divide(sy, sx)); // for u_x v_x
        const inverse = times(p1, divide(sx, sy));
        const product = times(squared, times(times(sx, sy), polarization === 'Ez' ? eps : ONE));
        const aa = [by * by, bx * bx];
        const ab = [-by * ay, -bx * ax];
        const bb = [ay * ay, ax * ax];
        for (let t = 0; t < nd * nd; t++) {
          const gxx = (reference.aa[t] * aa[0] + reference.ab[t] * ab[0] + reference.bb[t] * bb[0]) / det;
          const gyy = (reference.aa[t] * aa[1] + reference.ab[t] * ab[1] + reference.bb[t] * bb[1]) / det;
          const mass = reference.mass[t] * det;
          const to = 2 * (e * nd * nd + t);
          values[to] = gxx * ratio[0] + gyy * inverse[0] - mass * product[0];
          values[to + 1] = gxx * ratio[1] + gyy * inverse[1] - mass * product[1];
        }
      }
    }
  }
  const size = 2 * nd * nd;
  return {
    pattern: { unknowns, starts, list, centroids },
    values,
    nodesPerElement: nd,
    fill(element, into) {
      const from = element * size;
      for (let t = 0; t < size; t++) into[t] = values[from + t];
    },
    multiplyInto(out, x, columns) {
      // Element by element, so that the matrix is read once for all columns.
      out.fill(0, 0, 2 * unknowns * columns);
      const local = new Float64Array(2 * nd);
      for (let el = 0; el < total; el++) {
        const at = el * size;
        for (let c = 0; c < columns; c++) {
          const base = 2 * unknowns * c;
          for (let b = 0; b < nd; b++) {
            const v = list[el * nd + b];
            local[2 * b] = v < 0 ? 0 : x[base + 2 * v];
            local[2 * b + 1] = v < 0 ? 0 : x[base + 2 * v + 1];
          }
          for (let a = 0; a < nd; a++) {
            const u = list[el * nd + a];
            if (u < 0) continue;
            let re = 0;
            let im = 0;
            // Row a of a symmetric matrix is its column a.
            for (let j = 0, t = at + 2 * a * nd; j < 2 * nd; j += 2, t += 2) {
              re += values[t] * local[j] - values[t + 1] * local[j + 1];
              im += values[t] * local[j + 1] + values[t + 1] * local[j];
            }
            out[base + 2 * u] += re;
            out[base + 2 * u + 1] += im;
          }
        }
      }
      return out;
    },
  };

  /** ds/dx: 1 inside, turning by up to 45° within a tenth of the side at the rim. */
  function stretch(x: number): Pair {
    const depth = Math.max(0, 0.1 - x, x - 0.9) / 0.1;
    return [1, 3 * depth * depth];
  }
}

/** ∫ ∂ₐφᵢ ∂ₐφⱼ, ∫ (∂ₐφᵢ ∂ᵦφⱼ + ∂ᵦφᵢ ∂ₐφⱼ), ∫ ∂ᵦφᵢ ∂ᵦφⱼ, ∫ φᵢφⱼ on the unit triangle, exactly, through monomials. */
function referenceMatrices(order: number): Record<'aa' | 'ab' | 'bb' | 'mass', Float64Array> {
  const powers: [number, number][] = [];
  for (let b = 0; b <= order; b++) for (let a = 0; a + b <= order; a++) powers.push([a, b]);
  const n = powers.length;
  // Vandermonde at the nodes; coefficients of φ are the columns of its inverse.
  const v = powers.map(([na, nb]) => powers.map(([a, b]) => (na / order) ** a * (nb / order) ** b));
  const inverse = invert(v);
  const integral = (a: number, b: number): number =>
    a < 0 || b < 0 ? 0 : (factorial(a) * factorial(b)) / factorial(a + b + 2);
  const out = {
    aa: new Float64Array(n * n),
    ab: new Float64Array(n * n),
    bb: new Float64Array(n * n),
    mass: new Float64Array(n * n),
  };
  const gram = (f: (p: [number, number], q: [number, number]) => number, into: Float64Array): void => {
    const g = powers.map((p) => powers.map((q) => f(p, q)));
    for (let i = 0; i < n; i++) {
      const row = g.map((_, q) => g.reduce((s, gp, p) => s + inverse[p][i] * gp[q], 0));
      for (let j = 0; j < n; j++) into[i + j * n] = row.reduce((s, r, q) => s + r * inverse[q][j], 0);
    }
  };
  gram(([a, b], [c, d]) => a * c * integral(a + c - 2, b + d), out.aa);
  gram(([a, b], [c, d]) => (a * d + b * c) * integral(a + c - 1, b + d - 1), out.ab);
  gram(([a, b], [c, d]) => b * d * integral(a + c, b + d - 2), out.bb);
  gram(([a, b], [c, d]) => integral(a + c, b + d), out.mass);
  for (const m of Object.values(out))
    for (let i = 0; i < n; i++) for (let j = 0; j < i; j++) m[i + j * n] = m[j + i * n];
  return out;
}

function invert(matrix: number[][]): number[][] {
  const n = matrix.length;
  const a = matrix.map((row, i) => [...row, ...row.map((_, j) => (i === j ? 1 : 0))]);
  for (let k = 0; k < n; k++) {
    let pivot = k;
    for (let i = k; i < n; i++) if (Math.abs(a[i][k]) > Math.abs(a[pivot][k])) pivot = i;
    [a[k], a[pivot]] = [a[pivot], a[k]];
    const inv = 1 / a[k][k];
    a[k] = a[k].map((x) => x * inv);
    for (let i = 0; i < n; i++) {
      if (i === k || a[i][k] === 0) continue;
      const f = a[i][k];
      a[i] = a[i].map((x, j) => x - f * a[k][j]);
    }
  }
  return a.map((row) => row.slice(n));
}

const factorial = (n: number): number => (n <= 1 ? 1 : n * factorial(n - 1));
const times = (a: Pair, b: Pair): Pair => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
function divide(a: Pair, b: Pair): Pair {
  const d = b[0] * b[0] + b[1] * b[1];
  return [(a[0] * b[0] + a[1] * b[1]) / d, (a[1] * b[0] - a[0] * b[1]) / d];
}

function mulberry(seed: number): () => number {
  let state = seed | 0;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return ((t ^ (t >>> 14)) >>> 0) / 2 ** 32;
  };
}
