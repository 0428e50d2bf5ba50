// wavewell threshold FILE: at which frequency, and with how much gain, does the device start to lase?

import type { Command } from 'commander';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice, refusePassive } from './device-file.ts';
import { readAboveZero, type SolveOptions, withSolveOptions } from './options.ts';
import { commonSettings } from './settings.ts';

export function addThreshold(program: Command): void {
  const command = program
    .command('threshold')
    .description('lasing thresholds in the band, lowest pump first')
    .argument('<FILE>', 'device file')
    .option(
      '--pump-max <D>',
      'largest pump D looked at (a quarter of the active permittivity if absent)',
      (text: string) => readAboveZero(text, '--pump-max'),
    );
  withSolveOptions(command).action(async (path: string, options: SolveOptions & { pumpMax?: number }) => {
    const file = openDevice(path, options);
    refusePassive(file);
    const settings = { ...commonSettings(options), levelMax: options.pumpMax ?? null };
    const asked = await ask('threshold', file, settings, options);
    process.exitCode = printAnswer(asked, options.json === true);
  });
}
