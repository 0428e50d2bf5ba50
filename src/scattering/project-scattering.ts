// How does a device become a small dense model of its S-matrix?

import { functionCount } from '../elements/basis.ts';
import type { Space } from '../elements/space.ts';
import { complex, type Complex, type ComplexArray, divide, modulus } from '../numerics/complex.ts';
import { hermitianEigen } from '../numerics/hermitian.ts';
import { randomStream } from '../numerics/random.ts';
import { addTimes, choleskyFactor, transposeTimes } from '../numerics/real-columns.ts';
import type { ClosedOpenings } from '../operator/closed-openings.ts';
import { type RegionWeights, setSurface, zeroWeights } from '../operator/region-weights.ts';
import type { ModelChannel, ScatteringModel } from '../projected/scattering-model.ts';

export interface ProjectionRequest {
  readonly kMin: number;
  readonly kMax: number;
  readonly channels: readonly ModelChannel[];
  /** Fields whose energy beside the basis is below 8p times this are left out. */
  readonly tolerance: number;
}

/** A growing real basis of driven fields, and all that the model holds of it. */
export interface ScatteringProjection {
  readonly size: number;
  /** Takes in the fields of unit drives at k (unknowns × channels); returns how many directions were new. */
  add(fields: ComplexArray, k: number): number;
  /** A field of the basis (interleaved coefficients) as a field of the device. */
  field(vector: ComplexArray): ComplexArray;
  /** Takes in one field, whatever its size. */
  addField(field: ComplexArray): number;
  /** A full solve that the model had estimated: true error over estimate. */
  compare(ratio: number): void;
  /** The model as it stands. */
  model(): ScatteringModel;
  /**
   * |dᵀA d| of what the highest order adds to a field of the basis (interleaved, scaled to uᵀ(∂A/∂k)u = 1): how far the
   * order below moves the pole, from above.
   */
  orderShift(vector: ComplexArray, k: Complex): number;
}

/** Witnesses: the square of a norm is estimated with a spread of √(2/48) = 20 %. */
const WITNESSES = 48;

/**
 * Basis: [Re, Im] of the fields, orthonormal in X = ∫ |p| ∇u·∇v + k₀²|q| u v, k₀² the middle of k². At real k and real
 * materials the fields of n channels and their conjugates span only about n directions.
 *
 * Residuals are measured in X⁻¹ through witnesses W = X⁻¹Z, Z normal with covariance X, made element by element: E|wᵀr|² =
 * rᴴX⁻¹r. They cost one factorization, and nothing that grows with the square of the basis. Source: O. Balabanov,
 * A. Nouy, Adv. Comput. Math. 45, 2969 (2019), for random sketches of residuals.
 */
export function projectScattering(closed: ClosedOpenings, request: ProjectionRequest): ScatteringProjection {
  const { family, functionals } = closed;
  const { operator } = family;
  const { space } = operator;
  const N = space.unknowns;
  const parts = realTerms(closed);
  const k0 = (request.kMin ** 2 + request.kMax ** 2) / 2;
  const energy = energyWeights(closed, k0);
  const p = family.weights(complex(1), 0, 'value').stiffness[2];
  const limit = 8 * p * request.tolerance;
  const functions = functionals.flatMap(
    ({ unknowns, count, values }) =>
    Array.from({ length: count }, (_, j) => ({ unknowns, values: Float64Array.from(unknowns, (__, i) => values[j + i * count]) })), // prettier-ignore
  );
  const n = functions.length;
  const apply = (weights: RegionWeights, F: Float64Array, columns: number): Float64Array =>
    applyReal(closed, weights, F, columns, N);

  const W = witnesses(closed, energy, N);
  const l = WITNESSES;
  const witnessCoupling = new Float64Array(n * l);
  functions.forEach(({ unknowns, values }, j) => {
    unknowns.forEach((g, i) => {
      for (let w = 0; w < l; w++) witnessCoupling[j * l + w] += values[i] * W[g + w * N];
    });
  });

  let r = 0;
  let V = new Float64Array(0);
  const matrices = parts.map(() => new Float64Array(0));
  const witness = parts.map(() => new Float64Array(0));
  let coupling = new Float64Array(0);
  const reach = new Float64Array(n);
  const snapshots: number[] = [];
  let ratio = 1;

  const projectOut = (F: Float64Array, q: number): void => {
    if (r > 0) addTimes(F, q, V, r, transposeTimes(V, r, apply(energy, F, q), q, N), N, -1);
  };
  const join = (F: Float64Array, q: number): void => {
    const size = r + q;
    const grown = new Float64Array(N * size);
    grown.set(V);
    grown.set(F, N * r);
    parts.forEach(({ weights }, t) => {
      const T = apply(weights, F, q);
      const cross = r > 0 ? transposeTimes(V, r, T, q, N) : new Float64Array(0);
      const own = transposeTimes(F, q, T, q, N);
      const P = new Float64Array(size * size);
      for (let j = 0; j < r; j++) P.set(matrices[t].subarray(r * j, r * (j + 1)), size * j);
      for (let j = 0; j < q; j++) {
        for (let i = 0; i < r; i++) P[i + (r + j) * size] = P[r + j + i * size] = cross[i + j * r];
        for (let i = 0; i < q; i++) P[r + i + (r + j) * size] = (own[i + j * q] + own[j + i * q]) / 2;
      }
      matrices[t] = P;
      const seen = transposeTimes(W, l, T, q, N);
      const more = new Float64Array(size * l);
      more.set(witness[t]);
      more.set(seen, r * l);
      witness[t] = more;
    });
    const rows = new Float64Array(n * size);
    functions.forEach(({ unknowns, values }, j) => {
      rows.set(coupling.subarray(r * j, r * (j + 1)), size * j);
      for (let c = 0; c < q; c++) {
        let sum = 0;
        for (let i = 0; i < values.length; i++) sum += values[i] * F[unknowns[i] + c * N];
        rows[size * j + r + c] = sum;
      }
    });
    coupling = rows;
    V = grown;
    r = size;
  };

  /** Strong directions first: what rounding leaves of them would hide the weak ones. */
  const takeIn = (F: Float64Array, q: number): number => {
    let taken = 0;
    for (let round = 0; round < MOST_ROUNDS; round++) {
      projectOut(F, q);
      projectOut(F, q);
      const { columns, kept } = strongest(F, q, transposeTimes(F, q, apply(energy, F, q), q, N), limit, N);
      if (kept === 0) break;
      projectOut(columns, kept);
      const L = choleskyFactor(transposeTimes(columns, kept, apply(energy, columns, kept), kept, N), kept);
      if (!L) break;
      divideByTranspose(columns, kept, L, N);
      join(columns, kept);
      taken += kept;
    }
    return taken;
  };
  const field = (vector: ComplexArray): ComplexArray => {
    const out = new Float64Array(2 * N);
    // vectors from before the basis grew keep their meaning
    for (let c = 0; c < vector.length / 2; c++)
      for (let g = 0; g < N; g++) {
        out[2 * g] += V[g + c * N] * vector[2 * c];
        out[2 * g + 1] += V[g + c * N] * vector[2 * c + 1];
      }
    return out;
  };

  return {
    get size() {
      return r;
    },
    add(fields, k) {
      snapshots.push(k);
      const q = fields.length / N;
      functions.forEach(({ unknowns, values }, j) => {
        for (let c = 0; c < q / 2; c++) {
          let re = 0;
          let im = 0;
          for (let i = 0; i < values.length; i++) {
            re += values[i] * fields[2 * (unknowns[i] + c * N)];
            im += values[i] * fields[2 * (unknowns[i] + c * N) + 1];
          }
          const square = re * re + im * im;
          if (square > reach[j]) reach[j] = square;
        }
      });
      return takeIn(realColumns(fields, q, N), q);
    },
    field,
    addField(given) {
      const F = realColumns(given, 2, N);
      const scale = transposeTimes(F, 2, apply(energy, F, 2), 2, N);
      const size = Math.sqrt(scale[0] + scale[3]);
      return takeIn(
        F.map((v) => v / size),
        2,
      );
    },
    compare(seen) {
      if (Number.isFinite(seen)) ratio = Math.max(ratio, seen);
    },
    model: () => ({
      kMin: request.kMin,
      kMax: request.kMax,
      p,
      size: r,
      openings: functionals.map(({ opening, count }) => ({ spec: opening.spec, count })),
      channels: request.channels,
      terms: parts.map(({ coefficient, exponent }, t) => ({
        coefficient,
        exponent,
        matrix: matrices[t],
        witness: witness[t],
      })),
      coupling,
      reach: Float64Array.from(reach),
      witnesses: l,
      witnessCoupling,
      snapshots: Float64Array.from(snapshots).sort(),
      ratio,
      rounding: 0,
      poles: [],
    }),
    orderShift(vector, k) {
      const highest = highestDegree(space);
      const d = field(vector);
      for (let g = 0; g < N; g++) if (!highest[g]) d.fill(0, 2 * g, 2 * g + 2);
      const Ad = family.multiplyInto(new Float64Array(2 * N), k, 0, 'value', d, 1);
      let re = 0;
      let im = 0;
      for (let i = 0; i < 2 * N; i += 2) {
        re += d[i] * Ad[i] - d[i + 1] * Ad[i + 1];
        im += d[i] * Ad[i + 1] + d[i + 1] * Ad[i];
      }
      return Math.hypot(re, im);
    },
  };
}

interface RealTerm {
  readonly coefficient: Complex;
  readonly exponent: number;
  readonly weights: RegionWeights;
}

/** The device's matrices with real weights: stiffness, mass, their lossy parts where there are any, each metal. */
function realTerms({ family }: ClosedOpenings): RealTerm[] {
  const all = family.weights(complex(1), 0, 'value');
  const regions = all.stiffness.length / 2;
  const metals = family.terms - 2;
  const blank = (): RegionWeights => zeroWeights(regions - 2, metals);
  const out: RealTerm[] = [];
  const take = (
    which: 'stiffness' | 'mass',
    part: 0 | 1,
    sign: number,
    coefficient: Complex,
    exponent: number,
  ): void => {
    const weights = blank();
    let any = false;
    for (let i = 0; i < regions; i++) {
      weights[which][2 * i] = sign * all[which][2 * i + part];
      any ||= weights[which][2 * i] !== 0;
    }
    if (any) out.push({ coefficient, exponent, weights });
  };
  take('stiffness', 0, 1, complex(1), 0);
  take('stiffness', 1, 1, complex(0, 1), 0);
  // the family's mass has the factor −k²
  take('mass', 0, -1, complex(-1), 2);
  take('mass', 1, -1, complex(0, -1), 2);
  for (let j = 0; j < metals; j++) {
    const { value, byK } = family.termFactor(2 + j, complex(1));
    const weights = blank();
    setSurface(weights, j, complex(1));
    out.push({ coefficient: value, exponent: divide(byK, value).re, weights });
  }
  return out;
}

/** |p| and k₀²|q| of every region. */
function energyWeights({ family }: ClosedOpenings, k0Square: number): RegionWeights {
  const all = family.weights(complex(1), 0, 'value');
  const regions = all.stiffness.length / 2;
  const out = zeroWeights(regions - 2, family.terms - 2);
  for (let i = 0; i < regions; i++) {
    out.stiffness[2 * i] = modulus(complex(all.stiffness[2 * i], all.stiffness[2 * i + 1]));
    out.mass[2 * i] = k0Square * modulus(complex(all.mass[2 * i], all.mass[2 * i + 1]));
  }
  return out;
}

/** Two real columns pass as one complex one: the weights are real. */
function applyReal(
  { family }: ClosedOpenings,
  weights: RegionWeights,
  F: Float64Array,
  columns: number,
  N: number,
): Float64Array {
  const pairs = Math.ceil(columns / 2);
  const x = new Float64Array(2 * N * pairs);
  for (let c = 0; c < columns; c++)
    for (let g = 0, at = 2 * N * (c >> 1) + (c & 1); g < N; g++) x[at + 2 * g] = F[g + c * N];
  return realColumns(family.operator.multiplyInto(new Float64Array(x.length), weights, x, pairs), columns, N);
}

/** Interleaved complex columns as real ones, Re and Im in turn. */
function realColumns(x: ComplexArray, columns: number, N: number): Float64Array {
  const F = new Float64Array(N * columns);
  for (let c = 0; c < columns; c++)
    for (let g = 0, at = 2 * N * (c >> 1) + (c & 1); g < N; g++) F[g + c * N] = x[at + 2 * g];
  return F;
}

/** Energies that one Gram matrix can tell apart from rounding, relative. */
const DYNAMIC = 1e-9;
const MOST_ROUNDS = 4;

/** The combinations of q columns whose energy is above the limit and not far below the largest, scaled to energy 1. */
function strongest(
  F: Float64Array,
  q: number,
  gram: Float64Array,
  limit: number,
  N: number,
): { columns: Float64Array; kept: number } {
  const packed = new Float64Array(2 * q * q);
  for (let i = 0; i < q * q; i++) packed[2 * i] = gram[i];
  const { values, vectors } = hermitianEigen(packed, q);
  const bar = Math.max(limit, DYNAMIC * values[q - 1]);
  const chosen = Array.from({ length: q }, (_, i) => q - 1 - i).filter((i) => values[i] > bar);
  const C = new Float64Array(q * chosen.length);
  chosen.forEach((from, to) => {
    for (let i = 0; i < q; i++) C[i + to * q] = vectors[2 * (i + from * q)] / Math.sqrt(values[from]);
  });
  const columns = new Float64Array(N * chosen.length);
  addTimes(columns, chosen.length, F, q, C, N);
  return { columns, kept: chosen.length };
}

/** F ← F L⁻ᵀ. */
function divideByTranspose(F: Float64Array, q: number, L: Float64Array, N: number): void {
  for (let j = 0; j < q; j++) {
    for (let i = 0; i < j; i++) {
      const c = L[j + i * q];
      if (c !== 0) for (let g = 0; g < N; g++) F[g + j * N] -= c * F[g + i * N];
    }
    const s = 1 / L[j + j * q];
    for (let g = 0; g < N; g++) F[g + j * N] *= s;
  }
}

/** X⁻¹Z, unknowns × witnesses: Z = Σ_e L_e g_e with L_eL_eᵀ the element's part of X and g_e normal. */
function witnesses({ family }: ClosedOpenings, energy: RegionWeights, N: number): Float64Array {
  const { operator } = family;
  const { space, elements } = operator;
  const l = WITNESSES;
  const random = randomStream(1);
  const Z = new Float64Array(N * l);
  for (let t = 0; t + 1 < space.starts.length; t++) {
    const start = space.starts[t];
    const nd = space.starts[t + 1] - start;
    const at = 2 * (space.mesh.regions[t] + 2);
    const X = new Float64Array(nd * nd);
    let top = 0;
    for (let i = 0; i < nd * nd; i++) {
      X[i] = energy.stiffness[at] * elements.stiffness[t][i] + energy.mass[at] * elements.mass[t][i];
      top = Math.max(top, X[i]);
    }
    // rounding may leave the nearly constant directions a little negative
    for (let i = 0; i < nd; i++) X[i + i * nd] += 1e-13 * top;
    const L = choleskyFactor(X, nd);
    if (!L) continue;
    const g = new Float64Array(nd);
    for (let w = 0; w < l; w++) {
      for (let i = 0; i < nd; i++) g[i] = random.normal();
      for (let i = 0; i < nd; i++) {
        const unknown = space.list[start + i];
        if (unknown < 0) continue;
        let sum = 0;
        for (let j = 0; j <= i; j++) sum += L[i + j * nd] * g[j];
        Z[unknown + w * N] += sum;
      }
    }
  }
  const pairs = l / 2;
  const x = new Float64Array(2 * N * pairs);
  for (let c = 0; c < l; c++) for (let u = 0, at = 2 * N * (c >> 1) + (c & 1); u < N; u++) x[at + 2 * u] = Z[u + c * N];
  const factor = operator.factorize(energy);
  factor.solveInto(x, x, pairs);
  factor.release();
  return realColumns(x, l, N);
}

/** 1 for the unknowns of the space's highest degree. */
function highestDegree(space: Space): Uint8Array {
  const out = new Uint8Array(space.unknowns);
  const below = functionCount(space.order - 1);
  space.list.forEach((g, i) => {
    if (g >= 0 && space.functions[i] >= below) out[g] = 1;
  });
  return out;
}
