// Does a spectrum of many points come from a model that the run keeps, and leave as tables?

import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { certifiedError, loadModel, modelSolver, readRun, spectrumView } from '../../src/index.ts';
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
