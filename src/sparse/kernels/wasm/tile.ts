// The inner product that does nearly all the arithmetic: a 4 × 4 tile of C −= L Wᵀ.

/** A 4 × 4 complex tile for edges; each thread has its own. */
export let tileAt: usize = 64;

export function setTile(at: usize): void {
  tileAt = at;
}

export function clearTile(): void {
  memory.fill(tileAt, 0, 256);
}

/**
 * c: 4 × 4 complex tile, columns ld bytes apart, imaginary plane `plane` bytes on. l, w: slabs, per k 4 real then 4
 * imaginary parts (64 bytes). Two columns at a time: 8 sums, 4 factors and a splat fill the 16 vector registers;
 * two steps a turn of the loop, which spares it the moves between its turns.
 */
export function updateTile(c: usize, ld: usize, plane: usize, l: usize, w: usize, n: i32): void {
  updateHalf(c, ld, plane, l, w, n);
  updateHalf(c + ld + ld, ld, plane, l, w + 16, n);
}

function updateHalf(c: usize, ld: usize, plane: usize, l: usize, w: usize, n: i32): void {
  let r0 = f64x2.splat(0);
  let r1 = r0;
  let i0 = r0;
  let i1 = r0;
  let s0 = r0;
  let s1 = r0;
  let j0 = r0;
  let j1 = r0;
  const end = l + ((<usize>n) << 6);
  if (n & 1) {
    const ar = v128.load(l);
    const br = v128.load(l, 16);
    const ai = v128.load(l, 32);
    const bi = v128.load(l, 48);
    let b = v128.load64_splat(w);
    r0 = f64x2.add(r0, f64x2.mul(ar, b));
    r1 = f64x2.add(r1, f64x2.mul(br, b));
    i0 = f64x2.add(i0, f64x2.mul(ai, b));
    i1 = f64x2.add(i1, f64x2.mul(bi, b));
    b = v128.load64_splat(w, 32);
    r0 = f64x2.sub(r0, f64x2.mul(ai, b));
    r1 = f64x2.sub(r1, f64x2.mul(bi, b));
    i0 = f64x2.add(i0, f64x2.mul(ar, b));
    i1 = f64x2.add(i1, f64x2.mul(br, b));
    b = v128.load64_splat(w, 8);
    s0 = f64x2.add(s0, f64x2.mul(ar, b));
    s1 = f64x2.add(s1, f64x2.mul(br, b));
    j0 = f64x2.add(j0, f64x2.mul(ai, b));
    j1 = f64x2.add(j1, f64x2.mul(bi, b));
    b = v128.load64_splat(w, 40);
    s0 = f64x2.sub(s0, f64x2.mul(ai, b));
    s1 = f64x2.sub(s1, f64x2.mul(bi, b));
    j0 = f64x2.add(j0, f64x2.mul(ar, b));
    j1 = f64x2.add(j1, f64x2.mul(br, b));
    l += 64;
    w += 64;
  }
  for (; l < end; l += 128, w += 128) {
    let ar = v128.load(l);
    let br = v128.load(l, 16);
    let ai = v128.load(l, 32);
    let bi = v128.load(l, 48);
    let b = v128.load64_splat(w);
    r0 = f64x2.add(r0, f64x2.mul(ar, b));
    r1 = f64x2.add(r1, f64x2.mul(br, b));
    i0 = f64x2.add(i0, f64x2.mul(ai, b));
    i1 = f64x2.add(i1, f64x2.mul(bi, b));
    b = v128.load64_splat(w, 32);
    r0 = f64x2.sub(r0, f64x2.mul(ai, b));
    r1 = f64x2.sub(r1, f64x2.mul(bi, b));
    i0 = f64x2.add(i0, f64x2.mul(ar, b));
    i1 = f64x2.add(i1, f64x2.mul(br, b));
    b = v128.load64_splat(w, 8);
    s0 = f64x2.add(s0, f64x2.mul(ar, b));
    s1 = f64x2.add(s1, f64x2.mul(br, b));
    j0 = f64x2.add(j0, f64x2.mul(ai, b));
    j1 = f64x2.add(j1, f64x2.mul(bi, b));
    b = v128.load64_splat(w, 40);
    s0 = f64x2.sub(s0, f64x2.mul(ai, b));
    s1 = f64x2.sub(s1, f64x2.mul(bi, b));
    j0 = f64x2.add(j0, f64x2.mul(ar, b));
    j1 = f64x2.add(j1, f64x2.mul(br, b));
    ar = v128.load(l, 64);
    br = v128.load(l, 80);
    ai = v128.load(l, 96);
    bi = v128.load(l, 112);
    b = v128.load64_splat(w, 64);
    r0 = f64x2.add(r0, f64x2.mul(ar, b));
    r1 = f64x2.add(r1, f64x2.mul(br, b));
    i0 = f64x2.add(i0, f64x2.mul(ai, b));
    i1 = f64x2.add(i1, f64x2.mul(bi, b));
    b = v128.load64_splat(w, 96);
    r0 = f64x2.sub(r0, f64x2.mul(ai, b));
    r1 = f64x2.sub(r1, f64x2.mul(bi, b));
    i0 = f64x2.add(i0, f64x2.mul(ar, b));
    i1 = f64x2.add(i1, f64x2.mul(br, b));
    b = v128.load64_splat(w, 72);
    s0 = f64x2.add(s0, f64x2.mul(ar, b));
    s1 = f64x2.add(s1, f64x2.mul(br, b));
    j0 = f64x2.add(j0, f64x2.mul(ai, b));
    j1 = f64x2.add(j1, f64x2.mul(bi, b));
    b = v128.load64_splat(w, 104);
    s0 = f64x2.sub(s0, f64x2.mul(ai, b));
    s1 = f64x2.sub(s1, f64x2.mul(bi, b));
    j0 = f64x2.add(j0, f64x2.mul(ar, b));
    j1 = f64x2.add(j1, f64x2.mul(br, b));
  }
  v128.store(c, f64x2.sub(v128.load(c), r0));
  v128.store(c, f64x2.sub(v128.load(c, 16), r1), 16);
  let at = c + plane;
  v128.store(at, f64x2.sub(v128.load(at), i0));
  v128.store(at, f64x2.sub(v128.load(at, 16), i1), 16);
  at = c + ld;
  v128.store(at, f64x2.sub(v128.load(at), s0));
  v128.store(at, f64x2.sub(v128.load(at, 16), s1), 16);
  at += plane;
  v128.store(at, f64x2.sub(v128.load(at), j0));
  v128.store(at, f64x2.sub(v128.load(at, 16), j1), 16);
}
