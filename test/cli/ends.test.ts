// Does the program end as it should: interrupted, with its pipe closed, asked for its version?

import { readdirSync, readFileSync } from 'node:fs';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterAll, expect, test } from 'vitest';
import { run, start, TINY_DISK, workFolder } from './program.ts';

const folder = workFolder();
afterAll(() => folder.remove());

test.skipIf(process.platform === 'win32')('Ctrl-C ends long work at once with 130 and leaves nothing', async () => {
  // 25 wavelengths across in the glass and eight digits: minutes of work.
  const long = TINY_DISK.replace('radius: 1', 'radius: 16');
  const file = folder.write('long.yaml', long);
  const { child, ended } = start(folder.path, ['modes', file, '--digits', '8']);
  // Time enough for the device to be read; the work then runs beside the command.
  await sleep(5000);
  const asked = performance.now();
  child.kill('SIGINT');
  const { code, stdout } = await ended;
  expect(code).toBe(130);
  expect(performance.now() - asked).toBeLessThan(2000);
  expect(stdout).toBe('');
  expect(readdirSync(folder.path)).toEqual(['long.yaml']);
});

test('a closed pipe is silent', async () => {
  const { child, ended } = start(folder.path, ['schema']);
  child.stdout!.destroy();
  const { code, stderr } = await ended;
  expect(stderr).toBe('');
  expect(code).toBe(0);
});

test('version, schema and help', async () => {
  const { version } = JSON.parse(readFileSync(new URL('../../package.json', import.meta.url), 'utf8'));
  expect(await run(folder.path, '--version')).toEqual({ code: 0, stdout: `${version}\n`, stderr: '' });
  const schema = await run(folder.path, 'schema');
  expect(JSON.parse(schema.stdout).required).toEqual(expect.arrayContaining(['wavewell', 'band', 'bodies']));
  expect((await run(folder.path, 'modes', '--help')).code).toBe(0);
});
