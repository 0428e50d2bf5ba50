// Are guides, walls and symmetry lines read as written, and refused with a reason where they cannot be?

import { describe, expect, test } from 'vitest';
import { DeviceError } from '../../src/device/findings.ts';
import { readDevice } from '../../src/device/read.ts';
import { standardGuide, STANDARD_GUIDES } from '../../src/device/standard-guides.ts';

const text = (more: string, polarization = 'Ez', length = 'mm'): string => `wavewell: 1
length: ${length}
polarization: ${polarization}
band: { wavenumber: [0.1, 0.3] }
materials: { glass: { index: 1.5 }, tin: { conductivity: 9e6 } }
${more}`;
const read = (more: string, polarization?: string, length?: string) =>
  readDevice(text(more, polarization, length), 'a.yaml');
const guide = (keys: string): string => `bodies: []\nguides: [ { name: g, from: [0, 0], angle: 0, ${keys} } ]`;

test('standard sizes: cutoffs c/2a of the public chart, every name once, bands above the cutoff', () => {
  // EIA RS-261-B and IEC 60153-2, sides seen in a public chart; cutoffs recomputed, GHz
  for (const [name, cutoff] of [
    ['WR-430', 1.37242],
    ['WR-90', 6.55714],
    ['R320', 21.0765],
    ['wr10', 59.0143],
  ] as const)
    expect(Math.abs(299.792458 / (2 * standardGuide(name)!.width) / cutoff - 1)).toBeLessThan(1e-5);
  expect(new Set(STANDARD_GUIDES.flatMap((g) => [g.name, g.iec])).size).toBe(2 * STANDARD_GUIDES.length);
  for (const { width, band } of STANDARD_GUIDES) {
    const cutoff = 299.792458 / (2 * width);
    expect(band[0] / cutoff).toBeGreaterThan(1.2);
    expect(band[1] / cutoff).toBeLessThan(2);
  }
});

test('a size is turned into the unit of the file', () => {
  expect(read(guide('size: WR-90')).guides![0].width).toBe(22.86);
  expect(read(guide('size: R100'), 'Ez', 'um').guides![0].width).toBe(22860);
});

describe.each([
  [guide('size: WR-91'), 'guides[0].size', 'unknown guide', 'WR-90'],
  [guide('size: WR-90, width: 3'), 'guides[0].size', 'size and width together', 'keep one'],
  [guide('length: 3'), 'guides[0]', 'neither size nor width', 'WR-90'],
  [guide('width: -3'), 'guides[0].width', '-3', 'positive'],
  [guide('width: 3, wall: tin'), 'guides[0].wall', 'lossy wall', 'enclosure'],
  [guide('width: 3, wall: glass'), 'guides[0].wall', 'glass, which waves can enter', 'conductivity'],
  [guide('width: 3, modes: 0'), 'guides[0].modes', '0', 'whole number'],
  [
    'bodies: []\nenclosure: { spaces: [ { disk: { center: [0, 0], radius: 9 } } ] }\nguides: [ { name: g, from: [0, 0], angle: 0, width: 3 } ]',
    'guides[0]',
    'whose end lies inside the enclosure',
    'longer',
  ],
  [
    'bodies: [ { name: rod, material: glass, disk: { center: [3, 0], radius: 1 } } ]\nguides: [ { name: g, from: [0, 0], angle: 0, width: 3 } ]',
    'guides[0]',
    'at whose end lies the body rod',
    'longer',
  ],
  [
    'bodies: []\nsymmetry: [ { field: odd } ]\nenclosure: { spaces: [ { disk: { center: [0, 0], radius: 9 } } ] }',
    'symmetry[0]',
    'without',
    'keep one',
  ],
  ['bodies: []', 'bodies', '[]', 'add what is missing'],
  [
    'bodies: [ { name: lid, material: tin, disk: { center: [3, 0], radius: 1 } } ]\npump: { bodies: { lid: 1 } }',
    'pump.bodies.lid',
    'metal',
    'leave it out',
  ],
])('%s', (more, path, came, mend) => {
  test('is refused with its place, what came and the mend', () => {
    try {
      read(more);
      expect.unreachable();
    } catch (error) {
      expect(error).toBeInstanceOf(DeviceError);
      const [finding] = (error as DeviceError).findings;
      expect(finding.path).toBe(path);
      expect(finding.came).toContain(came);
      expect(finding.mend).toContain(mend);
    }
  });
});

test('a named guide in Hz is refused: it is seen across its broad side', () => {
  expect(() => read(guide('size: WR-90'), 'Hz')).toThrow(/Ez/);
});
