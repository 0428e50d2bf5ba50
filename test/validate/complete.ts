// Does `modes` ever miss a mode, invent one, or call an incomplete list complete?
//
// npx tsx test/validate/complete.ts [--count 200] [--seed 1] [--from 0] [--csv FILE] [--both]
// Random devices; the judges are the exact equation (disks, rings, clusters) and a count with doubled points on a
// finer mesh: of every polygon and every fourth other device, with --both of all.

import { appendFileSync } from 'node:fs';
import { judgeCase } from './judge-complete.ts';
import { randomCase } from './random-devices.ts';

const args = process.argv.slice(2);
const option = (name: string, absent: string): string => (args.includes(name) ? args[args.indexOf(name) + 1] : absent);
const count = Number(option('--count', '200'));
const seed = Number(option('--seed', '1'));
const from = Number(option('--from', '0'));
const csv = option('--csv', '');

let wrong = 0;
let misses = 0;
let extras = 0;
let unproven = 0;
let unsettled = 0;
let modes = 0;
let seconds = 0;
for (let i = from; i < from + count; i++) {
  const c = randomCase(seed, i);
  let line: string;
  try {
    const j = judgeCase(c, args.includes('--both') || Math.floor(i / 4) % 4 === 0);
    const [least, most] = j.exact ?? [j.found, j.found];
    const missed = Math.max(j.misses.length, least - j.found);
    const added = Math.max(j.extras.length, j.found - most);
    const bad = j.said.proven && missed + added > 0;
    modes += j.found;
    seconds += j.seconds;
    misses += missed;
    extras += added;
    if (bad) wrong++;
    if (!j.said.proven) unproven++;
    if (!j.settled) unsettled++;
    const exact = j.exact ? (least === most ? String(least) : `${least}–${most}`) : '';
    line = [
      c.name,
      j.found,
      exact,
      missed,
      added,
      j.said.proven ? 'complete' : `not proven: ${j.said.reason}`,
      j.settled ? 'settled' : 'JUDGE UNSETTLED',
      j.said.factorizations,
      j.seconds.toFixed(1),
      bad ? 'WRONG' : '',
    ].join(' | ');
  } catch (fault) {
    wrong++;
    line = `${c.name} | FAULT ${String(fault)}`;
  }
  console.log(line);
  if (csv) appendFileSync(csv, `${line}\n`);
}
console.log(
  `\n${count} devices, ${modes} modes, ${misses} missed, ${extras} invented, ${unproven} not proven, ` +
    `${wrong} wrongly called complete; judge unsettled ${unsettled}; ${(seconds / count).toFixed(1)} s a device.`,
);
process.exitCode = misses + extras + wrong > 0 ? 1 : 0;
