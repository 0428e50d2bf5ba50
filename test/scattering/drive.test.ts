// Does a driven device keep the laws of scattering, and is S of a disk the exact one?

import { describe, expect, test } from 'vitest';
import { resolutionFor } from '../../src/accuracy/resolution.ts';
import type { Body, Device } from '../../src/device/model.ts';
import {
  type Complex,
  complex,
  add,
  divide,
  multiply,
  scale,
  subtract,
  squareRoot,
} from '../../src/numerics/complex.ts';
import type { Polarization } from '../../src/numerics/conventions.ts';
import { besselJ, besselJDerivatives, hankel, hankelDerivatives } from '../../src/numerics/cylinder-functions.ts';
import { familyOf, prepare, spaceOf } from '../../src/questions/prepare.ts';
import { driveMultipoles, farField, normaliseDrive, power } from '../../src/scattering/amplitudes.ts';
import { absorbedPower, type ContrastProblem, type Multipoles } from '../../src/scattering/contrast.ts';
import { rimMultipoles } from '../../src/scattering/rim-waves.ts';
import { disk } from '../mesh/sample-bodies.ts';

/** Highest |m|; beyond it nothing is scattered to the digits asked for. */
const M = 9;
const ORDER = 7;

interface Disk {
  readonly at: readonly [number, number];
  readonly radius: number;
  readonly permittivity: Complex;
  readonly permeability?: Complex;
  readonly weight?: number;
}

function deviceOf(polarization: Polarization, k: number, disks: readonly Disk[], outside = [1, 1]): Device {
  return {
    title: '',
    lengthUnit: 'none',
    metres: null,
    polarization,
    band: { quantity: 'wavenumber', limits: [k, 1.01 * k], unit: '', kMin: k, kMax: 1.01 * k },
    knobs: [],
    background: { material: 'outside', permittivity: outside[0], permeability: outside[1] },
    bodies: disks.map(({ at, radius, permittivity, permeability, weight }, i): Body => ({
      name: `disk${i}`,
      group: `disk${i}`,
      material: 'glass',
      permittivity,
      permeability: permeability ?? complex(1),
      shape: disk(at, radius),
      pumpWeight: weight ?? 0,
    })),
  };
}

/** Answers to the drives a_m = δ_{mn}, n = −N … N, at real k. */
function scatter(device: Device, k: number, level: number, N: number) {
  const prepared = prepare(device, { kMin: k, kMax: k, slope: 0.01 }, { ...resolutionFor(6), layerTolerance: 1e-10 });
  const problem: ContrastProblem = { device, space: spaceOf(prepared, ORDER), k, level, sense: 'loss', order: M };
  const factor = familyOf(prepared, ORDER, 'outgoing', 'loss').factorize(complex(k), level);
  const drives = Array.from({ length: 2 * N + 1 }, (_, i): Multipoles => {
    const drive = new Float64Array(2 * (2 * M + 1));
    drive[2 * (i - N + M)] = 1;
    return drive;
  });
  const driven = driveMultipoles(problem, factor, drives);
  factor.release();
  const absorbed = absorbedPower(
    problem,
    driven.map((d) => d.scattered),
    drives,
  );
  return { prepared, problem, drives, driven, absorbed, N };
}

type Answer = ReturnType<typeof scatter>;

/** S_{mn}: outgoing m for incoming n. */
const entry = ({ driven, N }: Answer, m: number, n: number): Complex => {
  const { outgoing } = driven[n + N];
  return complex(outgoing[2 * (m + M)], outgoing[2 * (m + M) + 1]);
};

/** Source line: u and p ∂u/∂r continuous at r = a, J inside, a H⁽²⁾ + b H⁽¹⁾ outside (any book on optics, from memory). */
function exactDisk(
  polarization: Polarization,
  m: number,
  k: number,
  a: number,
  [eps, mu]: readonly [Complex, Complex],
  [epsB, muB]: readonly [number, number],
): Complex {
  const [pi, pb] = polarization === 'Ez' ? [divide(complex(1), mu), 1 / muB] : [divide(complex(1), eps), 1 / epsB];
  const inside = scale(squareRoot(multiply(eps, mu)), k);
  const outside = complex(k * Math.sqrt(epsB * muB));
  const at = (values: Float64Array): Complex => complex(values[2 * m], values[2 * m + 1]);
  const J = at(besselJ(m, scale(inside, a)));
  const slopeJ = multiply(multiply(pi, inside), at(besselJDerivatives(m, scale(inside, a))));
  const wronskian = (kind: 1 | 2): Complex => {
    const z = scale(outside, a);
    const slope = scale(multiply(outside, at(hankelDerivatives(kind, m, z))), pb);
    return subtract(multiply(slope, J), multiply(at(hankel(kind, m, z)), slopeJ));
  };
  return scale(divide(wronskian(2), wronskian(1)), -1);
}

describe.each<[Polarization, number, number]>([
  ['Ez', 1, 1],
  ['Hz', 1, 1],
  ['Ez', 2.1, 1.3],
  ['Hz', 2.1, 1.3],
])('a disk away from the origin, %s, background ε = %f, μ = %f', (polarization, epsB, muB) => {
  const k = 1.7;
  const level = 0.3;
  const eps = complex(4.2, 0.1);
  const mu = complex(1.4, 0.05);
  const weight = 1.5;
  const device = deviceOf(
    polarization,
    k,
    [{ at: [3.1, -2.3], radius: 0.8, permittivity: eps, permeability: mu, weight }],
    [epsB, muB],
  );
  const answer = scatter(device, k, level, 3);

  test('S_m is the exact one, and m does not turn into another', () => {
    for (let n = -3; n <= 3; n++) {
      const total = add(eps, complex(0, level * weight));
      const exact = exactDisk(polarization, Math.abs(n), k, 0.8, [total, mu], [epsB, muB]);
      for (let m = -M; m <= M; m++) {
        const s = entry(answer, m, n);
        const want = m === n ? exact : complex(0);
        expect(Math.hypot(s.re - want.re, s.im - want.im)).toBeLessThan(1e-7);
      }
    }
  });

  test('what comes in goes out or stays', () => {
    answer.driven.forEach(({ outgoing }, i) => {
      const stays = answer.absorbed[i].reduce((a, b) => a + b, 0);
      expect(stays).toBeGreaterThan(0);
      expect(1 - power(outgoing) - stays).toBeCloseTo(0, 7);
    });
  });

  test('the scattered field shows the same amplitudes on the rim', () => {
    const { prepared, driven, drives } = answer;
    const rim = rimMultipoles(
      device,
      spaceOf(prepared, ORDER),
      complex(k),
      1,
      M,
      driven.map((d) => d.scattered),
    );
    driven.forEach(({ outgoing }, i) => {
      for (let s = 2 * (M - 3); s < 2 * (M + 4); s++)
        expect(Math.abs(rim[i][s] - (outgoing[s] - drives[i][s]))).toBeLessThan(1e-5);
    });
  });
});

describe('two bodies of different weights, no symmetry', () => {
  const k = 2.1;
  const bodies: readonly Disk[] = [
    { at: [0, 0], radius: 0.6, permittivity: complex(3), weight: 1 },
    { at: [1.1, 0.7], radius: 0.35, permittivity: complex(-2.5, 0), weight: 0.4 },
  ];

  test.each<[Polarization]>([['Ez'], ['Hz']])(
    '%s: reciprocity, unitarity without loss, balance with',
    (polarization) => {
      const device = deviceOf(polarization, k, bodies);
      const [lossless, lossy] = [scatter(device, k, 0, 3), scatter(device, k, 0.5, 3)];
      for (const answer of [lossless, lossy]) {
        for (let m = -3; m <= 3; m++) {
          for (let n = -3; n <= 3; n++) {
            const s = entry(answer, m, n);
            const t = entry(answer, -n, -m);
            const sign = (m + n) % 2 === 0 ? 1 : -1;
            expect(Math.hypot(s.re - sign * t.re, s.im - sign * t.im)).toBeLessThan(1e-5);
          }
        }
      }
      lossless.driven.forEach(({ outgoing }, i) => {
        expect(lossless.absorbed[i].every((p) => p === 0)).toBe(true);
        expect(power(outgoing)).toBeCloseTo(1, 5);
      });
      lossy.driven.forEach(({ outgoing }, i) => {
        expect(lossy.absorbed[i].every((p) => p > 0)).toBe(true);
        expect(1 - power(outgoing) - lossy.absorbed[i].reduce((a, b) => a + b, 0)).toBeCloseTo(0, 5);
      });
    },
  );
});

test.each<[Polarization]>([['Ez'], ['Hz']])(
  '%s: a background of index n is vacuum with ε/n² and nk',
  (polarization) => {
    const n2 = 2.085;
    const k = 1.9;
    const level = 0.4;
    const one = { at: [0, 0], radius: 0.7, permittivity: complex(6), weight: 1 } as const;
    const inside = scatter(deviceOf(polarization, k, [one], [n2, 1]), k, level, 2);
    const kVacuum = k * Math.sqrt(n2);
    const vacuum = scatter(
      deviceOf(polarization, kVacuum, [{ ...one, permittivity: complex(6 / n2) }]),
      kVacuum,
      level / n2,
      2,
    );
    for (let m = -2; m <= 2; m++) {
      const [a, b] = [entry(inside, m, m), entry(vacuum, m, m)];
      expect(Math.hypot(a.re - b.re, a.im - b.im)).toBeLessThan(1e-9);
      expect(inside.absorbed[m + 2][0]).toBeCloseTo(vacuum.absorbed[m + 2][0], 9);
    }
  },
);

test('bodies that equal the background scatter nothing', () => {
  const device = deviceOf(
    'Hz',
    2,
    [{ at: [0, 0], radius: 0.5, permittivity: complex(2), permeability: complex(1) }],
    [2, 1],
  );
  const answer = scatter(device, 2, 0, 1);
  for (let n = -1; n <= 1; n++) expect(entry(answer, n, n)).toEqual(complex(1));
});

describe('amplitudes', () => {
  const of = (...values: number[]): Multipoles => Float64Array.from(values);

  test('unit power, the largest real and positive, the first of equals', () => {
    const { drive, factor } = normaliseDrive(of(0, 2, 1, 0, -2, 0));
    expect(power(drive)).toBeCloseTo(1, 15);
    expect(drive[0]).toBeCloseTo(2 / 3, 15);
    expect(drive[1]).toBeCloseTo(0, 15);
    // (−2) · factor with factor = −i/3
    expect(factor.re).toBeCloseTo(0, 15);
    expect(factor.im).toBeCloseTo(-1 / 3, 15);
    expect(drive[5]).toBeCloseTo(2 / 3, 15);
  });

  test('far field: mean 1; a plane of m = ±1 in phase is a dipole across', () => {
    // b_1 e^{iφ}(−i) + b_{−1} e^{−iφ} i with b_1 = b_{−1}: 2 sin φ
    const pattern = farField(of(1, 0, 0, 0, 1, 0));
    expect(pattern.reduce((a, b) => a + b, 0) / 360).toBeCloseTo(1, 12);
    expect(pattern[0]).toBeCloseTo(0, 12);
    expect(pattern[90]).toBeCloseTo(2, 12);
    expect(farField(of(0, 0, 1, 2, 0, 0))[77]).toBeCloseTo(1, 12);
  });
});
