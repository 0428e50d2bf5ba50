// How do words and tables reach the terminal?

import Table from 'cli-table3';
import pc from 'picocolors';

const onTerminal = (stream: NodeJS.WriteStream): boolean =>
  stream.isTTY === true && !process.env['NO_COLOR'] && process.env['TERM'] !== 'dumb';

/** Colours on a terminal only, and never against NO_COLOR. */
export const ink = pc.createColors(onTerminal(process.stdout));
export const errorInk = pc.createColors(onTerminal(process.stderr));

export const say = (text = ''): void => void process.stdout.write(`${text}\n`);
export const sayJson = (value: unknown): void => say(JSON.stringify(value, null, 2));

export interface Column {
  readonly head: string;
  readonly align?: 'left' | 'right';
}

/** Columns that hold nothing in any row are left out; rows are indented by two. */
export function sayTable(columns: readonly Column[], rows: readonly (readonly string[])[]): void {
  const kept = columns.map((_, c) => c).filter((c) => rows.some((row) => row[c] !== ''));
  if (kept.length === 0) return;
  const blank = Object.fromEntries(EDGES.map((edge) => [edge, '']));
  const table = new Table({
    head: kept.map((c) => ink.dim(columns[c].head)),
    colAligns: kept.map((c) => columns[c].align ?? 'left'),
    chars: { ...blank, middle: '  ' },
    style: { head: [], border: [], 'padding-left': 0, 'padding-right': 0 },
  });
  for (const row of rows) table.push(kept.map((c) => row[c]));
  for (const line of table.toString().split('\n')) say(`  ${line}`.trimEnd());
}

const EDGES = [
  'top',
  'top-mid',
  'top-left',
  'top-right',
  'bottom',
  'bottom-mid',
  'bottom-left',
  'bottom-right',
  'left',
  'left-mid',
  'mid',
  'mid-mid',
  'right',
  'right-mid',
] as const;

/** Names and values in two columns, without a head. */
export function sayFacts(facts: readonly (readonly [string, string])[]): void {
  const shown = facts.filter(([, value]) => value !== '');
  const width = Math.max(0, ...shown.map(([name]) => name.length));
  for (const [name, value] of shown) say(`  ${ink.dim(name.padEnd(width))}  ${value}`);
}

/** The cautions that go with an answer, last. */
export function sayCautions(cautions: readonly string[]): void {
  if (cautions.length === 0) return;
  say();
  cautions.forEach((text, i) => say(`${i === 0 ? ink.yellow('Caution') : '       '}  ${text}`));
}

/** 'µm' on paper, 'um' in files. */
export const unitText = (unit: string): string => (unit === 'none' ? '' : unit.replace(/\bum\b/, 'µm'));

/** 'k [1/µm]', or 'k' without a unit. */
export const withUnit = (name: string, unit: string): string => {
  const text = unitText(unit);
  return text === '' ? name : `${name} [${text}]`;
};
