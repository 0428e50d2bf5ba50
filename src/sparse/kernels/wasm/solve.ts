// Substitution with the panels of L for blocks of right-hand sides.

// A quad is four right-hand sides: 64 bytes a row, 4 real parts, then 4 imaginary ones. `x` holds the rows of all
// places, rowBytes apart, in each its quads side by side. `local` holds rows of one front, quad by quad `step` bytes
// apart. Panels: nf × np column-major, real plane then imaginary plane, the rows at and above the diagonal not read.
//
// All arithmetic is done on two rows a, b and a strip of L: per k 32 bytes (re a, re b, im a, im b), packed once for
// all quads.

/** Columns of L that pass together: with them the pivot rows of 16 quads stay in the first-level cache. */
const PIECE: i32 = 32;
/** Entries of the longest strip. */
const STRIP: i32 = 96;

/**
 * Columns (re, im a row), columnStep bytes apart, four a quad, to the rows of x; `places` lists where each row goes.
 */
export function putQuads(
  columns: usize,
  columnStep: usize,
  places: usize,
  count: i32,
  quads: i32,
  x: usize,
  rowBytes: usize,
): void {
  for (let u = 0; u < count; u++, columns += 16) {
    let to = x + <usize>load<i32>(places + ((<usize>u) << 2)) * rowBytes;
    let c = columns;
    for (let q = 0; q < quads; q++, to += 64) {
      const c0 = v128.load(c);
      c += columnStep;
      const c1 = v128.load(c);
      c += columnStep;
      const c2 = v128.load(c);
      c += columnStep;
      const c3 = v128.load(c);
      c += columnStep;
      v128.store(to, v128.shuffle<f64>(c0, c1, 0, 2));
      v128.store(to, v128.shuffle<f64>(c2, c3, 0, 2), 16);
      v128.store(to, v128.shuffle<f64>(c0, c1, 1, 3), 32);
      v128.store(to, v128.shuffle<f64>(c2, c3, 1, 3), 48);
    }
  }
}

/** And back. */
export function takeQuads(
  columns: usize,
  columnStep: usize,
  places: usize,
  count: i32,
  quads: i32,
  x: usize,
  rowBytes: usize,
): void {
  for (let u = 0; u < count; u++, columns += 16) {
    let from = x + <usize>load<i32>(places + ((<usize>u) << 2)) * rowBytes;
    let c = columns;
    for (let q = 0; q < quads; q++, from += 64) {
      const r0 = v128.load(from);
      const r1 = v128.load(from, 16);
      const i0 = v128.load(from, 32);
      const i1 = v128.load(from, 48);
      v128.store(c, v128.shuffle<f64>(r0, i0, 0, 2));
      c += columnStep;
      v128.store(c, v128.shuffle<f64>(r0, i0, 1, 3));
      c += columnStep;
      v128.store(c, v128.shuffle<f64>(r1, i1, 0, 2));
      c += columnStep;
      v128.store(c, v128.shuffle<f64>(r1, i1, 1, 3));
      c += columnStep;
    }
  }
}

/** Fronts first..last whose panels lie one after the other from l. */
export function forwardBlock(
  first: i32,
  last: i32,
  l: usize,
  pivotStarts: usize,
  boundaryStarts: usize,
  order: usize,
  boundary: usize,
  d: usize,
  x: usize,
  rowBytes: usize,
  quads: i32,
  local: usize,
  step: usize,
  strip: usize,
): void {
  for (let f = first; f < last; f++) {
    const place = load<i32>(pivotStarts + ((<usize>f) << 2));
    const np = load<i32>(pivotStarts + ((<usize>f) << 2), 4) - place;
    const from = load<i32>(boundaryStarts + ((<usize>f) << 2));
    const nb = load<i32>(boundaryStarts + ((<usize>f) << 2), 4) - from;
    const rows = order + ((<usize>place) << 2);
    const plane = (<usize>((np + nb) * np)) << 3;
    gatherBlock(x, rowBytes, rows, np, quads, local, step);
    forwardColumnsBlock(l, plane, np, nb, 0, np, boundary + ((<usize>from) << 2), x, rowBytes, quads, local, step, strip);
    scatterForwardBlock(x, rowBytes, rows, np, quads, local, step, d + ((<usize>place) << 5));
    l += plane + plane;
  }
}

/** The same backwards; panels still in increasing order, l points behind the last one. */
export function backwardBlock(
  first: i32,
  last: i32,
  l: usize,
  pivotStarts: usize,
  boundaryStarts: usize,
  order: usize,
  boundary: usize,
  x: usize,
  rowBytes: usize,
  quads: i32,
  local: usize,
  step: usize,
  strip: usize,
): void {
  for (let f = last - 1; f >= first; f--) {
    const place = load<i32>(pivotStarts + ((<usize>f) << 2));
    const np = load<i32>(pivotStarts + ((<usize>f) << 2), 4) - place;
    const from = load<i32>(boundaryStarts + ((<usize>f) << 2));
    const nb = load<i32>(boundaryStarts + ((<usize>f) << 2), 4) - from;
    const rows = order + ((<usize>place) << 2);
    const plane = (<usize>((np + nb) * np)) << 3;
    l -= plane + plane;
    gatherBlock(x, rowBytes, rows, np, quads, local, step);
    gatherBlock(x, rowBytes, boundary + ((<usize>from) << 2), nb, quads, local + ((<usize>np) << 6), step);
    backwardColumnsBlock(l, plane, np + nb, 0, np, quads, local, step, strip);
    scatterBlock(x, rowBytes, rows, np, quads, local, step);
  }
}

/** Rows of x listed from `rows` on, to the rows of `local`. */
export function gatherBlock(
  x: usize,
  rowBytes: usize,
  rows: usize,
  count: i32,
  quads: i32,
  local: usize,
  step: usize,
): void {
  for (let i = 0; i < count; i++) {
    let from = x + <usize>load<i32>(rows + ((<usize>i) << 2)) * rowBytes;
    let to = local + ((<usize>i) << 6);
    for (let q = 0; q < quads; q++, from += 64, to += step) copyRow(to, from);
  }
}

/** And back. */
export function scatterBlock(
  x: usize,
  rowBytes: usize,
  rows: usize,
  count: i32,
  quads: i32,
  local: usize,
  step: usize,
): void {
  for (let i = 0; i < count; i++) {
    let to = x + <usize>load<i32>(rows + ((<usize>i) << 2)) * rowBytes;
    let from = local + ((<usize>i) << 6);
    for (let q = 0; q < quads; q++, to += 64, from += step) copyRow(to, from);
  }
}

// @ts-ignore: decorator of AssemblyScript
@inline
function copyRow(to: usize, from: usize): void {
  v128.store(to, v128.load(from));
  v128.store(to, v128.load(from, 16), 16);
  v128.store(to, v128.load(from, 32), 32);
  v128.store(to, v128.load(from, 48), 48);
}

/** Pivot rows go back divided by D. */
export function scatterForwardBlock(
  x: usize,
  rowBytes: usize,
  rows: usize,
  np: i32,
  quads: i32,
  local: usize,
  step: usize,
  d: usize,
): void {
  for (let j = 0; j < np; j++, local += 64, d += 32) {
    let to = x + <usize>load<i32>(rows + ((<usize>j) << 2)) * rowBytes;
    const pr = v128.load64_splat(d);
    const pi = v128.load64_splat(d, 8);
    let from = local;
    if (load<f64>(d, 16) == 0 && load<f64>(d, 24) == 0) {
      for (let q = 0; q < quads; q++, from += step, to += 64) {
        for (let h: usize = 0; h < 32; h += 16) {
          const ar = v128.load(from + h);
          const ai = v128.load(from + h, 32);
          v128.store(to + h, f64x2.sub(f64x2.mul(ar, pr), f64x2.mul(ai, pi)));
          v128.store(to + h, f64x2.add(f64x2.mul(ar, pi), f64x2.mul(ai, pr)), 32);
        }
      }
      continue;
    }
    let next = x + <usize>load<i32>(rows + ((<usize>j) << 2), 4) * rowBytes;
    const qr = v128.load64_splat(d, 16);
    const qi = v128.load64_splat(d, 24);
    const cr = v128.load64_splat(d, 32);
    const ci = v128.load64_splat(d, 40);
    for (let q = 0; q < quads; q++, from += step, to += 64, next += 64) {
      for (let h: usize = 0; h < 32; h += 16) {
        const ar = v128.load(from + h);
        const ai = v128.load(from + h, 32);
        const br = v128.load(from + h, 64);
        const bi = v128.load(from + h, 96);
        let re = f64x2.sub(f64x2.mul(ar, pr), f64x2.mul(ai, pi));
        let im = f64x2.add(f64x2.mul(ar, pi), f64x2.mul(ai, pr));
        re = f64x2.sub(f64x2.add(re, f64x2.mul(br, qr)), f64x2.mul(bi, qi));
        im = f64x2.add(f64x2.add(im, f64x2.mul(br, qi)), f64x2.mul(bi, qr));
        v128.store(to + h, re);
        v128.store(to + h, im, 32);
        re = f64x2.sub(f64x2.mul(ar, qr), f64x2.mul(ai, qi));
        im = f64x2.add(f64x2.mul(ar, qi), f64x2.mul(ai, qr));
        re = f64x2.sub(f64x2.add(re, f64x2.mul(br, cr)), f64x2.mul(bi, ci));
        im = f64x2.add(f64x2.add(im, f64x2.mul(br, ci)), f64x2.mul(bi, cr));
        v128.store(next + h, re);
        v128.store(next + h, im, 32);
      }
    }
    j++;
    local += 64;
    d += 32;
  }
}

/**
 * Columns first..last of L (column `first` at l) taken out of all rows below them: pivot rows in `local`, boundary rows
 * in x, listed from `edge` on. Unless last = np, last − first is even.
 */
export function forwardColumnsBlock(
  l: usize,
  plane: usize,
  np: i32,
  nb: i32,
  first: i32,
  last: i32,
  edge: usize,
  x: usize,
  rowBytes: usize,
  quads: i32,
  local: usize,
  step: usize,
  strip: usize,
): void {
  const nf = np + nb;
  const ld = (<usize>nf) << 3;
  const spare = strip + 32 * STRIP;
  for (let from = first; from < last; from += PIECE) {
    const end = min(last, from + PIECE);
    const column = l + <usize>(from - first) * ld;
    const pivots = local + ((<usize>from) << 6);
    for (let i = from; i < np; i += 2) {
      const n = min(i, end) - from;
      const at = column + ((<usize>i) << 3);
      const row = local + ((<usize>i) << 6);
      const both = i + 1 < np;
      packRows(at, ld, plane, n, both, strip);
      const b = both ? row + 64 : spare;
      const bStep = both ? step : 0;
      if (i < end && both) {
        const beside = at + <usize>n * ld + 8;
        pairTriangle(row, b, step, pivots, step, strip, n, load<f64>(beside), load<f64>(beside + plane), quads);
      } else pair(row, b, step, bStep, pivots, step, strip, n, quads);
    }
    const n = end - from;
    for (let i = 0; i < nb; i += 2) {
      const both = i + 1 < nb;
      packRows(column + ((<usize>(np + i)) << 3), ld, plane, n, both, strip);
      const a = x + <usize>load<i32>(edge + ((<usize>i) << 2)) * rowBytes;
      const b = both ? x + <usize>load<i32>(edge + ((<usize>i) << 2), 4) * rowBytes : spare;
      pair(a, b, 64, both ? 64 : 0, pivots, step, strip, n, quads);
    }
  }
}

/** Columns last-1 … first of L (column `first` at l): each pivot row minus the rows below it times its column. */
export function backwardColumnsBlock(
  l: usize,
  plane: usize,
  nf: i32,
  first: i32,
  last: i32,
  quads: i32,
  local: usize,
  step: usize,
  strip: usize,
): void {
  const ld = (<usize>nf) << 3;
  const spare = strip + 32 * STRIP;
  for (let end = last; end > first; end -= PIECE) {
    const from = max(first, end - PIECE);
    // Rows below these columns, a few at a time; the last few pass with the triangle.
    let below = end;
    if (nf - from > STRIP) {
      for (; below < nf; below += PIECE) {
        const n = min(PIECE, nf - below);
        const rows = local + ((<usize>below) << 6);
        for (let j = end - 1; j >= from; j -= 2) {
          const both = j > from;
          const at = l + <usize>(j - first) * ld + ((<usize>below) << 3);
          packColumns(at, both ? at - ld : at, plane, n, strip);
          const row = local + ((<usize>j) << 6);
          pair(row, both ? row - 64 : spare, step, both ? step : 0, rows, step, strip, n, quads);
        }
      }
      below = end;
    } else below = nf;
    for (let j = end - 1; j >= from; j -= 2) {
      const n = below - 1 - j;
      const both = j > from;
      const at = l + <usize>(j - first) * ld + ((<usize>(j + 1)) << 3);
      packColumns(at, both ? at - ld : at, plane, n, strip);
      const row = local + ((<usize>j) << 6);
      if (both) {
        const re = load<f64>(at - ld - 8);
        const im = load<f64>(at - ld - 8 + plane);
        pairTriangle(row, row - 64, step, row + 64, step, strip, n, re, im, quads);
      } else pair(row, spare, step, 0, row + 64, step, strip, n, quads);
    }
  }
}

/** Rows a, b (side by side) of n columns of L. */
function packRows(at: usize, ld: usize, plane: usize, n: i32, both: bool, strip: usize): void {
  const end = strip + ((<usize>n) << 5);
  if (both) {
    for (; strip < end; strip += 32, at += ld) {
      v128.store(strip, v128.load(at));
      v128.store(strip, v128.load(at + plane), 16);
    }
    return;
  }
  for (; strip < end; strip += 32, at += ld) {
    v128.store(strip, v128.load64_zero(at));
    v128.store(strip, v128.load64_zero(at + plane), 16);
  }
}

/** n rows of two columns a, b of L. */
function packColumns(a: usize, b: usize, plane: usize, n: i32, strip: usize): void {
  const end = strip + ((<usize>n) << 5);
  for (; strip + 32 < end; strip += 64, a += 16, b += 16) {
    const ar = v128.load(a);
    const br = v128.load(b);
    const ai = v128.load(a + plane);
    const bi = v128.load(b + plane);
    v128.store(strip, v128.shuffle<f64>(ar, br, 0, 2));
    v128.store(strip, v128.shuffle<f64>(ai, bi, 0, 2), 16);
    v128.store(strip, v128.shuffle<f64>(ar, br, 1, 3), 32);
    v128.store(strip, v128.shuffle<f64>(ai, bi, 1, 3), 48);
  }
  if (strip < end) {
    store<f64>(strip, load<f64>(a));
    store<f64>(strip, load<f64>(b), 8);
    store<f64>(strip, load<f64>(a + plane), 16);
    store<f64>(strip, load<f64>(b + plane), 24);
  }
}

/** Rows a, b −= Σₖ strip[k] · rows x[k], for each quad. */
function pair(
  a: usize,
  b: usize,
  aStep: usize,
  bStep: usize,
  x: usize,
  step: usize,
  strip: usize,
  n: i32,
  quads: i32,
): void {
  subtract(a, b, aStep, bStep, x, step, strip, n, false, 0, 0, quads);
}

/** The same, then b −= (lr + i li) a: a is a pivot of b. */
function pairTriangle(
  a: usize,
  b: usize,
  rowStep: usize,
  x: usize,
  step: usize,
  strip: usize,
  n: i32,
  lr: f64,
  li: f64,
  quads: i32,
): void {
  subtract(a, b, rowStep, rowStep, x, step, strip, n, true, lr, li, quads);
}

/**
 * Eight sums, four factors and a splat fill the registers; two steps a turn of the loop, which spares it the moves
 * between its turns: 22 GFLOP/s where one step makes 16.
 */
// @ts-ignore: decorator of AssemblyScript
@inline
function subtract(
  a: usize,
  b: usize,
  aStep: usize,
  bStep: usize,
  x: usize,
  step: usize,
  strip: usize,
  n: i32,
  triangle: bool,
  lr: f64,
  li: f64,
  quads: i32,
): void {
  const end = strip + ((<usize>n) << 5);
  for (let q = 0; q < quads; q++, a += aStep, b += bStep, x += step) {
    let r0 = v128.load(a);
    let r1 = v128.load(a, 16);
    let i0 = v128.load(a, 32);
    let i1 = v128.load(a, 48);
    let s0 = v128.load(b);
    let s1 = v128.load(b, 16);
    let j0 = v128.load(b, 32);
    let j1 = v128.load(b, 48);
    let l = strip;
    let y = x;
    if (n & 1) {
      const xr = v128.load(y);
      const yr = v128.load(y, 16);
      const xi = v128.load(y, 32);
      const yi = v128.load(y, 48);
      let f = v128.load64_splat(l);
      r0 = f64x2.sub(r0, f64x2.mul(xr, f));
      r1 = f64x2.sub(r1, f64x2.mul(yr, f));
      i0 = f64x2.sub(i0, f64x2.mul(xi, f));
      i1 = f64x2.sub(i1, f64x2.mul(yi, f));
      f = v128.load64_splat(l, 16);
      r0 = f64x2.add(r0, f64x2.mul(xi, f));
      r1 = f64x2.add(r1, f64x2.mul(yi, f));
      i0 = f64x2.sub(i0, f64x2.mul(xr, f));
      i1 = f64x2.sub(i1, f64x2.mul(yr, f));
      f = v128.load64_splat(l, 8);
      s0 = f64x2.sub(s0, f64x2.mul(xr, f));
      s1 = f64x2.sub(s1, f64x2.mul(yr, f));
      j0 = f64x2.sub(j0, f64x2.mul(xi, f));
      j1 = f64x2.sub(j1, f64x2.mul(yi, f));
      f = v128.load64_splat(l, 24);
      s0 = f64x2.add(s0, f64x2.mul(xi, f));
      s1 = f64x2.add(s1, f64x2.mul(yi, f));
      j0 = f64x2.sub(j0, f64x2.mul(xr, f));
      j1 = f64x2.sub(j1, f64x2.mul(yr, f));
      l += 32;
      y += 64;
    }
    for (; l < end; l += 64, y += 128) {
      let xr = v128.load(y);
      let yr = v128.load(y, 16);
      let xi = v128.load(y, 32);
      let yi = v128.load(y, 48);
      let f = v128.load64_splat(l);
      r0 = f64x2.sub(r0, f64x2.mul(xr, f));
      r1 = f64x2.sub(r1, f64x2.mul(yr, f));
      i0 = f64x2.sub(i0, f64x2.mul(xi, f));
      i1 = f64x2.sub(i1, f64x2.mul(yi, f));
      f = v128.load64_splat(l, 16);
      r0 = f64x2.add(r0, f64x2.mul(xi, f));
      r1 = f64x2.add(r1, f64x2.mul(yi, f));
      i0 = f64x2.sub(i0, f64x2.mul(xr, f));
      i1 = f64x2.sub(i1, f64x2.mul(yr, f));
      f = v128.load64_splat(l, 8);
      s0 = f64x2.sub(s0, f64x2.mul(xr, f));
      s1 = f64x2.sub(s1, f64x2.mul(yr, f));
      j0 = f64x2.sub(j0, f64x2.mul(xi, f));
      j1 = f64x2.sub(j1, f64x2.mul(yi, f));
      f = v128.load64_splat(l, 24);
      s0 = f64x2.add(s0, f64x2.mul(xi, f));
      s1 = f64x2.add(s1, f64x2.mul(yi, f));
      j0 = f64x2.sub(j0, f64x2.mul(xr, f));
      j1 = f64x2.sub(j1, f64x2.mul(yr, f));
      xr = v128.load(y, 64);
      yr = v128.load(y, 80);
      xi = v128.load(y, 96);
      yi = v128.load(y, 112);
      f = v128.load64_splat(l, 32);
      r0 = f64x2.sub(r0, f64x2.mul(xr, f));
      r1 = f64x2.sub(r1, f64x2.mul(yr, f));
      i0 = f64x2.sub(i0, f64x2.mul(xi, f));
      i1 = f64x2.sub(i1, f64x2.mul(yi, f));
      f = v128.load64_splat(l, 48);
      r0 = f64x2.add(r0, f64x2.mul(xi, f));
      r1 = f64x2.add(r1, f64x2.mul(yi, f));
      i0 = f64x2.sub(i0, f64x2.mul(xr, f));
      i1 = f64x2.sub(i1, f64x2.mul(yr, f));
      f = v128.load64_splat(l, 40);
      s0 = f64x2.sub(s0, f64x2.mul(xr, f));
      s1 = f64x2.sub(s1, f64x2.mul(yr, f));
      j0 = f64x2.sub(j0, f64x2.mul(xi, f));
      j1 = f64x2.sub(j1, f64x2.mul(yi, f));
      f = v128.load64_splat(l, 56);
      s0 = f64x2.add(s0, f64x2.mul(xi, f));
      s1 = f64x2.add(s1, f64x2.mul(yi, f));
      j0 = f64x2.sub(j0, f64x2.mul(xr, f));
      j1 = f64x2.sub(j1, f64x2.mul(yr, f));
    }
    v128.store(a, r0);
    v128.store(a, r1, 16);
    v128.store(a, i0, 32);
    v128.store(a, i1, 48);
    if (triangle) {
      const f = f64x2.splat(lr);
      const g = f64x2.splat(li);
      s0 = f64x2.add(f64x2.sub(s0, f64x2.mul(r0, f)), f64x2.mul(i0, g));
      s1 = f64x2.add(f64x2.sub(s1, f64x2.mul(r1, f)), f64x2.mul(i1, g));
      j0 = f64x2.sub(f64x2.sub(j0, f64x2.mul(i0, f)), f64x2.mul(r0, g));
      j1 = f64x2.sub(f64x2.sub(j1, f64x2.mul(i1, f)), f64x2.mul(r1, g));
    }
    v128.store(b, s0);
    v128.store(b, s1, 16);
    v128.store(b, j0, 32);
    v128.store(b, j1, 48);
  }
}
