// Do match, and threshold and absorb of a device with guides, keep what they promise to scripts?

import { afterAll, expect, test } from 'vitest';
import { run, workFolder } from './program.ts';

const folder = workFolder();
afterAll(() => folder.remove());

const file = folder.write(
  'slab.yaml',
  `wavewell: 1
title: Slab in a guide
polarization: Hz
band: { wavenumber: [5.8, 6.8] }
materials: { glass: { index: 2 } }
enclosure: { spaces: [ { rectangle: { center: [0.5, 0], size: [1, 0.3] } } ] }
bodies: [ { name: slab, material: glass, rectangle: { center: [0.5, 0], size: [1, 0.3] } } ]
pump: { bodies: { slab: 1 } }
guides:
  - { name: left, from: [0, 0], angle: 180, width: 0.3 }
  - { name: right, from: [1, 0], angle: 0, width: 0.3 }
`,
);

test('threshold and absorb of a device with guides: the same k and D, and a proof', async () => {
  const [lasing, absorbing] = await Promise.all(
    ['threshold', 'absorb'].map(async (command) => {
      const most = command === 'threshold' ? '--pump-max' : '--loss-max';
      const ended = await run(folder.path, command, file, most, '1.5', '--digits', '6', '--json');
      expect([ended.code, ended.stderr]).toEqual([0, '']);
      return JSON.parse(ended.stdout);
    }),
  );
  expect(lasing.inputs).toEqual([]);
  expect(absorbing.inputs).toEqual(['left.0', 'right.0']);
  expect(lasing.matches).toHaveLength(absorbing.matches.length);
  expect(lasing.matches.length).toBeGreaterThan(0);
  for (const [i, twin] of absorbing.matches.entries()) {
    expect(Math.abs(twin.k - lasing.matches[i].k)).toBeLessThan(1e-9);
    expect(Math.abs(twin.level - lasing.matches[i].level)).toBeLessThan(1e-9);
    expect(twin.reflected).toBeLessThan(1e-10);
    expect(Math.abs(twin.absorbed - 1)).toBeLessThan(1e-9);
  }
  expect(lasing.cautions.join(' ')).toMatch(/threshold/);
  expect(absorbing.cautions.join(' ')).toMatch(/heat/);
}, 60_000);

test('match --every-choice: two sets of one guide each', async () => {
  const { code, stdout } = await run(folder.path, 'match', file, '--every-choice', '--digits', '4', '--json');
  expect(code).toBe(0);
  const { choices } = JSON.parse(stdout);
  expect(choices.map((c: { inputs: string[] }) => c.inputs).sort()).toEqual([['left.0'], ['right.0']]);
  // whole half waves: k n = mπ
  for (const { k, kError } of choices) {
    expect(Math.abs(k[0] - 2 * Math.PI)).toBeLessThan(1e-5);
    expect(kError).toBeLessThan(1e-4);
  }
}, 60_000);

test.each([
  ['nothing that comes in', ['match', file], /--every-choice/],
  ['an unknown guide', ['match', file, '--in', 'top'], /left, right/],
  ['every choice and one of them', ['match', file, '--every-choice', '--in', 'left'], /--in/],
] as const)('%s', async (_, words, complaint) => {
  const { code, stdout, stderr } = await run(folder.path, ...words);
  expect([code, stdout]).toEqual([2, '']);
  expect(stderr).toMatch(complaint);
});
