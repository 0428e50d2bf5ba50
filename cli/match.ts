// wavewell match FILE: where do chosen channels send nothing back, and where does the power go?

import type { Command } from 'commander';
import { DEFAULT_Q_MIN, isWalled } from '../src/index.ts';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice } from './device-file.ts';
import { InputError } from './faults.ts';
import {
  type AlongOption,
  readAboveZero,
  readAlong,
  readNumber,
  type SolveOptions,
  withSolveOptions,
} from './options.ts';
import { alongSettings, commonSettings } from './settings.ts';

interface MatchOptions extends SolveOptions {
  readonly in?: string;
  readonly everyChoice?: true;
  readonly pump?: true;
  readonly levelMax?: number;
  readonly qMin?: number;
  readonly along?: AlongOption;
}

export function addMatch(program: Command): void {
  const command = program
    .command('match')
    .description('reflectionless modes: chosen channels take waves in and send none back')
    .argument('<FILE>', 'device file')
    .option('--in <NAMES>', 'guides or channels that waves come in through, with commas between; "none" for lasing')
    .option('--every-choice', 'all choices of inputs, by their distance from the real axis; up to 8 channels')
    .option('--pump', 'the level is gain instead of loss')
    .option('--level-max <D>', 'largest loss (or pump) looked at', (text: string) => readAboveZero(text, '--level-max'))
    .option('--along <KNOB[=A,B]>', 'a knob as the parameter, over its range in the file or A to B', readAlong)
    .option(
      '--q-min <Q>',
      `lowest Q of the complex spectrum (${String(DEFAULT_Q_MIN)} if absent, or what the level can reach)`,
      (text: string) => readNumber(text, '--q-min', (v) => Number.isFinite(v) && v >= 0.5, 'a number from 0.5 up'),
    );
  withSolveOptions(command).action(async (path: string, options: MatchOptions) => {
    const file = openDevice(path, options);
    const { device } = file;
    if (isWalled(device) && !device.guides)
      throw new InputError(path, 'a closed device', 'guides, or open space around it', 'add a guide');
    const qMin = options.qMin ?? DEFAULT_Q_MIN;
    if (options.everyChoice) {
      refuseBeside(options);
      const settings = { ...commonSettings(options), qMin, everyChoice: true as const };
      process.exitCode = printAnswer(await ask('match', file, settings, options), options.json === true);
      return;
    }
    if (options.in === undefined)
      throw new InputError('wavewell match', 'nothing that says what comes in', '--in NAMES, or --every-choice', 'write --in with guides or channels'); // prettier-ignore
    const names = options.in.split(',').map((name) => name.trim());
    const inputs = names.length === 1 && names[0] === 'none' ? [] : names;
    const guides = (device.guides ?? []).map((g) => g.name);
    const wrong = inputs.find((name) => isWalled(device) && !guides.includes(name.replace(/\.\d+$/, '')));
    if (wrong !== undefined)
      throw new InputError('option --in', wrong, `some of ${guides.join(', ')}`, `write --in ${guides[0]}`);
    const settings = {
      ...commonSettings(options),
      inputs,
      sense: options.pump ? ('gain' as const) : ('loss' as const),
      ...(options.qMin === undefined ? {} : { qMin: options.qMin }),
      levelMax: options.levelMax ?? null,
      along: alongSettings(options.along, file),
    };
    process.exitCode = printAnswer(await ask('match', file, settings, options), options.json === true);
  });
}

function refuseBeside(options: MatchOptions): void {
  const other = options.in !== undefined ? '--in' : options.along ? '--along' : options.pump ? '--pump' : null;
  if (other !== null)
    throw new InputError('option --every-choice', `--every-choice with ${other}`, 'one of them', 'leave one out');
}
