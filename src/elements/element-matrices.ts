// What are the stiffness and mass matrices of one triangle?

import { LAYER } from '../mesh/mesh.ts';
import { triangleRule } from '../numerics/quadrature.ts';
import { functionCount, tabulateBasis } from './basis.ts';
import { isCurved, MAP_STRIDE, mapInto, tabulateMap } from './curved-map.ts';
import { type DenseKernels, type ElementTables, makeDenseKernels } from '../sparse/kernels/dense-kernels.ts';
import { largestElement, type Space } from './space.ts';

/**
 * Complex coefficients of one point: ∇uᵀT∇v with the symmetric tensor T = [[t11,t12],[t12,t22]], and m·u·v, as
 * [Re t11, Im t11, Re t12, Im t12, Re t22, Im t22, Re m, Im m].
 */
export type PointCoefficients = (x: number, y: number, out: Float64Array) => void;

/**
 * Matrices of every triangle for unit material, so that A = Σ_t p_t K_t − k² q_t M_t. Inside the rim they are real
 * (nd² numbers, symmetric); in the layer complex, interleaved (2nd²). Signs of the space are folded in.
 */
export interface ElementMatrices {
  readonly stiffness: readonly Float64Array[];
  readonly mass: readonly Float64Array[];
  /** 1 where the triangle's matrices are complex (the stretched layer). */
  readonly complex: Uint8Array;
  /** Absent without compiled kernels. */
  readonly store?: ElementStore;
}

/** What the compiled product needs: everything in one memory. */
export interface ElementStore {
  readonly kernels: DenseKernels;
  readonly tables: ElementTables;
  /** Room for the weights of so many regions, and for COLUMNS columns of x and of the product. */
  readonly regions: number;
  readonly weights: number;
  readonly x: number;
  readonly out: number;
}

/** Columns that are multiplied together. */
export const COLUMNS = 8;

/** Quadrature degree beyond 2p that curved maps (degree 10, fast-decaying) and stretched layers ask for. */
const EXTRA_DEGREE = 8;

/** Assembles all element matrices; `layer` gives the coefficients in region LAYER. */
export function assembleElements(space: Space, layer: PointCoefficients): ElementMatrices {
  const { mesh, starts } = space;
  const triangles = mesh.triangles.length / 3;
  const stiffness: Float64Array[] = new Array<Float64Array>(triangles);
  const mass: Float64Array[] = new Array<Float64Array>(triangles);
  const complex = new Uint8Array(triangles);
  for (let t = 0; t < triangles; t++) complex[t] = mesh.regions[t] === LAYER ? 1 : 0;
  const reference = referenceMatrices(space.order);
  const degrees = degreesOf(space);
  const tables = new Map<number, Tables>();
  let room = 0;
  for (const degree of [...new Set(degrees)].sort((a, b) => a - b)) {
    const made = makeTables(degree, mesh.curveOrder, room);
    tables.set(degree, made);
    room += workNumbers(made.basis.points, functionCount(degree));
  }
  const store = makeStore(space, complex, largestElement(space), room);
  const works = new Map<number, Work>();
  for (const [degree, { basis, at }] of tables)
    works.set(degree, makeWork(basis.points, functionCount(degree), store?.kernels, at));
  for (let t = 0; t < triangles; t++) {
    const { rule, basis, table } = tables.get(degrees[t])!;
    const work = works.get(degrees[t])!;
    const functions = space.functions.subarray(starts[t], starts[t + 1]);
    const signs = space.signs.subarray(starts[t], starts[t + 1]);
    const nd = functions.length;
    const width = complex[t] ? 2 : 1;
    const length = width * nd * nd;
    const at = store ? store.kernels.integers[store.tables.places + t] : 0;
    stiffness[t] = store ? store.kernels.numbers.subarray(at, at + length) : new Float64Array(length);
    mass[t] = store ? store.kernels.numbers.subarray(at + length, at + 2 * length) : new Float64Array(length);
    mapInto(work.map, mesh, t, table);
    if (complex[t]) integrateLayer(stiffness[t], mass[t], functions, basis, rule.weights, work, layer);
    else if (isCurved(mesh, t)) integrateCurved(stiffness[t], mass[t], functions, basis, rule.weights, work);
    else scaleReference(stiffness[t], mass[t], functions, reference, work.map);
    applySigns(stiffness[t], signs, width);
    applySigns(mass[t], signs, width);
  }
  return { stiffness, mass, complex, ...(store ? { store } : {}) };
}

/** Highest degree among the functions of each triangle: that of its own order or of a richer neighbour's edge. */
function degreesOf({ starts, functions }: Space): Int32Array {
  const out = new Int32Array(starts.length - 1);
  for (let t = 0; t < out.length; t++) {
    let last = 0;
    for (let i = starts[t]; i < starts[t + 1]; i++) last = Math.max(last, functions[i]);
    let degree = 1;
    while (functionCount(degree) <= last) degree++;
    out[t] = degree;
  }
  return out;
}

/** Rule, tabulated functions and map for triangles of one degree; their work begins at `at` in the common room. */
interface Tables {
  readonly rule: ReturnType<typeof triangleRule>;
  readonly basis: Basis;
  readonly table: ReturnType<typeof tabulateMap>;
  readonly at: number;
}

function makeTables(degree: number, curveOrder: number, at: number): Tables {
  const rule = triangleRule(2 * degree + EXTRA_DEGREE);
  return { rule, basis: transposeBasis(degree, rule.points), table: tabulateMap(rule.points, curveOrder), at };
}

/** Plans one memory for work, tables, matrices and columns; undefined where there are no compiled kernels. */
function makeStore(space: Space, complex: Uint8Array, widest: number, work: number): ElementStore | undefined {
  const { mesh, starts, list, unknowns } = space;
  const triangles = complex.length;
  let regions = 0;
  for (const region of mesh.regions) regions = Math.max(regions, region + 3);
  const localNumbers = 2 * COLUMNS * (widest + 4);
  // Positions from 0 on; the kernels' own come before them.
  let free = work;
  const numbers = (length: number): number => (free += length + (length & 1)) - length - (length & 1);
  const words = (length: number): number => 2 * numbers(Math.ceil(length / 2));
  const wordsOf = { starts: words(triangles + 1), list: words(list.length), places: words(triangles) };
  const regionsAt = words(triangles);
  const complexAt = words(triangles);
  const weights = numbers(4 * regions);
  const x = numbers(2 * COLUMNS * unknowns);
  const out = numbers(2 * COLUMNS * unknowns);
  const local = numbers(5 * localNumbers);
  const matrices = free;
  for (let t = 0; t < triangles; t++) free += 2 * (complex[t] ? 2 : 1) * (starts[t + 1] - starts[t]) ** 2;
  const kernels = makeDenseKernels(free + 16);
  if (kernels === undefined) return undefined;
  const { base, integers } = kernels;
  const tables: ElementTables = {
    elements: triangles,
    starts: 2 * base + wordsOf.starts,
    list: 2 * base + wordsOf.list,
    places: 2 * base + wordsOf.places,
    regions: 2 * base + regionsAt,
    complex: 2 * base + complexAt,
    local: base + local,
    localNumbers,
  };
  integers.set(starts, tables.starts);
  integers.set(list, tables.list);
  integers.set(complex, tables.complex);
  let at = base + matrices;
  for (let t = 0; t < triangles; t++) {
    integers[tables.regions + t] = mesh.regions[t] + 2;
    integers[tables.places + t] = at;
    at += 2 * (complex[t] ? 2 : 1) * (starts[t + 1] - starts[t]) ** 2;
  }
  return { kernels, tables, regions, weights: base + weights, x: base + x, out: base + out };
}

/** Function-major tables of one triangle, in one array: function i at point q sits at i·nq + q. */
interface Work {
  /** Points a row; an odd number is filled up by one of weight zero. */
  readonly nq: number;
  readonly map: Float64Array;
  /** ∂x then ∂y of each function: rows of 2nq. */
  readonly gradients: Float64Array;
  readonly values: Float64Array;
  /** The same, weighted. */
  readonly flux: Float64Array;
  readonly load: Float64Array;
  readonly sum: Float64Array;
  /** sum = left·rightᵀ of two of the tables, as gramInto. */
  gram(left: Float64Array, right: Float64Array, rows: number, nd: number): Float64Array;
}

/** Even, so that each begins on 16 bytes. */
const workNumbers = (nq: number, nd: number): number => 2 * Math.ceil(((6 * nq + nd) * nd + 8) / 2);

function makeWork(nq: number, nd: number, kernels: DenseKernels | undefined, at: number): Work {
  const all = kernels
    ? kernels.numbers.subarray(kernels.base + at, kernels.base + at + workNumbers(nq, nd))
    : new Float64Array(workNumbers(nq, nd));
  let free = 0;
  const take = (length: number): Float64Array => all.subarray(free, (free += length));
  const tables = {
    nq,
    map: new Float64Array(MAP_STRIDE * nq),
    gradients: take(2 * nd * nq),
    values: take(nd * nq),
    flux: take(2 * nd * nq),
    load: take(nd * nq),
    sum: take(nd * nd),
  };
  return {
    ...tables,
    gram(left, right, rows, size): Float64Array {
      const { sum } = tables;
      if (kernels === undefined) return gramInto(sum, left, right, rows, size);
      kernels.gram(sum.byteOffset / 8, left.byteOffset / 8, right.byteOffset / 8, rows, size);
      return sum;
    },
  };
}

/** Values and reference gradients, function by function. */
interface Basis {
  /** Points, and points a row: even. */
  readonly count: number;
  readonly points: number;
  readonly values: Float64Array;
  readonly dx: Float64Array;
  readonly dy: Float64Array;
}

function transposeBasis(order: number, at: ArrayLike<number>): Basis {
  const count = at.length / 2;
  const points = count + (count & 1);
  const nd = functionCount(order);
  const from = tabulateBasis(order, at);
  const turn = (rows: Float64Array): Float64Array => {
    const out = new Float64Array(nd * points);
    for (let q = 0; q < count; q++) for (let i = 0; i < nd; i++) out[i * points + q] = rows[q * nd + i];
    return out;
  };
  return { count, points, values: turn(from.values), dx: turn(from.dx), dy: turn(from.dy) };
}

/** Fills values and plane gradients of the chosen functions at all points. */
function tabulateTriangle(functions: Int32Array, basis: Basis, work: Work): void {
  const { map, gradients, values, nq } = work;
  const { count } = basis;
  const inverse = new Float64Array(4 * count);
  for (let q = 0; q < count; q++) {
    const at = MAP_STRIDE * q;
    const scale = 1 / determinant(map, q);
    for (let c = 0; c < 4; c++) inverse[4 * q + c] = map[at + 2 + c] * scale;
  }
  for (let i = 0; i < functions.length; i++) {
    const from = functions[i] * nq;
    const x = 2 * i * nq;
    for (let q = 0; q < count; q++) {
      const dx = basis.dx[from + q];
      const dy = basis.dy[from + q];
      gradients[x + q] = inverse[4 * q + 3] * dx - inverse[4 * q + 2] * dy;
      gradients[x + nq + q] = inverse[4 * q] * dy - inverse[4 * q + 1] * dx;
    }
    values.set(basis.values.subarray(from, from + nq), i * nq);
  }
}

const determinant = (map: Float64Array, q: number): number =>
  map[MAP_STRIDE * q + 2] * map[MAP_STRIDE * q + 5] - map[MAP_STRIDE * q + 3] * map[MAP_STRIDE * q + 4];

function integrateCurved(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  basis: Basis,
  weights: Float64Array,
  work: Work,
): void {
  const nd = functions.length;
  const { gradients, values, flux, load, map, nq } = work;
  const { count } = basis;
  tabulateTriangle(functions, basis, work);
  const w = new Float64Array(count);
  for (let q = 0; q < count; q++) w[q] = weights[q] * determinant(map, q);
  for (let i = 0; i < nd; i++) {
    const x = 2 * i * nq;
    for (let q = 0; q < count; q++) {
      flux[x + q] = w[q] * gradients[x + q];
      flux[x + nq + q] = w[q] * gradients[x + nq + q];
      load[i * nq + q] = w[q] * values[i * nq + q];
    }
  }
  scatterGram(k, 1, 0, work.gram(gradients, flux, 2 * nq, nd), nd);
  scatterGram(m, 1, 0, work.gram(values, load, nq, nd), nd);
}

function integrateLayer(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  basis: Basis,
  weights: Float64Array,
  work: Work,
  coefficients: PointCoefficients,
): void {
  const nd = functions.length;
  const { gradients, values, flux, load, map, nq } = work;
  const { count } = basis;
  tabulateTriangle(functions, basis, work);
  // Weighted coefficients, real parts then imaginary ones: four rows (t11, t12, t22, m) of points each.
  const c = new Float64Array(8);
  const rows = new Float64Array(8 * count);
  for (let q = 0; q < count; q++) {
    coefficients(map[MAP_STRIDE * q], map[MAP_STRIDE * q + 1], c);
    const w = weights[q] * determinant(map, q);
    for (let r = 0; r < 4; r++) {
      rows[r * count + q] = w * c[2 * r];
      rows[(4 + r) * count + q] = w * c[2 * r + 1];
    }
  }
  for (const part of [0, 1] as const) {
    const t11 = 4 * part * count;
    const t12 = t11 + count;
    const t22 = t12 + count;
    const density = t22 + count;
    for (let i = 0; i < nd; i++) {
      const x = 2 * i * nq;
      const y = x + nq;
      for (let q = 0; q < count; q++) {
        const gx = gradients[x + q];
        const gy = gradients[y + q];
        flux[x + q] = rows[t11 + q] * gx + rows[t12 + q] * gy;
        flux[y + q] = rows[t12 + q] * gx + rows[t22 + q] * gy;
        load[i * nq + q] = rows[density + q] * values[i * nq + q];
      }
    }
    scatterGram(k, 2, part, work.gram(gradients, flux, 2 * nq, nd), nd);
    scatterGram(m, 2, part, work.gram(values, load, nq, nd), nd);
  }
}

/**
 * out[i + j nd] = Σ_s left[i·rows + s] right[j·rows + s] for i ≤ j (and the rest of the 4 × 2 blocks on the diagonal):
 * eight sums in registers, every number loaded serves two or four of them.
 */
function gramInto(out: Float64Array, left: Float64Array, right: Float64Array, rows: number, nd: number): Float64Array {
  const last = nd - 1;
  for (let j = 0; j < nd; j += 2) {
    const b0 = j * rows;
    const b1 = Math.min(j + 1, last) * rows;
    for (let i = 0; i <= Math.min(j + 1, last); i += 4) {
      const a0 = i * rows;
      const a1 = Math.min(i + 1, last) * rows;
      const a2 = Math.min(i + 2, last) * rows;
      const a3 = Math.min(i + 3, last) * rows;
      let s00 = 0;
      let s10 = 0;
      let s20 = 0;
      let s30 = 0;
      let s01 = 0;
      let s11 = 0;
      let s21 = 0;
      let s31 = 0;
      for (let s = 0; s < rows; s++) {
        const u = right[b0 + s];
        const v = right[b1 + s];
        const x0 = left[a0 + s];
        const x1 = left[a1 + s];
        const x2 = left[a2 + s];
        const x3 = left[a3 + s];
        s00 += x0 * u;
        s10 += x1 * u;
        s20 += x2 * u;
        s30 += x3 * u;
        s01 += x0 * v;
        s11 += x1 * v;
        s21 += x2 * v;
        s31 += x3 * v;
      }
      const c0 = j * nd;
      const c1 = Math.min(j + 1, last) * nd;
      // where indices were clipped the same sum is written twice
      out[c0 + i] = s00;
      out[c1 + i] = s01;
      out[c0 + Math.min(i + 1, last)] = s10;
      out[c1 + Math.min(i + 1, last)] = s11;
      out[c0 + Math.min(i + 2, last)] = s20;
      out[c1 + Math.min(i + 2, last)] = s21;
      out[c0 + Math.min(i + 3, last)] = s30;
      out[c1 + Math.min(i + 3, last)] = s31;
    }
  }
  return out;
}

/** Copies the upper triangle of the sums to both triangles of `a`, at stride `width` and an offset in the entry. */
function scatterGram(a: Float64Array, width: 1 | 2, offset: 0 | 1, sums: Float64Array, nd: number): void {
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i <= j; i++) {
      a[width * (i + j * nd) + offset] = sums[i + j * nd];
      a[width * (j + i * nd) + offset] = sums[i + j * nd];
    }
  }
}

/** Matrices of the reference triangle: ξξ, ξη+ηξ, ηη stiffness and mass. */
interface Reference {
  readonly nd: number;
  readonly xx: Float64Array;
  readonly xy: Float64Array;
  readonly yy: Float64Array;
  readonly mass: Float64Array;
}

const REFERENCE = new Map<number, Reference>();

function referenceMatrices(order: number): Reference {
  const known = REFERENCE.get(order);
  if (known) return known;
  const nd = functionCount(order);
  const rule = triangleRule(2 * order);
  const { values, dx, dy } = tabulateBasis(order, rule.points);
  const xx = new Float64Array(nd * nd);
  const xy = new Float64Array(nd * nd);
  const yy = new Float64Array(nd * nd);
  const mass = new Float64Array(nd * nd);
  for (let q = 0; q < rule.weights.length; q++) {
    const w = rule.weights[q];
    const at = q * nd;
    for (let j = 0; j < nd; j++) {
      for (let i = 0; i < nd; i++) {
        const n = j * nd + i;
        xx[n] = xx[n] + w * dx[at + i] * dx[at + j];
        yy[n] = yy[n] + w * dy[at + i] * dy[at + j];
        xy[n] = xy[n] + w * (dx[at + i] * dy[at + j] + dy[at + i] * dx[at + j]);
        mass[n] = mass[n] + w * values[at + i] * values[at + j];
      }
    }
  }
  const made = { nd, xx, xy, yy, mass };
  REFERENCE.set(order, made);
  return made;
}

function scaleReference(
  k: Float64Array,
  m: Float64Array,
  functions: Int32Array,
  reference: Reference,
  map: Float64Array,
): void {
  const a = map[2];
  const b = map[3];
  const c = map[4];
  const d = map[5];
  const det = a * d - b * c;
  const g11 = (d * d + b * b) / det;
  const g12 = -(c * d + a * b) / det;
  const g22 = (c * c + a * a) / det;
  const nd = functions.length;
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i < nd; i++) {
      const n = functions[j] * reference.nd + functions[i];
      k[j * nd + i] = g11 * reference.xx[n] + g12 * reference.xy[n] + g22 * reference.yy[n];
      m[j * nd + i] = det * reference.mass[n];
    }
  }
}

function applySigns(a: Float64Array, signs: Int8Array, width: 1 | 2): void {
  const nd = signs.length;
  for (let j = 0; j < nd; j++) {
    for (let i = 0; i < nd; i++) {
      if (signs[i] === signs[j]) continue;
      for (let c = 0; c < width; c++) a[width * (j * nd + i) + c] = -a[width * (j * nd + i) + c];
    }
  }
}
