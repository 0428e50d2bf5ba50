// How are tall real matrices multiplied, column by column, without leaving the cache?

/** Rows taken together: eight columns of them stay in the first cache. */
const STRIP = 512;

/** AᵀB of p columns A and q columns B with n rows each: p × q, column-major. */
export function transposeTimes(A: Float64Array, p: number, B: Float64Array, q: number, n: number): Float64Array {
  const out = new Float64Array(p * q);
  for (let from = 0; from < n; from += STRIP) {
    const to = Math.min(n, from + STRIP);
    for (let j = 0; j < q; j += 2) {
      const b0 = j * n;
      const b1 = Math.min(j + 1, q - 1) * n;
      for (let i = 0; i < p; i += 4) {
        const last = p - 1;
        const a0 = i * n;
        const a1 = Math.min(i + 1, last) * n;
        const a2 = Math.min(i + 2, last) * n;
        const a3 = Math.min(i + 3, last) * n;
        let s00 = 0;
        let s10 = 0;
        let s20 = 0;
        let s30 = 0;
        let s01 = 0;
        let s11 = 0;
        let s21 = 0;
        let s31 = 0;
        for (let k = from; k < to; k++) {
          const y0 = B[b0 + k];
          const y1 = B[b1 + k];
          const x0 = A[a0 + k];
          const x1 = A[a1 + k];
          const x2 = A[a2 + k];
          const x3 = A[a3 + k];
          s00 += x0 * y0;
          s10 += x1 * y0;
          s20 += x2 * y0;
          s30 += x3 * y0;
          s01 += x0 * y1;
          s11 += x1 * y1;
          s21 += x2 * y1;
          s31 += x3 * y1;
        }
        const at = i + j * p;
        const rows = Math.min(4, p - i);
        out[at] += s00;
        if (rows > 1) out[at + 1] += s10;
        if (rows > 2) out[at + 2] += s20;
        if (rows > 3) out[at + 3] += s30;
        if (j + 1 === q) continue;
        out[at + p] += s01;
        if (rows > 1) out[at + p + 1] += s11;
        if (rows > 2) out[at + p + 2] += s21;
        if (rows > 3) out[at + p + 3] += s31;
      }
    }
  }
  return out;
}

/** Y += factor · X C in place: Y has q columns, X p, C is p × q column-major, n rows. */
export function addTimes(
  Y: Float64Array,
  q: number,
  X: Float64Array,
  p: number,
  C: Float64Array,
  n: number,
  factor = 1,
): void {
  for (let from = 0; from < n; from += STRIP) {
    const to = Math.min(n, from + STRIP);
    for (let j = 0; j < q; j++) {
      const y = j * n;
      let i = 0;
      for (; i + 4 <= p; i += 4) {
        const c0 = factor * C[i + j * p];
        const c1 = factor * C[i + 1 + j * p];
        const c2 = factor * C[i + 2 + j * p];
        const c3 = factor * C[i + 3 + j * p];
        const x0 = i * n;
        const x1 = x0 + n;
        const x2 = x1 + n;
        const x3 = x2 + n;
        for (let k = from; k < to; k++) Y[y + k] += c0 * X[x0 + k] + c1 * X[x1 + k] + c2 * X[x2 + k] + c3 * X[x3 + k];
      }
      for (; i < p; i++) {
        const c = factor * C[i + j * p];
        const x = i * n;
        for (let k = from; k < to; k++) Y[y + k] += c * X[x + k];
      }
    }
  }
}

/** L with G = LLᵀ (lower, column-major n × n) of a symmetric positive definite matrix; null where it is not. */
export function choleskyFactor(G: Float64Array, n: number): Float64Array | null {
  const L = Float64Array.from(G);
  for (let j = 0; j < n; j++) {
    for (let k = 0; k < j; k++) {
      const c = L[j + k * n];
      if (c !== 0) for (let i = j; i < n; i++) L[i + j * n] -= c * L[i + k * n];
    }
    const d = L[j + j * n];
    if (!(d > 0)) return null;
    const s = 1 / Math.sqrt(d);
    for (let i = j; i < n; i++) L[i + j * n] *= s;
    for (let i = 0; i < j; i++) L[i + j * n] = 0;
  }
  return L;
}
