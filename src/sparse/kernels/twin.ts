// The dense work on one front, in plain TypeScript.

import { DELAY, MOST_DELAYED, type FrontKernels } from './kernels.ts';

/** Columns eliminated together; pivots are chosen inside such a panel. */
const PANEL = 48;
/** Bunch and Kaufman's bound on element growth, (1 + √17)/8. */
const GROWTH = (1 + Math.sqrt(17)) / 8;

/** Kernels over a growing plain memory. */
export function makeTwinKernels(): FrontKernels {
  let buffer = new ArrayBuffer(1 << 20);
  let m = new Float64Array(buffer);
  let ints = new Int32Array(buffer);

  return {
    kind: 'typescript',
    base: 0,
    get numbers() {
      return m;
    },
    get integers() {
      return ints;
    },
    reserve(numbers: number): void {
      if (m.length >= numbers) return;
      const grown = new ArrayBuffer(8 * Math.ceil(numbers * 1.2));
      buffer = grown;
      m = new Float64Array(buffer);
      ints = new Int32Array(buffer);
    },
    clear(p: number, _s: number, nf: number, np: number): void {
      m.fill(0, p, p + 2 * nf * np + 2 * (nf - np) * (nf - np));
    },
    addElement,
    addContribution,
    factorFront,
    packContribution,
  };

  function addElement(p: number, s: number, nf: number, np: number, element: number, nd: number, map: number): void {
    const nb = nf - np;
    const pi = nf * np;
    const si = nb * nb;
    for (let j = 0; j < nd; j++) {
      const cj = ints[map + j];
      if (cj < 0) continue;
      let from = element + 2 * j * nd;
      for (let i = 0; i < nd; i++, from += 2) {
        const ci = ints[map + i];
        // Each pair once, from its lower triangle in the front; a doubled unknown takes both of its entries.
        if (ci < cj) continue;
        if (cj < np) {
          const to = p + cj * nf + ci;
          m[to] += m[from];
          m[to + pi] += m[from + 1];
        } else {
          const to = s + (cj - np) * nb + ci - np;
          m[to] += m[from];
          m[to + si] += m[from + 1];
        }
      }
    }
  }

  function addContribution(p: number, s: number, nf: number, np: number, from: number, n: number, map: number): void {
    const nb = nf - np;
    const pi = nf * np;
    const si = nb * nb;
    const half = (n * (n + 1)) / 2;
    let at = from;
    for (let j = 0; j < n; j++) {
      const cj = ints[map + j];
      if (cj < np) {
        const to = p + cj * nf;
        for (let i = j; i < n; i++, at++) {
          const t = to + ints[map + i];
          m[t] += m[at];
          m[t + pi] += m[at + half];
        }
      } else {
        const to = s + (cj - np) * nb - np;
        for (let i = j; i < n; i++, at++) {
          const t = to + ints[map + i];
          m[t] += m[at];
          m[t + si] += m[at + half];
        }
      }
    }
  }

  function packContribution(p: number, s: number, nf: number, np: number, e: number, to: number, work: number): void {
    const nb = nf - np;
    // Imaginary parts of unfinished columns could be overwritten by real parts: put aside.
    let aside = work;
    for (let j = e; j < np; j++) {
      const from = p + nf * np + j * nf;
      m.copyWithin(aside, from + j, from + nf);
      aside += nf - j;
    }
    for (let j = e; j < np; j++) {
      m.copyWithin(to, p + j * nf + j, p + (j + 1) * nf);
      to += nf - j;
    }
    for (let plane = 0; plane < 2; plane++) {
      if (plane === 1) {
        m.copyWithin(to, work, aside);
        to += aside - work;
      }
      for (let j = 0; j < nb; j++) {
        const from = s + plane * nb * nb + j * nb;
        m.copyWithin(to, from + j, from + nb);
        to += nb - j;
      }
    }
  }

  function factorFront(
    p: number,
    s: number,
    nf: number,
    np: number,
    d: number,
    perm: number,
    work: number,
    tiny: number,
    force: boolean,
  ): number {
    const nb = nf - np;
    const pi = nf * np;
    for (let j = 0; j < np; j++) ints[perm + j] = j;
    measureColumns(p, nf, np, d);
    m[d + 4 * np] = 0;
    let done = 0;
    let limit = np; // rows limit..np were tried in vain
    let forcing = false;
    let progress = false;
    for (;;) {
      if (done === limit) {
        if (limit === np) break;
        if (!progress) {
          if (!force && np - done <= MOST_DELAYED) break;
          forcing = true;
        }
        limit = np;
        progress = false;
      }
      const first = done;
      const last = Math.min(limit, first + PANEL);
      done = factorDiagonal(p, nf, np, first, last, d, perm, tiny, forcing);
      if (done > first) progress = true;
      const rows = nf - last;
      if (rows > 0 && done > first) {
        solveBelow(p, nf, np, first, done, last);
        // Keep W = L D in work, columns of nf − last rows; scale the panel to L.
        const plane = rows * (done - first);
        for (let j = first; j < done; j++) {
          const from = p + j * nf + last;
          const to = work + (j - first) * rows;
          m.copyWithin(to, from, from + rows);
          m.copyWithin(to + plane, from + pi, from + pi + rows);
        }
        scaleBelow(p, nf, np, first, done, last, d, work, plane);
        // What is left of the fully summed columns, then the boundary block.
        const n = done - first;
        for (let j = last; j < np; j += 2) {
          const width = Math.min(2, np - j);
          update(p + j * nf + j, nf, pi, nf - j, width, p + first * nf + j, nf, pi, work + j - last, rows, plane, n);
        }
        for (let j = np; j < nf; j += 2) {
          const c = s + (j - np) * nb + j - np;
          const width = Math.min(2, nf - j);
          update(c, nb, nb * nb, nf - j, width, p + first * nf + j, nf, pi, work + j - last, rows, plane, n);
        }
      }
      for (let j = last - 1; j >= done; j--) {
        limit--;
        if (limit > j) exchange(p, nf, np, j, limit, d, perm);
      }
    }
    return done;
  }

  /** Largest part of an entry in each pivot's row and column, to d[4j]. */
  function measureColumns(p: number, nf: number, np: number, d: number): void {
    const pi = nf * np;
    for (let j = 0; j < np; j++) m[d + 4 * j] = 0;
    for (let j = 0; j < np; j++) {
      let largest = m[d + 4 * j];
      for (let i = j; i < nf; i++) {
        const v = Math.max(Math.abs(m[p + j * nf + i]), Math.abs(m[p + j * nf + i + pi]));
        if (v > largest) largest = v;
        if (i < np && v > m[d + 4 * i]) m[d + 4 * i] = v;
      }
      m[d + 4 * j] = largest;
    }
  }

  /**
   * P L D Lᵀ Pᵀ of the diagonal block first..last of the panel (J. Bunch, L. Kaufman, Math. Comp. 31 (1977) 163).
   * Interchanges are applied to whole rows and columns of the front. Inverse diagonal blocks go to d, four numbers a
   * pivot: [[a, b], [b, c]] as (a, b) at the first and (c, 0) at the second; b = 0 marks single pivots.
   * Unless forced, pivots too small for their columns (largest entries at d[4j]) go to the end of the block.
   * Returns the first column that was not eliminated.
   */
  function factorDiagonal(
    p: number,
    nf: number,
    np: number,
    first: number,
    last: number,
    d: number,
    perm: number,
    tiny: number,
    forcing: boolean,
  ): number {
    const pi = nf * np;
    const size = (i: number, j: number): number => {
      const at = p + j * nf + i;
      return Math.abs(m[at]) + Math.abs(m[at + pi]);
    };
    let k = first;
    let active = last; // rows active..last were refused
    while (k < active) {
      const diagonal = size(k, k);
      let largest = 0;
      let row = k;
      for (let i = k + 1; i < last; i++) {
        const v = size(i, k);
        if (v > largest) {
          largest = v;
          row = i;
        }
      }
      let double = false;
      if (diagonal < GROWTH * largest) {
        let across = 0;
        for (let j = k; j < row; j++) across = Math.max(across, size(row, j));
        for (let i = row + 1; i < last; i++) across = Math.max(across, size(i, row));
        if (diagonal * across >= GROWTH * largest * largest) row = k;
        else if (size(row, row) < GROWTH * across) double = true;
      } else row = k;
      const target = double ? k + 1 : k;
      if (row !== target) exchange(p, nf, np, target, row, d, perm);
      if (!forcing && !accepts(p + k * nf + k, pi, nf, double, d + 4 * k)) {
        active--;
        if (active > k) exchange(p, nf, np, k, active, d, perm);
        continue;
      }
      if (double) {
        eliminateDouble(p, nf, np, k, last, d);
        k += 2;
      } else {
        const at = p + k * nf + k;
        let re = m[at];
        let im = m[at + pi];
        const modulus = Math.hypot(re, im);
        if (modulus <= tiny) {
          // Keep the direction of the pivot where it has one.
          m[d + 4 * np]++;
          re = modulus > 0 ? (re / modulus) * tiny : tiny;
          im = modulus > 0 ? (im / modulus) * tiny : 0;
        }
        eliminateSingle(p, nf, np, k, last, d, re, im);
        k++;
      }
    }
    return k;
  }

  /** Whether the single or double pivot at `at` is large enough for its columns. */
  function accepts(at: number, pi: number, nf: number, double: boolean, scale: number): boolean {
    const ar = m[at];
    const ai = m[at + pi];
    if (!double) return Math.hypot(ar, ai) > DELAY * m[scale];
    const br = m[at + 1];
    const bi = m[at + 1 + pi];
    const cr = m[at + nf + 1];
    const ci = m[at + nf + 1 + pi];
    // |det| over the largest entry is about the smaller singular value.
    const detRe = ar * cr - ai * ci - (br * br - bi * bi);
    const detIm = ar * ci + ai * cr - 2 * br * bi;
    const largest = Math.max(Math.hypot(ar, ai), Math.hypot(br, bi), Math.hypot(cr, ci));
    return Math.hypot(detRe, detIm) / largest > DELAY * Math.min(m[scale], m[scale + 4]);
  }

  function exchange(p: number, nf: number, np: number, a: number, b: number, d: number, perm: number): void {
    const pi = nf * np;
    const scale = m[d + 4 * a];
    m[d + 4 * a] = m[d + 4 * b];
    m[d + 4 * b] = scale;
    const held = ints[perm + a];
    ints[perm + a] = ints[perm + b];
    ints[perm + b] = held;
    const swap = (x: number, y: number): void => {
      const re = m[x];
      const im = m[x + pi];
      m[x] = m[y];
      m[x + pi] = m[y + pi];
      m[y] = re;
      m[y + pi] = im;
    };
    for (let j = 0; j < a; j++) swap(p + j * nf + a, p + j * nf + b);
    swap(p + a * nf + a, p + b * nf + b);
    for (let i = a + 1; i < b; i++) swap(p + a * nf + i, p + i * nf + b);
    for (let i = b + 1; i < nf; i++) swap(p + a * nf + i, p + b * nf + i);
  }

  function eliminateSingle(
    p: number,
    nf: number,
    np: number,
    k: number,
    last: number,
    d: number,
    re: number,
    im: number,
  ): void {
    const pi = nf * np;
    const at = d + 4 * k;
    const [ir, ii] = reciprocal(re, im);
    m[at] = ir;
    m[at + 1] = ii;
    m[at + 2] = m[at + 3] = 0;
    const c = p + k * nf;
    for (let j = k + 1; j < last; j++) {
      const wr = m[c + j];
      const wi = m[c + j + pi];
      const lr = wr * ir - wi * ii;
      const li = wr * ii + wi * ir;
      const to = p + j * nf;
      for (let i = j; i < last; i++) {
        const ar = m[c + i];
        const ai = m[c + i + pi];
        m[to + i] -= ar * lr - ai * li;
        m[to + i + pi] -= ar * li + ai * lr;
      }
      m[c + j] = lr;
      m[c + j + pi] = li;
    }
  }

  function eliminateDouble(p: number, nf: number, np: number, k: number, last: number, d: number): void {
    const pi = nf * np;
    const c = p + k * nf;
    const e = c + nf;
    // Inverse of [[a, b], [b, c]] with b the largest: scaled by b, det/b² = (a/b)(c/b) − 1.
    const [br, bi] = reciprocal(m[c + k + 1], m[c + k + 1 + pi]);
    const ar = m[c + k] * br - m[c + k + pi] * bi;
    const ai = m[c + k] * bi + m[c + k + pi] * br;
    const gr = m[e + k + 1] * br - m[e + k + 1 + pi] * bi;
    const gi = m[e + k + 1] * bi + m[e + k + 1 + pi] * br;
    const [tr, ti] = reciprocal(ar * gr - ai * gi - 1, ar * gi + ai * gr);
    const fr = tr * br - ti * bi;
    const fi = tr * bi + ti * br;
    const pr = gr * fr - gi * fi;
    const pim = gr * fi + gi * fr;
    const qr = -fr;
    const qi = -fi;
    const rr = ar * fr - ai * fi;
    const ri = ar * fi + ai * fr;
    const at = d + 4 * k;
    m[at] = pr;
    m[at + 1] = pim;
    m[at + 2] = qr;
    m[at + 3] = qi;
    m[at + 4] = rr;
    m[at + 5] = ri;
    m[at + 6] = m[at + 7] = 0;
    m[c + k + 1] = m[c + k + 1 + pi] = 0;
    for (let j = k + 2; j < last; j++) {
      const xr = m[c + j];
      const xi = m[c + j + pi];
      const yr = m[e + j];
      const yi = m[e + j + pi];
      const ur = xr * pr - xi * pim + yr * qr - yi * qi;
      const ui = xr * pim + xi * pr + yr * qi + yi * qr;
      const vr = xr * qr - xi * qi + yr * rr - yi * ri;
      const vi = xr * qi + xi * qr + yr * ri + yi * rr;
      const to = p + j * nf;
      for (let i = j; i < last; i++) {
        const sr = m[c + i];
        const si = m[c + i + pi];
        const wr = m[e + i];
        const wi = m[e + i + pi];
        m[to + i] -= sr * ur - si * ui + wr * vr - wi * vi;
        m[to + i + pi] -= sr * ui + si * ur + wr * vi + wi * vr;
      }
      m[c + j] = ur;
      m[c + j + pi] = ui;
      m[e + j] = vr;
      m[e + j + pi] = vi;
    }
  }

  /** Rows below the block: A ← W with W (unit L₁₁)ᵀ = A; refused columns done..last only lose what was eliminated. */
  function solveBelow(p: number, nf: number, np: number, first: number, done: number, last: number): void {
    const pi = nf * np;
    for (let j = first + 1; j < last; j++) {
      const to = p + j * nf;
      for (let k = first; k < Math.min(j, done); k++) {
        const lr = m[p + k * nf + j];
        const li = m[p + k * nf + j + pi];
        if (lr === 0 && li === 0) continue;
        const from = p + k * nf;
        for (let i = last; i < nf; i++) {
          const wr = m[from + i];
          const wi = m[from + i + pi];
          m[to + i] -= wr * lr - wi * li;
          m[to + i + pi] -= wr * li + wi * lr;
        }
      }
    }
  }

  /** L = W D⁻¹ in the panel, W from work. */
  function scaleBelow(
    p: number,
    nf: number,
    np: number,
    first: number,
    done: number,
    last: number,
    d: number,
    work: number,
    plane: number,
  ): void {
    const pi = nf * np;
    const rows = nf - last;
    for (let j = first; j < done; j++) {
      const at = d + 4 * j;
      const ar = m[at];
      const ai = m[at + 1];
      const br = m[at + 2];
      const bi = m[at + 3];
      const to = p + j * nf + last;
      const from = work + (j - first) * rows;
      if (br === 0 && bi === 0) {
        for (let i = 0; i < rows; i++) {
          const wr = m[from + i];
          const wi = m[from + i + plane];
          m[to + i] = wr * ar - wi * ai;
          m[to + i + pi] = wr * ai + wi * ar;
        }
      } else {
        const cr = m[at + 4];
        const ci = m[at + 5];
        for (let i = 0; i < rows; i++) {
          const xr = m[from + i];
          const xi = m[from + i + plane];
          const yr = m[from + rows + i];
          const yi = m[from + rows + i + plane];
          m[to + i] = xr * ar - xi * ai + yr * br - yi * bi;
          m[to + i + pi] = xr * ai + xi * ar + yr * bi + yi * br;
          m[to + nf + i] = xr * br - xi * bi + yr * cr - yi * ci;
          m[to + nf + i + pi] = xr * bi + xi * br + yr * ci + yi * cr;
        }
        j++;
      }
    }
  }

  /** One or two columns of C (rows from the diagonal down) −= L Wᵀ, inner length n. */
  function update(
    c: number,
    ldc: number,
    planeC: number,
    rows: number,
    columns: number,
    l: number,
    ldl: number,
    planeL: number,
    w: number,
    ldw: number,
    planeW: number,
    n: number,
  ): void {
    const c1 = columns > 1 ? c + ldc : c;
    for (let k = 0; k < n; k++) {
      const at = w + k * ldw;
      const xr = m[at];
      const xi = m[at + planeW];
      const yr = columns > 1 ? m[at + 1] : 0;
      const yi = columns > 1 ? m[at + 1 + planeW] : 0;
      const from = l + k * ldl;
      if (columns === 1) {
        for (let i = 0; i < rows; i++) {
          const ar = m[from + i];
          const ai = m[from + i + planeL];
          m[c + i] -= ar * xr - ai * xi;
          m[c + i + planeC] -= ar * xi + ai * xr;
        }
      } else {
        for (let i = 0; i < rows; i++) {
          const ar = m[from + i];
          const ai = m[from + i + planeL];
          m[c + i] -= ar * xr - ai * xi;
          m[c + i + planeC] -= ar * xi + ai * xr;
          m[c1 + i] -= ar * yr - ai * yi;
          m[c1 + i + planeC] -= ar * yi + ai * yr;
        }
      }
    }
  }
}

function reciprocal(re: number, im: number): [number, number] {
  if (Math.abs(re) >= Math.abs(im)) {
    const t = im / re;
    const d = re + im * t;
    return [1 / d, -t / d];
  }
  const t = re / im;
  const d = im + re * t;
  return [t / d, -1 / d];
}
