// What may be said on the command line, and in which form?

import { Command } from 'commander';
import { DEFAULT_DIGITS, FEWEST_DIGITS, listNames, MOST_DIGITS, nearestName, showValue } from '../src/index.ts';
import { InputError } from './faults.ts';

/** A command whose mistakes are told in four lines. */
export class WellCommand extends Command {
  override createCommand(name?: string): WellCommand {
    return new WellCommand(name);
  }

  override error(message: string, options: { code?: string } = {}): never {
    throw usageFault(this, message.replace(/^error: /, ''), options.code ?? '');
  }
}

function usageFault(command: Command, message: string, code: string): InputError {
  const name = pathOf(command);
  const help = `see: ${name} --help`;
  const quoted = /'([^']*)'/.exec(message)?.[1] ?? '';
  if (code === 'commander.unknownOption') {
    const known = command.options.flatMap((o) => [o.long, o.short].filter((s) => s !== undefined && s !== null));
    known.push('--help');
    return unknown(name, 'option', quoted.split('=')[0], known, help);
  }
  if (code === 'commander.unknownCommand')
    return unknown(
      name,
      'command',
      quoted,
      command.commands.map((c) => c.name()),
      help,
    );
  if (code === 'commander.missingArgument')
    return new InputError(name, 'nothing', `the argument ${quoted.toUpperCase()}`, help);
  if (code === 'commander.optionMissingArgument')
    return new InputError(`option ${quoted.split(/[ ,]/)[0]}`, 'nothing', `a value: ${quoted}`, help);
  if (code === 'commander.excessArguments')
    return new InputError(name, message, 'no more arguments', 'quote names that hold blanks');
  return new InputError(name, message, 'a command that can be read', help);
}

function unknown(where: string, kind: string, came: string, known: readonly string[], help: string): InputError {
  const near = nearestName(came, known);
  return new InputError(
    where,
    `the unknown ${kind} ${came}`,
    `one of ${listNames(known).replaceAll('"', '')}`,
    near === undefined ? help : `write ${near}`,
  );
}

const pathOf = (command: Command): string =>
  command.parent ? `${pathOf(command.parent)} ${command.name()}` : command.name();

/** What every question about a device file takes. */
export interface DeviceOptions {
  readonly band?: readonly [number, number];
  readonly knob?: Readonly<Record<string, number>>;
  readonly json?: true;
  readonly out?: string;
}

/** What a computing command takes besides. */
export interface SolveOptions extends DeviceOptions {
  readonly digits?: number;
  readonly mostMemory?: number;
  readonly mostTime?: number;
  readonly again?: true;
}

export function withDeviceOptions(command: Command, out: string): Command {
  return command
    .option('--band <A,B>', "band limits, in the file's own quantity and unit", (text: string) =>
      readPair(text, '--band'),
    )
    .option('--knob <name=value>', 'sets a knob of the file; may be given again', readKnob)
    .option('--out <DIR>', out)
    .option('--json', 'prints one JSON object and nothing else');
}

export function withSolveOptions(command: Command): Command {
  return withDeviceOptions(
    withDigits(command)
      .option(
        '--most-memory <GIB>',
        "memory that refinement may use (three quarters of the machine's if absent)",
        (text) => readAboveZero(text, '--most-memory'),
      )
      .option('--most-time <S>', 'seconds after which nothing is refined any more (no limit if absent)', (text) =>
        readAboveZero(text, '--most-time'),
      )
      .option('--again', 'computes anew although a stored run has the answer'),
    'run folder to write (instead of runs/DEVICE/COMMAND-HASH)',
  );
}

export const withDigits = (command: Command): Command =>
  command.option(
    '--digits <N>',
    `digits wanted, ${String(FEWEST_DIGITS)} to ${String(MOST_DIGITS)} (${String(DEFAULT_DIGITS)} if absent)`,
    (text: string) => readWhole(text, '--digits', FEWEST_DIGITS, MOST_DIGITS),
  );

export function readNumber(text: string, option: string, fits: (value: number) => boolean, expected: string): number {
  const value = numberOf(text);
  if (fits(value)) return value;
  throw new InputError(`option ${option}`, showValue(text), expected, `write ${option} followed by such a number`);
}

export const readWhole = (text: string, option: string, least: number, most: number): number =>
  readNumber(
    text,
    option,
    (v) => Number.isInteger(v) && v >= least && v <= most,
    `a whole number from ${String(least)} to ${String(most)}`,
  );

export const readAboveZero = (text: string, option: string): number =>
  readNumber(text, option, (v) => Number.isFinite(v) && v > 0, 'a number above 0');

/** Comma-separated numbers. */
export function readNumbers(text: string, option: string, count: number, form: string): number[] {
  const values = text.split(',').map(numberOf);
  if (values.length === count && values.every(Number.isFinite)) return values;
  throw new InputError(
    `option ${option}`,
    showValue(text),
    `${String(count)} numbers: ${form}`,
    `write ${option} ${form}`,
  );
}

export interface AlongOption {
  readonly knob: string;
  /** That of the file if absent. */
  readonly range: readonly [number, number] | null;
}

/** 'gap' or 'gap=0.1,0.4'. */
export function readAlong(text: string): AlongOption {
  const [knob, limits, ...rest] = text.split('=');
  if (knob.trim() === '' || rest.length > 0)
    throw new InputError('option --along', showValue(text), 'name or name=A,B', 'write --along gap=0.1,0.4');
  if (limits === undefined) return { knob: knob.trim(), range: null };
  const range = readPair(limits, '--along');
  if (!(range[0] < range[1]))
    throw new InputError('option --along', showValue(text), 'the smaller value first', 'order the two values');
  return { knob: knob.trim(), range };
}

function readPair(text: string, option: string): readonly [number, number] {
  const [a, b] = readNumbers(text, option, 2, 'A,B');
  return [a, b];
}

function readKnob(text: string, before: Readonly<Record<string, number>> = {}): Record<string, number> {
  const [name, value, ...rest] = text.split('=');
  const number = numberOf(value ?? '');
  if (name === '' || rest.length > 0 || !Number.isFinite(number))
    throw new InputError(
      'option --knob',
      showValue(text),
      'name=value with a finite number',
      'write --knob radius=1.5',
    );
  return { ...before, [name.trim()]: number };
}

/** NaN unless the whole text is one decimal number. */
const numberOf = (text: string): number =>
  /^\s*[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?\s*$/i.test(text) ? Number(text) : NaN;
