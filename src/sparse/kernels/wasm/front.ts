// The dense work on one front, in AssemblyScript with SIMD.

// Pointers are bytes. Layout of fronts, meaning of arguments: ../kernels.ts. The order of operations is that of
// ../twin.ts in exact arithmetic; sums are grouped differently.

import { exchange, factorDiagonal, measureColumns } from './diagonal';
import { share, SHARED_SLABS, sharing } from './share';
import { clearTile, tileAt, updateTile } from './tile';

/** Columns eliminated together. */
const PANEL: i32 = 48;
/** As in ../kernels.ts. */
const MOST_DELAYED: i32 = 128;
/** Row slabs (of 4 rows) of L that stay in the second-level cache while all columns pass. */
const SLAB_BLOCK: i32 = 32;

/** Zeros in P and in the lower triangle of S (a few numbers above it too). */
export function clear(p: usize, s: usize, nf: i32, np: i32): void {
  const nb = nf - np;
  clearRun(p, nf * np * 2);
  for (let plane = 0; plane < 2; plane++) {
    let column = s + ((<usize>(plane * nb * nb)) << 3);
    for (let j = 0; j < nb; j++) {
      clearRun(column, nb - j);
      column += (<usize>(nb + 1)) << 3;
    }
  }
}

function clearRun(at: usize, count: i32): void {
  const zero = f64x2.splat(0);
  const end = at + ((<usize>count) << 3);
  while (at + 56 < end) {
    v128.store(at, zero);
    v128.store(at, zero, 16);
    v128.store(at, zero, 32);
    v128.store(at, zero, 48);
    at += 64;
  }
  for (; at < end; at += 8) store<f64>(at, 0);
}

export function addElement(p: usize, s: usize, nf: i32, np: i32, element: usize, nd: i32, map: usize): void {
  const nb = nf - np;
  const planeP = (<usize>(nf * np)) << 3;
  const planeS = (<usize>(nb * nb)) << 3;
  for (let j = 0; j < nd; j++) {
    const cj = load<i32>(map + ((<usize>j) << 2));
    if (cj < 0) continue;
    let to: usize;
    let plane: usize;
    if (cj < np) {
      to = p + ((<usize>(cj * nf)) << 3);
      plane = planeP;
    } else {
      to = s + ((<usize>((cj - np) * nb)) << 3) - ((<usize>np) << 3);
      plane = planeS;
    }
    let from = element + ((<usize>(j * nd)) << 4);
    for (let i = 0; i < nd; i++, from += 16) {
      const ci = load<i32>(map + ((<usize>i) << 2));
      if (ci < cj) continue;
      const at = to + ((<usize>ci) << 3);
      store<f64>(at, load<f64>(at) + load<f64>(from));
      store<f64>(at + plane, load<f64>(at + plane) + load<f64>(from, 8));
    }
  }
}

export function addContribution(p: usize, s: usize, nf: i32, np: i32, from: usize, n: i32, map: usize): void {
  const nb = nf - np;
  const planeP = (<usize>(nf * np)) << 3;
  const planeS = (<usize>(nb * nb)) << 3;
  const half = (<usize>((n * (n + 1)) >> 1)) << 3;
  let at = from;
  for (let j = 0; j < n; j++) {
    const cj = load<i32>(map + ((<usize>j) << 2));
    let to: usize;
    let plane: usize;
    if (cj < np) {
      to = p + ((<usize>(cj * nf)) << 3);
      plane = planeP;
    } else {
      to = s + ((<usize>((cj - np) * nb)) << 3) - ((<usize>np) << 3);
      plane = planeS;
    }
    let i = j;
    while (i < n) {
      // A run of consecutive rows, two at a time; the map increases, so its ends decide.
      const first = load<i32>(map + ((<usize>i) << 2));
      let t = to + ((<usize>first) << 3);
      let end = i + 1;
      while (end + 1 < n && load<i32>(map + ((<usize>(end + 1)) << 2)) - first == end + 1 - i) end += 2;
      if (end < n && load<i32>(map + ((<usize>end) << 2)) - first == end - i) end++;
      for (; i + 1 < end; i += 2, at += 16, t += 16) {
        v128.store(t, f64x2.add(v128.load(t), v128.load(at)));
        v128.store(t + plane, f64x2.add(v128.load(t + plane), v128.load(at + half)));
      }
      if (i < end) {
        store<f64>(t, load<f64>(t) + load<f64>(at));
        store<f64>(t + plane, load<f64>(t + plane) + load<f64>(at + half));
        i++;
        at += 8;
      }
    }
  }
}

export function packContribution(p: usize, s: usize, nf: i32, np: i32, e: i32, to: usize, work: usize): void {
  const nb = nf - np;
  // Imaginary parts of unfinished columns could be overwritten by real parts: put aside.
  const planeP = (<usize>(nf * np)) << 3;
  let aside = work;
  for (let j = e; j < np; j++) {
    aside = copyDown(aside, p + planeP + ((<usize>(j * nf + j)) << 3), nf - j);
  }
  for (let j = e; j < np; j++) to = copyDown(to, p + ((<usize>(j * nf + j)) << 3), nf - j);
  for (let plane = 0; plane < 2; plane++) {
    if (plane == 1) to = copyDown(to, work, <i32>((aside - work) >> 3));
    let from = s + ((<usize>(plane * nb * nb)) << 3);
    for (let j = 0; j < nb; j++) {
      to = copyDown(to, from, nb - j);
      from += (<usize>(nb + 1)) << 3;
    }
  }
}

/** Loads run ahead of the stores, which go down: overlap is safe. Returns the end. */
// @ts-ignore: decorator of AssemblyScript
@inline
function copyDown(to: usize, at: usize, count: i32): usize {
  const end = at + ((<usize>count) << 3);
  for (; at + 24 < end; at += 32, to += 32) {
    const x = v128.load(at);
    const y = v128.load(at, 16);
    v128.store(to, x);
    v128.store(to, y, 16);
  }
  for (; at < end; at += 8, to += 8) store<f64>(to, load<f64>(at));
  return to;
}

export function factorFront(
  p: usize,
  s: usize,
  nf: i32,
  np: i32,
  d: usize,
  perm: usize,
  work: usize,
  tiny: f64,
  force: bool,
): i32 {
  for (let j = 0; j < np; j++) store<i32>(perm + ((<usize>j) << 2), j);
  const plane = (<usize>(nf * np)) << 3;
  const ld = (<usize>nf) << 3;
  measureColumns(p, nf, np, d);
  store<f64>(d + ((<usize>np) << 5), 0);
  let done = 0;
  let limit = np; // rows limit..np were tried in vain
  let forcing = false;
  let progress = false;
  for (;;) {
    if (done == limit) {
      if (limit == np) break;
      if (!progress) {
        if (!force && np - done <= MOST_DELAYED) break;
        forcing = true;
      }
      limit = np;
      progress = false;
    }
    const first = done;
    const last = min(limit, first + PANEL);
    const width = last - first;
    done = factorDiagonal(p, nf, np, first, last, d, perm, tiny, forcing);
    if (done > first) progress = true;
    const rows = nf - last;
    if (rows > 0 && done > first) {
      // work: rows of L₁₁ in pairs, then W and L as slabs of 4 rows: per column 4 real, 4 imaginary parts.
      const slabs = (rows + 3) >> 2;
      const stride = (<usize>width) << 6;
      const w = work + ((<usize>((width + 1) * (width + 1))) << 4);
      const l = w + <usize>slabs * stride;
      packTriangle(p + ((<usize>(first * nf + first)) << 3), ld, plane, width, done - first, work);
      if (ASC_FEATURE_THREADS && sharing && slabs >= SHARED_SLABS) {
        share(p, s, nf, np, first, last, done, d, work, w, l, slabs, stride);
      } else {
        belowSlabs(p, nf, np, first, last, done, d, work, w, l, stride, 0, slabs);
        updateTrailing(p, s, nf, np, last, done - first, w, l, slabs, stride);
      }
    }
    for (let j = last - 1; j >= done; j--) {
      limit--;
      if (limit > j) exchange(p, nf, np, j, limit, d, perm);
    }
  }
  return done;
}

/** Slabs of rows below the panel: A ← W, W and L = W D⁻¹ kept as slabs, L back into the panel. */
export function belowSlabs(
  p: usize,
  nf: i32,
  np: i32,
  first: i32,
  last: i32,
  done: i32,
  d: usize,
  triangle: usize,
  w: usize,
  l: usize,
  stride: usize,
  firstSlab: i32,
  endSlab: i32,
): void {
  const plane = (<usize>(nf * np)) << 3;
  const ld = (<usize>nf) << 3;
  const width = last - first;
  for (let slab = firstSlab; slab < endSlab; slab++) {
    const row = last + 4 * slab;
    const height = min(4, nf - row);
    const ws = w + <usize>slab * stride;
    const ls = l + <usize>slab * stride;
    const from = p + ((<usize>(first * nf + row)) << 3);
    packSlab(from, ld, plane, width, height, ws);
    solveSlab(ws, triangle, width);
    scaleSlab(ws, ls, d + ((<usize>first) << 5), done - first, width);
    unpackSlab(from, ld, plane, width, height, ls);
  }
}

/**
 * Rows j, j+1 of L₁₁ side by side: for k < j four numbers (re, im of row j, then of row j+1), then k = j likewise;
 * zeros for the columns from `done` on, which were not eliminated.
 */
function packTriangle(from: usize, ld: usize, plane: usize, width: i32, done: i32, to: usize): void {
  for (let j = 0; j < width; j += 2) {
    const both = j + 1 < width;
    for (let k = 0; k <= j; k++) {
      if (k >= done) {
        v128.store(to, f64x2.splat(0));
        v128.store(to, f64x2.splat(0), 16);
        to += 32;
        continue;
      }
      const at = from + <usize>k * ld + ((<usize>j) << 3);
      store<f64>(to, load<f64>(at));
      store<f64>(to, load<f64>(at + plane), 8);
      if (both) {
        store<f64>(to, load<f64>(at, 8), 16);
        store<f64>(to, load<f64>(at + plane, 8), 24);
      }
      to += 32;
    }
  }
}

function packSlab(from: usize, ld: usize, plane: usize, width: i32, height: i32, to: usize): void {
  if (height == 4) {
    for (let k = 0; k < width; k++, from += ld, to += 64) {
      v128.store(to, v128.load(from));
      v128.store(to, v128.load(from, 16), 16);
      v128.store(to, v128.load(from + plane), 32);
      v128.store(to, v128.load(from + plane, 16), 48);
    }
    return;
  }
  const zero = f64x2.splat(0);
  for (let k = 0; k < width; k++, from += ld, to += 64) {
    v128.store(to, zero);
    v128.store(to, zero, 16);
    v128.store(to, zero, 32);
    v128.store(to, zero, 48);
    for (let i = 0; i < height; i++) {
      const step = (<usize>i) << 3;
      store<f64>(to + step, load<f64>(from + step));
      store<f64>(to + step, load<f64>(from + plane + step), 32);
    }
  }
}

function unpackSlab(to: usize, ld: usize, plane: usize, width: i32, height: i32, from: usize): void {
  if (height == 4) {
    for (let k = 0; k < width; k++, from += 64, to += ld) {
      v128.store(to, v128.load(from));
      v128.store(to, v128.load(from, 16), 16);
      v128.store(to + plane, v128.load(from, 32));
      v128.store(to + plane, v128.load(from, 48), 16);
    }
    return;
  }
  for (let k = 0; k < width; k++, from += 64, to += ld) {
    for (let i = 0; i < height; i++) {
      const step = (<usize>i) << 3;
      store<f64>(to + step, load<f64>(from + step));
      store<f64>(to + plane + step, load<f64>(from + step, 32));
    }
  }
}

/** A ← W with W L₁₁ᵀ = A for 4 rows; two columns at a time. */
function solveSlab(ws: usize, triangle: usize, width: i32): void {
  let t = triangle;
  for (let j = 0; j < width; j += 2) {
    const target = ws + ((<usize>j) << 6);
    const both = j + 1 < width;
    let r0 = v128.load(target);
    let r1 = v128.load(target, 16);
    let i0 = v128.load(target, 32);
    let i1 = v128.load(target, 48);
    let s0 = v128.load(target, 64);
    let s1 = v128.load(target, 80);
    let j0 = v128.load(target, 96);
    let j1 = v128.load(target, 112);
    for (let a = ws; a < target; a += 64, t += 32) {
      const ar = v128.load(a);
      const br = v128.load(a, 16);
      const ai = v128.load(a, 32);
      const bi = v128.load(a, 48);
      let b = v128.load64_splat(t);
      r0 = f64x2.sub(r0, f64x2.mul(ar, b));
      r1 = f64x2.sub(r1, f64x2.mul(br, b));
      i0 = f64x2.sub(i0, f64x2.mul(ai, b));
      i1 = f64x2.sub(i1, f64x2.mul(bi, b));
      b = v128.load64_splat(t, 8);
      r0 = f64x2.add(r0, f64x2.mul(ai, b));
      r1 = f64x2.add(r1, f64x2.mul(bi, b));
      i0 = f64x2.sub(i0, f64x2.mul(ar, b));
      i1 = f64x2.sub(i1, f64x2.mul(br, b));
      b = v128.load64_splat(t, 16);
      s0 = f64x2.sub(s0, f64x2.mul(ar, b));
      s1 = f64x2.sub(s1, f64x2.mul(br, b));
      j0 = f64x2.sub(j0, f64x2.mul(ai, b));
      j1 = f64x2.sub(j1, f64x2.mul(bi, b));
      b = v128.load64_splat(t, 24);
      s0 = f64x2.add(s0, f64x2.mul(ai, b));
      s1 = f64x2.add(s1, f64x2.mul(bi, b));
      j0 = f64x2.sub(j0, f64x2.mul(ar, b));
      j1 = f64x2.sub(j1, f64x2.mul(br, b));
    }
    v128.store(target, r0);
    v128.store(target, r1, 16);
    v128.store(target, i0, 32);
    v128.store(target, i1, 48);
    if (both) {
      const br = v128.load64_splat(t, 16);
      const bi = v128.load64_splat(t, 24);
      s0 = f64x2.add(f64x2.sub(s0, f64x2.mul(r0, br)), f64x2.mul(i0, bi));
      s1 = f64x2.add(f64x2.sub(s1, f64x2.mul(r1, br)), f64x2.mul(i1, bi));
      j0 = f64x2.sub(f64x2.sub(j0, f64x2.mul(i0, br)), f64x2.mul(r0, bi));
      j1 = f64x2.sub(f64x2.sub(j1, f64x2.mul(i1, br)), f64x2.mul(r1, bi));
      v128.store(target, s0, 64);
      v128.store(target, s1, 80);
      v128.store(target, j0, 96);
      v128.store(target, j1, 112);
    }
    t += 32;
  }
}

/** L = W D⁻¹ for 4 rows; columns from `done` on are copied. */
function scaleSlab(from: usize, to: usize, d: usize, done: i32, width: i32): void {
  for (let k = done; k < width; k++) {
    const step = (<usize>k) << 6;
    v128.store(to + step, v128.load(from + step));
    v128.store(to + step, v128.load(from + step, 16), 16);
    v128.store(to + step, v128.load(from + step, 32), 32);
    v128.store(to + step, v128.load(from + step, 48), 48);
  }
  for (let k = 0; k < done; k++, from += 64, to += 64, d += 32) {
    const pr = v128.load64_splat(d);
    const pi = v128.load64_splat(d, 8);
    const double = load<f64>(d, 16) != 0 || load<f64>(d, 24) != 0;
    for (let h: usize = 0; h < 32; h += 16) {
      const xr = v128.load(from + h);
      const xi = v128.load(from + h, 32);
      let ur = f64x2.sub(f64x2.mul(xr, pr), f64x2.mul(xi, pi));
      let ui = f64x2.add(f64x2.mul(xr, pi), f64x2.mul(xi, pr));
      if (double) {
        const qr = v128.load64_splat(d, 16);
        const qi = v128.load64_splat(d, 24);
        const cr = v128.load64_splat(d, 32);
        const ci = v128.load64_splat(d, 40);
        const yr = v128.load(from + h, 64);
        const yi = v128.load(from + h, 96);
        ur = f64x2.sub(f64x2.add(ur, f64x2.mul(yr, qr)), f64x2.mul(yi, qi));
        ui = f64x2.add(f64x2.add(ui, f64x2.mul(yr, qi)), f64x2.mul(yi, qr));
        const vr = f64x2.sub(
          f64x2.add(f64x2.sub(f64x2.mul(xr, qr), f64x2.mul(xi, qi)), f64x2.mul(yr, cr)),
          f64x2.mul(yi, ci),
        );
        const vi = f64x2.add(
          f64x2.add(f64x2.add(f64x2.mul(xr, qi), f64x2.mul(xi, qr)), f64x2.mul(yr, ci)),
          f64x2.mul(yi, cr),
        );
        v128.store(to + h, vr, 64);
        v128.store(to + h, vi, 96);
      }
      v128.store(to + h, ur);
      v128.store(to + h, ui, 32);
    }
    if (double) {
      k++;
      from += 64;
      to += 64;
      d += 32;
    }
  }
}

/** Everything right of and below the panel −= L Wᵀ, lower triangle, in 4 × 4 tiles. */
function updateTrailing(
  p: usize,
  s: usize,
  nf: i32,
  np: i32,
  last: i32,
  width: i32,
  w: usize,
  l: usize,
  slabs: i32,
  stride: usize,
): void {
  for (let block = 0; block < slabs; block += SLAB_BLOCK) {
    const blockEnd = min(slabs, block + SLAB_BLOCK);
    for (let j = 0; j < blockEnd; j++) {
      updateColumns(p, s, nf, np, last, width, w + <usize>j * stride, l, j, max(block, j), blockEnd, stride);
    }
  }
}

export function updateColumns(
  p: usize,
  s: usize,
  nf: i32,
  np: i32,
  last: i32,
  width: i32,
  ws: usize,
  l: usize,
  j: i32,
  firstSlab: i32,
  endSlab: i32,
  stride: usize,
): void {
  const nb = nf - np;
  const column = last + 4 * j;
  const planeP = (<usize>(nf * np)) << 3;
  const planeS = (<usize>(nb * nb)) << 3;
  let base: usize;
  let ld: usize;
  let plane: usize;
  let whole: bool;
  if (column >= np) {
    ld = (<usize>nb) << 3;
    base = s + <usize>(column - np) * ld - ((<usize>np) << 3);
    plane = planeS;
    whole = column + 4 <= nf;
  } else {
    ld = (<usize>nf) << 3;
    base = p + <usize>column * ld;
    plane = planeP;
    whole = column + 4 <= np;
  }
  let ls = l + <usize>firstSlab * stride;
  for (let i = firstSlab; i < endSlab; i++, ls += stride) {
    const row = last + 4 * i;
    if (whole && row + 4 <= nf) {
      updateTile(base + ((<usize>row) << 3), ld, plane, ls, ws, width);
      continue;
    }
    // A tile over an edge goes through a full one.
    clearTile();
    updateTile(tileAt, 32, 128, ls, ws, width);
    for (let b = 0; b < 4; b++) {
      const c = column + b;
      if (c >= nf) break;
      let to: usize;
      let step: usize;
      if (c < np) {
        to = p + ((<usize>(c * nf)) << 3);
        step = planeP;
      } else {
        to = s + ((<usize>((c - np) * nb)) << 3) - ((<usize>np) << 3);
        step = planeS;
      }
      for (let a = 0; a < 4; a++) {
        const r = row + a;
        if (r < c || r >= nf) continue;
        const at = to + ((<usize>r) << 3);
        const from = tileAt + ((<usize>(4 * b + a)) << 3);
        store<f64>(at, load<f64>(at) + load<f64>(from));
        store<f64>(at + step, load<f64>(at + step) + load<f64>(from, 128));
      }
    }
  }
}

export * from './solve';
export * from './solve-one';
