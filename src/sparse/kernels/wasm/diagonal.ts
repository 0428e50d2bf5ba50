// Pivots of one diagonal block.

/** Bunch and Kaufman's bound on element growth, (1 + √17)/8. */
const GROWTH: f64 = 0.6403882032022076;
/** As in ../kernels.ts. */
const DELAY: f64 = 1e-6;

/** Largest part of an entry in each pivot's row and column, to d[4j]. */
export function measureColumns(p: usize, nf: i32, np: i32, d: usize): void {
  const plane = (<usize>(nf * np)) << 3;
  for (let j = 0; j < np; j++) store<f64>(d + ((<usize>j) << 5), 0);
  for (let j = 0; j < np; j++) {
    const target = d + ((<usize>j) << 5);
    let largest = load<f64>(target);
    let at = p + ((<usize>(j * nf + j)) << 3);
    for (let i = j; i < np; i++, at += 8) {
      const v = max(abs(load<f64>(at)), abs(load<f64>(at + plane)));
      if (v > largest) largest = v;
      const other = d + ((<usize>i) << 5);
      if (v > load<f64>(other)) store<f64>(other, v);
    }
    let top = f64x2.splat(0);
    const end = p + ((<usize>((j + 1) * nf)) << 3);
    for (; at + 8 < end; at += 16) {
      top = f64x2.pmax(top, f64x2.pmax(f64x2.abs(v128.load(at)), f64x2.abs(v128.load(at + plane))));
    }
    if (at < end) largest = max(largest, max(abs(load<f64>(at)), abs(load<f64>(at + plane))));
    largest = max(largest, max(f64x2.extract_lane(top, 0), f64x2.extract_lane(top, 1)));
    store<f64>(target, largest);
  }
}

/**
 * P L D Lᵀ Pᵀ of the diagonal block first..last of the panel (J. Bunch, L. Kaufman, Math. Comp. 31 (1977) 163);
 * the twin in ../twin.ts says what goes where.
 */
export function factorDiagonal(
  p: usize,
  nf: i32,
  np: i32,
  first: i32,
  last: i32,
  d: usize,
  perm: usize,
  tiny: f64,
  forcing: bool,
): i32 {
  const plane = (<usize>(nf * np)) << 3;
  let k = first;
  let active = last; // rows active..last were refused
  while (k < active) {
    const at = p + ((<usize>(k * nf + k)) << 3);
    const diagonal = abs(load<f64>(at)) + abs(load<f64>(at + plane));
    let largest: f64 = 0;
    let row = k;
    let c = at;
    for (let i = k + 1; i < last; i++) {
      c += 8;
      const v = abs(load<f64>(c)) + abs(load<f64>(c + plane));
      if (v > largest) {
        largest = v;
        row = i;
      }
    }
    let double = false;
    if (diagonal < GROWTH * largest) {
      let across: f64 = 0;
      for (let j = k; j < row; j++) across = max(across, size(p, nf, plane, row, j));
      for (let i = row + 1; i < last; i++) across = max(across, size(p, nf, plane, i, row));
      if (diagonal * across >= GROWTH * largest * largest) row = k;
      else if (size(p, nf, plane, row, row) < GROWTH * across) double = true;
    } else row = k;
    const target = double ? k + 1 : k;
    if (row != target) exchange(p, nf, np, target, row, d, perm);
    if (!forcing && !accepts(at, plane, (<usize>nf) << 3, double, d + ((<usize>k) << 5))) {
      active--;
      if (active > k) exchange(p, nf, np, k, active, d, perm);
      continue;
    }
    if (double) {
      eliminateDouble(p, nf, np, k, last, d);
      k += 2;
    } else {
      let re = load<f64>(at);
      let im = load<f64>(at + plane);
      const modulus = hypot(re, im);
      if (modulus <= tiny) {
        const count = d + ((<usize>np) << 5);
        store<f64>(count, load<f64>(count) + 1);
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
function accepts(at: usize, plane: usize, ld: usize, double: bool, scale: usize): bool {
  const ar = load<f64>(at);
  const ai = load<f64>(at + plane);
  if (!double) return hypot(ar, ai) > DELAY * load<f64>(scale);
  const br = load<f64>(at, 8);
  const bi = load<f64>(at + plane, 8);
  const cr = load<f64>(at + ld, 8);
  const ci = load<f64>(at + ld + plane, 8);
  // |det| over the largest entry is about the smaller singular value.
  const detRe = ar * cr - ai * ci - (br * br - bi * bi);
  const detIm = ar * ci + ai * cr - 2 * br * bi;
  const largest = max(max(hypot(ar, ai), hypot(br, bi)), hypot(cr, ci));
  return hypot(detRe, detIm) / largest > DELAY * min(load<f64>(scale), load<f64>(scale, 32));
}

// @ts-ignore: decorator of AssemblyScript
@inline
function size(p: usize, nf: i32, plane: usize, i: i32, j: i32): f64 {
  const at = p + ((<usize>(j * nf + i)) << 3);
  return abs(load<f64>(at)) + abs(load<f64>(at + plane));
}

/** √(a² + b²) scaled by the larger one. */
function hypot(a: f64, b: f64): f64 {
  const x = max(abs(a), abs(b));
  const y = min(abs(a), abs(b));
  if (x == 0) return 0;
  const t = y / x;
  return x * sqrt(1 + t * t);
}

export function exchange(p: usize, nf: i32, np: i32, a: i32, b: i32, d: usize, perm: usize): void {
  const plane = (<usize>(nf * np)) << 3;
  const da = d + ((<usize>a) << 5);
  const db = d + ((<usize>b) << 5);
  const scale = load<f64>(da);
  store<f64>(da, load<f64>(db));
  store<f64>(db, scale);
  const pa = perm + ((<usize>a) << 2);
  const pb = perm + ((<usize>b) << 2);
  const held = load<i32>(pa);
  store<i32>(pa, load<i32>(pb));
  store<i32>(pb, held);
  for (let j = 0; j < a; j++) swap(p, plane, j * nf + a, j * nf + b);
  swap(p, plane, a * nf + a, b * nf + b);
  for (let i = a + 1; i < b; i++) swap(p, plane, a * nf + i, i * nf + b);
  for (let i = b + 1; i < nf; i++) swap(p, plane, a * nf + i, b * nf + i);
}

// @ts-ignore: decorator of AssemblyScript
@inline
function swap(p: usize, plane: usize, x: i32, y: i32): void {
  const ax = p + ((<usize>x) << 3);
  const ay = p + ((<usize>y) << 3);
  const re = load<f64>(ax);
  const im = load<f64>(ax + plane);
  store<f64>(ax, load<f64>(ay));
  store<f64>(ax + plane, load<f64>(ay + plane));
  store<f64>(ay, re);
  store<f64>(ay + plane, im);
}

let reciprocalRe: f64 = 0;
let reciprocalIm: f64 = 0;

function reciprocal(re: f64, im: f64): void {
  if (abs(re) >= abs(im)) {
    const t = im / re;
    const d = re + im * t;
    reciprocalRe = 1 / d;
    reciprocalIm = -t / d;
  } else {
    const t = re / im;
    const d = im + re * t;
    reciprocalRe = t / d;
    reciprocalIm = -1 / d;
  }
}

function eliminateSingle(p: usize, nf: i32, np: i32, k: i32, last: i32, d: usize, re: f64, im: f64): void {
  const plane = (<usize>(nf * np)) << 3;
  const at = d + ((<usize>k) << 5);
  reciprocal(re, im);
  const ir = reciprocalRe;
  const ii = reciprocalIm;
  store<f64>(at, ir);
  store<f64>(at, ii, 8);
  store<f64>(at, 0, 16);
  store<f64>(at, 0, 24);
  const c = p + ((<usize>(k * nf)) << 3);
  const end = c + ((<usize>last) << 3);
  const ld = (<usize>nf) << 3;
  let to = c + ld;
  for (let from = c + ((<usize>(k + 1)) << 3); from < end; from += 8, to += ld) {
    const wr = load<f64>(from);
    const wi = load<f64>(from + plane);
    const lr = wr * ir - wi * ii;
    const li = wr * ii + wi * ir;
    let a = from;
    let t = to + (from - c);
    const r = f64x2.splat(lr);
    const s = f64x2.splat(li);
    for (; a + 8 < end; a += 16, t += 16) {
      const ar = v128.load(a);
      const ai = v128.load(a + plane);
      v128.store(t, f64x2.add(f64x2.sub(v128.load(t), f64x2.mul(ar, r)), f64x2.mul(ai, s)));
      v128.store(t + plane, f64x2.sub(f64x2.sub(v128.load(t + plane), f64x2.mul(ar, s)), f64x2.mul(ai, r)));
    }
    if (a < end) {
      const ar = load<f64>(a);
      const ai = load<f64>(a + plane);
      store<f64>(t, load<f64>(t) - ar * lr + ai * li);
      store<f64>(t + plane, load<f64>(t + plane) - ar * li - ai * lr);
    }
    store<f64>(from, lr);
    store<f64>(from + plane, li);
  }
}

function eliminateDouble(p: usize, nf: i32, np: i32, k: i32, last: i32, d: usize): void {
  const plane = (<usize>(nf * np)) << 3;
  const c = p + ((<usize>(k * nf)) << 3);
  const e = c + ((<usize>nf) << 3);
  const ck = c + ((<usize>k) << 3);
  const ek = e + ((<usize>k) << 3);
  // Inverse of [[a, b], [b, c]] with b the largest: scaled by b, det/b² = (a/b)(c/b) − 1.
  reciprocal(load<f64>(ck, 8), load<f64>(ck + plane, 8));
  const br = reciprocalRe;
  const bi = reciprocalIm;
  const ar = load<f64>(ck) * br - load<f64>(ck + plane) * bi;
  const ai = load<f64>(ck) * bi + load<f64>(ck + plane) * br;
  const gr = load<f64>(ek, 8) * br - load<f64>(ek + plane, 8) * bi;
  const gi = load<f64>(ek, 8) * bi + load<f64>(ek + plane, 8) * br;
  reciprocal(ar * gr - ai * gi - 1, ar * gi + ai * gr);
  const tr = reciprocalRe;
  const ti = reciprocalIm;
  const fr = tr * br - ti * bi;
  const fi = tr * bi + ti * br;
  const pr = gr * fr - gi * fi;
  const pi = gr * fi + gi * fr;
  const qr = -fr;
  const qi = -fi;
  const rr = ar * fr - ai * fi;
  const ri = ar * fi + ai * fr;
  const at = d + ((<usize>k) << 5);
  store<f64>(at, pr);
  store<f64>(at, pi, 8);
  store<f64>(at, qr, 16);
  store<f64>(at, qi, 24);
  store<f64>(at, rr, 32);
  store<f64>(at, ri, 40);
  store<f64>(at, 0, 48);
  store<f64>(at, 0, 56);
  store<f64>(ck, 0, 8);
  store<f64>(ck + plane, 0, 8);
  for (let j = k + 2; j < last; j++) {
    const step = (<usize>j) << 3;
    const xr = load<f64>(c + step);
    const xi = load<f64>(c + step + plane);
    const yr = load<f64>(e + step);
    const yi = load<f64>(e + step + plane);
    const ur = xr * pr - xi * pi + yr * qr - yi * qi;
    const ui = xr * pi + xi * pr + yr * qi + yi * qr;
    const vr = xr * qr - xi * qi + yr * rr - yi * ri;
    const vi = xr * qi + xi * qr + yr * ri + yi * rr;
    const to = p + ((<usize>(j * nf)) << 3);
    for (let i = j; i < last; i++) {
      const h = (<usize>i) << 3;
      const sr = load<f64>(c + h);
      const si = load<f64>(c + h + plane);
      const wr = load<f64>(e + h);
      const wi = load<f64>(e + h + plane);
      const t = to + h;
      store<f64>(t, load<f64>(t) - (sr * ur - si * ui + wr * vr - wi * vi));
      store<f64>(t + plane, load<f64>(t + plane) - (sr * ui + si * ur + wr * vi + wi * vr));
    }
    store<f64>(c + step, ur);
    store<f64>(c + step + plane, ui);
    store<f64>(e + step, vr);
    store<f64>(e + step + plane, vi);
  }
}
