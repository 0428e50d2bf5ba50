// Where does the map of a curved triangle send a point, and is it one to one?

import type { Point } from '../geometry/curves.ts';
import { lagrangeBasis, lagrangeInto, legendreDerivativesInto, legendreInto } from '../numerics/polynomials.ts';
import { gaussLegendre, gaussLobatto } from '../numerics/quadrature.ts';
import type { Mesh } from './mesh.ts';

/**
 * What the map of one triangle is made of, with barycentric coordinates λ₀ = 1 − l₁ − l₂, λ₁ = l₁, λ₂ = l₂:
 *
 *     X = Σ λᵢ xᵢ + Σ_edges λ_a λ_b φ(λ_b − λ_a),   φ(s) = 4 d(s) / (1 − s²)
 *
 * d(s) is the edge's curve minus its chord, s ∈ [−1, 1] from a to b. On the edge itself λ_a λ_b = (1 − s²)/4, so X is
 * the curve; inside, X is a polynomial of degree g.
 */
export interface TriangleCurves {
  /** [x0,y0,x1,y1,x2,y2]. */
  readonly corners: Float64Array;
  /**
   * Per local edge (from its first to its second local vertex) the Legendre coefficients of φ, interleaved:
   * [φx₀, φy₀, φx₁, φy₁, …], g − 1 pairs; null for a straight edge.
   */
  readonly bulges: readonly [Float64Array | null, Float64Array | null, Float64Array | null];
}

/** Rigorous bounds of det ∂X/∂(l₁, l₂) over a triangle (twice the area of a straight one). */
export interface JacobianBounds {
  readonly lower: number;
  readonly upper: number;
}

/** The map of triangle t. */
export function triangleCurves(mesh: Mesh, t: number): TriangleCurves {
  const { vertices, triangles, triangleEdges, edges } = mesh;
  const corners = new Float64Array(6);
  for (let i = 0; i < 3; i++) {
    const v = triangles[3 * t + i];
    corners[2 * i] = vertices[2 * v];
    corners[2 * i + 1] = vertices[2 * v + 1];
  }
  const bulge = (i: number): Float64Array | null => {
    const edge = triangleEdges[3 * t + i];
    const bulge = edgeBulge(mesh, edge);
    // Backwards: φ(−s), so odd coefficients change sign.
    if (bulge && edges[2 * edge] !== triangles[3 * t + i])
      for (let j = 2; j < bulge.length; j += 4) [bulge[j], bulge[j + 1]] = [-bulge[j], -bulge[j + 1]];
    return bulge;
  };
  return { corners, bulges: [bulge(0), bulge(1), bulge(2)] };
}

/** Legendre coefficients of φ from the edge's lower vertex to its higher one (see `TriangleCurves`); null if straight. */
export function edgeBulge(mesh: Mesh, edge: number): Float64Array | null {
  const curve = mesh.edgeCurve[edge];
  if (curve < 0) return null;
  const g = mesh.curveOrder;
  const first = 2 * (g + 1) * curve;
  return bulgeOfNodes(mesh.curves.subarray(first, first + 2 * (g + 1)));
}

/** Legendre coefficients of φ of the curve through the g + 1 Gauss–Lobatto points [x0,y0,…]. */
export function bulgeOfNodes(points: Float64Array): Float64Array {
  const g = points.length / 2 - 1;
  const { nodes, toLegendre } = transformOf(g);
  const n = g - 1;
  const coefficients = new Float64Array(2 * n);
  for (let j = 0; j < n; j++) {
    const s = nodes[j + 1];
    for (let i = 0; i < 2; i++) {
      const chord = ((1 - s) * points[i] + (1 + s) * points[2 * g + i]) / 2;
      const value = (4 * (points[2 * (j + 1) + i] - chord)) / (1 - s * s);
      for (let m = 0; m < n; m++) coefficients[2 * m + i] += toLegendre[m + j * n] * value;
    }
  }
  return coefficients;
}

/** X at the reference point (l₁, l₂) of triangle t. For many points of one triangle see `mapInto`. */
export function mapPoint(mesh: Mesh, t: number, l1: number, l2: number): Point {
  const out = mapInto(new Float64Array(6), triangleCurves(mesh, t), l1, l2);
  return [out[0], out[1]];
}

/** Writes [x, y, ∂x/∂l₁, ∂y/∂l₁, ∂x/∂l₂, ∂y/∂l₂] to `out`. */
export function mapInto(out: Float64Array, { corners, bulges }: TriangleCurves, l1: number, l2: number): Float64Array {
  const l0 = 1 - l1 - l2;
  for (let i = 0; i < 2; i++) {
    out[i] = l0 * corners[i] + l1 * corners[2 + i] + l2 * corners[4 + i];
    out[2 + i] = corners[2 + i] - corners[i];
    out[4 + i] = corners[4 + i] - corners[i];
  }
  for (let e = 0; e < 3; e++) {
    const bulge = bulges[e];
    if (!bulge) continue;
    const n = bulge.length / 2;
    if (legendre.length < n) [legendre, slopes] = [new Float64Array(n), new Float64Array(n)];
    const a = e === 0 ? l0 : e === 1 ? l1 : l2;
    const b = e === 0 ? l1 : e === 1 ? l2 : l0;
    legendreInto(legendre, n - 1, b - a);
    legendreDerivativesInto(slopes, legendre, n - 1);
    // Derivatives of λ_a and λ_b with respect to l₁ and l₂.
    const a1 = e === 0 ? -1 : e === 1 ? 1 : 0;
    const a2 = e === 0 ? -1 : e === 1 ? 0 : 1;
    const b1 = e === 0 ? 1 : e === 1 ? 0 : -1;
    const b2 = e === 0 ? 0 : e === 1 ? 1 : -1;
    for (let i = 0; i < 2; i++) {
      let phi = 0;
      let slope = 0;
      for (let m = 0; m < n; m++) {
        phi += bulge[2 * m + i] * legendre[m];
        slope += bulge[2 * m + i] * slopes[m];
      }
      out[i] += a * b * phi;
      out[2 + i] += (a1 * b + a * b1) * phi + a * b * slope * (b1 - a1);
      out[4 + i] += (a2 * b + a * b2) * phi + a * b * slope * (b2 - a2);
    }
  }
  return out;
}
let legendre = new Float64Array(16);
let slopes = new Float64Array(16);

export const jacobianBounds = (mesh: Mesh, t: number): JacobianBounds =>
  boundJacobian(triangleCurves(mesh, t), mesh.curveOrder);

/**
 * Bounds of the Jacobian determinant by its Bernstein coefficients (degree 2g − 2), whose smallest and largest enclose
 * it; the triangle is halved until they are within a twentieth of values really taken, or lower ≥ `enough` × upper, or
 * 64 times at most.
 */
export function boundJacobian({ corners, bulges }: TriangleCurves, g: number, enough = Infinity): JacobianBounds {
  if (!bulges[0] && !bulges[1] && !bulges[2]) {
    const [x0, y0, x1, y1, x2, y2] = corners;
    const twice = (x1 - x0) * (y2 - y0) - (y1 - y0) * (x2 - x0);
    return { lower: twice, upper: twice };
  }
  const n = 2 * g - 2;
  const whole = jacobianCoefficients({ corners, bulges }, g);
  let cells = [cellOf(whole, n)];
  // Values really taken, at corners of cells.
  let least = cells[0].least;
  let most = cells[0].most;
  for (let split = 0; split < 64; split++) {
    let worst = 0;
    for (let i = 1; i < cells.length; i++) if (cells[i].lower < cells[worst].lower) worst = i;
    let widest = 0;
    for (let i = 1; i < cells.length; i++) if (cells[i].upper > cells[widest].upper) widest = i;
    if (cells[worst].lower >= enough * cells[widest].upper) break;
    const slack = 0.05 * Math.abs(least);
    let chosen = worst;
    if (cells[worst].lower >= least - slack || least <= 0) {
      if (cells[widest].upper <= most + 0.05 * Math.abs(most)) break;
      chosen = widest;
    }
    const halves = halve(cells[chosen].coefficients, n).map((half) => cellOf(half, n));
    cells = [...cells.slice(0, chosen), ...halves, ...cells.slice(chosen + 1)];
    for (const half of halves) {
      least = Math.min(least, half.least);
      most = Math.max(most, half.most);
    }
  }
  return {
    lower: cells.reduce((low, cell) => Math.min(low, cell.lower), Infinity),
    upper: cells.reduce((high, cell) => Math.max(high, cell.upper), -Infinity),
  };
}

interface Cell {
  /** Bernstein coefficients over the cell. */
  readonly coefficients: Float64Array;
  readonly lower: number;
  readonly upper: number;
  readonly least: number;
  readonly most: number;
}

function cellOf(coefficients: Float64Array, n: number): Cell {
  let lower = Infinity;
  let upper = -Infinity;
  for (const c of coefficients) {
    lower = Math.min(lower, c);
    upper = Math.max(upper, c);
  }
  const ends = [coefficients[at(0, 0)], coefficients[at(n, 0)], coefficients[at(0, n)]];
  return { coefficients, lower, upper, least: Math.min(...ends), most: Math.max(...ends) };
}

/** Place of the coefficient of λ₀^(n−j−k) λ₁^j λ₂^k, whatever n. */
const at = (j: number, k: number): number => ((j + k) * (j + k + 1)) / 2 + k;
const terms = (n: number): number => ((n + 1) * (n + 2)) / 2;

/**
 * Cuts from the middle of side 0–1 to vertex 2 and turns both halves so that the next cut takes another side: children
 * (2, 0, m) and (1, 2, m), whose vertex m is opposite the side cut next.
 */
function halve(c: Float64Array, n: number): [Float64Array, Float64Array] {
  const first = new Float64Array(c.length);
  const second = new Float64Array(c.length);
  const row = new Float64Array(n + 1);
  for (let k = 0; k <= n; k++) {
    // For fixed k a polynomial of degree n − k along 0–1: de Casteljau at ½.
    const d = n - k;
    for (let j = 0; j <= d; j++) row[j] = c[at(j, k)];
    for (let r = 0; r <= d; r++) {
      // First child (0, m, 2) has exponents (d − r, r, k); as (2, 0, m): (k, d − r, r).
      first[at(d - r, r)] = row[0];
      // Second child (m, 1, 2) has exponents (r, d − r, k); as (1, 2, m): (d − r, k, r).
      second[at(k, r)] = row[d - r];
      for (let j = 0; j < d - r; j++) row[j] = (row[j] + row[j + 1]) / 2;
    }
  }
  return [first, second];
}

/** Bernstein coefficients, degree 2g − 2, of ∂x/∂l₁ ∂y/∂l₂ − ∂x/∂l₂ ∂y/∂l₁. */
function jacobianCoefficients({ corners, bulges }: TriangleCurves, g: number): Float64Array {
  // Homogeneous coefficients of both coordinates: linear part times (λ₀+λ₁+λ₂)^(g−1), then the bulges.
  const { linear, edges } = powersOf(g);
  const slopes: Float64Array[] = [];
  for (let i = 0; i < 2; i++) {
    const p = new Float64Array(terms(g));
    for (let v = 0; v < 3; v++) {
      const x = corners[2 * v + i] - corners[i];
      for (let q = 0; q < p.length; q++) p[q] += x * linear[v][q];
    }
    for (let e = 0; e < 3; e++) {
      const bulge = bulges[e];
      if (!bulge) continue;
      for (let m = 0; m < g - 1; m++) {
        const phi = bulge[2 * m + i];
        for (let q = 0; q < p.length; q++) p[q] += phi * edges[e][m][q];
      }
    }
    const [along0, along1, along2] = [0, 1, 2].map((v) => partial(p, g, v));
    slopes.push(
      along1.map((c, q) => c - along0[q]),
      along2.map((c, q) => c - along0[q]),
    );
  }
  const [x1, x2, y1, y2] = slopes;
  const n = 2 * g - 2;
  const product = multiply(x1, g - 1, y2, g - 1);
  const other = multiply(x2, g - 1, y1, g - 1);
  const factorials = new Float64Array(n + 1).fill(1);
  for (let i = 1; i <= n; i++) factorials[i] = i * factorials[i - 1];
  for (let j = 0; j <= n; j++)
    for (let k = 0; j + k <= n; k++)
      product[at(j, k)] =
        ((product[at(j, k)] - other[at(j, k)]) * factorials[j] * factorials[k] * factorials[n - j - k]) / factorials[n];
  return product;
}

/** ∂/∂λᵥ of a homogeneous polynomial of degree n. */
function partial(p: Float64Array, n: number, v: number): Float64Array {
  const result = new Float64Array(terms(n - 1));
  for (let j = 0; j <= n - 1; j++)
    for (let k = 0; j + k <= n - 1; k++) {
      const i = n - 1 - j - k;
      result[at(j, k)] =
        v === 0 ? (i + 1) * p[at(j, k)] : v === 1 ? (j + 1) * p[at(j + 1, k)] : (k + 1) * p[at(j, k + 1)];
    }
  return result;
}

/** Product of homogeneous polynomials of degrees n and m. */
function multiply(p: Float64Array, n: number, q: Float64Array, m: number): Float64Array {
  const result = new Float64Array(terms(n + m));
  for (let j = 0; j <= n; j++)
    for (let k = 0; j + k <= n; k++) {
      const c = p[at(j, k)];
      if (c === 0) continue;
      for (let u = 0; u <= m; u++) for (let w = 0; u + w <= m; w++) result[at(j + u, k + w)] += c * q[at(u, w)];
    }
  return result;
}

interface Transform {
  readonly nodes: Float64Array;
  /** Values at the inner Gauss–Lobatto nodes → Legendre coefficients, entry (m, j) at m + j (g−1). */
  readonly toLegendre: Float64Array;
}
const transforms = new Map<number, Transform>();

function transformOf(g: number): Transform {
  let transform = transforms.get(g);
  if (transform) return transform;
  const n = g - 1;
  const { nodes } = gaussLobatto(g + 1);
  const basis = lagrangeBasis(nodes.slice(1, g));
  const rule = gaussLegendre(n);
  const toLegendre = new Float64Array(n * n);
  const values = new Float64Array(n);
  const legendre = new Float64Array(n);
  for (let q = 0; q < n; q++) {
    lagrangeInto(values, basis, rule.nodes[q]);
    legendreInto(legendre, n - 1, rule.nodes[q]);
    for (let j = 0; j < n; j++)
      for (let m = 0; m < n; m++)
        toLegendre[m + j * n] += ((2 * m + 1) / 2) * rule.weights[q] * legendre[m] * values[j];
  }
  transform = { nodes, toLegendre };
  transforms.set(g, transform);
  return transform;
}

interface Powers {
  /** λᵥ (λ₀+λ₁+λ₂)^(g−1). */
  readonly linear: readonly Float64Array[];
  /** Per local edge and m: λ_a λ_b P_m(λ_b − λ_a), made homogeneous of degree g. */
  readonly edges: readonly (readonly Float64Array[])[];
}
const powers = new Map<number, Powers>();

function powersOf(g: number): Powers {
  let found = powers.get(g);
  if (found) return found;
  const one = Float64Array.of(1, 1, 1);
  const lambda = [0, 1, 2].map((v) => {
    const p = new Float64Array(3);
    p[v === 0 ? at(0, 0) : v === 1 ? at(1, 0) : at(0, 1)] = 1;
    return p;
  });
  const raise = (p: Float64Array, from: number, to: number): Float64Array => {
    let result = p;
    for (let d = from; d < to; d++) result = multiply(result, d, one, 1);
    return result;
  };
  const edges = [0, 1, 2].map((e) => {
    const a = lambda[e];
    const b = lambda[(e + 1) % 3];
    const s = b.map((c, q) => c - a[q]);
    const ab = multiply(a, 1, b, 1);
    // (m+1) P_{m+1} = (2m+1) s P_m − m σ² P_{m−1}
    const legendre = [Float64Array.of(1), s];
    for (let m = 1; m < g - 2; m++) {
      const up = multiply(s, 1, legendre[m], m);
      const down = raise(legendre[m - 1], m - 1, m + 1);
      legendre.push(up.map((c, q) => ((2 * m + 1) * c - m * down[q]) / (m + 1)));
    }
    return legendre.slice(0, g - 1).map((p, m) => raise(multiply(ab, 2, p, m), m + 2, g));
  });
  found = { linear: lambda.map((p) => raise(p, 1, g)), edges };
  powers.set(g, found);
  return found;
}
