// How does a question about a device file get its run: from the store, or computed?

import { existsSync, readFileSync } from 'node:fs';
import { extname, join, relative, resolve } from 'node:path';
import { type LoadedRun, readRun, runFolder, writeRun } from '../src/index.ts';
import { type DeviceFile } from './device-file.ts';
import { InputError } from './faults.ts';
import { farWork } from './far-work.ts';
import type { RunCommand, RunInput, RunOutput, Settings } from './tasks.ts';
import { programVersion } from './version.ts';

export interface Asked {
  readonly run: LoadedRun;
  /** As the user would write it. */
  readonly folder: string;
  /** Read back from an earlier run instead of computed. */
  readonly reused: boolean;
}

export interface Place {
  /** Exactly this folder; else one of its own below `base`. */
  readonly out?: string;
  /** 'runs' if absent. */
  readonly base?: string;
  readonly again?: boolean;
}

/** The run that answers the question; stored whole when this returns. */
export async function ask(command: RunCommand, file: DeviceFile, settings: Settings, place: Place): Promise<Asked> {
  const version = programVersion();
  const question = JSON.stringify([command, version, settings, file.text]);
  const own = runFolder(place.base ?? 'runs', file.path, command, question);
  const folder = place.out ?? own;
  const same = (f: string): LoadedRun | null => storedAnswer(f, { command, version, settings, text: file.text });
  if (!place.again) {
    const here = same(folder);
    if (here) return { run: here, folder: shown(folder), reused: true };
    const elsewhere = folder === own ? null : same(own);
    if (elsewhere) {
      refuseOther(folder, command, file);
      writeRun(folder, withoutTables(elsewhere), arraysOf(elsewhere), copyOf(file));
      return { run: readRun(folder), folder: shown(folder), reused: true };
    }
  }
  if (place.out !== undefined) refuseOther(place.out, command, file);
  const input: RunInput = {
    command,
    text: file.text,
    read: { knobs: settings.knobs, ...(settings.band ? { band: settings.band } : {}) },
    settings,
    context: {
      deviceFile: file.path,
      version,
      node: process.version,
      when: new Date().toISOString(),
      options: { ...settings },
    },
  };
  const { record, arrays } = await farWork<RunOutput>(command, { task: 'run', input });
  writeRun(folder, record, arrays, copyOf(file));
  return { run: readRun(folder), folder: shown(folder), reused: false };
}

/** The name of the copy of the device file in a run folder: 'device.yaml'. */
const copyName = (path: string): string => `device${extname(path).toLowerCase() === '.json' ? '.json' : '.yaml'}`;
const copyOf = (file: DeviceFile): Record<string, string> => ({ [copyName(file.path)]: file.text });

/** The run in the folder when it answers the very same question of the very same file, else null. */
function storedAnswer(
  folder: string,
  question: { command: string; version: string; settings: Settings; text: string },
): LoadedRun | null {
  if (!existsSync(join(folder, 'run.json'))) return null;
  try {
    const run = readRun(folder);
    const { record } = run;
    const copies = ['device.yaml', 'device.json'].map((name) => join(folder, name)).filter((path) => existsSync(path));
    const same =
      record.command === question.command &&
      record.program.version === question.version &&
      JSON.stringify(record.options) === JSON.stringify(question.settings) &&
      copies.some((path) => readFileSync(path, 'utf8') === question.text);
    return same ? run : null;
  } catch {
    // A run that cannot be read is no answer; it is computed again.
    return null;
  }
}

/** A folder named by the user may hold an earlier run of this question with other settings, but not another answer. */
function refuseOther(folder: string, command: string, file: DeviceFile): void {
  if (!existsSync(join(folder, 'run.json'))) return;
  let held: LoadedRun;
  try {
    held = readRun(folder);
  } catch {
    return;
  }
  const { record } = held;
  if (record.command === command && resolve(record.device.file) === resolve(file.path)) return;
  throw new InputError(
    'option --out',
    `${folder}, which holds the run "${record.command}" of ${record.device.file}`,
    'a new folder, or one with an earlier run of the same question',
    'name another folder',
  );
}

function withoutTables({ record }: LoadedRun): RunOutput['record'] {
  const { arrays: _arrays, files: _files, ...rest } = record;
  return rest;
}

const arraysOf = (run: LoadedRun): RunOutput['arrays'] =>
  Object.fromEntries(Object.keys(run.record.arrays).map((name) => [name, run.array(name)]));

/** Relative to the current folder where that is shorter. */
export function shown(path: string): string {
  const short = relative(process.cwd(), resolve(path));
  return short !== '' && short.length < path.length && !short.startsWith('..') ? short : path;
}
