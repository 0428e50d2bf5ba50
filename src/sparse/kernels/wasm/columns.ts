// Products of tall complex matrices: interleaved numbers, columns one after the other.

// Pointers are bytes, columns n × 16 bytes apart. Rows pass in runs that stay in the first-level cache.

const ROWS: i32 = 256;

/** out[i + j p] = Σ conj(x_i) y_j for p columns x and q columns y. */
export function adjointProduct(x: usize, p: i32, y: usize, q: i32, n: i32, out: usize): void {
  const step = (<usize>n) << 4;
  memory.fill(out, 0, (<usize>(p * q)) << 4);
  for (let row = 0; row < n; row += ROWS) {
    const bytes = (<usize>min(ROWS, n - row)) << 4;
    const first = (<usize>row) << 4;
    for (let i = 0; i < p; i += 4) {
      const a = x + <usize>i * step + first;
      for (let j = 0; j < q; j++) {
        addProducts(
          a,
          i + 1 < p ? step : 0,
          i + 2 < p ? 2 * step : 0,
          i + 3 < p ? 3 * step : 0,
          y + <usize>j * step + first,
          bytes,
          out + ((<usize>(i + j * p)) << 4),
          min(4, p - i),
        );
      }
    }
  }
}

/** Up to four products over some rows. With c = (c₀, c₁): Σ a c lane by lane is the real part, Σ a (c₁, c₀) the other. */
function addProducts(a: usize, s1: usize, s2: usize, s3: usize, c: usize, bytes: usize, out: usize, count: i32): void {
  let r0 = f64x2.splat(0);
  let r1 = r0;
  let r2 = r0;
  let r3 = r0;
  let i0 = r0;
  let i1 = r0;
  let i2 = r0;
  let i3 = r0;
  for (const end = a + bytes; a < end; a += 16, c += 16) {
    const u = v128.load(c);
    const v = v128.shuffle<f64>(u, u, 1, 0);
    let f = v128.load(a);
    r0 = f64x2.add(r0, f64x2.mul(f, u));
    i0 = f64x2.add(i0, f64x2.mul(f, v));
    f = v128.load(a + s1);
    r1 = f64x2.add(r1, f64x2.mul(f, u));
    i1 = f64x2.add(i1, f64x2.mul(f, v));
    f = v128.load(a + s2);
    r2 = f64x2.add(r2, f64x2.mul(f, u));
    i2 = f64x2.add(i2, f64x2.mul(f, v));
    f = v128.load(a + s3);
    r3 = f64x2.add(r3, f64x2.mul(f, u));
    i3 = f64x2.add(i3, f64x2.mul(f, v));
  }
  addTo(out, r0, i0);
  if (count > 1) addTo(out + 16, r1, i1);
  if (count > 2) addTo(out + 32, r2, i2);
  if (count > 3) addTo(out + 48, r3, i3);
}

function addTo(out: usize, r: v128, i: v128): void {
  store<f64>(out, load<f64>(out) + f64x2.extract_lane(r, 0) + f64x2.extract_lane(r, 1));
  store<f64>(out, load<f64>(out, 8) + f64x2.extract_lane(i, 0) - f64x2.extract_lane(i, 1), 8);
}

/** y_j += Σ x_i c[i + j p] for p columns x and q columns y. */
export function addProduct(y: usize, x: usize, p: i32, c: usize, q: i32, n: i32): void {
  const step = (<usize>n) << 4;
  for (let row = 0; row < n; row += ROWS) {
    const bytes = (<usize>min(ROWS, n - row)) << 4;
    const first = (<usize>row) << 4;
    for (let i = 0; i < p; i += 4) {
      const a = x + <usize>i * step + first;
      for (let j = 0; j < q; j++) {
        const to = y + <usize>j * step + first;
        const factors = c + ((<usize>(i + j * p)) << 4);
        if (i + 4 <= p) addFour(to, a, step, factors, bytes);
        else for (let k = 0; i + k < p; k++) addOne(to, a + <usize>k * step, factors + ((<usize>k) << 4), bytes);
      }
    }
  }
}

function addFour(y: usize, a: usize, step: usize, c: usize, bytes: usize): void {
  const s2 = 2 * step;
  const s3 = 3 * step;
  const r0 = v128.load64_splat(c);
  const r1 = v128.load64_splat(c, 16);
  const r2 = v128.load64_splat(c, 32);
  const r3 = v128.load64_splat(c, 48);
  const i0 = turned(c + 8);
  const i1 = turned(c + 24);
  const i2 = turned(c + 40);
  const i3 = turned(c + 56);
  for (const end = a + bytes; a < end; a += 16, y += 16) {
    let u = v128.load(a);
    let v = f64x2.add(f64x2.mul(u, r0), f64x2.mul(v128.shuffle<f64>(u, u, 1, 0), i0));
    u = v128.load(a + step);
    v = f64x2.add(v, f64x2.add(f64x2.mul(u, r1), f64x2.mul(v128.shuffle<f64>(u, u, 1, 0), i1)));
    u = v128.load(a + s2);
    v = f64x2.add(v, f64x2.add(f64x2.mul(u, r2), f64x2.mul(v128.shuffle<f64>(u, u, 1, 0), i2)));
    u = v128.load(a + s3);
    v = f64x2.add(v, f64x2.add(f64x2.mul(u, r3), f64x2.mul(v128.shuffle<f64>(u, u, 1, 0), i3)));
    v128.store(y, f64x2.add(v128.load(y), v));
  }
}

function addOne(y: usize, a: usize, c: usize, bytes: usize): void {
  const re = v128.load64_splat(c);
  const im = turned(c + 8);
  for (const end = a + bytes; a < end; a += 16, y += 16) {
    const u = v128.load(a);
    const v = f64x2.add(f64x2.mul(u, re), f64x2.mul(v128.shuffle<f64>(u, u, 1, 0), im));
    v128.store(y, f64x2.add(v128.load(y), v));
  }
}

/** (−c, c). */
// @ts-ignore: decorator of AssemblyScript
@inline
function turned(at: usize): v128 {
  const c = load<f64>(at);
  return f64x2.replace_lane(f64x2.splat(c), 0, -c);
}
