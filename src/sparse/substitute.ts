// How are right-hand sides solved with the factors, in plain TypeScript?

import type { ComplexArray } from '../numerics/complex.ts';
import type { Factors } from './factors.ts';

/** The twin of substituteCompiled: one column after the other, straight on the stored panels. */
export function substitutePlain(factors: Factors, out: ComplexArray, rhs: ComplexArray, columns: number): ComplexArray {
  const { count, placeOf, pivotStarts, order, edgeStarts, edges, panels, panelStarts, inversePivots: d } = factors;
  const n = placeOf.length;
  // x[place], planes
  const xr = new Float64Array(n);
  const xi = new Float64Array(n);
  const fr = new Float64Array(factors.largestFront);
  const fi = new Float64Array(factors.largestFront);
  for (let column = 0; column < columns; column++) {
    const base = 2 * n * column;
    for (let u = 0; u < n; u++) {
      xr[placeOf[u]] = rhs[base + 2 * u];
      xi[placeOf[u]] = rhs[base + 2 * u + 1];
    }
    for (let f = 0; f < count; f++) forward(f);
    for (let f = count - 1; f >= 0; f--) backward(f);
    for (let u = 0; u < n; u++) {
      out[base + 2 * u] = xr[placeOf[u]];
      out[base + 2 * u + 1] = xi[placeOf[u]];
    }
  }
  return out;

  function forward(f: number): void {
    const first = pivotStarts[f];
    const np = pivotStarts[f + 1] - first;
    const from = edgeStarts[f];
    const nf = np + edgeStarts[f + 1] - from;
    const pi = nf * np;
    for (let j = 0; j < np; j++) {
      fr[j] = xr[order[first + j]];
      fi[j] = xi[order[first + j]];
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
      xr[edges[from + i - np]] += fr[i];
      xi[edges[from + i - np]] += fi[i];
    }
    for (let j = 0; j < np; j++) {
      const q = 4 * (first + j);
      if (d[q + 2] !== 0 || d[q + 3] !== 0) {
        const ar = fr[j];
        const ai = fi[j];
        const br = fr[j + 1];
        const bi = fi[j + 1];
        xr[order[first + j]] = ar * d[q] - ai * d[q + 1] + br * d[q + 2] - bi * d[q + 3];
        xi[order[first + j]] = ar * d[q + 1] + ai * d[q] + br * d[q + 3] + bi * d[q + 2];
        xr[order[first + j + 1]] = ar * d[q + 2] - ai * d[q + 3] + br * d[q + 4] - bi * d[q + 5];
        xi[order[first + j + 1]] = ar * d[q + 3] + ai * d[q + 2] + br * d[q + 5] + bi * d[q + 4];
        j++;
      } else {
        xr[order[first + j]] = fr[j] * d[q] - fi[j] * d[q + 1];
        xi[order[first + j]] = fr[j] * d[q + 1] + fi[j] * d[q];
      }
    }
  }

  function backward(f: number): void {
    const first = pivotStarts[f];
    const np = pivotStarts[f + 1] - first;
    const from = edgeStarts[f];
    const nf = np + edgeStarts[f + 1] - from;
    const pi = nf * np;
    for (let j = 0; j < np; j++) {
      fr[j] = xr[order[first + j]];
      fi[j] = xi[order[first + j]];
    }
    for (let i = np; i < nf; i++) {
      fr[i] = xr[edges[from + i - np]];
      fi[i] = xi[edges[from + i - np]];
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
      xr[order[first + j]] = fr[j];
      xi[order[first + j]] = fi[j];
    }
  }
}
