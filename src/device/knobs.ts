// Which value has each knob?

import { ExpressionError, RESERVED_NAMES, evaluateExpression, namesIn, parseExpression } from './expression.ts';
import type { Expression } from './expression.ts';
import { listNames, nearestName, showNumber } from './findings.ts';
import type { Path } from './findings.ts';
import type { Knob } from './model.ts';
import { aboveZero, numberReader, reportExpression, unknownKnob } from './numbers.ts';
import type { Log } from './numbers.ts';
import type { KnobInput } from './schema.ts';

/** Bounds the depth of knobs that depend on each other. */
const MOST_KNOBS = 1000;

/**
 * Knobs in file order, with expressions worked out whatever their order. `chosen` replaces values by name, and what
 * depends on them follows.
 */
export function settleKnobs(
  input: Readonly<Record<string, KnobInput>>,
  chosen: Readonly<Record<string, number>>,
  log: Log,
): { readonly knobs: readonly Knob[]; readonly values: ReadonlyMap<string, number> } {
  const names = Object.keys(input);
  if (names.length > MOST_KNOBS) {
    log.report(['knobs'], `${names.length} knobs`, `at most ${MOST_KNOBS}`, 'use an array or a polygon', 'key');
    log.throwIfAny();
  }
  checkChosen(names, chosen, log);
  const values = settleValues(input, chosen, log);
  const numbers = numberReader(log, values);
  const knobs = names.map((name): Knob => {
    const entry = input[name];
    const value = values.get(name)!;
    if (typeof entry !== 'object') return { name, value };
    const range = entry.range && numbers.readPoint(entry.range, ['knobs', name, 'range']);
    if (range && range[0] >= range[1])
      log.report(
        ['knobs', name, 'range'],
        `[${range.map(showNumber).join(', ')}]`,
        'the smaller value first',
        'order the two values',
      );
    else if (range && !Object.hasOwn(chosen, name) && (value < range[0] || value > range[1]))
      log.report(
        ['knobs', name, 'value'],
        showNumber(value),
        `a value in the knob's own range, ${showNumber(range[0])} to ${showNumber(range[1])}`,
        'change the value or the range',
      );
    const tolerance = entry.tolerance === undefined ? undefined : readTolerance(entry.tolerance, name);
    return { name, value, ...(range && { range }), ...(tolerance && { tolerance }) };
  });
  return { knobs, values };

  function readTolerance(tolerance: number | string | { sigma: number | string }, name: string): Knob['tolerance'] {
    const path = ['knobs', name, 'tolerance'];
    if (typeof tolerance !== 'object')
      return { kind: 'limit', value: numbers.read(tolerance, path, aboveZero('a tolerance')) };
    return {
      kind: 'sigma',
      value: numbers.read(tolerance.sigma, [...path, 'sigma'], aboveZero('a standard deviation')),
    };
  }
}

function checkChosen(names: readonly string[], chosen: Readonly<Record<string, number>>, log: Log): void {
  for (const [name, value] of Object.entries(chosen)) {
    const finding = { file: 'option knobs', line: 0, column: 0, path: name };
    if (!names.includes(name)) {
      const near = nearestName(name, names);
      log.findings.push({
        ...finding,
        came: `the unknown knob ${JSON.stringify(name)}`,
        expected: names.length === 0 ? 'no knob: the file has none' : listNames(names),
        mend: near === undefined ? `define it in ${log.source.file}` : `write ${JSON.stringify(near)} instead`,
      });
    } else if (!Number.isFinite(value))
      log.findings.push({ ...finding, came: String(value), expected: 'a finite number', mend: 'give a number' });
  }
}

/** Values by name; NaN where a finding was made. */
function settleValues(
  input: Readonly<Record<string, KnobInput>>,
  chosen: Readonly<Record<string, number>>,
  log: Log,
): ReadonlyMap<string, number> {
  const values = new Map<string, number>();
  const open: string[] = [];
  const names = Object.keys(input);
  for (const name of names) settle(name);
  // In file order, so that messages list knobs as the file does.
  return new Map(names.map((name) => [name, values.get(name)!]));

  function settle(name: string): void {
    if (values.has(name)) return;
    const entry = input[name];
    const written = typeof entry === 'object' ? entry.value : entry;
    const path: Path = typeof entry === 'object' ? ['knobs', name, 'value'] : ['knobs', name];
    if (RESERVED_NAMES.has(name)) {
      log.report(
        ['knobs', name],
        `a knob called ${name}`,
        'a name that is no function or constant',
        'rename it',
        'key',
      );
      values.set(name, NaN);
    } else if (Object.hasOwn(chosen, name)) values.set(name, chosen[name]);
    else if (typeof written === 'number') values.set(name, written);
    else {
      open.push(name);
      values.set(name, settleText(written, path));
      open.pop();
    }
  }

  function settleText(text: string, path: Path): number {
    try {
      const expression: Expression = parseExpression(text);
      for (const [used, column] of namesIn(expression)) {
        if (!Object.hasOwn(input, used)) throw unknownKnob(used, column, names);
        if (open.includes(used)) {
          const ring = [...open.slice(open.indexOf(used)), used].join(' → ');
          throw new ExpressionError(
            column,
            `the knobs depend on each other: ${ring}`,
            'knobs that can be worked out one after the other',
            'give one of them as a number',
          );
        }
        settle(used);
        if (Number.isNaN(values.get(used))) return NaN;
      }
      return evaluateExpression(expression, values);
    } catch (error) {
      if (!(error instanceof ExpressionError)) throw error;
      reportExpression(log, text, path, error);
      return NaN;
    }
  }
}
