// Does a dimension bring a lossy one-port to critical coupling where transfer matrices say?

import { expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { complex, subtract } from '../../src/numerics/complex.ts';
import { findKnobMatches } from '../../src/questions/knob-match.ts';
import { layersInGuide, solveReal } from '../checks/transfer-matrix.ts';

const WIDTH = 0.8;

/** A dense plate of thickness `plate` before a lossy filling of length 1 that ends on a wall. */
const device = (plate: number) =>
  readDevice(
    `wavewell: 1
polarization: Ez
band: { wavenumber: [5.4, 7] }
knobs: { plate: ${plate} }
materials: { dense: { permittivity: 9 }, lossy: { permittivity: [2, 0.15] } }
enclosure: { spaces: [ { rectangle: { center: ["(1 + plate)/2", 0], size: ["1 + plate", ${WIDTH}] } } ] }
bodies:
  - { material: dense, rectangle: { center: [plate/2, 0], size: [plate, ${WIDTH}] } }
  - { material: lossy, rectangle: { center: [plate + 0.5, 0], size: [1, ${WIDTH}] } }
guides: [ { name: left, from: [0, 0], angle: 180, width: ${WIDTH} } ]`,
    'test.yaml',
  );

/** r of the one-port: the device and its mirror image, odd about the wall. */
const reflection = (k: number, plate: number) => {
  const front = { permittivity: complex(9), length: plate };
  const { r, t } = layersInGuide(
    'Ez',
    [front, { permittivity: complex(2, 0.15), length: 2 }, front],
    Math.PI / WIDTH,
    complex(k),
  );
  return subtract(r, t);
};

test('critical coupling by the thickness of a plate', () => {
  const matches = findKnobMatches(device, { inputs: ['left'], range: [0.1, 0.25], digits: 8, qMin: 3 });
  // all solutions of r = 0 in this range and band, from starts on a grid
  expect(matches).toHaveLength(2);
  for (const [i, [k0, plate0]] of [
    [5.635, 0.217],
    [6.713, 0.142],
  ].entries()) {
    const [k, plate] = solveReal(reflection, k0, plate0);
    const match = matches[i];
    expect(Math.abs(match.k - k)).toBeLessThan(1e-8);
    expect(Math.abs(match.level - plate)).toBeLessThan(1e-8);
    expect(match.forward.sameMesh.reflected).toBeLessThan(1e-16);
    expect(match.forward.ownMesh.reflected).toBeLessThan(1e-14);
    expect(match.forward.ownMesh.absorbed).toBeCloseTo(1, 10);
  }
});
