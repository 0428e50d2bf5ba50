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

/** Random elements of 1 … 6 unknowns (some fixed) that together hold all unknowns, with random symmetric entries. */
export function randomMatrix(
  unknowns: number,
  seed: number,
  elements?: number,
): { pattern: ElementPattern; fill: ElementFill } {
  const random = randomNumbers(100 * (unknowns + 10), seed);
  let used = 0;
  const draw = (below: number): number => Math.floor(((random[used++ % random.length] + 1) / 2) * below);
  if (elements !== undefined) {
    return {
      pattern: { unknowns, starts: Int32Array.of(0), list: new Int32Array(0), centroids: new Float64Array(0) },
      fill: fillOf(() => unknowns),
    };
  }
  const list: number[] = [];
  const starts = [0];
  const close = (): void => {
    starts.push(list.length);
  };
  for (let u = 0; u < unknowns; u++) {
    list.push(u);
    const more = draw(6);
    for (let i = 0; i < more; i++) list.push(draw(5) === 0 ? -1 : Math.min(unknowns - 1, Math.max(0, u + draw(9) - 4)));
    close();
  }
  const count = starts.length - 1;
  const pattern = {
    unknowns,
    starts: Int32Array.from(starts),
    list: Int32Array.from(list),
    centroids: randomNumbers(2 * count, seed + 5),
  };
  return { pattern, fill: fillOf((e) => pattern.starts[e + 1] - pattern.starts[e]) };

  function fillOf(sizeOf: (e: number) => number): ElementFill {
    return (e, into) => {
      const nd = sizeOf(e);
      const values = randomNumbers(2 * nd * nd, seed + 17 * e);
      for (let j = 0; j < nd; j++) {
        for (let i = 0; i <= j; i++) {
          for (let part = 0; part < 2; part++) {
            into[2 * (i + j * nd) + part] = into[2 * (j + i * nd) + part] = values[2 * (i + j * nd) + part];
          }
        }
      }
    };
  }
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
