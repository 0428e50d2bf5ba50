// What are the values and slopes of Legendre, integrated Legendre, Jacobi and Lagrange polynomials?

/**
 * Scaled Legendre polynomials t^j P_j(x/t), j = 0…n, into `values[0..n]`. No division by t; t = 1 gives P_j(x).
 *
 *     (j+1) P_{j+1} = (2j+1) x P_j − j t² P_{j−1}          (DLMF 18.9.1, homogenised)
 *
 * @returns `values`.
 */
export function scaledLegendreInto(values: Float64Array, n: number, x: number, t: number): Float64Array {
  values[0] = 1;
  if (n === 0) return values;
  values[1] = x;
  const tt = t * t;
  for (let j = 1; j < n; j++) values[j + 1] = ((2 * j + 1) * x * values[j] - j * tt * values[j - 1]) / (j + 1);
  return values;
}

/** Legendre polynomials P_0(x) … P_n(x) into `values[0..n]`; see `scaledLegendreInto`. Error on [−1, 1] below 2e-15 (n ≤ 60). */
export const legendreInto = (values: Float64Array, n: number, x: number): Float64Array =>
  scaledLegendreInto(values, n, x, 1);

/**
 * Derivatives P_0′(x) … P_n′(x) into `slopes[0..n]`: P′_{j+1} = P′_{j−1} + (2j+1) P_j (DLMF 18.9.7 with 18.9.19, λ = ½),
 * which holds at the ends of the interval too. `values` are those of `legendreInto`.
 */
export function legendreDerivativesInto(slopes: Float64Array, values: Float64Array, n: number): Float64Array {
  slopes[0] = 0;
  if (n === 0) return slopes;
  slopes[1] = 1;
  for (let j = 1; j < n; j++) slopes[j + 1] = slopes[j - 1] + (2 * j + 1) * values[j];
  return slopes;
}

/**
 * Integrated Legendre polynomials L_j(x) = ∫_{−1}^{x} P_{j−1} = (P_j − P_{j−2})/(2j−1), j = 2…n, into `values[j]`;
 * their slopes L_j′ = P_{j−1} into `slopes[j]`. They vanish at both ends. Entries 0 and 1 are set to 0.
 */
export function integratedLegendreInto(values: Float64Array, slopes: Float64Array, n: number, x: number): void {
  const unused = new Float64Array(n + 1);
  scaledIntegratedLegendreInto(values, slopes, unused, n, x, 1);
}

/**
 * Scaled integrated Legendre polynomials L_j^S(x, t) = t^j L_j(x/t), j = 2…n, with both partial derivatives.
 *
 *     j L^S_j = (2j−3) x L^S_{j−1} − (j−3) t² L^S_{j−2},   L^S_2 = (x² − t²)/2
 *     ∂L^S_j/∂x = P^S_{j−1},   ∂L^S_j/∂t = −t P^S_{j−2}
 *
 * For an edge between barycentric coordinates λa, λb of a triangle: x = λb − λa, t = λa + λb.
 * Entries 0 and 1 of every output (length ≥ n+1) are set to 0.
 * Source: S. Zaglmayr, High Order Finite Element Methods for Electromagnetic Field Computation, thesis, Linz 2006.
 */
export function scaledIntegratedLegendreInto(
  values: Float64Array,
  alongX: Float64Array,
  alongT: Float64Array,
  n: number,
  x: number,
  t: number,
): void {
  values[0] = alongX[0] = alongT[0] = 0;
  if (n === 0) return;
  values[1] = alongX[1] = alongT[1] = 0;
  const tt = t * t;
  let p0 = 1; // P^S_{j−2}
  let p1 = x; // P^S_{j−1}
  for (let j = 2; j <= n; j++) {
    if (j === 2) values[2] = (x - t) * (x + t) * 0.5;
    else values[j] = ((2 * j - 3) * x * values[j - 1] - (j - 3) * tt * values[j - 2]) / j;
    alongX[j] = p1;
    alongT[j] = -t * p0;
    const p2 = ((2 * j - 1) * x * p1 - (j - 1) * tt * p0) / j;
    p0 = p1;
    p1 = p2;
  }
}

/**
 * Jacobi polynomials P_j^{(a,b)}(x), j = 0…n, into `values[j]` (DLMF 18.9.2), standard normalisation
 * P_j^{(a,b)}(1) = (j+a choose j). a, b > −1.
 */
export function jacobiInto(values: Float64Array, n: number, a: number, b: number, x: number): Float64Array {
  values[0] = 1;
  if (n === 0) return values;
  values[1] = (a - b + (a + b + 2) * x) / 2;
  for (let j = 1; j < n; j++) {
    const s = 2 * j + a + b;
    const c1 = 2 * (j + 1) * (j + a + b + 1) * s;
    const c2 = (s + 1) * (a - b) * (a + b);
    const c3 = s * (s + 1) * (s + 2);
    const c4 = 2 * (j + a) * (j + b) * (s + 2);
    values[j + 1] = ((c2 + c3 * x) * values[j] - c4 * values[j - 1]) / c1;
  }
  return values;
}

/** Slopes of `jacobiInto`: dP_j^{(a,b)}/dx = (j+a+b+1)/2 · P_{j−1}^{(a+1,b+1)} (DLMF 18.9.15), into `slopes[0..n]`. */
export function jacobiDerivativesInto(slopes: Float64Array, n: number, a: number, b: number, x: number): Float64Array {
  if (n > 0) jacobiInto(slopes, n - 1, a + 1, b + 1, x);
  for (let j = n; j > 0; j--) slopes[j] = (slopes[j - 1] * (j + a + b + 1)) / 2;
  slopes[0] = 0;
  return slopes;
}

/** What Lagrange interpolation on fixed nodes needs. */
export interface LagrangeBasis {
  /** n distinct nodes. */
  readonly nodes: Float64Array;
  /** Barycentric weights w_j = 1 / Π_{k≠j} (x_j − x_k). */
  readonly weights: Float64Array;
  /** ℓ_j′(x_i) at i + j n (column-major): nodal values → slopes at the nodes. */
  readonly differentiation: Float64Array;
}

/**
 * Barycentric weights and differentiation matrix of the given nodes; the diagonal is minus the sum of the rest of its
 * row, so that constants have slope 0 exactly up to rounding.
 *
 * @throws RangeError when two nodes coincide.
 * Source: J.-P. Berrut, L. N. Trefethen, Barycentric Lagrange interpolation, SIAM Review 46, 501 (2004), §3 and §9.3.
 */
export function lagrangeBasis(nodes: Float64Array): LagrangeBasis {
  const n = nodes.length;
  const weights = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    let product = 1;
    for (let k = 0; k < n; k++) if (k !== j) product *= nodes[j] - nodes[k];
    if (product === 0)
      throw new RangeError(`lagrangeBasis: node ${j} (${nodes[j]}) comes twice; nodes must be distinct`);
    weights[j] = 1 / product;
  }
  const differentiation = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) {
      if (j === i) continue;
      const d = weights[j] / weights[i] / (nodes[i] - nodes[j]);
      differentiation[i + j * n] = d;
      sum += d;
    }
    differentiation[i + i * n] = -sum;
  }
  return { nodes: Float64Array.from(nodes), weights, differentiation };
}

/**
 * Lagrange polynomials ℓ_0(x) … ℓ_{n−1}(x) into `values`, by products from both sides: ℓ_j = w_j Π_{k≠j} (x − x_k)
 * without a division, so exact at the nodes.
 */
export function lagrangeInto(values: Float64Array, basis: LagrangeBasis, x: number): Float64Array {
  const { nodes, weights } = basis;
  const n = nodes.length;
  let below = 1;
  for (let j = 0; j < n; j++) {
    values[j] = weights[j] * below;
    below *= x - nodes[j];
  }
  let above = 1;
  for (let j = n - 1; j >= 0; j--) {
    values[j] *= above;
    above *= x - nodes[j];
  }
  return values;
}

/**
 * Slopes ℓ_j′(x) into `slopes`: ℓ_j′ has a lower degree than the basis, so it is its own interpolant,
 * ℓ_j′(x) = Σ_i D_ij ℓ_i(x); no cancellation near nodes. `values` are those of `lagrangeInto` at the same x.
 */
export function lagrangeDerivativesInto(
  slopes: Float64Array,
  values: Float64Array,
  basis: LagrangeBasis,
): Float64Array {
  const n = basis.nodes.length;
  const d = basis.differentiation;
  for (let j = 0; j < n; j++) {
    let sum = 0;
    for (let i = 0; i < n; i++) sum += d[i + j * n] * values[i];
    slopes[j] = sum;
  }
  return slopes;
}
