// Substitution with the panels of L, four right-hand sides at a time or one.

// Four at a time, a row is 64 bytes: 4 real parts, then 4 imaginary ones; `x` holds the rows of all places for one
// quad after the other, quadBytes apart. One alone, `x` holds (re, im) a place, and the front's rows are two planes.
// Panels: nf × np column-major, real plane then imaginary plane, the rows at and above the diagonal not read.

/** Fronts first..last whose panels lie one after the other from l. */
export function forwardQuads(
  first: i32,
  last: i32,
  l: usize,
  pivotStarts: usize,
  boundaryStarts: usize,
  order: usize,
  boundary: usize,
  d: usize,
  x: usize,
  quadBytes: usize,
  quads: i32,
  local: usize,
): void {
  for (let f = first; f < last; f++) {
    const place = load<i32>(pivotStarts + ((<usize>f) << 2));
    const np = load<i32>(pivotStarts + ((<usize>f) << 2), 4) - place;
    const from = load<i32>(boundaryStarts + ((<usize>f) << 2));
    const nb = load<i32>(boundaryStarts + ((<usize>f) << 2), 4) - from;
    const rows = order + ((<usize>place) << 2);
    const edge = boundary + ((<usize>from) << 2);
    const plane = (<usize>((np + nb) * np)) << 3;
    for (let q = 0; q < quads; q++) {
      const xq = x + <usize>q * quadBytes;
      gatherForward(xq, rows, np, nb, local);
      forwardColumns(l, plane, np + nb, 0, np, local);
      scatterForward(xq, rows, edge, np, nb, local, d + ((<usize>place) << 5));
    }
    l += plane + plane;
  }
}

/** The same backwards; panels still in increasing order from l, which points behind the last one. */
export function backwardQuads(
  first: i32,
  last: i32,
  l: usize,
  pivotStarts: usize,
  boundaryStarts: usize,
  order: usize,
  boundary: usize,
  x: usize,
  quadBytes: usize,
  quads: i32,
  local: usize,
): void {
  for (let f = last - 1; f >= first; f--) {
    const place = load<i32>(pivotStarts + ((<usize>f) << 2));
    const np = load<i32>(pivotStarts + ((<usize>f) << 2), 4) - place;
    const from = load<i32>(boundaryStarts + ((<usize>f) << 2));
    const nb = load<i32>(boundaryStarts + ((<usize>f) << 2), 4) - from;
    const rows = order + ((<usize>place) << 2);
    const edge = boundary + ((<usize>from) << 2);
    const plane = (<usize>((np + nb) * np)) << 3;
    l -= plane + plane;
    for (let q = 0; q < quads; q++) {
      const xq = x + <usize>q * quadBytes;
      gatherBackward(xq, rows, edge, np, nb, local);
      backwardColumns(l, plane, np + nb, 0, np, local);
      scatterBackward(xq, rows, np, local);
    }
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

export function gatherForward(x: usize, rows: usize, np: i32, nb: i32, local: usize): void {
  let to = local;
  for (let j = 0; j < np; j++, to += 64) copyRow(to, x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 6));
  const zero = f64x2.splat(0);
  for (const end = to + ((<usize>nb) << 6); to < end; to += 16) v128.store(to, zero);
}

/** Boundary rows go to x by addition, pivot rows divided by D. */
export function scatterForward(x: usize, rows: usize, edge: usize, np: i32, nb: i32, local: usize, d: usize): void {
  let from = local + ((<usize>np) << 6);
  for (let i = 0; i < nb; i++, from += 64) {
    const to = x + ((<usize>load<i32>(edge + ((<usize>i) << 2))) << 6);
    v128.store(to, f64x2.add(v128.load(to), v128.load(from)));
    v128.store(to, f64x2.add(v128.load(to, 16), v128.load(from, 16)), 16);
    v128.store(to, f64x2.add(v128.load(to, 32), v128.load(from, 32)), 32);
    v128.store(to, f64x2.add(v128.load(to, 48), v128.load(from, 48)), 48);
  }
  from = local;
  for (let j = 0; j < np; j++, from += 64, d += 32) {
    const to = x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 6);
    const pr = v128.load64_splat(d);
    const pi = v128.load64_splat(d, 8);
    const double = load<f64>(d, 16) != 0 || load<f64>(d, 24) != 0;
    for (let h: usize = 0; h < 32; h += 16) {
      const ar = v128.load(from + h);
      const ai = v128.load(from + h, 32);
      let ur = f64x2.sub(f64x2.mul(ar, pr), f64x2.mul(ai, pi));
      let ui = f64x2.add(f64x2.mul(ar, pi), f64x2.mul(ai, pr));
      if (double) {
        const qr = v128.load64_splat(d, 16);
        const qi = v128.load64_splat(d, 24);
        const cr = v128.load64_splat(d, 32);
        const ci = v128.load64_splat(d, 40);
        const br = v128.load(from + h, 64);
        const bi = v128.load(from + h, 96);
        ur = f64x2.sub(f64x2.add(ur, f64x2.mul(br, qr)), f64x2.mul(bi, qi));
        ui = f64x2.add(f64x2.add(ui, f64x2.mul(br, qi)), f64x2.mul(bi, qr));
        const next = x + ((<usize>load<i32>(rows + ((<usize>j) << 2), 4)) << 6);
        v128.store(
          next + h,
          f64x2.sub(
            f64x2.add(f64x2.sub(f64x2.mul(ar, qr), f64x2.mul(ai, qi)), f64x2.mul(br, cr)),
            f64x2.mul(bi, ci),
          ),
        );
        v128.store(
          next + h,
          f64x2.add(
            f64x2.add(f64x2.add(f64x2.mul(ar, qi), f64x2.mul(ai, qr)), f64x2.mul(br, ci)),
            f64x2.mul(bi, cr),
          ),
          32,
        );
      }
      v128.store(to + h, ur);
      v128.store(to + h, ui, 32);
    }
    if (double) {
      j++;
      from += 64;
      d += 32;
    }
  }
}

export function gatherBackward(x: usize, rows: usize, edge: usize, np: i32, nb: i32, local: usize): void {
  let to = local;
  for (let j = 0; j < np; j++, to += 64) copyRow(to, x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 6));
  for (let i = 0; i < nb; i++, to += 64) copyRow(to, x + ((<usize>load<i32>(edge + ((<usize>i) << 2))) << 6));
}

export function scatterBackward(x: usize, rows: usize, np: i32, local: usize): void {
  for (let j = 0; j < np; j++, local += 64) {
    copyRow(x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 6), local);
  }
}

/** Columns first..last of L (column `first` at l) taken out of all rows below them. */
export function forwardColumns(l: usize, plane: usize, nf: i32, first: i32, last: i32, local: usize): void {
  const ld = (<usize>nf) << 3;
  const pivots = local + ((<usize>first) << 6);
  // The first row needs nothing; then two rows at a time.
  for (let i = first + 1; i < nf; i += 2) {
    const row = local + ((<usize>i) << 6);
    const n = min(i, last) - first;
    const at = l + ((<usize>i) << 3);
    if (i + 1 < nf) {
      twoRows(row, pivots, at, at + 8, plane, ld, n);
      // Row i itself is a pivot of row i + 1.
      if (i < last) oneRow(row + 64, row, at + 8 + <usize>(i - first) * ld, plane, ld, 1);
    } else oneRow(row, pivots, at, plane, ld, n);
  }
}

/** Columns last-1 … first of L (column `first` at l): each pivot row minus the rows below it times its column. */
export function backwardColumns(l: usize, plane: usize, nf: i32, first: i32, last: i32, local: usize): void {
  const ld = (<usize>nf) << 3;
  let j = last - 1;
  for (; j > first; j -= 2) {
    // Rows j − 1 and j; row j is below row j − 1.
    const row = local + ((<usize>(j - 1)) << 6);
    const at = l + <usize>(j - 1 - first) * ld + ((<usize>(j + 1)) << 3);
    twoRows(row, row + 128, at, at + ld, plane, 8, nf - j - 1);
    oneRow(row, row + 64, at - 8, plane, 8, 1);
  }
  if (j == first) {
    const row = local + ((<usize>j) << 6);
    oneRow(row, row + 64, l + ((<usize>(j + 1)) << 3), plane, 8, nf - j - 1);
  }
}

/** Two neighbouring rows c, c + 64 −= Σₖ (a[k], b[k]) · rows x[k]; a and b step by `step` bytes. */
function twoRows(c: usize, x: usize, a: usize, b: usize, plane: usize, step: usize, n: i32): void {
  let r0 = f64x2.splat(0);
  let r1 = r0;
  let i0 = r0;
  let i1 = r0;
  let s0 = r0;
  let s1 = r0;
  let j0 = r0;
  let j1 = r0;
  const end = x + ((<usize>n) << 6);
  for (; x < end; x += 64, a += step, b += step) {
    const xr = v128.load(x);
    const yr = v128.load(x, 16);
    const xi = v128.load(x, 32);
    const yi = v128.load(x, 48);
    let f = v128.load64_splat(a);
    r0 = f64x2.add(r0, f64x2.mul(xr, f));
    r1 = f64x2.add(r1, f64x2.mul(yr, f));
    i0 = f64x2.add(i0, f64x2.mul(xi, f));
    i1 = f64x2.add(i1, f64x2.mul(yi, f));
    f = v128.load64_splat(a + plane);
    r0 = f64x2.sub(r0, f64x2.mul(xi, f));
    r1 = f64x2.sub(r1, f64x2.mul(yi, f));
    i0 = f64x2.add(i0, f64x2.mul(xr, f));
    i1 = f64x2.add(i1, f64x2.mul(yr, f));
    f = v128.load64_splat(b);
    s0 = f64x2.add(s0, f64x2.mul(xr, f));
    s1 = f64x2.add(s1, f64x2.mul(yr, f));
    j0 = f64x2.add(j0, f64x2.mul(xi, f));
    j1 = f64x2.add(j1, f64x2.mul(yi, f));
    f = v128.load64_splat(b + plane);
    s0 = f64x2.sub(s0, f64x2.mul(xi, f));
    s1 = f64x2.sub(s1, f64x2.mul(yi, f));
    j0 = f64x2.add(j0, f64x2.mul(xr, f));
    j1 = f64x2.add(j1, f64x2.mul(yr, f));
  }
  v128.store(c, f64x2.sub(v128.load(c), r0));
  v128.store(c, f64x2.sub(v128.load(c, 16), r1), 16);
  v128.store(c, f64x2.sub(v128.load(c, 32), i0), 32);
  v128.store(c, f64x2.sub(v128.load(c, 48), i1), 48);
  v128.store(c, f64x2.sub(v128.load(c, 64), s0), 64);
  v128.store(c, f64x2.sub(v128.load(c, 80), s1), 80);
  v128.store(c, f64x2.sub(v128.load(c, 96), j0), 96);
  v128.store(c, f64x2.sub(v128.load(c, 112), j1), 112);
}

function oneRow(c: usize, x: usize, a: usize, plane: usize, step: usize, n: i32): void {
  let r0 = f64x2.splat(0);
  let r1 = r0;
  let i0 = r0;
  let i1 = r0;
  const end = x + ((<usize>n) << 6);
  for (; x < end; x += 64, a += step) {
    const xr = v128.load(x);
    const yr = v128.load(x, 16);
    const xi = v128.load(x, 32);
    const yi = v128.load(x, 48);
    let f = v128.load64_splat(a);
    r0 = f64x2.add(r0, f64x2.mul(xr, f));
    r1 = f64x2.add(r1, f64x2.mul(yr, f));
    i0 = f64x2.add(i0, f64x2.mul(xi, f));
    i1 = f64x2.add(i1, f64x2.mul(yi, f));
    f = v128.load64_splat(a + plane);
    r0 = f64x2.sub(r0, f64x2.mul(xi, f));
    r1 = f64x2.sub(r1, f64x2.mul(yi, f));
    i0 = f64x2.add(i0, f64x2.mul(xr, f));
    i1 = f64x2.add(i1, f64x2.mul(yr, f));
  }
  v128.store(c, f64x2.sub(v128.load(c), r0));
  v128.store(c, f64x2.sub(v128.load(c, 16), r1), 16);
  v128.store(c, f64x2.sub(v128.load(c, 32), i0), 32);
  v128.store(c, f64x2.sub(v128.load(c, 48), i1), 48);
}
