// Does wrong input end with 2, four lines that help, and nothing written?

import { readdirSync } from 'node:fs';
import { afterAll, expect, test } from 'vitest';
import { run, TINY_DISK, workFolder } from './program.ts';

const folder = workFolder();
afterAll(() => folder.remove());

/** Each wrong file: what is replaced, what the message must hold; the place is line:column. */
const WRONG_FILES: readonly [string, string, string, string, RegExp, string?][] = [
  ['bad YAML', 'polarization: Ez', 'polarization: [Ez', ':', /mend/],
  ['unknown key', 'polarization: Ez', 'polarisation: Ez', ':5:1', /polarization/],
  ['wrong type', 'radius: radius }', 'radius: [1] }', ':10:', /number/],
  ['negative radius', 'radius: radius }', 'radius: -1 }', ':10:', /above 0/],
  ['NaN', 'radius: radius }', 'radius: .nan }', ':10:', /finite|number/],
  ['expression error', 'radius: radius }', 'radius: "radius +" }', ':10:', /expected/],
  ['empty band', '[2.35, 2.45]', '[2.45, 2.35]', ':6:', /smaller/],
  ['no active body', 'pump: { bodies: { disk: 1 } }', '', ':1:1', /pump/, 'threshold'],
  [
    'too many bodies',
    'radius: radius }',
    'radius: 0.1 }, array: { count: [100000, 10000], pitch: [1, 1] }',
    ':10:',
    /at most/,
  ],
  [
    'a gap too thin',
    'radius: radius } }',
    'radius: radius } }\n  - { material: glass, disk: { center: [2.000000001, 0], radius: 1 } }',
    ':11:',
    /wide between/,
  ],
];

test.each(WRONG_FILES)('a device file with %s', async (name, from, to, place, words, command = 'modes') => {
  expect(TINY_DISK).toContain(from);
  const file = folder.write(`${name.replaceAll(' ', '-')}.yaml`, TINY_DISK.replace(from, to));
  const { code, stdout, stderr } = await run(folder.path, command, file, '--json');
  expect(code).toBe(2);
  expect(stdout).toBe('');
  const lines = stderr.trimEnd().split('\n');
  expect(lines[0]).toContain(`${file}${place}`);
  expect(lines[1]).toMatch(/^ {2}came: /);
  expect(lines[2]).toMatch(/^ {2}expected: /);
  expect(lines[3]).toMatch(/^ {2}mend: /);
  expect(stderr).toMatch(words);
  expect(readdirSync(folder.path)).not.toContain('runs');
});

test.each(['threshold', 'absorb'])('%s of a device with walls all around it', async (command) => {
  const walls = 'enclosure: { spaces: [{ rectangle: { center: [0, 0], size: [4, 4] } }] }';
  const file = folder.write(`boxed-${command}.yaml`, `${TINY_DISK.trimEnd()}\n${walls}\n`);
  const { code, stdout, stderr } = await run(folder.path, command, file, '--json');
  expect(stderr).toMatch(/walls all around/);
  expect(code).toBe(2);
  expect(stdout).toBe('');
  expect(readdirSync(folder.path)).not.toContain('runs');
});

test.each([
  ['no such file', ['modes', 'nowhere.yaml'], /no such file/],
  ['a misspelt command', ['tresholds', 'x.yaml'], /write threshold/],
  ['a misspelt option', ['modes', 'disk.yaml', '--qmin', '4'], /write --q-min/],
  ['a missing file name', ['modes'], /FILE/],
  ['digits out of range', ['modes', 'disk.yaml', '--digits', '40'], /from 2 to 11/],
  ['an unknown knob', ['modes', 'disk.yaml', '--knob', 'radios=1'], /"radius"/],
  ['an unknown knob to go along', ['absorb', 'disk.yaml', '--along', 'radios=1,2'], /write radius/],
  ['a band that is no band', ['modes', 'disk.yaml', '--band', '3'], /A,B/],
  ['a place below a file', ['modes', 'disk.yaml', '--out', 'disk.yaml/run'], /below the file/],
  ['a run that is none', ['export', 'disk.yaml'], /run folder/],
])('%s', async (_, args, words) => {
  folder.write('disk.yaml', TINY_DISK);
  const { code, stdout, stderr } = await run(folder.path, ...args);
  expect(code).toBe(2);
  expect(stdout).toBe('');
  expect(stderr).toMatch(words);
  expect(stderr.trimEnd().split('\n')).toHaveLength(4);
  expect(readdirSync(folder.path)).not.toContain('runs');
});
