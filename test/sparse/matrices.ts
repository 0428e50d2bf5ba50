// Small matrices to test the direct solver with, and their dense forms.

import type { ElementFill, ElementPattern } from '../../src/sparse/pattern.ts';

/** Seeded uniform numbers in [-1, 1) (mulberry32). */
export function randomNumbers(count: number, seed: number): Float64Array {
  let state = seed | 0;
  return Float64Array.from({ length: count }, () => {
    state = (state + 0x6d2b79f5) | 0;
    let t = Math.imul(state ^ (state >>> 15), 1 | state);
    t = (t + Math.imul(t ^ (t >>> 7), 61 | t)) ^ t;
    return ((t ^ (t >>> 14)) >>> 0) / 2 ** 31 - 1;
  });
}

/** Shapes of the random matrices below. */
export interface RandomChoice {
  /** Share of the elements whose diagonal is zero. */
  readonly zeroDiagonals?: number;
  /** Unknowns of one extra element that couples many. */
  readonly hub?: number;
  /** Entries of element e are multiplied by this. */
  readonly scaleOf?: (element: number) => number;
  /** Neighbours reach this far; 0 decouples all unknowns. */
  readonly reach?: number;
}

/** Random elements of 1 … 6 unknowns (some fixed, some doubled) that together hold all unknowns. */
export function randomMatrix(
  unknowns: number,
  seed: number,
  { zeroDiagonals = 0, hub = 0, scaleOf = () => 1, reach = 4 }: RandomChoice = {},
): { pattern: ElementPattern; fill: ElementFill } {
  const random = randomNumbers(20 * (unknowns + 10), seed);
  let used = 0;
  const draw = (below: number): number => Math.floor(((random[used++ % random.length] + 1) / 2) * below);
  const list: number[] = [];
  const starts = [0];
  const bare: boolean[] = [];
  for (let u = 0; u < unknowns; u++) {
    list.push(u);
    const more = reach === 0 ? 0 : draw(6);
    for (let i = 0; i < more; i++) {
      const v = u + draw(2 * reach + 1) - reach;
      list.push(draw(5) === 0 ? -1 : Math.min(unknowns - 1, Math.max(0, v)));
    }
    starts.push(list.length);
    bare.push(draw(1000) < 1000 * zeroDiagonals);
  }
  if (hub > 0) {
    for (let i = 0; i < hub; i++) list.push(Math.floor((i * unknowns) / hub));
    starts.push(list.length);
    bare.push(false);
  }
  const count = starts.length - 1;
  const pattern = {
    unknowns,
    starts: Int32Array.from(starts),
    list: Int32Array.from(list),
    centroids: Float64Array.from({ length: 2 * count }, (_, i) => (i % 2 === 0 ? i : Math.sin(i))),
  };
  return {
    pattern,
    fill(e, into) {
      const nd = pattern.starts[e + 1] - pattern.starts[e];
      const values = randomNumbers(2 * nd * nd, seed + 17 * e);
      for (let j = 0; j < nd; j++) {
        for (let i = 0; i <= j; i++) {
          for (let part = 0; part < 2; part++) {
            const value = i === j && bare[e] ? 0 : scaleOf(e) * values[2 * (i + j * nd) + part];
            into[2 * (i + j * nd) + part] = into[2 * (j + i * nd) + part] = value;
          }
        }
      }
    },
  };
}

/** log det of a dense matrix by elimination with full pivoting. */
export function denseLogDeterminant(matrix: Float64Array, n: number): { re: number; im: number } {
  const a = matrix.slice();
  let re = 0;
  let im = 0;
  const rows = Array.from({ length: n }, (_, i) => i);
  const columns = Array.from({ length: n }, (_, i) => i);
  for (let k = 0; k < n; k++) {
    let best = -1;
    let at: [number, number] = [k, k];
    for (let i = k; i < n; i++) {
      for (let j = k; j < n; j++) {
        const t = 2 * (rows[i] + columns[j] * n);
        const size = Math.hypot(a[t], a[t + 1]);
        if (size > best) {
          best = size;
          at = [i, j];
        }
      }
    }
    if (at[0] !== k) im += Math.PI;
    if (at[1] !== k) im += Math.PI;
    [rows[k], rows[at[0]]] = [rows[at[0]], rows[k]];
    [columns[k], columns[at[1]]] = [columns[at[1]], columns[k]];
    const d = 2 * (rows[k] + columns[k] * n);
    const [pr, pi] = [a[d], a[d + 1]];
    re += Math.log(best);
    im += Math.atan2(pi, pr);
    for (let i = k + 1; i < n; i++) {
      const t = 2 * (rows[i] + columns[k] * n);
      const fr = (a[t] * pr + a[t + 1] * pi) / best ** 2;
      const fi = (a[t + 1] * pr - a[t] * pi) / best ** 2;
      for (let j = k + 1; j < n; j++) {
        const s = 2 * (rows[k] + columns[j] * n);
        const u = 2 * (rows[i] + columns[j] * n);
        a[u] -= fr * a[s] - fi * a[s + 1];
        a[u + 1] -= fr * a[s + 1] + fi * a[s];
      }
    }
  }
  return { re, im: Math.atan2(Math.sin(im), Math.cos(im)) };
}

/** The assembled matrix, dense. */
export function denseMatrix({ unknowns: n, starts, list }: ElementPattern, fill: ElementFill): Float64Array {
  const a = new Float64Array(2 * n * n);
  for (let e = 0; e + 1 < starts.length; e++) {
    const nd = starts[e + 1] - starts[e];
    const element = new Float64Array(2 * nd * nd);
    fill(e, element);
    for (let j = 0; j < nd; j++) {
      for (let i = 0; i < nd; i++) {
        const u = list[starts[e] + i];
        const v = list[starts[e] + j];
        if (u < 0 || v < 0) continue;
        a[2 * (u + v * n)] += element[2 * (i + j * nd)];
        a[2 * (u + v * n) + 1] += element[2 * (i + j * nd) + 1];
      }
    }
  }
  return a;
}

/** max |A x − b| / (max|A| max|x| + max|b|), worst column. */
export function largestResidual(a: Float64Array, n: number, x: Float64Array, b: Float64Array, columns: number): number {
  let worst = 0;
  const top = (v: Float64Array): number => v.reduce((t, c) => Math.max(t, Math.abs(c)), 0);
  for (let c = 0; c < columns; c++) {
    const xc = x.subarray(2 * n * c, 2 * n * (c + 1));
    const bc = b.subarray(2 * n * c, 2 * n * (c + 1));
    let r = 0;
    for (let i = 0; i < n; i++) {
      let re = -bc[2 * i];
      let im = -bc[2 * i + 1];
      for (let j = 0; j < n; j++) {
        const at = 2 * (i + j * n);
        re += a[at] * xc[2 * j] - a[at + 1] * xc[2 * j + 1];
        im += a[at] * xc[2 * j + 1] + a[at + 1] * xc[2 * j];
      }
      r = Math.max(r, Math.hypot(re, im));
    }
    const residual = r / (top(a) * top(xc) + top(bc));
    worst = Math.max(worst, Number.isNaN(residual) ? Infinity : residual);
  }
  return worst;
}
