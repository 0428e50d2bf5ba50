// Does the run of a large spectrum hold S in an array, its model, and leave as files that say the same?

import { expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { modelSolver } from '../../src/projected/pole-residue.ts';
import { modelledRecord } from '../../src/questions/scatter-record.ts';
import { findSpectrum } from '../../src/questions/spectrum.ts';
import { spectrumTableCsv } from '../../src/results/export-spectrum-csv.ts';
import { runTouchstone } from '../../src/results/export-touchstone.ts';
import type { RunRecord } from '../../src/results/format.ts';
import { loadModel } from '../../src/results/model-store.ts';
import { spectrumView } from '../../src/results/spectrum-view.ts';
import { readTouchstone } from '../../src/results/touchstone-read.ts';
import { analyseMeasured } from '../../src/questions/measured.ts';
import { scatteringOfNetwork } from '../../src/results/touchstone.ts';

const device = readDevice(
  `wavewell: 1
length: mm
polarization: Ez
band: { frequency: [60, 100], unit: GHz }
materials: { glass: { permittivity: [4, 0.2] } }
bodies: [ { material: glass, disk: { center: [0.1, 0], radius: 0.8 } } ]`,
  'rod.yaml',
);
const { kMin, kMax } = device.band;
const ks = Array.from({ length: 101 }, (_, i) => kMin + ((kMax - kMin) * i) / 100);
const answer = findSpectrum(device, ks, { multipoles: 7, digits: 4 });
const parts = modelledRecord(device, answer, {
  deviceFile: 'rod.yaml',
  version: '0',
  node: '',
  when: null,
  options: {},
});
const run = {
  record: { ...parts.record, arrays: {} } as RunRecord,
  array: (name: string) => parts.arrays[name],
};

test('S stands in an array and reads back; the record is plain JSON', () => {
  const { points, matrix } = spectrumView(run);
  expect(points).toHaveLength(answer.points.length);
  expect(points[0].S).toBeUndefined();
  answer.points.forEach((p, i) => expect(matrix(i)).toEqual(p.matrix));
  expect(JSON.parse(JSON.stringify(parts.record))).toEqual(parts.record);
  expect(parts.record.sentence).toMatch(/15 channels at 101 points.*factorizations.*basis fields/);
});

test('the stored model gives the same S, after a trip through JSON', () => {
  const record = JSON.parse(JSON.stringify(run.record)) as RunRecord;
  const solver = modelSolver(loadModel({ ...run, record })!);
  const { S } = solver.at(ks[40]);
  S.forEach((v, i) => expect(v).toBeCloseTo(answer.points[40].matrix[i], 11));
});

test.each([1, 2] as const)('a Touchstone file of version %i holds one port a multipole, symmetric', (version) => {
  const { text, ports } = runTouchstone(run, { version });
  expect(ports).toBe(15);
  const network = readTouchstone(text);
  const measured = scatteringOfNetwork(network);
  expect(measured.hertz[0] / 60e9).toBeCloseTo(1, 13);
  answer.points.forEach((p, i) => expect(measured.matrices.slice(450 * i, 450 * (i + 1))).toEqual(p.matrix.slice()));
  expect(analyseMeasured(measured, { inputs: [0] }).reciprocity).toBeLessThan(1e-12);
});

test('best drive of the file is that of the run', () => {
  const { text } = runTouchstone(run, { version: 1 });
  const { points } = analyseMeasured(scatteringOfNetwork(readTouchstone(text)));
  for (const i of [0, 50, 100]) {
    expect(points[i].best).toBeCloseTo(answer.points[i].best, 10);
    expect(points[i].single[3]).toBeCloseTo(answer.points[i].absorbed[3], 10);
  }
});

test('the table of two channels has their four entries', () => {
  const [header, first] = spectrumTableCsv(run, ['open.cos0', 'open.sin2']).split('\r\n');
  expect(header.match(/re_S/g)).toHaveLength(4);
  // k, wavelength, frequency; S; error, two absorbed, balance; model error, best, worst, delay, added
  expect(first.split(',')).toHaveLength(3 + 8 + 4 + 5);
  expect(() => spectrumTableCsv(run, ['left.0'])).toThrow(/open\.cos0/);
});

test('a device without a length unit has no frequencies in Hz', () => {
  const bare = { ...run, record: { ...run.record, device: { ...run.record.device, metres: null } } };
  expect(() => runTouchstone(bare, { version: 1 })).toThrow(/length unit/);
});
