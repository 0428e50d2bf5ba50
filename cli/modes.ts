// wavewell modes FILE: where does the device resonate?

import type { Command } from 'commander';
import { type Assignment, DEFAULT_Q_MIN } from '../src/index.ts';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice } from './device-file.ts';
import { InputError } from './faults.ts';
import { readNumber, type SolveOptions, withSolveOptions } from './options.ts';
import { commonSettings } from './settings.ts';

interface ModesOptions extends SolveOptions {
  readonly qMin?: number;
  readonly zeros?: true;
  readonly assignment?: Assignment;
}

export function addModes(program: Command): void {
  const command = program
    .command('modes')
    .description('poles (or zeros) in the band, each with its Q and its error')
    .argument('<FILE>', 'device file')
    .option('--q-min <Q>', `lowest Q asked for (${String(DEFAULT_Q_MIN)} if absent)`, (text: string) =>
      readNumber(text, '--q-min', (v) => Number.isFinite(v) && v >= 0.5, 'a number from 0.5 up'),
    )
    .option('--zeros', 'all waves come in, instead of all going out')
    .option('--assignment <SIDE>', 'poles, or zeros as --zeros says', readAssignment);
  withSolveOptions(command).action(async (path: string, options: ModesOptions) => {
    const file = openDevice(path, options);
    const assignment = options.assignment ?? (options.zeros ? 'zeros' : 'poles');
    if (options.zeros && assignment !== 'zeros')
      throw new InputError('option --zeros', '--zeros with --assignment poles', 'one of them', 'leave one out');
    const settings = { ...commonSettings(options), assignment, qMin: options.qMin ?? DEFAULT_Q_MIN };
    const asked = await ask('modes', file, settings, options);
    process.exitCode = printAnswer(asked, options.json === true);
  });
}

function readAssignment(text: string): Assignment {
  if (text === 'poles' || text === 'zeros') return text;
  throw new InputError('option --assignment', text, 'poles or zeros', 'write --assignment zeros');
}
