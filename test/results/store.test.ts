// Is a run on the disk always whole, old or new, and never mistaken for something else?

import { spawn, spawnSync } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdirSync, mkdtempSync, readFileSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { hostname, tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';

import { RunStoreError, readRun, runFolder, writeRun } from '../../src/results/store.ts';
import { syntheticRun } from './synthetic-run.ts';

const small = { rings: 4, sectors: 8, many: 2 };
let base: string;
beforeEach(() => (base = mkdtempSync(join(tmpdir(), 'wavewell-store-'))));
afterEach(() => rmSync(base, { recursive: true, force: true }));

const store = (folder: string, command: 'modes' | 'absorb' = 'absorb', extra = {}): void => {
  const { record, arrays } = syntheticRun(command, small);
  writeRun(folder, record, arrays, { 'device.yaml': 'wavewell: 1\n', ...extra });
};

describe('writing and reading', () => {
  test('a run comes back with every number', () => {
    const folder = join(base, 'deep', 'run');
    const { record, arrays } = syntheticRun('absorb', small);
    store(folder);
    const run = readRun(folder);
    expect(run.record).toMatchObject(JSON.parse(JSON.stringify(record)));
    for (const [name, array] of Object.entries(arrays)) expect(run.array(name)).toEqual(array);
    expect(readdirSync(folder).sort()).toEqual(['READ-FIRST.txt', 'arrays.bin', 'device.yaml', 'run.json']);
    expect(readFileSync(join(folder, 'READ-FIRST.txt'), 'utf8')).toContain(record.cautions[0]);
    expect(readdirSync(join(base, 'deep'))).toEqual(['run']);
    expect(() => run.array('nothing')).toThrow(/'nothing'/);
  });

  test('where nothing can hurt there is nothing to read first', () => {
    store(join(base, 'run'), 'modes');
    expect(existsSync(join(base, 'run', 'READ-FIRST.txt'))).toBe(false);
  });

  test('a run is replaced whole; what others put there is kept apart', () => {
    const folder = join(base, 'run');
    store(folder, 'absorb', { 'old.txt': 'made by the first run' });
    writeFileSync(join(folder, 'notes.md'), 'mine');
    store(folder, 'modes');
    expect(readRun(folder).record.command).toBe('modes');
    expect(readdirSync(folder).sort()).toEqual(['arrays.bin', 'device.yaml', 'earlier', 'run.json']);
    store(folder, 'modes');
    expect(readFileSync(join(folder, 'earlier', 'notes.md'), 'utf8')).toBe('mine');
    expect(readdirSync(base)).toEqual(['run']);
  });
});

describe('refusals', () => {
  test('a folder with other things in it is left alone', () => {
    writeFileSync(join(base, 'thesis.tex'), '');
    expect(() => store(base)).toThrow(/holds files but no run/);
    expect(readdirSync(base)).toEqual(['thesis.tex']);
  });

  test('an empty folder is taken', () => {
    mkdirSync(join(base, 'run'));
    store(join(base, 'run'));
    expect(readRun(join(base, 'run')).record.command).toBe('absorb');
  });

  test.each(['../escape', 'a/b', '', '.hidden', 'run.json', 'arrays.bin'])('file name %j', (name) => {
    expect(() => store(join(base, 'run'), 'absorb', { [name]: '' })).toThrow(RunStoreError);
    expect(readdirSync(base)).toEqual([]);
  });

  test('the current folder', () => expect(() => store('.')).toThrow(/current folder/));

  test('a record that would not read back is never written', () => {
    const { record, arrays } = syntheticRun('absorb', small);
    const spoiled = { ...record, fields: record.fields.map((field) => ({ ...field, scale: NaN })) };
    expect(() => writeRun(join(base, 'run'), spoiled, arrays)).toThrow(/fields\[0\].scale.*NaN/);
    expect(readdirSync(base)).toEqual([]);
  });

  test('a place that cannot be written leaves nothing behind', () => {
    writeFileSync(join(base, 'file'), '');
    expect(() => store(join(base, 'file', 'run'))).toThrow();
    expect(readdirSync(base)).toEqual(['file']);
  });
});

describe('what cannot be read says why', () => {
  const spoil = (change: (folder: string) => void): (() => unknown) => {
    const folder = join(base, 'run');
    store(folder);
    change(folder);
    return () => readRun(folder);
  };
  const edit = (folder: string, change: (text: string) => string): void => {
    const path = join(folder, 'run.json');
    writeFileSync(path, change(readFileSync(path, 'utf8')));
  };

  test.each<[string, (folder: string) => void, RegExp]>([
    ['no folder', (folder) => rmSync(folder, { recursive: true }), /no such folder/],
    ['no record', (folder) => rmSync(join(folder, 'run.json')), /has no run.json/],
    ['no arrays', (folder) => rmSync(join(folder, 'arrays.bin')), /has no arrays.bin/],
    ['half a record', (folder) => edit(folder, (text) => text.slice(0, text.length / 2)), /not valid JSON/],
    ['newer', (folder) => edit(folder, (text) => text.replace('"version": 1', '"version": 9')), /newer program/],
    ['truncated arrays', (folder) => writeFileSync(join(folder, 'arrays.bin'), 'short'), /truncated/],
  ])('%s', (_, change, message) => expect(spoil(change)).toThrow(message));

  test('one flipped bit in the arrays', () => {
    const flip = spoil((folder) => {
      const bytes = readFileSync(join(folder, 'arrays.bin'));
      bytes[100] ^= 1;
      writeFileSync(join(folder, 'arrays.bin'), bytes);
    });
    expect(flip).toThrow(/arrays.bin is damaged/);
  });

  test('a file', () => {
    writeFileSync(join(base, 'file'), '');
    expect(() => readRun(join(base, 'file'))).toThrow(/is a file/);
  });
});

describe('after a crash', () => {
  /** The number of a process that has ended. */
  const deadPid = (): number => spawnSync(process.execPath, ['-e', '']).pid;
  const host = hostname().replaceAll(/[^A-Za-z0-9.]/g, '_');

  test('half-written siblings of dead processes go; those of others stay', () => {
    const stale = join(base, `.run.writing-${host}-${deadPid()}`);
    const alive = join(base, `.run.writing-${host}-${process.ppid}`);
    const elsewhere = join(base, `.run.writing-otherhost-1`);
    for (const path of [stale, alive, elsewhere]) mkdirSync(path);
    store(join(base, 'run'));
    expect(readdirSync(base).sort()).toEqual([basename(alive), basename(elsewhere), 'run'].sort());
  });

  test.each(['SIGKILL', 'SIGINT'] as const)('a writer that is stopped by %s leaves a whole run', async (signal) => {
    const folder = join(base, 'run');
    const script = join(import.meta.dirname, 'write-endlessly.ts');
    for (const delay of [3, 40, 77]) {
      const writer = spawn(process.execPath, ['--import', 'tsx', script, folder], {
        stdio: ['ignore', 'pipe', 'inherit'],
      });
      await once(writer.stdout, 'data');
      await new Promise((done) => setTimeout(done, delay));
      writer.kill(signal);
      await once(writer, 'exit');
      expect(['absorb', 'modes']).toContain(readRun(folder).record.command);
    }
    store(folder);
    expect(readdirSync(base)).toEqual(['run']);
  });

  test('a run set aside in the moment of replacing is put back', () => {
    store(join(base, `.run.replaced-${host}-${deadPid()}`));
    expect(readRun(join(base, 'run')).record.command).toBe('absorb');
    expect(readdirSync(base)).toEqual(['run']);
  });

  test('what others had put into it is not lost even then', () => {
    const aside = join(base, `.run.replaced-${host}-${deadPid()}`);
    store(aside);
    writeFileSync(join(aside, 'notes.md'), 'mine');
    store(join(base, 'run'));
    writeFileSync(join(base, 'run', 'more.md'), 'too');
    store(join(base, 'run'));
    expect(readdirSync(base)).toEqual(['run']);
    expect(readdirSync(join(base, 'run', 'earlier')).sort()).toEqual(['more.md', 'notes.md']);
  });
});

describe('folder names', () => {
  test('device, command and the first digits of the sha256 of the input', () => {
    // sha256("abc") begins ba7816bf: FIPS 180-4, example of appendix B.
    expect(runFolder('runs', '/some/where/dented-disk.yaml', 'modes', 'abc')).toBe(
      join('runs', 'dented-disk', 'modes-ba7816bf'),
    );
  });

  test('odd device names stay inside the base', () => {
    expect(runFolder('runs', '../..', 'modes', 'abc').startsWith(join('runs', 'device'))).toBe(true);
    expect(runFolder('runs', 'größe 2 µm.json', 'modes', '')).toContain('größe-2-µm');
  });
});
