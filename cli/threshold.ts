// wavewell threshold FILE: at which frequency, and with how much gain, does the device start to lase?

import type { Command } from 'commander';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice, refusePassive, waysOut } from './device-file.ts';
import { InputError } from './faults.ts';
import { type AlongOption, readAboveZero, readAlong, type SolveOptions, withSolveOptions } from './options.ts';
import { alongSettings, commonSettings } from './settings.ts';

interface CrossingOptions extends SolveOptions {
  readonly pumpMax?: number;
  readonly along?: AlongOption;
}

export function addThreshold(program: Command): void {
  const command = program
    .command('threshold')
    .description('lasing thresholds in the band, lowest pump first')
    .argument('<FILE>', 'device file')
    .option(
      '--pump-max <D>',
      'largest pump D looked at (a quarter of the active permittivity if absent)',
      (text: string) => readAboveZero(text, '--pump-max'),
    )
    .option(
      '--along <KNOB[=A,B]>',
      'a knob as the parameter instead of pump, over its range in the file or A to B',
      readAlong,
    );
  withSolveOptions(command).action(async (path: string, options: CrossingOptions) => {
    const file = openDevice(path, options);
    if (options.pumpMax !== undefined && options.along)
      throw new InputError('option --along', '--along with --pump-max', 'one of them', 'leave one out');
    if (!options.along) refusePassive(file);
    const along = alongSettings(options.along, file);
    const settings = { ...commonSettings(options), levelMax: options.pumpMax ?? null, along };
    const ways = waysOut(file);
    if (ways) {
      const none = { ...settings, inputs: [], sense: 'gain' as const };
      process.exitCode = printAnswer(await ask('match', file, none, options), options.json === true);
      return;
    }
    process.exitCode = printAnswer(await ask('threshold', file, settings, options), options.json === true);
  });
}
