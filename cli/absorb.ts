// wavewell absorb FILE: which loss, frequency and input wave make the device absorb everything, and is it so?

import type { Command } from 'commander';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice, refusePassive } from './device-file.ts';
import { readAboveZero, type SolveOptions, withSolveOptions } from './options.ts';
import { commonSettings } from './settings.ts';

export function addAbsorb(program: Command): void {
  const command = program
    .command('absorb')
    .description('coherent absorption in the band: loss, drive and forward check')
    .argument('<FILE>', 'device file')
    .option(
      '--loss-max <D>',
      'largest added loss D looked at (a quarter of the active permittivity if absent)',
      (text: string) => readAboveZero(text, '--loss-max'),
    );
  withSolveOptions(command).action(async (path: string, options: SolveOptions & { lossMax?: number }) => {
    const file = openDevice(path, options);
    refusePassive(file);
    const settings = { ...commonSettings(options), levelMax: options.lossMax ?? null };
    const asked = await ask('absorb', file, settings, options);
    process.exitCode = printAnswer(asked, options.json === true);
  });
}
