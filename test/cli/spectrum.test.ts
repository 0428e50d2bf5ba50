// Does a spectrum of many points come from a model that the run keeps, and leave as tables?

import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import {
  certifiedError,
  loadModel,
  modelSolver,
  readRun,
  readTouchstone,
  scatteringOfNetwork,
  spectrumView,
} from '../../src/index.ts';
import { type Ended, run, workFolder } from './program.ts';

const GUIDE = `wavewell: 1
title: Post in a guide
length: mm
polarization: Ez
band: { frequency: [8.2, 12.4], unit: GHz }
guides:
  - { name: in, from: [0, 0], angle: 180, size: WR-90 }
  - { name: out, from: [0, 0], angle: 0, size: WR-90 }
bodies: [ { material: electric wall, disk: { center: [0, 2], radius: 1 } } ]
`;

const folder = workFolder();
const file = folder.write('post.yaml', GUIDE);
let ended: Ended;
beforeAll(async () => {
  ended = await run(folder.path, 'spectrum', file, '--points', '41', '--in', 'in.0', '--json', '--out', 'post');
}, 60_000);
afterAll(() => folder.remove());

test('the answer tells factorizations, basis and the certified error of every point', () => {
  expect([ended.code, ended.stderr]).toEqual([0, '']);
  const answer = JSON.parse(ended.stdout);
  expect(answer.channels).toEqual(['in.0', 'out.0']);
  expect(answer.points).toHaveLength(41);
  for (const { modelError, error, S, smallest } of answer.points) {
    expect(modelError).toBeLessThan(1e-6);
    expect(error).toBeLessThan(1e-5);
    expect(smallest).toBeCloseTo(Math.hypot(...(S[0][0] as [number, number])), 12);
  }
  expect(answer.basis).toBeLessThan(40);
  expect(answer.factorizations.snapshots).toBeLessThan(12);
});

test('the model read back from the run gives the same S, without the mesh', () => {
  const stored = readRun(join(folder.path, 'post'));
  const solver = modelSolver(loadModel(stored)!);
  const { points, matrix } = spectrumView(stored);
  for (const i of [0, 7, 40]) {
    const { S, estimate } = solver.at(points[i].k[0], { estimate: true });
    const whole = matrix(i);
    S.forEach((v, j) => expect(v).toBeCloseTo(whole[j], 11));
    expect(certifiedError(solver.model, points[i].k[0], estimate!)).toBeLessThan(1e-6);
  }
});

test('the table has one row a point and the columns of the model', async () => {
  const wrong = await run(folder.path, 'export', 'post', '--channels', 'in.1');
  expect(wrong.code).toBe(2);
  const out = await run(folder.path, 'export', 'post', '--spectrum', '--channels', 'in.0');
  expect(out.code).toBe(0);
  const lines = readFileSync(join(folder.path, 'post/csv/spectrum.csv'), 'utf8').trimEnd().split('\r\n');
  expect(lines).toHaveLength(42);
  expect(lines[0]).toBe(
    'k [1/mm],wavelength [mm],frequency [GHz],"re_S(in.0, in.0)","im_S(in.0, in.0)",error_S,absorbed(in.0),balance,' +
      'error_model,best_absorbed,worst_absorbed,delay [mm],added,smallest_singular',
  );
});

test.each([
  ['1.1', 'spectrum.s2p'],
  ['2.0', 'spectrum.ts'],
])('a Touchstone file %s of the run reads back equal, and its network is analysed', async (version, name) => {
  const out = await run(folder.path, 'export', 'post', '--touchstone', version, '--out', `out${version}`);
  expect([out.code, out.stderr]).toEqual([0, '']);
  const text = readFileSync(join(folder.path, `out${version}`, name), 'utf8');
  expect(text).toContain('! Port 2: out.0');
  const read = scatteringOfNetwork(readTouchstone(text, 2));
  const stored = spectrumView(readRun(join(folder.path, 'post')));
  expect(read.hertz).toHaveLength(41);
  read.hertz.forEach((f, i) => {
    expect(f / (stored.points[i].frequency! * 1e12)).toBeCloseTo(1, 14);
    expect(read.matrices.slice(8 * i, 8 * i + 8)).toEqual(stored.matrix(i).slice());
  });

  const network = await run(folder.path, 'network', `out${version}/${name}`, '--in', '1', '--json');
  expect([network.code, network.stderr]).toEqual([0, '']);
  const answer = JSON.parse(network.stdout);
  expect(answer.ports).toBe(2);
  expect(Math.abs(answer.gain - 1)).toBeLessThan(1e-12);
  // a lossless post: what does not come back goes through
  expect(answer.points[0].best).toBeCloseTo(0, 12);
  expect(answer.points[0].reflection).toBeCloseTo(Math.hypot(stored.matrix(0)[0], stored.matrix(0)[1]), 12);
});

test('network: a file that breaks a rule is refused with its line, a port that is not there with the ports', async () => {
  folder.write('bad.s2p', '# GHz S RI R 50\n1 1 0 2 0 3 0 4 0\n2 1 0 2 0\n');
  const bad = await run(folder.path, 'network', 'bad.s2p');
  expect(bad.code).toBe(2);
  expect(bad.stderr).toMatch(/bad\.s2p, line 3/);
  const wrong = await run(folder.path, 'network', 'out1.1/spectrum.s2p', '--in', '3');
  expect(wrong.code).toBe(2);
  expect(wrong.stderr).toMatch(/ports 1 to 2/);
});

test('network writes tables and prints drives with a caution', async () => {
  const ended = await run(folder.path, 'network', 'out1.1/spectrum.s2p', '--out', 'measured');
  expect(ended.code).toBe(0);
  expect(ended.stdout).toMatch(/Best drive at/);
  expect(ended.stdout).toMatch(/Caution/);
  expect(readFileSync(join(folder.path, 'measured/network.csv'), 'utf8').split('\r\n')).toHaveLength(43);
  expect(readFileSync(join(folder.path, 'measured/READ-FIRST.txt'), 'utf8')).toMatch(/ICNIRP/);
});
