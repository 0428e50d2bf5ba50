// Is the shift that the layer's end gives to a mode on the axis known, to the square of what returns?

import { describe, expect, test } from 'vitest';
import { layerShift } from '../../src/accuracy/layer-return.ts';
import { resolutionFor } from '../../src/accuracy/resolution.ts';
import { findCrossing } from '../../src/eigen/crossing.ts';
import { modesNear } from '../../src/eigen/krylov.ts';
import type { Complex } from '../../src/numerics/complex.ts';
import type { LevelSense } from '../../src/operator/device-family.ts';
import { familyOf, prepare, spaceOf } from '../../src/questions/prepare.ts';
import { multipoleJumps } from '../../src/scattering/contrast.ts';
import { layeredDevice } from '../validate/devices.ts';

/** Crossing of the pair near k, as the layer gives it and with the shift taken off. */
function crossing(tolerance: number, polarization: 'Ez' | 'Hz', sense: LevelSense, near: Complex, absorbing: number) {
  // a core that absorbs, so that absorbing points are no mirror images of thresholds
  const device = layeredDevice(
    { radii: [0.3, 1], eps: [[4, absorbing], 4] },
    { polarization, band: [near.re - 0.1, near.re + 0.1], pumped: [1] },
  );
  const prepared = prepare(
    device,
    { kMin: near.re, kMax: near.re, slope: 0.05 },
    { ...resolutionFor(7), layerTolerance: tolerance },
  );
  const direction = sense === 'gain' ? 'outgoing' : 'incoming';
  const family = familyOf(prepared, 9, direction, sense);
  const shift = sense === 'gain' ? near : { re: near.re, im: -near.im };
  const found = modesNear(family, {
    shift,
    level: 0,
    radius: 0.3,
    block: 3,
    largestDimension: 90,
    tolerance: 1e-9,
    seed: 1,
  });
  const space = found.vectors.subarray(0, 4 * family.size);
  const at = findCrossing(family, {
    k: near.re,
    level: 0.1,
    space,
    columns: 2,
    groupWidth: 0.1,
    multiplicity: 2,
  })!;
  const n = family.size;
  const { vectors, slope } = at.group;
  const order = 14;
  const jumps = multipoleJumps(
    { device, space: spaceOf(prepared, 9), k: at.k, level: at.level, sense, order },
    [vectors.subarray(0, 2 * n), vectors.subarray(2 * n, 4 * n)],
    null,
  );
  const moved = layerShift(family, prepared.layer, {
    k: at.k,
    level: at.level,
    background: 1,
    vectors,
    multiplicity: 2,
    jumps,
  });
  const levelMoved = -moved.im / slope.im;
  return {
    plain: [at.k, at.level],
    mended: [at.k + moved.re + slope.re * levelMoved, at.level + levelMoved],
  };
}

describe('the shift is first order: what is left is of the order of its square', () => {
  test.each([
    ['Ez', 'gain'],
    ['Ez', 'loss'],
    ['Hz', 'gain'],
    ['Hz', 'loss'],
  ] as const)('%s, %s', (polarization, sense) => {
    // m = 4, lowest radial order of the lossless disk (its core is thinly filled by the mode)
    const near = polarization === 'Ez' ? { re: 3.013, im: -0.05 } : { re: 3.36, im: -0.09 };
    const exact = crossing(1e-9, polarization, sense, near, 0.2).plain;
    for (const tolerance of [0.1, 0.01]) {
      const { plain, mended } = crossing(tolerance, polarization, sense, near, 0.2);
      const before = Math.abs(plain[1] / exact[1] - 1);
      const after = Math.abs(mended[1] / exact[1] - 1);
      expect(before).toBeGreaterThan(tolerance / 30);
      expect(after).toBeLessThan(4 * tolerance * before);
    }
  });
});
