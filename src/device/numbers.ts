// Which number does a value of the file stand for, and is it one that can be used?

import { ExpressionError, evaluateExpression, namesIn, parseExpression } from './expression.ts';
import { DeviceError, MOST_FINDINGS, formatPath, nearestName, showNumber, showValue } from './findings.ts';
import type { Finding, Path } from './findings.ts';
import type { Source } from './source.ts';

/** What a number must satisfy, in the words of the message. */
export interface Demand {
  readonly expected: string;
  readonly holds: (value: number) => boolean;
  readonly mend: string;
}

export const aboveZero = (what: string): Demand => ({
  expected: `${what} above 0`,
  holds: (v) => v > 0,
  mend: 'give a positive number',
});

export const zeroOrMore = (what: string): Demand => ({
  expected: `${what} of 0 or more`,
  holds: (v) => v >= 0,
  mend: 'give 0 or a positive number',
});

export const wholeFrom = (least: number, most: number, what: string): Demand => ({
  expected: `${what}: a whole number from ${least} to ${most}`,
  holds: (v) => Number.isInteger(v) && v >= least && v <= most,
  mend: 'give a whole number in these limits',
});

/**
 * Collects what is wrong while the file is worked through, so that one message names it all. A number that is wrong
 * becomes NaN; whoever receives NaN stays silent, for the finding is made.
 */
export interface Log {
  readonly source: Source;
  readonly findings: Finding[];
  report(path: Path, came: string, expected: string, mend: string, part?: 'key' | 'value'): void;
  throwIfAny(): void;
}

export function openLog(source: Source): Log {
  const findings: Finding[] = [];
  return {
    source,
    findings,
    report(path, came, expected, mend, part = 'value') {
      findings.push({ file: source.file, ...source.placeOf(path, part), path: formatPath(path), came, expected, mend });
      if (findings.length >= MOST_FINDINGS) throw new DeviceError(findings);
    },
    throwIfAny() {
      if (findings.length > 0) throw new DeviceError(findings);
    },
  };
}

/** Reads numbers and expressions at given knob values. */
export interface NumberReader {
  /** Value at a path; NaN (with a finding made) when it is no finite number or fails the demand. */
  readonly read: (value: number | string, path: Path, demand?: Demand) => number;
  readonly readPoint: (
    value: readonly [number | string, number | string],
    path: Path,
    demand?: Demand,
  ) => [number, number];
}

/** @param knobs values by name; NaN for a knob whose own finding is already made. */
export function numberReader(log: Log, knobs: ReadonlyMap<string, number>): NumberReader {
  const read = (value: number | string, path: Path, demand?: Demand): number => {
    const result = typeof value === 'number' ? value : evaluateText(log, knobs, value, path);
    if (Number.isNaN(result) || demand === undefined || demand.holds(result)) return result;
    log.report(path, showResult(value, result), demand.expected, demand.mend);
    return NaN;
  };
  return {
    read,
    readPoint: (value, path, demand) => [read(value[0], [...path, 0], demand), read(value[1], [...path, 1], demand)],
  };
}

/** `3`, or `"gap - 1" (= -0.8)`. */
export const showResult = (value: number | string, result: number): string =>
  typeof value === 'number' ? showValue(value) : `${showValue(value)} (= ${showNumber(result)})`;

function evaluateText(log: Log, knobs: ReadonlyMap<string, number>, text: string, path: Path): number {
  try {
    const expression = parseExpression(text);
    for (const [name, column] of namesIn(expression)) {
      const value = knobs.get(name);
      if (value === undefined) throw unknownKnob(name, column, knobs.keys());
      if (Number.isNaN(value)) return NaN;
    }
    return evaluateExpression(expression, knobs);
  } catch (error) {
    if (!(error instanceof ExpressionError)) throw error;
    reportExpression(log, text, path, error);
    return NaN;
  }
}

/** The finding of a fault inside an expression, placed at the character where it stands. */
export function reportExpression(log: Log, text: string, path: Path, error: ExpressionError): void {
  log.findings.push({
    file: log.source.file,
    ...log.source.placeWithin(path, error.column - 1),
    path: formatPath(path),
    came: `${showValue(text)}: ${error.message} at column ${error.column} of the expression`,
    expected: error.expected,
    mend: error.mend,
  });
}

export function unknownKnob(name: string, column: number, known: Iterable<string>): ExpressionError {
  const names = [...known];
  const near = nearestName(name, names);
  return new ExpressionError(
    column,
    `unknown knob ${name}`,
    names.length === 0 ? 'a number (the file has no knobs)' : `a knob of this file: ${names.slice(0, 12).join(', ')}`,
    near === undefined ? `define ${name} under knobs, or write a number` : `write ${near} instead`,
  );
}
