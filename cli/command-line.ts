// What does the command line ask for, and with which code does it end?

import { CommanderError } from 'commander';
import { addAbsorb } from './absorb.ts';
import { addCheck } from './check.ts';
import { addDemo } from './demo.ts';
import { INPUT_WRONG } from './exit-codes.ts';
import { addExport } from './export.ts';
import { reportFault } from './faults.ts';
import { addMatch } from './match.ts';
import { addMesh } from './mesh.ts';
import { addModes } from './modes.ts';
import { WellCommand } from './options.ts';
import { errorInk } from './paper.ts';
import { addNetwork } from './network.ts';
import { clearProgress } from './progress.ts';
import { addSchema } from './schema.ts';
import { addSpectrum } from './spectrum.ts';
import { addThreshold } from './threshold.ts';
import { programVersion } from './version.ts';
import { addView } from './view.ts';

/** Sets the exit code; returns when the command has ended (`view`: when it has begun to serve). */
export async function runCommandLine(): Promise<void> {
  process.on('uncaughtException', (error) => {
    fail(error);
    process.exit();
  });
  try {
    await commands().parseAsync();
  } catch (error) {
    fail(error);
  }
}

function commands(): WellCommand {
  const program = new WellCommand('wavewell')
    .description('Open resonators in two dimensions: poles, zeros, lasing thresholds, coherent absorption, with proof.')
    .version(programVersion(), '--version', 'prints the version')
    .helpOption('--help', 'prints this text')
    .helpCommand(false)
    .exitOverride()
    .configureHelp({ sortSubcommands: false, showGlobalOptions: false })
    .showSuggestionAfterError(false);
  addCheck(program);
  addSchema(program);
  addMesh(program);
  addModes(program);
  addThreshold(program);
  addAbsorb(program);
  addMatch(program);
  addSpectrum(program);
  addNetwork(program);
  addView(program);
  addExport(program);
  addDemo(program);
  return program;
}

function fail(error: unknown): void {
  clearProgress();
  if (error instanceof CommanderError) {
    // Help and version were asked for, or no command was given and help was printed instead.
    process.exitCode = error.exitCode === 0 ? 0 : INPUT_WRONG;
    return;
  }
  const { code, text, stack } = reportFault(error);
  const [first, ...rest] = text.split('\n');
  process.stderr.write(`${errorInk.bold(first)}\n${rest.map((line) => `${line}\n`).join('')}`);
  if (process.env['WAVEWELL_DEBUG'] && stack !== '') process.stderr.write(`${stack}\n`);
  process.exitCode = code;
}
