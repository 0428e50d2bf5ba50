// wavewell spectrum FILE: what does each channel send into every other, over the band?

import type { Command } from 'commander';
import { isWalled } from '../src/index.ts';
import { ask } from './ask.ts';
import { printAnswer } from './answer.ts';
import { openDevice } from './device-file.ts';
import { InputError } from './faults.ts';
import { readWhole, type SolveOptions, withSolveOptions } from './options.ts';
import { commonSettings } from './settings.ts';

interface SpectrumOptions extends SolveOptions {
  readonly points?: number;
  readonly full?: true;
  readonly multipoles?: number;
  readonly in?: readonly string[];
}

const DEFAULT_POINTS = 21;
const MOST_POINTS = 100_000;

export function addSpectrum(program: Command): void {
  const command = program
    .command('spectrum')
    .description('S-matrix between the modes of the guides, or the multipoles of open space, over the band')
    .argument('<FILE>', 'device file')
    .option('--points <N>', `evenly spaced in k (${String(DEFAULT_POINTS)} if absent)`, (text: string) =>
      readWhole(text, '--points', 1, MOST_POINTS),
    )
    .option('--full', 'solves every point in full; more than 24 come from a projected model otherwise')
    .option(
      '--multipoles <M>',
      'channels of open space up to cos M and sin M (those the bodies see if absent)',
      (text) => readWhole(text, '--multipoles', 0, 199),
    )
    .option('--in <A,B,…>', 'channels: adds the smallest singular value of S between them', (text) =>
      text.split(',').map((name) => name.trim()),
    );
  withSolveOptions(command).action(async (path: string, options: SpectrumOptions) => {
    const file = openDevice(path, options);
    if (isWalled(file.device) && !file.device.guides)
      throw new InputError(path, 'a closed device', 'guides, or open space around it', 'add a guide');
    if (options.in && (options.full || (options.points ?? DEFAULT_POINTS) <= 24))
      throw new InputError(
        'option --in',
        'a spectrum in full',
        'more than 24 points and no --full',
        'add --points 201',
      );
    const settings = { ...commonSettings(options), points: options.points ?? DEFAULT_POINTS, ...chosen(options) };
    process.exitCode = printAnswer(await ask('spectrum', file, settings, options), options.json === true);
  });
}

/** Only what was given: an absent option leaves the question as it is. */
const chosen = ({ full, multipoles, in: inputs }: SpectrumOptions) => ({
  ...(full ? { full } : {}),
  ...(multipoles === undefined ? {} : { multipoles }),
  ...(inputs ? { inputs } : {}),
});
