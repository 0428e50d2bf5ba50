// Bessel functions J_0 … J_M of a real argument, fast enough for every quadrature point.

/**
 * Fills out[0 … M] with J_m(x), x ≥ 0, by Miller's downward recurrence normalised with J_0 + 2ΣJ_{2m} = 1
 * (DLMF 10.6.1, 10.12.4). Relative error a few 1e-16 for m > x, absolute for m < x, up to x = 200 (against mpmath).
 */
export function besselJRealInto(out: Float64Array, M: number, x: number): Float64Array {
  if (!(x >= 0)) throw new RangeError(`besselJRealInto: x = ${x}; expected x ≥ 0`);
  out.fill(0, 0, M + 1);
  if (x < 1e-50) {
    out[0] = 1;
    return out;
  }
  // far enough above both M and x that the start is below rounding
  const base = Math.max(M, x);
  let m = 2 * Math.ceil((base + 8 + Math.cbrt(base) * 9) / 2);
  let above = 0;
  let here = 1e-280;
  let sum = 0;
  const two = 2 / x;
  for (; m > 0; m--) {
    const below = m * two * here - above;
    above = here;
    here = below;
    if (m - 1 <= M) out[m - 1] = here;
    if ((m & 1) === 1 && m > 1) sum += here;
    if (Math.abs(here) > 1e250) {
      here *= 1e-250;
      above *= 1e-250;
      sum *= 1e-250;
      for (let i = m - 1; i <= M; i++) out[i] = out[i] * 1e-250;
    }
  }
  const scale = 1 / (here + 2 * sum);
  for (let i = 0; i <= M; i++) out[i] = out[i] * scale;
  return out;
}
