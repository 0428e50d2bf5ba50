// Substitution with the panels of L for one right-hand side.

// x holds (re, im) a place; the front's rows are two planes of nf numbers in `local`.

export function forwardOne(
  first: i32,
  last: i32,
  l: usize,
  pivotStarts: usize,
  boundaryStarts: usize,
  order: usize,
  boundary: usize,
  d: usize,
  x: usize,
  local: usize,
): void {
  for (let f = first; f < last; f++) {
    const place = load<i32>(pivotStarts + ((<usize>f) << 2));
    const np = load<i32>(pivotStarts + ((<usize>f) << 2), 4) - place;
    const from = load<i32>(boundaryStarts + ((<usize>f) << 2));
    const nb = load<i32>(boundaryStarts + ((<usize>f) << 2), 4) - from;
    const plane = (<usize>((np + nb) * np)) << 3;
    gatherForwardOne(x, order + ((<usize>place) << 2), np, nb, local);
    forwardColumnsOne(l, plane, np + nb, 0, np, local);
    scatterForwardOne(x, order + ((<usize>place) << 2), boundary + ((<usize>from) << 2), np, nb, local, d + ((<usize>place) << 5));
    l += plane + plane;
  }
}

export function backwardOne(
  first: i32,
  last: i32,
  l: usize,
  pivotStarts: usize,
  boundaryStarts: usize,
  order: usize,
  boundary: usize,
  x: usize,
  local: usize,
): void {
  for (let f = last - 1; f >= first; f--) {
    const place = load<i32>(pivotStarts + ((<usize>f) << 2));
    const np = load<i32>(pivotStarts + ((<usize>f) << 2), 4) - place;
    const from = load<i32>(boundaryStarts + ((<usize>f) << 2));
    const nb = load<i32>(boundaryStarts + ((<usize>f) << 2), 4) - from;
    const plane = (<usize>((np + nb) * np)) << 3;
    l -= plane + plane;
    gatherBackwardOne(x, order + ((<usize>place) << 2), boundary + ((<usize>from) << 2), np, nb, local);
    backwardColumnsOne(l, plane, np + nb, 0, np, local);
    scatterBackwardOne(x, order + ((<usize>place) << 2), np, np + nb, local);
  }
}

export function gatherForwardOne(x: usize, rows: usize, np: i32, nb: i32, local: usize): void {
  const im = (<usize>(np + nb)) << 3;
  for (let j = 0; j < np; j++, local += 8) {
    const at = x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 4);
    store<f64>(local, load<f64>(at));
    store<f64>(local + im, load<f64>(at, 8));
  }
  for (let i = 0; i < nb; i++, local += 8) {
    store<f64>(local, 0);
    store<f64>(local + im, 0);
  }
}

export function scatterForwardOne(x: usize, rows: usize, edge: usize, np: i32, nb: i32, local: usize, d: usize): void {
  const im = (<usize>(np + nb)) << 3;
  let from = local + ((<usize>np) << 3);
  for (let i = 0; i < nb; i++, from += 8) {
    const to = x + ((<usize>load<i32>(edge + ((<usize>i) << 2))) << 4);
    store<f64>(to, load<f64>(to) + load<f64>(from));
    store<f64>(to, load<f64>(to, 8) + load<f64>(from + im), 8);
  }
  from = local;
  for (let j = 0; j < np; j++, from += 8, d += 32) {
    const to = x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 4);
    const pr = load<f64>(d);
    const pi = load<f64>(d, 8);
    const qr = load<f64>(d, 16);
    const qi = load<f64>(d, 24);
    const ar = load<f64>(from);
    const ai = load<f64>(from + im);
    let ur = ar * pr - ai * pi;
    let ui = ar * pi + ai * pr;
    if (qr != 0 || qi != 0) {
      const cr = load<f64>(d, 32);
      const ci = load<f64>(d, 40);
      const br = load<f64>(from, 8);
      const bi = load<f64>(from + im, 8);
      ur = ur + br * qr - bi * qi;
      ui = ui + br * qi + bi * qr;
      const next = x + ((<usize>load<i32>(rows + ((<usize>j) << 2), 4)) << 4);
      store<f64>(next, ar * qr - ai * qi + br * cr - bi * ci);
      store<f64>(next, ar * qi + ai * qr + br * ci + bi * cr, 8);
      store<f64>(to, ur);
      store<f64>(to, ui, 8);
      j++;
      from += 8;
      d += 32;
    } else {
      store<f64>(to, ur);
      store<f64>(to, ui, 8);
    }
  }
}

export function gatherBackwardOne(x: usize, rows: usize, edge: usize, np: i32, nb: i32, local: usize): void {
  const im = (<usize>(np + nb)) << 3;
  for (let j = 0; j < np; j++, local += 8) {
    const at = x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 4);
    store<f64>(local, load<f64>(at));
    store<f64>(local + im, load<f64>(at, 8));
  }
  for (let i = 0; i < nb; i++, local += 8) {
    const at = x + ((<usize>load<i32>(edge + ((<usize>i) << 2))) << 4);
    store<f64>(local, load<f64>(at));
    store<f64>(local + im, load<f64>(at, 8));
  }
}

export function scatterBackwardOne(x: usize, rows: usize, np: i32, nf: i32, local: usize): void {
  const im = (<usize>nf) << 3;
  for (let j = 0; j < np; j++, local += 8) {
    const at = x + ((<usize>load<i32>(rows + ((<usize>j) << 2))) << 4);
    store<f64>(at, load<f64>(local));
    store<f64>(at, load<f64>(local + im), 8);
  }
}

/** Columns first..last of L (column `first` at l) taken out of all rows below them, two columns at a time. */
export function forwardColumnsOne(l: usize, plane: usize, nf: i32, first: i32, last: i32, local: usize): void {
  const ld = (<usize>nf) << 3;
  const im = ld;
  const end = local + ld;
  for (let j = first; j < last; j += 2) {
    let a = l + <usize>(j - first) * ld + ((<usize>(j + 1)) << 3);
    let y = local + ((<usize>(j + 1)) << 3);
    const ur = load<f64>(y - 8);
    const ui = load<f64>(y - 8 + im);
    if (j + 1 == last) {
      for (; y < end; y += 8, a += 8) {
        const ar = load<f64>(a);
        const ai = load<f64>(a + plane);
        store<f64>(y, load<f64>(y) - (ar * ur - ai * ui));
        store<f64>(y + im, load<f64>(y + im) - (ar * ui + ai * ur));
      }
      return;
    }
    let ar = load<f64>(a);
    let ai = load<f64>(a + plane);
    const vr = load<f64>(y) - (ar * ur - ai * ui);
    const vi = load<f64>(y + im) - (ar * ui + ai * ur);
    store<f64>(y, vr);
    store<f64>(y + im, vi);
    y += 8;
    a += 8;
    let b = a + ld;
    const sr = f64x2.splat(ur);
    const si = f64x2.splat(ui);
    const tr = f64x2.splat(vr);
    const ti = f64x2.splat(vi);
    for (; y + 8 < end; y += 16, a += 16, b += 16) {
      const cr = v128.load(a);
      const ci = v128.load(a + plane);
      const er = v128.load(b);
      const ei = v128.load(b + plane);
      v128.store(
        y,
        f64x2.sub(
          v128.load(y),
          f64x2.add(
            f64x2.sub(f64x2.mul(cr, sr), f64x2.mul(ci, si)),
            f64x2.sub(f64x2.mul(er, tr), f64x2.mul(ei, ti)),
          ),
        ),
      );
      v128.store(
        y + im,
        f64x2.sub(
          v128.load(y + im),
          f64x2.add(
            f64x2.add(f64x2.mul(cr, si), f64x2.mul(ci, sr)),
            f64x2.add(f64x2.mul(er, ti), f64x2.mul(ei, tr)),
          ),
        ),
      );
    }
    if (y < end) {
      ar = load<f64>(a);
      ai = load<f64>(a + plane);
      const br = load<f64>(b);
      const bi = load<f64>(b + plane);
      store<f64>(y, load<f64>(y) - (ar * ur - ai * ui + br * vr - bi * vi));
      store<f64>(y + im, load<f64>(y + im) - (ar * ui + ai * ur + br * vi + bi * vr));
    }
  }
}

/** Columns last-1 … first of L: each pivot row minus the product of its column with the rows below it. */
export function backwardColumnsOne(l: usize, plane: usize, nf: i32, first: i32, last: i32, local: usize): void {
  const ld = (<usize>nf) << 3;
  const im = ld;
  const end = local + ld;
  for (let j = last - 1; j >= first; j -= 2) {
    // Columns j − 1 (a) and j (b), or j alone.
    const alone = j == first;
    let b = l + <usize>(j - first) * ld + ((<usize>(j + 1)) << 3);
    let a = alone ? b : b - ld;
    let y = local + ((<usize>(j + 1)) << 3);
    let pr = f64x2.splat(0);
    let pi = pr;
    let qr = pr;
    let qi = pr;
    for (; y + 8 < end; y += 16, a += 16, b += 16) {
      const yr = v128.load(y);
      const yi = v128.load(y + im);
      let cr = v128.load(b);
      let ci = v128.load(b + plane);
      qr = f64x2.add(qr, f64x2.sub(f64x2.mul(cr, yr), f64x2.mul(ci, yi)));
      qi = f64x2.add(qi, f64x2.add(f64x2.mul(cr, yi), f64x2.mul(ci, yr)));
      cr = v128.load(a);
      ci = v128.load(a + plane);
      pr = f64x2.add(pr, f64x2.sub(f64x2.mul(cr, yr), f64x2.mul(ci, yi)));
      pi = f64x2.add(pi, f64x2.add(f64x2.mul(cr, yi), f64x2.mul(ci, yr)));
    }
    let sr = f64x2.extract_lane(qr, 0) + f64x2.extract_lane(qr, 1);
    let si = f64x2.extract_lane(qi, 0) + f64x2.extract_lane(qi, 1);
    let tr = f64x2.extract_lane(pr, 0) + f64x2.extract_lane(pr, 1);
    let ti = f64x2.extract_lane(pi, 0) + f64x2.extract_lane(pi, 1);
    if (y < end) {
      const yr = load<f64>(y);
      const yi = load<f64>(y + im);
      let cr = load<f64>(b);
      let ci = load<f64>(b + plane);
      sr += cr * yr - ci * yi;
      si += cr * yi + ci * yr;
      cr = load<f64>(a);
      ci = load<f64>(a + plane);
      tr += cr * yr - ci * yi;
      ti += cr * yi + ci * yr;
    }
    const at = local + ((<usize>j) << 3);
    const xr = load<f64>(at) - sr;
    const xi = load<f64>(at + im) - si;
    store<f64>(at, xr);
    store<f64>(at + im, xi);
    if (alone) return;
    // Row j is below column j − 1 too.
    const c = l + <usize>(j - 1 - first) * ld + ((<usize>j) << 3);
    const cr = load<f64>(c);
    const ci = load<f64>(c + plane);
    store<f64>(at - 8, load<f64>(at - 8) - (tr + (cr * xr - ci * xi)));
    store<f64>(at - 8 + im, load<f64>(at - 8 + im) - (ti + (cr * xi + ci * xr)));
  }
}
