// Does the program agree with every exact value? Prints a table and exits with 1 when a bound is broken.
//
// npx tsx test/validate/run.ts [words …] [--long] [--csv FILE] [--list] [--brief]
// Words choose the cases whose name holds them all; cases that take minutes only run with --long or when they are named in full.

import { appendFileSync, writeFileSync } from 'node:fs';
import { allCases } from './cases.ts';
import { keeps, LARGEST_RATIO, ratioOf, type Row } from './rows.ts';

const args = process.argv.slice(2);
const flag = (name: string): boolean => args.includes(name);
const csv = flag('--csv') ? args[args.indexOf('--csv') + 1] : undefined;
const words = args.filter((a) => !a.startsWith('--') && a !== csv);

const quoted = (text: string): string => (/[",\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);
const number = (value: number): string => (Number.isNaN(value) ? '' : value === 0 ? '0' : value.toExponential(2));

const chosen = allCases().filter(
  (c) => words.every((w) => c.id.split(' ').includes(w)) && (!c.long || flag('--long') || words.join(' ') === c.id),
);
if (flag('--list')) {
  for (const c of chosen) console.log(c.id);
  process.exit(0);
}

const titles = ['case', 'what', 'exact', 'computed', 'error', 'bound', 'estimate', 'error / estimate', 'kept'];
if (csv) writeFileSync(csv, `${titles.join(',')}\r\n`);
console.log(`| ${titles.join(' | ')} |\n|${' --- |'.repeat(titles.length)}`);

let broken = 0;
const ratios: number[] = [];
for (const c of chosen) {
  const start = process.cpuUsage();
  let rows: Row[];
  try {
    rows = c.rows();
  } catch (fault) {
    rows = [{ what: 'answer', exact: 'an answer', computed: String(fault), error: Infinity, bound: 0, estimate: NaN }];
  }
  const used = process.cpuUsage(start);
  for (const row of rows) {
    const kept = keeps(row);
    if (!kept) broken++;
    const ratio = ratioOf(row);
    if (row.estimate > 0) ratios.push(ratio);
    const cells = [
      c.id,
      row.what,
      row.exact,
      row.computed,
      number(row.error),
      number(row.bound),
      number(row.estimate),
      Number.isNaN(ratio) ? '' : ratio.toFixed(3),
      kept ? 'yes' : 'NO',
    ];
    if (csv) appendFileSync(csv, `${cells.map(quoted).join(',')}\r\n`);
    if (!kept || !flag('--brief')) console.log(`| ${cells.join(' | ')} |`);
  }
  console.log(`| ${c.id} | processor time, s | | ${((used.user + used.system) / 1e6).toFixed(1)} | | | | | |`);
}

ratios.sort((a, b) => a - b);
const at = (share: number): string => (ratios[Math.floor(share * (ratios.length - 1))] ?? NaN).toPrecision(2);
console.log(
  `\n${chosen.length} cases, ${broken} bounds broken. True error / estimate over ${ratios.length} numbers: ` +
    `10 % ${at(0.1)}, median ${at(0.5)}, 90 % ${at(0.9)}, largest ${at(1)} (allowed ${LARGEST_RATIO}).`,
);
process.exitCode = broken > 0 || chosen.length === 0 ? 1 : 0;
