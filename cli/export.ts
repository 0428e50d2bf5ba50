// wavewell export RUN: how do the numbers and fields of a run leave as CSV?

import type { Command } from 'commander';
import { join } from 'node:path';
import {
  cautionsFor,
  crossingTableCsv,
  driveTableCsv,
  fieldFigure,
  fieldGridCsv,
  fieldLineCsv,
  fieldNodesCsv,
  fieldSampler,
  type LoadedRun,
  modeTableCsv,
  MOST_ROWS,
  nearestName,
  planeFigure,
  polePathCsv,
  READ_FIRST_NAME,
  readFirstText,
  readRun,
  runTouchstone,
  spectrumTableCsv,
  type TouchstoneFormat,
} from '../src/index.ts';
import { shown } from './ask.ts';
import { InputError } from './faults.ts';
import { readNumbers } from './options.ts';
import { ink, say, sayCautions, sayJson } from './paper.ts';
import { pictureFiles } from './pictures.ts';
import { writeFiles } from './write-files.ts';

interface ExportOptions {
  readonly field?: string;
  readonly nodes?: true;
  readonly grid?: readonly [number, number];
  readonly box?: readonly [number, number, number, number];
  readonly line?: readonly [number, number, number, number];
  readonly points?: number;
  readonly spectrum?: true;
  readonly channels?: readonly string[];
  readonly touchstone?: '1.1' | '2.0';
  readonly pairs?: TouchstoneFormat;
  readonly modes?: true;
  readonly crossings?: true;
  readonly drive?: true;
  readonly path?: true;
  readonly picture?: true;
  readonly out?: string;
  readonly json?: true;
}

export function addExport(program: Command): void {
  program
    .command('export')
    .description('writes tables and fields of a run as CSV; all tables if nothing is chosen')
    .argument('<RUN>', 'run folder')
    .option('--modes', 'the modes')
    .option('--spectrum', 'the S-parameters')
    .option('--channels <A,B,…>', 'only these channels of the S-parameters', (text: string) =>
      text.split(',').map((name) => name.trim()),
    )
    .option('--touchstone <VERSION>', 'the S-parameters as a Touchstone file, 1.1 or 2.0, under exp(+jωt)', (text) =>
      readWord(text, '--touchstone', ['1.1', '2.0']),
    )
    .option('--pairs <FORM>', 'of a Touchstone file: RI (if absent), MA or DB', (text) =>
      readWord(text.toUpperCase(), '--pairs', ['RI', 'MA', 'DB']),
    )
    .option('--crossings', 'the thresholds or absorption points')
    .option('--drive', 'the drives: amplitude and phase of every channel')
    .option('--path', 'the paths of poles or zeros')
    .option('--field <ID>', 'which field (the first if absent): with --nodes, --grid or --line')
    .option('--nodes', 'the field at the points of the display mesh')
    .option('--grid <NXxNY>', 'the field on a grid over the rim, or over --box', readGrid)
    .option('--box <x0,y0,x1,y1>', 'corners of the grid', (text: string) => readFour(text, '--box', ','))
    .option('--line <x0,y0:x1,y1>', 'the field along a line', (text: string) => readFour(text, '--line', ':'))
    .option('--points <N>', 'points on the line (201 if absent)', (text: string) => readCount(text, '--points'))
    .option('--picture', 'the field and the complex plane as SVG and PNG')
    .option('--out <DIR>', 'folder to write to (RUN/csv if absent)')
    .option('--json', 'prints one JSON object and nothing else')
    .action((folder: string, options: ExportOptions) => {
      const run = readRun(folder);
      const { record } = run;
      const out = options.out ?? join(folder, 'csv');
      const files = { ...exportFiles(run, out, options), ...readFirstFile(run, out) };
      writeFiles(files);
      const names = Object.keys(files).map(shown);
      const cautions = record.cautions.length > 0 ? record.cautions : cautionsFor('drive', record.device);
      if (options.json) return sayJson({ files: names, fields: record.fields.map((f) => f.id), cautions });
      say(ink.bold(`${String(names.length)} files written to ${shown(out)}.`));
      for (const name of names) say(`  ${name}`);
      const fields = record.fields.map((f) => f.id).join(', ');
      if (fields !== '') say(ink.dim(`  Fields of this run: ${fields} (--field ID with --nodes, --grid or --line).`));
      sayCautions(cautions);
    });
}

/** CSV has no comments: the cautions and meanings stand beside it. */
export const readFirstFile = ({ record }: LoadedRun, out: string): Record<string, string> => ({
  [join(out, READ_FIRST_NAME)]: readFirstText(record),
});

/** Path → text of everything that is asked for; throws before anything is written. */
export function exportFiles(run: LoadedRun, out: string, options: ExportOptions): Record<string, string | Uint8Array> {
  checkChoice(options);
  const { record } = run;
  const files: Record<string, string | Uint8Array> = {};
  const add = (name: string, text: string): void => void (files[join(out, `${name}.csv`)] = text);
  const wantsField =
    options.nodes || options.grid !== undefined || options.line !== undefined || options.field !== undefined;
  const all = !(
    wantsField ||
    options.modes ||
    options.spectrum ||
    options.touchstone ||
    options.crossings ||
    options.drive ||
    options.path ||
    options.picture
  );
  const holds = {
    modes: Array.isArray(record.answer['modes']),
    spectrum: Array.isArray(record.answer['points']),
    crossings: Array.isArray(record.answer['crossings']),
    drive: record.fields.some((f) => f.drive !== null),
    path: record.marks.some((m) => m.path !== null),
  };
  const wants = (table: keyof typeof holds): boolean => {
    if (options[table] && !holds[table])
      throw new InputError(
        `option --${table}`,
        `a run of "${record.command}", which holds none`,
        `one of ${
          Object.keys(holds)
            .filter((t) => holds[t as keyof typeof holds])
            .map((t) => `--${t}`)
            .join(', ') || 'nothing'
        }`,
        'choose what this run holds',
      );
    return holds[table] && (all || options[table] === true);
  };
  if (wants('modes')) add('modes', modeTableCsv(run));
  if (wants('spectrum')) add('spectrum', spectrumTableCsv(run, channelsIn(run, options.channels)));
  if (options.touchstone) {
    if (!holds.spectrum)
      throw new InputError(
        'option --touchstone',
        `a run of "${record.command}"`,
        'one of "spectrum"',
        'choose such a run',
      );
    if (record.device.metres === null)
      throw new InputError('option --touchstone', 'a device without a length unit', 'frequencies in Hz', 'add "length: mm" or what is true'); // prettier-ignore
    const channels = channelsIn(run, options.channels);
    const { text, ports } = runTouchstone(run, {
      version: options.touchstone === '2.0' ? 2 : 1,
      ...(options.pairs ? { format: options.pairs } : {}),
      ...(channels ? { channels } : {}),
    });
    files[join(out, options.touchstone === '2.0' ? 'spectrum.ts' : `spectrum.s${String(ports)}p`)] = text;
  }
  if (wants('crossings')) add('crossings', crossingTableCsv(run));
  if (wants('drive')) {
    const chosen =
      options.field === undefined ? record.fields.filter((f) => f.drive !== null) : [fieldIn(run, options.field)];
    for (const { id, drive } of chosen) {
      if (drive === null)
        throw new InputError('option --field', `${id}, which has no drive`, 'a driven field', 'leave --field out');
      add(`drive-${id}`, driveTableCsv(run, id));
    }
  }
  if (wants('path')) add('paths', polePathCsv(run));
  if (wantsField && !(options.drive && !options.nodes && !options.grid && !options.line)) addFields(run, options, add);
  if (options.picture) {
    const { id } = fieldIn(run, options.field);
    Object.assign(
      files,
      pictureFiles(out, `field-${id}`, fieldFigure(run, id)),
      pictureFiles(out, 'plane', planeFigure(run)),
    );
  }
  return files;
}

function addFields(run: LoadedRun, options: ExportOptions, add: (name: string, text: string) => void): void {
  const { id } = fieldIn(run, options.field);
  const sample = fieldSampler(run);
  const { center, rimRadius: r } = run.record.mesh;
  if (options.grid) {
    const [nx, ny] = options.grid;
    const box = options.box ?? [center[0] - r, center[1] - r, center[0] + r, center[1] + r];
    add(`field-${id}-grid`, fieldGridCsv(run, id, sample, { box, nx, ny }));
  }
  if (options.line) {
    const [x0, y0, x1, y1] = options.line;
    const line = { from: [x0, y0], to: [x1, y1], count: options.points ?? 201 } as const;
    add(`field-${id}-line`, fieldLineCsv(run, id, sample, line));
  }
  if (options.nodes || !(options.grid || options.line || options.picture))
    add(`field-${id}-nodes`, fieldNodesCsv(run, id, sample));
}

function fieldIn({ record }: LoadedRun, id: string | undefined) {
  const ids = record.fields.map((f) => f.id);
  const field = id === undefined ? record.fields[0] : record.fields.find((f) => f.id === id);
  if (field) return field;
  if (id === undefined)
    throw new InputError(
      'run',
      `a run of "${record.command}" without a field`,
      'a run that found a mode',
      'choose another run',
    );
  const near = nearestName(id, ids);
  throw new InputError(
    'option --field',
    id,
    `one of ${ids.slice(0, 12).join(', ')}${ids.length > 12 ? ' …' : ''}`,
    near === undefined ? 'choose one of them' : `write ${near}`,
  );
}

/** Names that the run knows, or a fault that says which it knows. */
function channelsIn({ record }: LoadedRun, names: readonly string[] | undefined): readonly string[] | undefined {
  const known = record.answer['channels'] as readonly string[];
  const unknown = names?.find((name) => !known.includes(name));
  if (unknown === undefined) return names;
  const near = nearestName(unknown, known);
  throw new InputError(
    'option --channels',
    unknown,
    `one of ${known.slice(0, 12).join(', ')}${known.length > 12 ? ' …' : ''}`,
    near === undefined ? 'choose one of them' : `write ${near}`,
  );
}

/** Options that mean something only beside another one. */
function checkChoice(options: ExportOptions): void {
  const needs = (option: string, other: string): never => {
    throw new InputError(`option --${option}`, `--${option} alone`, `--${option} beside --${other}`, `add --${other}`);
  };
  if (options.pairs && !options.touchstone) needs('pairs', 'touchstone 1.1');
  if (options.channels && !options.spectrum && !options.touchstone) needs('channels', 'spectrum');
  if (options.box && !options.grid) needs('box', 'grid');
  if (options.points !== undefined && !options.line) needs('points', 'line');
  const { grid, box } = options;
  if (grid && grid[0] * grid[1] > MOST_ROWS)
    throw new InputError(
      'option --grid',
      `${String(grid[0] * grid[1])} points`,
      `at most ${String(MOST_ROWS)}`,
      'take fewer',
    );
  if (box && !(box[0] <= box[2] && box[1] <= box[3]))
    throw new InputError('option --box', box.join(','), 'x0 <= x1 and y0 <= y1', 'order the corners');
}

function readWord<W extends string>(text: string, option: string, words: readonly W[]): W {
  const word = words.find((w) => w === text);
  if (word !== undefined) return word;
  throw new InputError(
    `option ${option}`,
    JSON.stringify(text),
    `one of ${words.join(', ')}`,
    `write ${option} ${words[0]}`,
  );
}

function readGrid(text: string): readonly [number, number] {
  const match = /^(\d{1,7})[x×,](\d{1,7})$/i.exec(text);
  const [nx, ny] = match ? [Number(match[1]), Number(match[2])] : [0, 0];
  if (nx > 0 && ny > 0) return [nx, ny];
  throw new InputError('option --grid', JSON.stringify(text), 'two whole numbers from 1 up', 'write --grid 200x100');
}

function readFour(text: string, option: string, middle: ',' | ':'): readonly [number, number, number, number] {
  const form = middle === ':' ? 'x0,y0:x1,y1' : 'x0,y0,x1,y1';
  const flat = middle === ':' && text.split(':').length === 2 ? text.replace(':', ',') : middle === ':' ? '' : text;
  try {
    const [a, b, c, d] = readNumbers(flat, option, 4, form);
    return [a, b, c, d];
  } catch {
    throw new InputError(
      `option ${option}`,
      JSON.stringify(text),
      `4 numbers: ${form}`,
      `write ${option} -1,0${middle}1,0`,
    );
  }
}

function readCount(text: string, option: string): number {
  const value = /^\d{1,7}$/.test(text) ? Number(text) : 0;
  if (value >= 1 && value <= MOST_ROWS) return value;
  throw new InputError(
    `option ${option}`,
    JSON.stringify(text),
    `a whole number from 1 to ${String(MOST_ROWS)}`,
    `write ${option} 500`,
  );
}
