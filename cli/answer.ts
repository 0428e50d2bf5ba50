// How is the answer of a run printed, and is it one?

import {
  type CompleteAnswer,
  type CrossingAnswer,
  ENERGY_UNITS,
  errorText,
  FREQUENCY_UNITS,
  fromWavenumber,
  type ChoiceAnswerRow,
  type MatchAnswerRow,
  type ModeAnswer,
  type PowerCheck,
  type RunRecord,
  type ScatterAnswerPoint,
  significant,
  spectrumView,
  type SpectrumView,
  toError,
  withError,
} from '../src/index.ts';
import type { Asked } from './ask.ts';
import { DONE, NOT_FOUND } from './exit-codes.ts';
import { ink, say, sayCautions, sayFacts, sayJson, sayTable, unitText, withUnit } from './paper.ts';

/** A crossing by pump or loss, or by a knob: then without bodies. */
type AxisAnswer = Omit<CrossingAnswer, 'bodies'> & {
  readonly bodies?: CrossingAnswer['bodies'];
  readonly knob?: { readonly name: string; readonly value: number; readonly error: number };
};

/** Rows of a table before the rest is only counted: the file and `--json` hold all. */
const MOST_ROWS = 40;
/** Choices of six channels are all shown. */
const MOST_CHOICES = 62;

/** Prints the run as people or scripts want it, and returns the exit code. */
export function printAnswer(asked: Asked | null, json: boolean): number {
  if (asked === null) {
    if (json) sayJson({ crossings: [], covered: true, cautions: [] });
    else say(ink.bold('No mode reaches the real axis in the band for any value of the knob in its range.'));
    return NOT_FOUND;
  }
  const { record } = asked.run;
  if (json) {
    sayJson({ ...record.answer, run: asked.folder });
    return answerCode(record);
  }
  printStory(asked);
  sayFacts([
    ['look', `npx wavewell view ${quoted(asked.folder)}`],
    ['take', `npx wavewell export ${quoted(asked.folder)}`],
  ]);
  sayCautions(record.cautions);
  return answerCode(record);
}

/** Sentence, table, proof, and where the run is; the cautions are left to the caller. */
export function printStory(asked: Asked): void {
  const { run, folder, reused } = asked;
  const { record } = run;
  say(ink.bold(record.sentence));
  for (const note of (record.answer['notes'] ?? []) as readonly string[]) say(ink.dim(`Note: ${note}`));
  const modes = record.answer['modes'] as readonly ModeAnswer[] | undefined;
  const crossings = record.answer['crossings'] as readonly AxisAnswer[] | undefined;
  if (modes && modes.length > 0) printModes(record, modes);
  if (crossings && crossings.length > 0) printCrossings(record, crossings);
  const points = record.answer['points'] as readonly ScatterAnswerPoint[] | undefined;
  if (points) printSpectrum(record, spectrumView(asked.run));
  const matches = record.answer['matches'] as readonly MatchAnswerRow[] | undefined;
  if (matches) printMatches(record, matches);
  const choices = record.answer['choices'] as readonly ChoiceAnswerRow[] | undefined;
  if (choices) printChoices(record, choices);
  printDoubts(record);
  say();
  sayFacts([['run ', reused ? `${folder}  (read back: same file, same options; --again computes anew)` : folder]]);
}

/** Found, all of it, with the digits asked for. */
export function answerCode({ answer }: RunRecord): number {
  const modes = answer['modes'] as readonly unknown[] | undefined;
  const crossings = answer['crossings'] as readonly CrossingAnswer[] | undefined;
  const points = answer['points'] as readonly unknown[] | undefined;
  const matches = answer['matches'] as readonly unknown[] | undefined;
  const choices = (answer['choices'] as readonly ChoiceAnswerRow[] | undefined)?.filter((c) => c.k !== null);
  const found = (matches ?? choices ?? modes ?? crossings ?? points ?? []).length > 0;
  const reached = answer['reached'] !== false && (crossings ?? []).every((c) => c.reached !== false);
  return found && reached && isWhole(answer) ? DONE : NOT_FOUND;
}

/** Proven by the count; without one, searched to the end. */
function isWhole(answer: RunRecord['answer']): boolean {
  const complete = answer['complete'] as CompleteAnswer | undefined;
  return complete ? complete.proven : answer['covered'] !== false;
}

function printDoubts({ answer, command }: RunRecord): void {
  const crossings = (answer['crossings'] ?? []) as readonly CrossingAnswer[];
  const complete = answer['complete'] as CompleteAnswer | undefined;
  if (complete) sayComplete(complete, command);
  else if (answer['covered'] === false)
    say(ink.yellow('Part of the window could not be searched: the list may lack modes.'));
  if (answer['reached'] === false || crossings.some((c) => c.reached === false))
    say(
      ink.yellow(
        `The digits asked for were not reached${stopText(answer['stopped'])}; the errors say how far the numbers go.`,
      ),
    );
}

function stopText(stopped: unknown): string {
  if (stopped === 'memory') return ' within the memory allowed (--most-memory)';
  if (stopped === 'time') return ' within the time allowed (--most-time)';
  return stopped === 'order' ? ' with the highest order there is' : '';
}

function sayComplete({ found, counted, proven, reason, below }: CompleteAnswer, command: string): void {
  const what = command === 'threshold' ? 'thresholds ' : command === 'absorb' ? 'absorption points ' : '';
  const range = below === undefined ? '' : ` below D = ${significant(below, 6)}`;
  if (proven) say(`${what}complete${range}: ${String(found)} of ${String(counted)}`);
  else say(ink.yellow(`${what}not proven complete${range}: ${String(found)} found, ${reason}`));
}

function printModes(record: RunRecord, modes: readonly ModeAnswer[]): void {
  const band = bandColumn(record);
  const { lengthUnit } = record.device;
  const perLength = lengthUnit === 'none' ? '' : `1/${lengthUnit}`;
  say();
  sayTable(
    [
      { head: '', align: 'right' },
      { head: band.head, align: 'right' },
      { head: withUnit('Re k', perLength), align: 'right' },
      { head: withUnit('Im k', perLength), align: 'right' },
      { head: '±', align: 'right' },
      { head: 'Q', align: 'right' },
      { head: 'lifetime [ps]', align: 'right' },
      { head: '×', align: 'right' },
      { head: 'symmetry' },
    ],
    modes
      .slice(0, MOST_ROWS)
      .map((m, i) => [
        String(i + 1),
        band.write(m.k[0], m.kError),
        toError(m.k[0], m.kError),
        toError(m.k[1], m.kError),
        errorText(m.kError),
        m.qError < 0.5 * m.q ? withError(m.q, m.qError) : `above ${significant(m.q / (1 + m.qError / m.q), 2)}`,
        m.lifetime === null ? '' : significant(m.lifetime, 3),
        m.multiplicity > 1 ? String(m.multiplicity) : '',
        m.label,
      ]),
  );
  printRest(modes.length);
}

function printMatches(record: RunRecord, matches: readonly MatchAnswerRow[]): void {
  const { answer } = record;
  const band = bandColumn(record);
  const knob = (answer['knob'] as string | undefined) ?? 'level D';
  const channels = answer['channels'] as readonly string[];
  const spectrum = (answer['spectrum'] ?? []) as readonly {
    k: readonly [number, number];
    kError: number;
    trapped: boolean;
  }[];
  if (spectrum.length > 0) {
    say();
    sayTable(
      [
        { head: 'complex k' },
        { head: 'Re', align: 'right' },
        { head: 'Im', align: 'right' },
        { head: '±', align: 'right' },
        { head: '' },
      ],
      spectrum
        .slice(0, MOST_ROWS)
        .map((m) => [
          '',
          toError(m.k[0], m.kError),
          toError(m.k[1], m.kError),
          errorText(m.kError),
          m.trapped ? 'trapped' : '',
        ]),
    );
  }
  if (matches.length === 0) return;
  say();
  sayTable(
    [
      { head: '', align: 'right' },
      { head: band.head, align: 'right' },
      { head: knob, align: 'right' },
      { head: 'back', align: 'right' },
      { head: 'absorbed', align: 'right' },
      { head: 'to' },
    ],
    matches
      .slice(0, MOST_ROWS)
      .map((m, i) => [
        String(i + 1),
        band.write(m.k, m.kError),
        withError(m.level, m.levelError),
        m.reflected.toExponential(1),
        significant(m.absorbed, 6),
        channels.flatMap((c, j) => (m.out[j] > 1e-9 ? [`${c} ${significant(m.out[j], 4)}`] : [])).join(', '),
      ]),
  );
  const [first] = matches;
  if (first.drive.length === 0) return;
  say();
  sayTable(
    [{ head: 'drive of 1' }, { head: 'amplitude', align: 'right' }, { head: 'phase [deg]', align: 'right' }],
    first.drive.map(({ channel, amplitude: [re, im] }) => [
      channel,
      significant(Math.hypot(re, im), 7),
      ((Math.atan2(im, re) * 180) / Math.PI).toFixed(4),
    ]),
  );
}

/** Im k above 0 waits for loss, below 0 for gain; other dimensions may do instead. */
function printChoices(record: RunRecord, choices: readonly ChoiceAnswerRow[]): void {
  const band = bandColumn(record);
  say();
  sayTable(
    [
      { head: 'in' },
      { head: band.head, align: 'right' },
      { head: 'Re k', align: 'right' },
      { head: 'Im k', align: 'right' },
      { head: '±', align: 'right' },
      { head: 'Q', align: 'right' },
    ],
    choices
      .slice(0, MOST_CHOICES)
      .map(({ inputs, k, kError, q }) => [
        inputs.join(', '),
        ...(k && kError !== null && q !== null
          ? [
              band.write(k[0], kError),
              toError(k[0], kError),
              toError(k[1], kError),
              errorText(kError),
              significant(q, 3),
            ]
          : ['', '', 'none in the window', '', '']),
      ]),
  );
  printMore(choices.length - MOST_CHOICES);
}

/** Entries in decibels for up to this many channels: beyond, the reflections only. */
const MOST_ENTRIES = 3;

function printSpectrum(record: RunRecord, { channels: names, points, matrix }: SpectrumView): void {
  const n = names.length;
  const band = bandColumn(record);
  const pairs = names.flatMap((out, i) =>
    names.flatMap((into, j) => (j > i || (n > MOST_ENTRIES && i !== j) ? [] : [{ i, j, out, into }])),
  );
  const shownPairs = pairs.slice(0, 2 * MOST_ENTRIES);
  say();
  sayTable(
    [
      { head: band.head, align: 'right' },
      ...shownPairs.map(({ out, into }) => ({ head: `${into} → ${out} [dB]`, align: 'right' as const })),
      { head: 'best absorbed', align: 'right' },
      { head: 'delay × c', align: 'right' },
      { head: 'least σ', align: 'right' },
      { head: '± |S|', align: 'right' },
      { head: 'balance', align: 'right' },
    ],
    evenly(points.length).map((at) => {
      const p = points[at];
      const S = matrix(at);
      const decibels = (i: number): string => (20 * Math.log10(Math.hypot(S[2 * i], S[2 * i + 1]))).toFixed(3);
      return [
        band.write(p.k[0], 1e-6 * p.k[0]).replace(/ ±.*$/, ''),
        ...shownPairs.map(({ i, j }) => (p.propagates[i] && p.propagates[j] ? decibels(i + j * n) : '')),
        p.best === undefined ? '' : significant(Math.max(0, p.best), 4),
        p.delay === undefined ? '' : significant(p.delay, 4),
        p.smallest === undefined || p.smallest === null ? '' : significant(p.smallest, 4),
        errorText(p.error),
        p.balance === null ? '' : p.balance.toExponential(0),
      ];
    }),
  );
  printRest(points.length);
  printResonances(record);
}

/** All numbers below n, or MOST_ROWS of them from end to end. */
const evenly = (n: number): number[] =>
  Array.from({ length: Math.min(n, MOST_ROWS) }, (_, i) =>
    n <= MOST_ROWS ? i : Math.round((i * (n - 1)) / (MOST_ROWS - 1)),
  );

interface Resonance {
  readonly k: readonly [number, number];
  readonly q: number;
}

function printResonances(record: RunRecord): void {
  const list = (record.answer['resonances'] ?? []) as readonly Resonance[];
  if (list.length === 0) return;
  const text = list.slice(0, 8).map(({ k, q }) => `k = ${significant(k[0], 9)} (Q = ${significant(q, 3)})`);
  const more = list.length > 8 ? ` and ${String(list.length - 8)} more` : '';
  say(`Sharp resonances: ${text.join(', ')}${more}`);
}

function printCrossings(record: RunRecord, crossings: readonly AxisAnswer[]): void {
  const knob = crossings[0].knob?.name;
  const band = bandColumn(record);
  const { lengthUnit } = record.device;
  const perLength = lengthUnit === 'none' ? '' : `1/${lengthUnit}`;
  say();
  sayTable(
    [
      { head: '', align: 'right' },
      { head: band.head, align: 'right' },
      { head: withUnit('k', perLength), align: 'right' },
      { head: knob ?? (record.command === 'absorb' ? 'added loss D' : 'pump D'), align: 'right' },
      { head: record.command === 'absorb' ? 'loss in all' : 'net gain' },
      { head: 'total Im ε', align: 'right' },
      { head: '×', align: 'right' },
      { head: 'symmetry' },
      { head: 'beam' },
    ],
    crossings.slice(0, MOST_ROWS).map((c, i) => {
      const bodies = c.bodies ?? [];
      const lead = bodies[0];
      return [
        String(i + 1),
        band.write(c.k, c.kError),
        withError(c.k, c.kError),
        c.knob
          ? withError(c.knob.value, c.knob.error)
          : withError(c.pump ?? c.loss ?? NaN, c.pumpError ?? c.lossError ?? NaN),
        lead && lead.units.perCentimetre !== null
          ? `${significant(Math.abs(lead.units.perCentimetre), 3)} /cm, ${significant(Math.abs(lead.units.decibelPerCentimetre!), 3)} dB/cm`
          : '',
        bodies
          .map((b) => `${significant(b.permittivity[1], 4)}${bodies.length > 1 ? ` ${b.name}` : ''}`)
          .slice(0, 3)
          .join(', '),
        c.multiplicity > 1 ? String(c.multiplicity) : '',
        c.label,
        c.farField
          ? `${significant(c.farField.directionality, 3)} × mean at ${significant(c.farField.peakAngle, 3)}°`
          : '',
      ];
    }),
  );
  printRest(crossings.length);
  if (record.command === 'absorb') printProof(crossings[0]);
}

/** The forward check of the first absorption point, on both meshes, and the strongest channels of its drive. */
function printProof({ forward, drive, drives, outgoingExpected, driveError }: AxisAnswer): void {
  if (!forward) return;
  say();
  say(`Forward check: ${powers(forward)}`);
  const expected =
    outgoingExpected === undefined || !(outgoingExpected < 1)
      ? ''
      : `; out ${power(outgoingExpected)} or less expected from the errors`;
  say(`  on a mesh of its own, one order higher: ${powers(forward.ownMesh)}${expected}`);
  const terms = [...(drive ?? [])].sort((a, b) => size(b.amplitude) - size(a.amplitude));
  const strong = terms.filter((t) => size(t.amplitude) > 1e-3).slice(0, 6);
  const list = strong.map(
    ({ m, amplitude }) => `m = ${String(m)}: ${size(amplitude).toFixed(3)} ∠ ${degrees(amplitude).toFixed(1)}°`,
  );
  const more = terms.length > strong.length ? ` and ${String(terms.length - strong.length)} weaker` : '';
  const off = driveError === undefined ? '' : `, amplitudes within ${errorText(driveError)}`;
  say(`Drive: ${list.join(', ')}${more}; total power 1${off}.`);
  if ((drives ?? []).length > 1)
    say(ink.dim(`  first of ${String(drives!.length)} orthonormal drives: any mixture of them is absorbed as well`));
}

const powers = (p: PowerCheck): string =>
  `in 1, out ${power(p.outgoing)}, absorbed ${p.absorbed.toFixed(p.absorbed > 0.999 && p.absorbed < 1.001 ? 6 : 4)}, balance ${power(Math.abs(p.balance))}`;

const power = (value: number): string =>
  value === 0 ? '0' : value >= 1e-3 ? significant(value, 3) : value.toExponential(0);
const size = ([re, im]: readonly [number, number]): number => Math.hypot(re, im);
const degrees = ([re, im]: readonly [number, number]): number => (Math.atan2(im, re) * 180) / Math.PI;

function printRest(count: number): void {
  printMore(count - MOST_ROWS);
}

function printMore(count: number): void {
  if (count > 0) say(ink.dim(`  … and ${String(count)} more: --json and export list all`));
}

/** The file's own quantity; wavelength where that is k, which has a column already. */
function bandColumn({ device }: RunRecord): { head: string; write: (k: number, kError: number) => string } {
  const quantity = device.band.quantity === 'wavenumber' ? 'wavelength' : device.band.quantity;
  const own =
    device.band.quantity === 'wavenumber' ? (device.lengthUnit === 'none' ? '' : device.lengthUnit) : device.band.unit;
  return {
    head: withUnit(quantity, own),
    write: (k, kError) => {
      const value = fromWavenumber(quantity, k, own, device.metres);
      return withError(value, (value * kError) / k);
    },
  };
}

/** The limits of a band in every unit that makes sense for it: name and text. */
export function bandFacts(band: {
  readonly kMin: number;
  readonly kMax: number;
  readonly lengthUnit: string;
  readonly metres: number | null;
}): [string, string][] {
  const { kMin, kMax, lengthUnit, metres } = band;
  const unit = lengthUnit === 'none' ? '' : lengthUnit;
  const text = (quantity: 'wavelength' | 'frequency' | 'energy' | 'wavenumber', u: string): string => {
    const ends = [kMin, kMax].map((k) => fromWavenumber(quantity, k, u, metres)).sort((a, b) => a - b);
    return `${ends.map((v) => Number(v.toPrecision(6))).join(' to ')} ${unitText(u)}`.trim();
  };
  const facts: [string, string][] = [
    ['wavelength', text('wavelength', unit)],
    ['wavenumber', text('wavenumber', unit === '' ? '' : `1/${unit}`)],
  ];
  if (metres === null) return facts;
  const fitting = (units: Readonly<Record<string, number>>, quantity: 'frequency' | 'energy'): string => {
    const names = Object.keys(units).sort((a, b) => units[b] - units[a]);
    return names.find((u) => fromWavenumber(quantity, kMax, u, metres) >= 1) ?? names[names.length - 1];
  };
  return [
    ...facts,
    ['frequency', text('frequency', fitting(FREQUENCY_UNITS, 'frequency'))],
    ['photon energy', text('energy', fitting(ENERGY_UNITS, 'energy'))],
  ];
}

/** A path as a shell takes it. */
export const quoted = (path: string): string =>
  /^[\w./:@%+=~-]+$/.test(path) ? path : `'${path.replaceAll("'", "'\\''")}'`;
