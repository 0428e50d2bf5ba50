// What does the user read when something is wrong, and with which code does the command end?

import { DeviceError, GeometryError, RunStoreError } from '../src/index.ts';
import { ServeError } from '../viewer/server/serve.ts';
import { INPUT_WRONG, INTERNAL_FAULT } from './exit-codes.ts';

/** A wrong option, or a file that cannot be used: where, what came, what was expected, what to do. */
export class InputError extends Error {
  override readonly name = 'InputError';

  constructor(where: string, came: string, expected: string, mend: string) {
    super([where, `  came: ${came}`, `  expected: ${expected}`, `  mend: ${mend}`].map(oneLine).join('\n'));
  }
}

/** An error that crossed from the worker: its class is lost on the way, its verdict is not. */
export class FarError extends Error {
  override readonly name = 'FarError';
  readonly report: FaultReport;

  constructor(report: FaultReport) {
    super(report.text);
    this.report = report;
  }
}

export interface FaultReport {
  readonly code: number;
  readonly text: string;
  /** For those who look for the fault: shown with WAVEWELL_DEBUG only. */
  readonly stack: string;
}

/** Lines for stderr, and the exit code. */
export function reportFault(error: unknown): FaultReport {
  if (error instanceof FarError) return error.report;
  const stack = error instanceof Error ? (error.stack ?? '') : '';
  const text = inputFault(error);
  if (text !== null) return { code: INPUT_WRONG, text, stack };
  const message = error instanceof Error ? `${error.name}: ${error.message}` : String(error);
  const lines = isOutOfMemory(message)
    ? [
        'wavewell: memory ran out',
        `  came: ${message}`,
        '  expected: enough memory for this device, band and number of digits',
        '  mend: ask for fewer digits or a narrower band, or use a machine with more memory',
      ]
    : [
        'wavewell: internal fault',
        `  came: ${message}`,
        '  expected: an answer, or a message that says what is wrong with the input',
        '  mend: please report it with the device file and the command; WAVEWELL_DEBUG=1 shows the details',
      ];
  return { code: INTERNAL_FAULT, text: lines.map(oneLine).join('\n'), stack };
}

/** The message when the input is at fault, or null. */
function inputFault(error: unknown): string | null {
  if (!(error instanceof Error)) return null;
  if (error instanceof InputError || error instanceof DeviceError) return error.message;
  if (error instanceof GeometryError) {
    const where = error.bodies.length > 0 ? `bodies ${error.bodies.join(', ')}` : 'bodies';
    const place = `at [${error.place.map((v) => Number(v.toPrecision(6))).join(', ')}]`;
    return new InputError(
      `${where}  ${place}`,
      error.message,
      'a drawing that can be meshed',
      'move or reshape these bodies',
    ).message;
  }
  if (error instanceof RunStoreError || error instanceof ServeError) {
    const [, where, rest] = /^(.*?): (.*)$/s.exec(error.message) ?? [null, 'run', error.message];
    const [came, mend] = splitAt(rest, /: (?=compute|choose|run|name )/);
    const [first, expected] = splitAt(came, /,? expected /);
    return new InputError(
      where,
      first,
      expected ?? 'a folder that a run can be written to or read from',
      mend ?? 'name another folder, or compute the run again',
    ).message;
  }
  const { code, path } = error as NodeJS.ErrnoException;
  if (code !== undefined && path !== undefined)
    return new InputError(
      path,
      `a place that cannot be read or written (${code})`,
      'a file or folder that can',
      'check its permissions and the room on its disk',
    ).message;
  // Doors in `src` say what they expected; a RangeError of the engine does not.
  if (error instanceof RangeError) {
    const [came, expected] = splitAt(error.message, /[;,:] expected /);
    if (expected !== null) return new InputError('options', came, expected, 'change the option').message;
  }
  return null;
}

function splitAt(text: string, mark: RegExp): [string, string | null] {
  const found = mark.exec(text);
  return found ? [text.slice(0, found.index), text.slice(found.index + found[0].length)] : [text, null];
}

const isOutOfMemory = (message: string): boolean =>
  /allocation failed|out of memory|ERR_WORKER_OUT_OF_MEMORY|memory\.grow|could not allocate/i.test(message);

const oneLine = (text: string): string => text.replace(/[\r\n]+/g, ' ');
