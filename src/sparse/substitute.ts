// How are right-hand sides solved with the factors, in plain TypeScript?

import type { ComplexArray } from '../numerics/complex.ts';
import type { Factors } from './factorize.ts';

/** The twin of substituteCompiled: one column after the other, straight on the stored panels. */
export function substitutePlain(factors: Factors, out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray {
  const { fronts, panels, panelStarts, inversePivots: d, pivotOrder } = factors;
  const { count, pivotStarts, boundaryStarts, boundary, unknownAt } = fronts;
  const n = unknownAt.length;
  // x[place], planes
  const xr = new Float64Array(n);
  const xi = new Float64Array(n);
  let largest = 0;
  for (let f = 0; f < count; f++) {
    largest = Math.max(largest, pivotStarts[f + 1] - pivotStarts[f] + boundaryStarts[f + 1] - boundaryStarts[f]);
  }
  const fr = new Float64Array(largest);
  const fi = new Float64Array(largest);
  for (let column = 0; column < columns; column++) {
    const base = 2 * n * column;
    for (let place = 0; place < n; place++) {
      xr[place] = rhs[base + 2 * unknownAt[place]];
      xi[place] = rhs[base + 2 * unknownAt[place] + 1];
    }
    for (let f = 0; f < count; f++) forward(f);
    for (let f = count - 1; f >= 0; f--) backward(f);
    for (let place = 0; place < n; place++) {
      out[base + 2 * unknownAt[place]] = xr[place];
      out[base + 2 * unknownAt[place] + 1] = xi[place];
    }
  }
  return out;

  function forward(f: number): void {
    const first = pivotStarts[f];
    const np = pivotStarts[f + 1] - first;
    const from = boundaryStarts[f];
    const nf = np + boundaryStarts[f + 1] - from;
    const pi = nf * np;
    for (let j = 0; j < np; j++) {
      fr[j] = xr[first + pivotOrder[first + j]];
      fi[j] = xi[first + pivotOrder[first + j]];
    }
    fr.fill(0, np, nf);
    fi.fill(0, np, nf);
    let at = panelStarts[f];
    for (let j = 0; j < np; j++, at += nf) {
      const br = fr[j];
      const bi = fi[j];
      if (br === 0 && bi === 0) continue;
      for (let i = j + 1; i < nf; i++) {
        const lr = panels[at + i];
        const li = panels[at + i + pi];
        fr[i] -= lr * br - li * bi;
        fi[i] -= lr * bi + li * br;
      }
    }
    for (let i = np; i < nf; i++) {
      xr[boundary[from + i - np]] += fr[i];
      xi[boundary[from + i - np]] += fi[i];
    }
    // Pivot values stay in pivot order from here on, already divided by D.
    for (let j = 0; j < np; j++) {
      const q = 4 * (first + j);
      if (d[q + 2] !== 0 || d[q + 3] !== 0) {
        const ar = fr[j];
        const ai = fi[j];
        const br = fr[j + 1];
        const bi = fi[j + 1];
        xr[first + j] = ar * d[q] - ai * d[q + 1] + br * d[q + 2] - bi * d[q + 3];
        xi[first + j] = ar * d[q + 1] + ai * d[q] + br * d[q + 3] + bi * d[q + 2];
        xr[first + j + 1] = ar * d[q + 2] - ai * d[q + 3] + br * d[q + 4] - bi * d[q + 5];
        xi[first + j + 1] = ar * d[q + 3] + ai * d[q + 2] + br * d[q + 5] + bi * d[q + 4];
        j++;
      } else {
        xr[first + j] = fr[j] * d[q] - fi[j] * d[q + 1];
        xi[first + j] = fr[j] * d[q + 1] + fi[j] * d[q];
      }
    }
  }

  function backward(f: number): void {
    const first = pivotStarts[f];
    const np = pivotStarts[f + 1] - first;
    const from = boundaryStarts[f];
    const nf = np + boundaryStarts[f + 1] - from;
    const pi = nf * np;
    for (let j = 0; j < np; j++) {
      fr[j] = xr[first + j];
      fi[j] = xi[first + j];
    }
    for (let i = np; i < nf; i++) {
      fr[i] = xr[boundary[from + i - np]];
      fi[i] = xi[boundary[from + i - np]];
    }
    for (let j = np - 1; j >= 0; j--) {
      const at = panelStarts[f] + j * nf;
      let sr = fr[j];
      let si = fi[j];
      for (let i = j + 1; i < nf; i++) {
        const lr = panels[at + i];
        const li = panels[at + i + pi];
        sr -= lr * fr[i] - li * fi[i];
        si -= lr * fi[i] + li * fr[i];
      }
      fr[j] = sr;
      fi[j] = si;
    }
    for (let j = 0; j < np; j++) {
      xr[first + pivotOrder[first + j]] = fr[j];
      xi[first + pivotOrder[first + j]] = fi[j];
    }
  }
}
