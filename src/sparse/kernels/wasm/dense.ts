// Small dense products: sums over quadrature points, and element matrices times vectors.

// Pointers are bytes. Meaning of arguments: ../dense-kernels.ts.

/** out[i + j nd] = Σ_s left[i rows + s] right[j rows + s] for i ≤ j (and a few below); rows is even. */
export function gram(out: usize, left: usize, right: usize, rows: i32, nd: i32): void {
  const step = (<usize>rows) << 3;
  for (let j = 0; j < nd; j += 2) {
    const both = j + 1 < nd;
    const b = right + <usize>j * step;
    const c = out + ((<usize>(j * nd)) << 3);
    for (let i = 0; i <= min(j + 1, nd - 1); i += 4) {
      gramTile(
        left + <usize>i * step,
        i + 1 < nd ? step : 0,
        i + 2 < nd ? step << 1 : 0,
        i + 3 < nd ? 3 * step : 0,
        b,
        both ? step : 0,
        step,
      );
      // Sums stand at 64 …: column j, then column j + 1.
      const height = min(4, nd - i);
      const to = c + ((<usize>i) << 3);
      for (let r = 0; r < height; r++) {
        const from = SUMS + ((<usize>r) << 3);
        store<f64>(to + ((<usize>r) << 3), load<f64>(from));
        if (both) store<f64>(to + ((<usize>(nd + r)) << 3), load<f64>(from, 32));
      }
    }
  }
}

/** Eight sums of one tile. */
const SUMS: usize = 64;

/** Rows a, a + a1, a + a2, a + a3 with columns b, b + b1; two points at a time. */
function gramTile(a: usize, a1: usize, a2: usize, a3: usize, b: usize, b1: usize, length: usize): void {
  let r0 = f64x2.splat(0);
  let r1 = r0;
  let r2 = r0;
  let r3 = r0;
  let s0 = r0;
  let s1 = r0;
  let s2 = r0;
  let s3 = r0;
  for (const end = a + length; a < end; a += 16, b += 16) {
    const u = v128.load(b);
    const v = v128.load(b + b1);
    let x = v128.load(a);
    r0 = f64x2.add(r0, f64x2.mul(x, u));
    s0 = f64x2.add(s0, f64x2.mul(x, v));
    x = v128.load(a + a1);
    r1 = f64x2.add(r1, f64x2.mul(x, u));
    s1 = f64x2.add(s1, f64x2.mul(x, v));
    x = v128.load(a + a2);
    r2 = f64x2.add(r2, f64x2.mul(x, u));
    s2 = f64x2.add(s2, f64x2.mul(x, v));
    x = v128.load(a + a3);
    r3 = f64x2.add(r3, f64x2.mul(x, u));
    s3 = f64x2.add(s3, f64x2.mul(x, v));
  }
  v128.store(SUMS, pairSums(r0, r1));
  v128.store(SUMS, pairSums(r2, r3), 16);
  v128.store(SUMS, pairSums(s0, s1), 32);
  v128.store(SUMS, pairSums(s2, s3), 48);
}

// @ts-ignore: decorator of AssemblyScript
@inline
function pairSums(x: v128, y: v128): v128 {
  return f64x2.add(v128.shuffle<f64>(x, y, 0, 2), v128.shuffle<f64>(x, y, 1, 3));
}

/** out = Σ_t w_K(region) K_t x + w_M(region) M_t x, element by element; all columns of an element together. */
export function multiplyElements(
  elements: i32,
  starts: usize,
  list: usize,
  places: usize,
  regions: usize,
  complex: usize,
  weights: usize,
  x: usize,
  out: usize,
  columnBytes: usize,
  columns: i32,
  flip: f64,
  local: usize,
  localBytes: usize,
): void {
  memory.fill(out, 0, <usize>columns * columnBytes);
  const even = (columns + 1) & ~1;
  const rowBytes = (<usize>even) << 4;
  const k1 = local;
  const k2 = k1 + localBytes;
  const m1 = k2 + localBytes;
  const m2 = m1 + localBytes;
  const y = m2 + localBytes;
  for (let t = 0; t < elements; t++) {
    const word = (<usize>t) << 2;
    const w = weights + ((<usize>load<i32>(regions + word)) << 5);
    const kr = load<f64>(w);
    const ki = load<f64>(w, 8);
    const mr = load<f64>(w, 16);
    const mi = load<f64>(w, 24);
    const useK = kr != 0 || ki != 0;
    const useM = mr != 0 || mi != 0;
    if (!useK && !useM) continue;
    const start = load<i32>(starts + word);
    const nd = load<i32>(starts + word, 4) - start;
    const unknowns = list + ((<usize>start) << 2);
    const turned = load<i32>(complex + word) != 0;
    const stiffness = (<usize>load<u32>(places + word)) << 3;
    const mass = stiffness + ((<usize>(nd * nd)) << (turned ? 4 : 3));
    if (columns == 1) {
      memory.fill(y, 0, <usize>(nd + 3) << 4);
      if (useK) {
        gatherOne(x, unknowns, nd, kr, ki, k1, k2);
        if (turned) addComplexOne(stiffness, nd, k1, k2, flip, y);
        else addRealOne(stiffness, nd, k1, k2, y);
      }
      if (useM) {
        gatherOne(x, unknowns, nd, mr, mi, m1, m2);
        if (turned) addComplexOne(mass, nd, m1, m2, flip, y);
        else addRealOne(mass, nd, m1, m2, y);
      }
      scatterOne(out, unknowns, nd, y);
      continue;
    }
    if (useK) gatherWeighted(x, columnBytes, columns, unknowns, nd, kr, ki, turned, flip, k1, k2);
    if (useM) gatherWeighted(x, columnBytes, columns, unknowns, nd, mr, mi, turned, flip, m1, m2);
    memory.fill(y, 0, <usize>(nd + 3) * rowBytes);
    for (let i = 0; i < nd; i += 4) {
      const rows = min(4, nd - i);
      for (let c: usize = 0; c < rowBytes; c += 32) {
        const to = y + <usize>i * rowBytes + c;
        if (turned) {
          const at = (<usize>(i * nd)) << 4;
          if (useK) {
            addComplexRows(stiffness + at, nd, rows, k1 + c, rowBytes, to);
            addComplexRows(stiffness + at + 8, nd, rows, k2 + c, rowBytes, to);
          }
          if (useM) {
            addComplexRows(mass + at, nd, rows, m1 + c, rowBytes, to);
            addComplexRows(mass + at + 8, nd, rows, m2 + c, rowBytes, to);
          }
        } else {
          const at = (<usize>(i * nd)) << 3;
          if (useK) addRealRows(stiffness + at, nd, rows, k1 + c, rowBytes, to);
          if (useM) addRealRows(mass + at, nd, rows, m1 + c, rowBytes, to);
        }
      }
    }
    for (let i = 0; i < nd; i++) {
      const g = load<i32>(unknowns + ((<usize>i) << 2));
      if (g < 0) continue;
      let to = out + ((<usize>g) << 4);
      let from = y + <usize>i * rowBytes;
      for (let c = 0; c < columns; c++, to += columnBytes, from += 16) {
        v128.store(to, f64x2.add(v128.load(to), v128.load(from)));
      }
    }
  }
}

/** w x of the element's unknowns for one column, real and imaginary parts apart. */
function gatherOne(x: usize, unknowns: usize, nd: i32, wr: f64, wi: f64, re: usize, im: usize): void {
  for (let j = 0; j < nd; j++, re += 8, im += 8) {
    const g = load<i32>(unknowns + ((<usize>j) << 2));
    let a = 0.0;
    let b = 0.0;
    if (g >= 0) {
      const at = x + ((<usize>g) << 4);
      a = load<f64>(at);
      b = load<f64>(at, 8);
    }
    store<f64>(re, wr * a - wi * b);
    store<f64>(im, wr * b + wi * a);
  }
}

function scatterOne(out: usize, unknowns: usize, nd: i32, y: usize): void {
  for (let i = 0; i < nd; i++, y += 16) {
    const g = load<i32>(unknowns + ((<usize>i) << 2));
    if (g < 0) continue;
    const to = out + ((<usize>g) << 4);
    v128.store(to, f64x2.add(v128.load(to), v128.load(y)));
  }
}

/** y (re, im) += a real matrix times one column; four rows, two of their numbers at a time. */
function addRealOne(m: usize, nd: i32, re: usize, im: usize, y: usize): void {
  const step = (<usize>nd) << 3;
  const pairs = (<usize>(nd & ~1)) << 3;
  for (let i = 0; i < nd; i += 4, y += 64) {
    let p = m + <usize>i * step;
    let q = i + 1 < nd ? p + step : p;
    let r = i + 2 < nd ? q + step : p;
    let s = i + 3 < nd ? r + step : p;
    let p0 = f64x2.splat(0);
    let p1 = p0;
    let q0 = p0;
    let q1 = p0;
    let r0 = p0;
    let r1 = p0;
    let s0 = p0;
    let s1 = p0;
    let u = re;
    let v = im;
    for (const end = re + pairs; u < end; u += 16, v += 16, p += 16, q += 16, r += 16, s += 16) {
      const a = v128.load(u);
      const b = v128.load(v);
      let f = v128.load(p);
      p0 = f64x2.add(p0, f64x2.mul(f, a));
      p1 = f64x2.add(p1, f64x2.mul(f, b));
      f = v128.load(q);
      q0 = f64x2.add(q0, f64x2.mul(f, a));
      q1 = f64x2.add(q1, f64x2.mul(f, b));
      f = v128.load(r);
      r0 = f64x2.add(r0, f64x2.mul(f, a));
      r1 = f64x2.add(r1, f64x2.mul(f, b));
      f = v128.load(s);
      s0 = f64x2.add(s0, f64x2.mul(f, a));
      s1 = f64x2.add(s1, f64x2.mul(f, b));
    }
    if (nd & 1) {
      const a = v128.load64_zero(u);
      const b = v128.load64_zero(v);
      let f = v128.load64_zero(p);
      p0 = f64x2.add(p0, f64x2.mul(f, a));
      p1 = f64x2.add(p1, f64x2.mul(f, b));
      f = v128.load64_zero(q);
      q0 = f64x2.add(q0, f64x2.mul(f, a));
      q1 = f64x2.add(q1, f64x2.mul(f, b));
      f = v128.load64_zero(r);
      r0 = f64x2.add(r0, f64x2.mul(f, a));
      r1 = f64x2.add(r1, f64x2.mul(f, b));
      f = v128.load64_zero(s);
      s0 = f64x2.add(s0, f64x2.mul(f, a));
      s1 = f64x2.add(s1, f64x2.mul(f, b));
    }
    v128.store(y, f64x2.add(v128.load(y), pairSums(p0, p1)));
    v128.store(y, f64x2.add(v128.load(y, 16), pairSums(q0, q1)), 16);
    v128.store(y, f64x2.add(v128.load(y, 32), pairSums(r0, r1)), 32);
    v128.store(y, f64x2.add(v128.load(y, 48), pairSums(s0, s1)), 48);
  }
}

/** The same for a complex matrix, conjugated where flip is −1. */
function addComplexOne(m: usize, nd: i32, re: usize, im: usize, flip: f64, y: usize): void {
  const step = (<usize>nd) << 4;
  const turn = f64x2.replace_lane(f64x2.splat(flip), 0, -flip);
  for (let i = 0; i < nd; i += 4, y += 64) {
    let p = m + <usize>i * step;
    let q = i + 1 < nd ? p + step : p;
    let r = i + 2 < nd ? q + step : p;
    let s = i + 3 < nd ? r + step : p;
    let p0 = f64x2.splat(0);
    let p1 = p0;
    let q0 = p0;
    let q1 = p0;
    let r0 = p0;
    let r1 = p0;
    let s0 = p0;
    let s1 = p0;
    const end = p + step;
    for (let u = re, v = im; p < end; u += 8, v += 8, p += 16, q += 16, r += 16, s += 16) {
      const a = v128.load64_splat(u);
      const b = v128.load64_splat(v);
      let f = v128.load(p);
      p0 = f64x2.add(p0, f64x2.mul(f, a));
      p1 = f64x2.add(p1, f64x2.mul(f, b));
      f = v128.load(q);
      q0 = f64x2.add(q0, f64x2.mul(f, a));
      q1 = f64x2.add(q1, f64x2.mul(f, b));
      f = v128.load(r);
      r0 = f64x2.add(r0, f64x2.mul(f, a));
      r1 = f64x2.add(r1, f64x2.mul(f, b));
      f = v128.load(s);
      s0 = f64x2.add(s0, f64x2.mul(f, a));
      s1 = f64x2.add(s1, f64x2.mul(f, b));
    }
    v128.store(y, f64x2.add(v128.load(y), turnedSum(p0, p1, turn)));
    v128.store(y, f64x2.add(v128.load(y, 16), turnedSum(q0, q1, turn)), 16);
    v128.store(y, f64x2.add(v128.load(y, 32), turnedSum(r0, r1, turn)), 32);
    v128.store(y, f64x2.add(v128.load(y, 48), turnedSum(s0, s1, turn)), 48);
  }
}

/** (a₀ ∓ b₁, b₀ ± a₁) of a = Σ (re, im) of m · re x and b = Σ (re, im) of m · im x. */
// @ts-ignore: decorator of AssemblyScript
@inline
function turnedSum(a: v128, b: v128, turn: v128): v128 {
  return f64x2.add(v128.shuffle<f64>(a, b, 0, 2), f64x2.mul(v128.shuffle<f64>(a, b, 3, 1), turn));
}

/** w x of the element's unknowns, rows of all columns; for complex matrices also ±i w x. */
function gatherWeighted(
  x: usize,
  columnBytes: usize,
  columns: i32,
  unknowns: usize,
  nd: i32,
  wr: f64,
  wi: f64,
  turned: bool,
  flip: f64,
  to: usize,
  also: usize,
): void {
  const re = f64x2.splat(wr);
  const im = f64x2.replace_lane(f64x2.splat(wi), 0, -wi);
  const turn = f64x2.replace_lane(f64x2.splat(flip), 0, -flip);
  const zero = f64x2.splat(0);
  const odd = (columns & 1) != 0;
  for (let j = 0; j < nd; j++) {
    const g = load<i32>(unknowns + ((<usize>j) << 2));
    let at = x + ((<usize>max(g, 0)) << 4);
    for (let c = 0; c < columns; c++, at += columnBytes, to += 16, also += 16) {
      let v = zero;
      if (g >= 0) {
        v = v128.load(at);
        v = f64x2.add(f64x2.mul(v, re), f64x2.mul(v128.shuffle<f64>(v, v, 1, 0), im));
      }
      v128.store(to, v);
      if (turned) v128.store(also, f64x2.mul(v128.shuffle<f64>(v, v, 1, 0), turn));
    }
    if (odd) {
      v128.store(to, zero);
      v128.store(also, zero);
      to += 16;
      also += 16;
    }
  }
}

function addRealRows(m: usize, nd: i32, rows: i32, x: usize, rowBytes: usize, y: usize): void {
  addRows(m, (<usize>nd) << 3, 8, nd, rows, x, rowBytes, y);
}

function addComplexRows(m: usize, nd: i32, rows: i32, x: usize, rowBytes: usize, y: usize): void {
  addRows(m, (<usize>nd) << 4, 16, nd, rows, x, rowBytes, y);
}

/** Four rows of y += four rows of a real matrix (numbers `entry` bytes apart) times x, two columns. */
// @ts-ignore: decorator of AssemblyScript
@inline
function addRows(
  m: usize,
  step: usize,
  entry: usize,
  nd: i32,
  rows: i32,
  x: usize,
  rowBytes: usize,
  y: usize,
): void {
  let p = m;
  let q = rows > 1 ? m + step : m;
  let r = rows > 2 ? m + 2 * step : m;
  let s = rows > 3 ? m + 3 * step : m;
  let p0 = v128.load(y);
  let p1 = v128.load(y, 16);
  let q0 = v128.load(y + rowBytes);
  let q1 = v128.load(y + rowBytes, 16);
  let r0 = v128.load(y + 2 * rowBytes);
  let r1 = v128.load(y + 2 * rowBytes, 16);
  let s0 = v128.load(y + 3 * rowBytes);
  let s1 = v128.load(y + 3 * rowBytes, 16);
  const end = m + <usize>nd * entry;
  if (nd & 1) {
    const u = v128.load(x);
    const v = v128.load(x, 16);
    let f = v128.load64_splat(p);
    p0 = f64x2.add(p0, f64x2.mul(u, f));
    p1 = f64x2.add(p1, f64x2.mul(v, f));
    f = v128.load64_splat(q);
    q0 = f64x2.add(q0, f64x2.mul(u, f));
    q1 = f64x2.add(q1, f64x2.mul(v, f));
    f = v128.load64_splat(r);
    r0 = f64x2.add(r0, f64x2.mul(u, f));
    r1 = f64x2.add(r1, f64x2.mul(v, f));
    f = v128.load64_splat(s);
    s0 = f64x2.add(s0, f64x2.mul(u, f));
    s1 = f64x2.add(s1, f64x2.mul(v, f));
    p += entry;
    q += entry;
    r += entry;
    s += entry;
    x += rowBytes;
  }
  while (p < end) {
    let u = v128.load(x);
    let v = v128.load(x, 16);
    let f = v128.load64_splat(p);
    p0 = f64x2.add(p0, f64x2.mul(u, f));
    p1 = f64x2.add(p1, f64x2.mul(v, f));
    f = v128.load64_splat(q);
    q0 = f64x2.add(q0, f64x2.mul(u, f));
    q1 = f64x2.add(q1, f64x2.mul(v, f));
    f = v128.load64_splat(r);
    r0 = f64x2.add(r0, f64x2.mul(u, f));
    r1 = f64x2.add(r1, f64x2.mul(v, f));
    f = v128.load64_splat(s);
    s0 = f64x2.add(s0, f64x2.mul(u, f));
    s1 = f64x2.add(s1, f64x2.mul(v, f));
    x += rowBytes;
    u = v128.load(x);
    v = v128.load(x, 16);
    f = v128.load64_splat(p + entry);
    p0 = f64x2.add(p0, f64x2.mul(u, f));
    p1 = f64x2.add(p1, f64x2.mul(v, f));
    f = v128.load64_splat(q + entry);
    q0 = f64x2.add(q0, f64x2.mul(u, f));
    q1 = f64x2.add(q1, f64x2.mul(v, f));
    f = v128.load64_splat(r + entry);
    r0 = f64x2.add(r0, f64x2.mul(u, f));
    r1 = f64x2.add(r1, f64x2.mul(v, f));
    f = v128.load64_splat(s + entry);
    s0 = f64x2.add(s0, f64x2.mul(u, f));
    s1 = f64x2.add(s1, f64x2.mul(v, f));
    x += rowBytes;
    p += 2 * entry;
    q += 2 * entry;
    r += 2 * entry;
    s += 2 * entry;
  }
  v128.store(y, p0);
  v128.store(y, p1, 16);
  v128.store(y + rowBytes, q0);
  v128.store(y + rowBytes, q1, 16);
  v128.store(y + 2 * rowBytes, r0);
  v128.store(y + 2 * rowBytes, r1, 16);
  v128.store(y + 3 * rowBytes, s0);
  v128.store(y + 3 * rowBytes, s1, 16);
}
