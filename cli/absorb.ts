// wavewell absorb FILE: which loss, frequency and input wave make the device absorb everything, and is it so?

import type { Command } from 'commander';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice, refusePassive, waysOut } from './device-file.ts';
import { InputError } from './faults.ts';
import { type AlongOption, readAboveZero, readAlong, type SolveOptions, withSolveOptions } from './options.ts';
import { alongSettings, commonSettings } from './settings.ts';

interface CrossingOptions extends SolveOptions {
  readonly lossMax?: number;
  readonly along?: AlongOption;
}

export function addAbsorb(program: Command): void {
  const command = program
    .command('absorb')
    .description('coherent absorption in the band: loss, drive and forward check')
    .argument('<FILE>', 'device file')
    .option(
      '--loss-max <D>',
      'largest added loss D looked at (a quarter of the active permittivity if absent)',
      (text: string) => readAboveZero(text, '--loss-max'),
    )
    .option(
      '--along <KNOB[=A,B]>',
      'a knob as the parameter instead of loss, over its range in the file or A to B',
      readAlong,
    );
  withSolveOptions(command).action(async (path: string, options: CrossingOptions) => {
    const file = openDevice(path, options);
    if (options.lossMax !== undefined && options.along)
      throw new InputError('option --along', '--along with --loss-max', 'one of them', 'leave one out');
    if (!options.along) refusePassive(file);
    const along = alongSettings(options.along, file);
    const settings = { ...commonSettings(options), levelMax: options.lossMax ?? null, along };
    const ways = waysOut(file);
    if (ways) {
      const all = { ...settings, inputs: ways, sense: 'loss' as const };
      process.exitCode = printAnswer(await ask('match', file, all, options), options.json === true);
      return;
    }
    process.exitCode = printAnswer(await ask('absorb', file, settings, options), options.json === true);
  });
}
