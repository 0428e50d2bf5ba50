// Do modes, threshold, absorb and export keep what they promise to scripts?

import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { type Ended, run, TINY_DISK, workFolder } from './program.ts';

const folder = workFolder();
const file = folder.write('disk.yaml', TINY_DISK);
const inside = (...parts: string[]): string => join(folder.path, ...parts);

let modes: Ended;
let threshold: Ended;
let absorb: Ended;

beforeAll(async () => {
  [modes, threshold] = await Promise.all([
    run(folder.path, 'modes', file, '--q-min', '5', '--digits', '3', '--json'),
    run(folder.path, 'threshold', file, '--pump-max', '0.6', '--digits', '3', '--json'),
  ]);
  absorb = await run(folder.path, 'absorb', file, '--loss-max', '0.6', '--digits', '3', '--json', '--out', 'twin');
}, 120_000);
afterAll(() => folder.remove());

// Source: test/checks/disk-modes.json, n = 2, Ez, m = 3, first (mpmath, 50 digits: secant on the exact equation).
const POLE = [2.3840470536572864, -0.12169591498222694] as const;

test('modes: one JSON object with the keys of the contract', () => {
  expect([modes.code, modes.stderr]).toEqual([0, '']);
  const answer = JSON.parse(modes.stdout);
  expect(answer.modes).toHaveLength(1);
  const [mode] = answer.modes;
  expect(mode).toMatchObject({ assignment: 'poles', multiplicity: 2, label: 'm = 3' });
  expect(Math.hypot(mode.k[0] - POLE[0], mode.k[1] - POLE[1])).toBeLessThan(1e-3 * POLE[0]);
  expect(mode.kError).toBeGreaterThan(0);
  expect(mode.q).toBeCloseTo(mode.k[0] / (2 * -mode.k[1]), 10);
  expect(mode.wavelength).toBeCloseTo((2 * Math.PI) / mode.k[0], 12);
  expect(mode.frequency).toBeCloseTo(299.792458 / mode.wavelength, 9);
  expect(answer.cautions.join(' ')).toMatch(/two-dimensional model/);
});

test('threshold and absorb: the twin has the same k and D, and a proof', () => {
  expect([threshold.code, absorb.code]).toEqual([0, 0]);
  const lasing = JSON.parse(threshold.stdout);
  const twin = JSON.parse(absorb.stdout);
  const [a] = lasing.crossings;
  const [b] = twin.crossings;
  expect(a.pumpError).toBeGreaterThan(0);
  expect(Math.abs(a.k - b.k)).toBeLessThan(a.kError + b.kError);
  expect(Math.abs(a.pump - b.loss)).toBeLessThan(a.pumpError + b.lossError);
  expect(b.drive.some((t: { m: number }) => t.m === 3)).toBe(true);
  const total = b.drive.reduce((s: number, t: { amplitude: number[] }) => s + Math.hypot(...t.amplitude) ** 2, 0);
  expect(total).toBeCloseTo(1, 10);
  expect(Object.keys(b.forward)).toEqual(expect.arrayContaining(['incoming', 'outgoing', 'absorbed', 'balance']));
  expect(b.forward.incoming).toBe(1);
  expect(b.forward.outgoing).toBeLessThan(1e-6);
  expect(b.forward.ownMesh.outgoing).toBeLessThan(1e-4);
  expect(lasing.cautions.join(' ')).toMatch(/IEC 60825-1/);
  expect(twin.cautions.join(' ')).toMatch(/heat/);
});

test('a run is stored whole, with the device file as it was written', () => {
  const { run: place } = JSON.parse(modes.stdout);
  expect(place).toMatch(/^runs[/\\]disk[/\\]modes-[0-9a-f]{8}$/);
  expect(readFileSync(inside(place, 'device.yaml'), 'utf8')).toBe(TINY_DISK);
  expect(JSON.parse(absorb.stdout).run).toBe('twin');
  expect(readdirSync(inside('twin')).sort()).toEqual(['READ-FIRST.txt', 'arrays.bin', 'device.yaml', 'run.json']);
  const { run: _, ...answer } = JSON.parse(modes.stdout);
  expect(JSON.parse(readFileSync(inside(place, 'run.json'), 'utf8')).answer).toEqual(answer);
});

test('the same question is read back, on paper: sentence, table, place, caution', async () => {
  const { run: place } = JSON.parse(modes.stdout);
  const before = statSync(inside(place, 'arrays.bin')).mtimeMs;
  const again = await run(folder.path, 'modes', file, '--q-min', '5', '--digits', '3');
  expect(again.code).toBe(0);
  expect(statSync(inside(place, 'arrays.bin')).mtimeMs).toBe(before);
  const lines = again.stdout.split('\n');
  expect(lines[0]).toMatch(/^2 resonances with Q ≥ 5/);
  expect(again.stdout).toMatch(/ ± /);
  expect(again.stdout).toMatch(/read back/);
  expect(again.stdout).toMatch(/Caution/);
  expect(again.stdout).not.toContain('\x1b');
});

test('none found ends with 1 and still answers', async () => {
  const none = await run(folder.path, 'modes', file, '--q-min', '50', '--digits', '2', '--json');
  expect(none.code).toBe(1);
  expect(JSON.parse(none.stdout).modes).toEqual([]);
});

test('export writes tables that read back, beside a READ-FIRST, and a field that the run holds', async () => {
  const ended = await run(folder.path, 'export', 'twin', '--json');
  expect(ended.code).toBe(0);
  const { files, fields } = JSON.parse(ended.stdout);
  const names = files.map((f: string) => f.split(/[/\\]/).at(-1));
  expect(names).toEqual(
    expect.arrayContaining(['crossings.csv', 'drive-absorbing-1.csv', 'paths.csv', 'READ-FIRST.txt']),
  );
  const rows = readFileSync(inside('twin', 'csv', 'drive-absorbing-1.csv'), 'utf8')
    .trimEnd()
    .split('\r\n');
  const [first] = JSON.parse(absorb.stdout).crossings[0].drive;
  const cells = rows[1].split(',').map(Number);
  expect(cells.slice(0, 3)).toEqual([first.m, ...first.amplitude]);

  const options = ['--field', fields[0], '--line', '-1,0.25:1,0.25', '--points', '5', '--grid', '3x2', '--out', 'csv'];
  expect((await run(folder.path, 'export', 'twin', ...options)).code).toBe(0);
  const line = readFileSync(inside('csv', `field-${fields[0]}-line.csv`), 'utf8')
    .trimEnd()
    .split('\r\n');
  expect(line[0]).toBe(
    'x [um],y [um],re_Ez [per unit drive],im_Ez [per unit drive],abs_Ez [per unit drive],phase [deg],body,distance [um]',
  );
  expect(line).toHaveLength(6);
  const middle = line[3].split(',');
  expect(middle.slice(0, 2).map(Number)).toEqual([0, 0.25]);
  expect(middle[6]).toBe('disk');
  expect(Math.hypot(Number(middle[2]), Number(middle[3]))).toBeCloseTo(Number(middle[4]), 12);
  expect(existsSync(inside('csv', 'READ-FIRST.txt'))).toBe(true);

  const wrong = await run(folder.path, 'export', 'twin', '--field', 'absorbing-9', '--out', 'never');
  expect(wrong.code).toBe(2);
  expect(wrong.stderr).toMatch(/write absorbing-/);
  expect(existsSync(inside('never'))).toBe(false);
});
