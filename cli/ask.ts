// How does a question about a device file get its run: from the store, or computed?

import { accessSync, constants, existsSync, readdirSync, readFileSync, statSync } from 'node:fs';
import { dirname, extname, join, relative, resolve, sep } from 'node:path';
import { type LoadedRun, readRun, runFolder, type RunParts, writeRun } from '../src/index.ts';
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

/** The run that answers the question, stored whole when this returns; null when a knob brings nothing to the axis. */
export async function ask(
  command: RunCommand,
  file: DeviceFile,
  settings: Settings,
  place: Place,
): Promise<Asked | null> {
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
      refusePlace(folder, command, file);
      writeRun(folder, withoutTables(elsewhere), arraysOf(elsewhere), copyOf(file));
      return { run: readRun(folder), folder: shown(folder), reused: true };
    }
  }
  refusePlace(folder, command, file);
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
  const parts = await farWork<RunOutput>(command, { task: 'run', input });
  if (parts === null) return null;
  writeRun(folder, parts.record, parts.arrays, copyOf(file));
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

/**
 * Before long work: a folder that cannot take the run. It may hold an earlier run of this question with other settings,
 * but not another answer, and nothing that no run wrote.
 */
function refusePlace(folder: string, command: string, file: DeviceFile): void {
  const refuse = (came: string): never => {
    const expected = 'a new folder, or one with an earlier run of the same question';
    throw new InputError(`folder ${folder}`, came, expected, 'name another folder with --out');
  };
  const cwd = process.cwd();
  let above = resolve(folder);
  if (cwd === above || cwd.startsWith(above.endsWith(sep) ? above : above + sep))
    refuse('the current folder, or one that holds it');
  while (!existsSync(above)) above = dirname(above);
  if (!statSync(above).isDirectory()) refuse(above === resolve(folder) ? 'a file' : `a place below the file ${above}`);
  try {
    accessSync(above, constants.W_OK);
  } catch {
    refuse('a place that may not be written');
  }
  if (above !== resolve(folder)) return;
  if (!existsSync(join(folder, 'run.json'))) {
    if (readdirSync(folder).length > 0) refuse('a folder that holds something else than a run');
    return;
  }
  let held: LoadedRun;
  try {
    held = readRun(folder);
  } catch {
    // A damaged run is replaced.
    return;
  }
  const { record } = held;
  if (record.command !== command || resolve(record.device.file) !== resolve(file.path))
    refuse(`the run "${record.command}" of ${record.device.file}`);
}

function withoutTables({ record }: LoadedRun): RunParts['record'] {
  const { arrays: _arrays, files: _files, ...rest } = record;
  return rest;
}

const arraysOf = (run: LoadedRun): RunParts['arrays'] =>
  Object.fromEntries(Object.keys(run.record.arrays).map((name) => [name, run.array(name)]));

/** Relative to the current folder where that is shorter. */
export function shown(path: string): string {
  const short = relative(process.cwd(), resolve(path));
  return short !== '' && short.length < path.length && !short.startsWith('..') ? short : path;
}
