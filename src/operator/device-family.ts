// How does A depend on k and on the pump (or loss) of a device?

import { metals } from '../device/metals.ts';
import type { Device } from '../device/model.ts';
import {
  add,
  type Complex,
  complex,
  type ComplexArray,
  divide,
  multiply,
  scale,
  squareRoot,
} from '../numerics/complex.ts';
import { BACKGROUND, LAYER } from '../mesh/mesh.ts';
import type { Factorization } from '../sparse/pattern.ts';
import type { OpenOperator } from './open-operator.ts';
import { type RegionWeights, setSurface, setWeight, zeroWeights } from './region-weights.ts';

/** Which matrix of the family: A itself, ∂A/∂k or ∂A/∂(level). */
export type Part = 'value' | 'byK' | 'byLevel';

/**
 * A(k, D) = Σ p_b(D) K_b − k² Σ q_b(D) M_b, with ε_b(D) = ε_b + σ i D w_b: σ = −1 pumps, σ = +1 adds loss.
 * (p, q) = (1/μ, ε) for `Ez`, (1/ε, μ) for `Hz`. Linear in k² and, for `Ez`, in D.
 */
export interface DeviceFamily {
  readonly size: number;
  readonly operator: OpenOperator;
  /** Stiffness with factor 1, mass with factor −k², then the surface of each metal with the factor of its impedance. */
  readonly terms: number;
  termFactor(j: number, k: Complex): { readonly value: Complex; readonly byK: Complex };
  multiplyTermInto(out: ComplexArray, j: number, level: number, x: ComplexArray, columns: number): ComplexArray;
  weights(k: Complex, level: number, part: Part): RegionWeights;
  multiplyInto(
    out: ComplexArray,
    k: Complex,
    level: number,
    part: Part,
    x: ComplexArray,
    columns: number,
  ): ComplexArray;
  factorize(k: Complex, level: number): Factorization;
  readonly pieces: FamilyPieces;
}

/** The family as Σ c_i(k, D) P_i with fixed matrices. */
export interface FamilyPieces {
  readonly count: number;
  factor(
    i: number,
    k: Complex,
    level: number,
  ): { readonly value: Complex; readonly byK: Complex; readonly byLevel: Complex };
  multiplyInto(out: ComplexArray, i: number, x: ComplexArray, columns: number): ComplexArray;
}

export type LevelSense = 'gain' | 'loss';

/** The family of a device on an assembled operator. */
export function deviceFamily(device: Device, operator: OpenOperator, sense: LevelSense): DeviceFamily {
  const conductors = operator.surfaces ? metals(device) : [];
  const metalCount = conductors.length;
  const weights = (k: Complex, level: number, part: Part): RegionWeights => {
    const out = zeroWeights(device.bodies.length, metalCount);
    if (part !== 'byLevel') conductors.forEach((sigma, i) => setSurface(out, i, surfaceFactor(device, sigma, k)[part]));
    for (let region = LAYER; region < device.bodies.length; region++) {
      const { p, q, pSlope, qSlope } = regionMaterial(device, region, level, sense);
      const k2 = multiply(k, k);
      if (part === 'value') {
        setWeight(out.stiffness, region, p);
        setWeight(out.mass, region, scale(multiply(k2, q), -1));
      } else if (part === 'byK') {
        setWeight(out.mass, region, scale(multiply(k, q), -2));
      } else {
        setWeight(out.stiffness, region, pSlope);
        setWeight(out.mass, region, scale(multiply(k2, qSlope), -1));
      }
    }
    return out;
  };
  const termWeights = (j: number, level: number): RegionWeights => {
    const out = zeroWeights(device.bodies.length, metalCount);
    if (j >= 2) {
      setSurface(out, j - 2, complex(1));
      return out;
    }
    for (let region = LAYER; region < device.bodies.length; region++) {
      const { p, q } = regionMaterial(device, region, level, sense);
      if (j === 0) setWeight(out.stiffness, region, p);
      else setWeight(out.mass, region, q);
    }
    return out;
  };
  return {
    size: operator.space.unknowns,
    operator,
    terms: 2 + metalCount,
    termFactor: (j, k) =>
      j >= 2
        ? surfaceFactor(device, conductors[j - 2], k)
        : j === 0
          ? { value: complex(1), byK: complex(0) }
          : { value: scale(multiply(k, k), -1), byK: scale(k, -2) },
    multiplyTermInto: (out, j, level, x, columns) => operator.multiplyInto(out, termWeights(j, level), x, columns),
    weights,
    multiplyInto: (out, k, level, part, x, columns) => operator.multiplyInto(out, weights(k, level, part), x, columns),
    factorize: (k, level) => operator.factorize(weights(k, level, 'value')),
    pieces: familyPieces(device, operator, sense, conductors),
  };
}

type PieceFactor = ReturnType<FamilyPieces['factor']>;

/**
 * Stiffness that no level moves; mass at level 0; mass by the level (`Ez`); stiffness of every kind of active body
 * (`Hz`: 1/ε is not linear); the surface of each metal.
 */
function familyPieces(
  device: Device,
  operator: OpenOperator,
  sense: LevelSense,
  conductors: readonly number[],
): FamilyPieces {
  const none = complex(0);
  const blank = (): RegionWeights => zeroWeights(device.bodies.length, conductors.length);
  const fixed = blank();
  const mass = blank();
  const massByLevel = blank();
  const active = new Map<string, { readonly weights: RegionWeights; readonly region: number }>();
  for (let region = LAYER; region < device.bodies.length; region++) {
    const { p, q, pSlope, qSlope } = regionMaterial(device, region, 0, sense);
    setWeight(mass.mass, region, q);
    setWeight(massByLevel.mass, region, qSlope);
    if (pSlope.re === 0 && pSlope.im === 0) {
      setWeight(fixed.stiffness, region, p);
      continue;
    }
    const { permittivity, pumpWeight } = device.bodies[region];
    const kind = `${permittivity.re} ${permittivity.im} ${pumpWeight}`;
    const group = active.get(kind) ?? { weights: blank(), region };
    setWeight(group.weights.stiffness, region, complex(1));
    active.set(kind, group);
  }
  const square = (k: Complex, factor: number): Complex => scale(multiply(k, k), -factor);
  const list: { weights: RegionWeights; factor: (k: Complex, level: number) => PieceFactor }[] = [
    { weights: fixed, factor: () => ({ value: complex(1), byK: none, byLevel: none }) },
    { weights: mass, factor: (k) => ({ value: square(k, 1), byK: scale(k, -2), byLevel: none }) },
  ];
  if (massByLevel.mass.some((w) => w !== 0)) {
    list.push({
      weights: massByLevel,
      factor: (k, level) => ({ value: square(k, level), byK: scale(k, -2 * level), byLevel: square(k, 1) }),
    });
  }
  for (const { weights, region } of active.values()) {
    list.push({
      weights,
      factor: (_, level) => {
        const { p, pSlope } = regionMaterial(device, region, level, sense);
        return { value: p, byK: none, byLevel: pSlope };
      },
    });
  }
  conductors.forEach((sigma, i) => {
    const weights = blank();
    setSurface(weights, i, complex(1));
    list.push({ weights, factor: (k) => ({ ...surfaceFactor(device, sigma, k), byLevel: none }) });
  });
  return {
    count: list.length,
    factor: (i, k, level) => list[i].factor(k, level),
    multiplyInto: (out, i, x, columns) => operator.multiplyInto(out, list[i].weights, x, columns),
  };
}

/** Free-space impedance μ₀c, ohm (CODATA 2018, from memory). */
const FREE_SPACE_IMPEDANCE = 376.730313668;

/**
 * Factor of ∮uv on a conductor of conductivity σ, from Z = (1 − i)√(ωμ₀/2σ): the wall's p∂ₙu = (ikη₀/Z) u in `Ez` and
 * (ikZ/η₀) u in `Hz`, taken to the left side.
 *
 * @throws RangeError for a device without a length unit, where σ means nothing.
 */
export function surfaceFactor(
  device: Device,
  sigma: number,
  k: Complex,
): { readonly value: Complex; readonly byK: Complex } {
  if (device.metres === null) throw new RangeError('a conductivity needs a length unit');
  const strength = sigma * FREE_SPACE_IMPEDANCE * device.metres;
  const root = squareRoot(k);
  if (device.polarization === 'Ez') {
    const value = multiply(root, complex(Math.sqrt(strength / 2), -Math.sqrt(strength / 2)));
    return { value, byK: divide(value, scale(k, 2)) };
  }
  const value = multiply(multiply(k, root), complex(-1 / Math.sqrt(2 * strength), -1 / Math.sqrt(2 * strength)));
  return { value, byK: divide(scale(value, 3), scale(k, 2)) };
}

/** (p, q) of a region at a level, and their derivatives by the level. */
export function regionMaterial(
  device: Device,
  region: number,
  level: number,
  sense: LevelSense,
): { readonly p: Complex; readonly q: Complex; readonly pSlope: Complex; readonly qSlope: Complex } {
  const zero = complex(0);
  const one = complex(1);
  if (region === BACKGROUND || region === LAYER) {
    const { permittivity, permeability } = device.background;
    return device.polarization === 'Ez'
      ? { p: complex(1 / permeability), q: complex(permittivity), pSlope: zero, qSlope: zero }
      : { p: complex(1 / permittivity), q: complex(permeability), pSlope: zero, qSlope: zero };
  }
  const body = device.bodies[region];
  const slope = complex(0, (sense === 'gain' ? -1 : 1) * body.pumpWeight);
  const permittivity = add(body.permittivity, scale(slope, level));
  if (device.polarization === 'Ez') {
    return { p: divide(one, body.permeability), q: permittivity, pSlope: zero, qSlope: slope };
  }
  const p = divide(one, permittivity);
  return { p, q: body.permeability, pSlope: scale(multiply(multiply(p, p), slope), -1), qSlope: zero };
}
