// wavewell network FILE: what can a measured S-matrix absorb, how little need it reflect, where are its zeros?

import type { Command } from 'commander';
import { readFileSync, statSync } from 'node:fs';
import { extname, join } from 'node:path';
import {
  analyseMeasured,
  cautionsFor,
  csvText,
  type MeasuredAnswer,
  type MeasuredRoot,
  READ_FIRST_NAME,
  readTouchstone,
  scatteringOfNetwork,
  significant,
  TouchstoneError,
  type TouchstoneNetwork,
} from '../src/index.ts';
import { shown } from './ask.ts';
import { DONE, NOT_FOUND } from './exit-codes.ts';
import { InputError } from './faults.ts';
import { readAboveZero } from './options.ts';
import { ink, say, sayCautions, sayFacts, sayJson, sayTable } from './paper.ts';
import { writeFiles } from './write-files.ts';

interface NetworkOptions {
  readonly in?: readonly number[];
  readonly tolerance?: number;
  readonly out?: string;
  readonly json?: true;
}

export function addNetwork(program: Command): void {
  program
    .command('network')
    .description('best drive, least reflection and zeros of a measured S-matrix in a Touchstone file')
    .argument('<FILE>', 'Touchstone file (.s1p, .s2p, …, .ts), version 1.0 to 2.1')
    .option('--in <PORTS>', 'ports that waves come in through, from 1, with commas between; all if absent', readPorts)
    .option('--tolerance <T>', 'of the rational fit, relative: about the noise of the data (1e-6 if absent)', (text) =>
      readAboveZero(text, '--tolerance'),
    )
    .option('--out <DIR>', 'writes a table of all frequencies and the best drives as CSV')
    .option('--json', 'prints one JSON object and nothing else')
    .action((path: string, options: NetworkOptions) => {
      const network = openNetwork(path);
      const { in: ports, tolerance } = options;
      const wrong = ports?.find((p) => p > network.ports);
      if (wrong !== undefined)
        throw new InputError(
          'option --in',
          `port ${String(wrong)}`,
          `ports 1 to ${String(network.ports)}`,
          'correct it',
        );
      const answer = analyseMeasured(scatteringOfNetwork(network), {
        ...(ports ? { inputs: ports.map((p) => p - 1) } : {}),
        ...(tolerance === undefined ? {} : { tolerance }),
      });
      const cautions = measuredCautions(answer);
      const files = options.out === undefined ? {} : filesOf(answer, options.out, cautions);
      writeFiles(files);
      const names = Object.keys(files).map(shown);
      if (options.json) sayJson({ ...contents(network, answer), files: names, cautions });
      else print(network, answer, names, cautions);
      process.exitCode = answer.zeros.length > 0 || answer.points.length > 0 ? DONE : NOT_FOUND;
    });
}

function readPorts(text: string): number[] {
  const ports = text.split(',').map((word) => (/^\s*\d{1,4}\s*$/.test(word) ? Number(word) : 0));
  if (ports.every((p) => p >= 1) && new Set(ports).size === ports.length) return ports;
  throw new InputError('option --in', JSON.stringify(text), 'different port numbers from 1', 'write --in 1,2');
}

/** Larger files are no measurements of a few ports. */
const MOST_BYTES = 256e6;

function openNetwork(path: string): TouchstoneNetwork {
  const refuse = (came: string): never => {
    throw new InputError(path, came, 'a Touchstone file (.s1p, .s2p, …, .ts)', 'check the name of the file');
  };
  let text = '';
  try {
    if (!statSync(path).isFile()) refuse('a folder');
    if (statSync(path).size > MOST_BYTES) refuse(`a file of ${String(statSync(path).size)} bytes`);
    text = readFileSync(path, 'utf8');
  } catch (error) {
    const { code } = error as NodeJS.ErrnoException;
    if (code === undefined) throw error;
    refuse(code === 'ENOENT' ? 'no such file' : `a file that cannot be read (${code})`);
  }
  const named = /^\.s(\d+)p$/i.exec(extname(path));
  try {
    return readTouchstone(text, named ? Number(named[1]) : undefined);
  } catch (error) {
    if (!(error instanceof TouchstoneError)) throw error;
    throw new InputError(`${path}, line ${String(error.line)}`, error.came, error.expected, error.mend);
  }
}

/** Those of a drive; the data were measured, so nothing is a prediction of a model. */
function measuredCautions({ points }: MeasuredAnswer): string[] {
  const band = { kMin: points[0].hertz, kMax: points[points.length - 1].hertz };
  const k = (hertz: number): number => (2 * Math.PI * hertz) / 299792458;
  return cautionsFor('drive', { metres: 1, band: { kMin: k(band.kMin), kMax: k(band.kMax) } }).filter(
    (text) => !text.includes('two-dimensional'),
  );
}

/** Amplitudes under the engineers' exp(+jωt): phases change their sign. */
const drivePairs = (drive: Float64Array): [number, number][] =>
  Array.from({ length: drive.length / 2 }, (_, i) => [drive[2 * i], -drive[2 * i + 1] + 0]);

const rootOf = ({ hertz, error }: MeasuredRoot) => ({
  hertz: [hertz.re, hertz.im],
  error: Number.isFinite(error) ? error : null,
});

function contents(network: TouchstoneNetwork, answer: MeasuredAnswer) {
  const { inputs, points, bestAt, reflectionAt, gain, reciprocity, zeros, poles, fit } = answer;
  return {
    ports: network.ports,
    inputs: inputs.map((i) => i + 1),
    points: points.map((p) => ({
      hertz: p.hertz,
      best: p.best,
      worst: p.worst,
      single: Array.from(p.single),
      reflection: p.reflection,
    })),
    bestDrive: { hertz: points[bestAt].hertz, absorbed: points[bestAt].best, engineers: drivePairs(points[bestAt].bestDrive) }, // prettier-ignore
    leastReflection: {
      hertz: points[reflectionAt].hertz,
      amplitude: points[reflectionAt].reflection,
      engineers: drivePairs(points[reflectionAt].reflectionDrive),
    },
    gain,
    reciprocity,
    zeros: zeros.map(rootOf),
    poles: poles.map(rootOf),
    fit: { degree: fit.degree, error: finite(fit.error), between: finite(fit.between) },
  };
}

const finite = (v: number): number | null => (Number.isFinite(v) ? v : null);

function filesOf(answer: MeasuredAnswer, out: string, cautions: readonly string[]): Record<string, string> {
  const { points, inputs, bestAt, reflectionAt } = answer;
  const names = inputs.map((i) => `port ${String(i + 1)}`);
  const table = csvText(
    ['frequency [Hz]', 'best_absorbed', 'worst_absorbed', ...names.map((n) => `absorbed(${n})`), 'least_reflection'],
    points.map((p) => [p.hertz, p.best, p.worst, ...p.single, p.reflection]),
  );
  const drive = (at: number, amplitudes: Float64Array) =>
    csvText(
      ['frequency [Hz]', 'port', 're_engineers', 'im_engineers', 'abs', 'phase_engineers [deg]'],
      drivePairs(amplitudes).map(([re, im], i) => [
        points[at].hertz,
        inputs[i] + 1,
        re,
        im,
        Math.hypot(re, im),
        (Math.atan2(im, re) * 180) / Math.PI,
      ]),
    );
  return {
    [join(out, 'network.csv')]: table,
    [join(out, 'best-drive.csv')]: drive(bestAt, points[bestAt].bestDrive),
    [join(out, 'least-reflection-drive.csv')]: drive(reflectionAt, points[reflectionAt].reflectionDrive),
    [join(out, READ_FIRST_NAME)]: [
      'READ FIRST',
      '',
      'CAUTIONS',
      ...cautions.map((c) => `* ${c}`),
      '',
      'WHAT THE NUMBERS MEAN',
      '* absorbed: share of the incoming power that leaves through no port; reflection: amplitude back into the inputs.',
      '* Drives have total power 1; columns named "engineers" use exp(+j w t), as the measured file does.',
      '',
    ].join('\r\n'),
  };
}

/** Rows of the table of frequencies. */
const MOST_ROWS = 20;

function print(
  network: TouchstoneNetwork,
  answer: MeasuredAnswer,
  files: readonly string[],
  cautions: readonly string[],
): void {
  const { points, inputs, bestAt, reflectionAt, gain, reciprocity, zeros, poles, fit } = answer;
  const { scale, unit } = unitOf(points[points.length - 1].hertz);
  const show = (hertz: number): string => significant(hertz / scale, 7);
  const best = points[bestAt];
  const least = points[reflectionAt];
  const which = inputs.length === network.ports ? 'all ports' : `ports ${inputs.map((i) => i + 1).join(', ')}`;
  say(
    ink.bold(
      `${String(network.ports)} ports, ${String(points.length)} frequencies; from ${which} at most ${significant(best.best, 6)} of the power is absorbed, at ` +
        `${show(best.hertz)} ${unit}; least reflection ${significant(least.reflection, 4)}, at ${show(least.hertz)} ${unit}.`,
    ),
  );
  if (gain > 1 + 1e-6) say(ink.yellow(`Not passive: a drive comes out ${significant(gain, 6)} times as strong.`));
  say();
  const rows = Math.min(points.length, MOST_ROWS);
  sayTable(
    [
      { head: unit, align: 'right' },
      { head: 'best', align: 'right' },
      { head: 'worst', align: 'right' },
      ...inputs.slice(0, 4).map((i) => ({ head: `port ${String(i + 1)} alone`, align: 'right' as const })),
      { head: 'least reflection', align: 'right' },
    ],
    Array.from({ length: rows }, (_, i) => {
      const p = points[rows === 1 ? 0 : Math.round((i * (points.length - 1)) / (rows - 1))];
      return [
        show(p.hertz),
        p.best.toFixed(6),
        p.worst.toFixed(6),
        ...Array.from(p.single.slice(0, 4), (v) => v.toFixed(6)),
        significant(p.reflection, 4),
      ];
    }),
  );
  say();
  sayDrive(`Best drive at ${show(best.hertz)} ${unit}`, inputs, best.bestDrive);
  sayDrive(`Least reflection at ${show(least.hertz)} ${unit}`, inputs, least.reflectionDrive);
  const list = (roots: readonly MeasuredRoot[]): string =>
    roots
      .slice(0, 6)
      .map(({ hertz, error }) => {
        const im = `${hertz.im < 0 ? '−' : '+'} ${significant(Math.abs(hertz.im) / scale, 4)}i`;
        return `${show(hertz.re)} ${im}${Number.isFinite(error) ? ` ± ${(error / scale).toExponential(0)}` : ''}`;
      })
      .join(', ') || 'none near the band';
  say(`Zeros of the inputs' S [${unit}]: ${list(zeros)}`);
  say(`Poles [${unit}]: ${list(poles)}`);
  say(
    ink.dim(
      `  rational fit of degree ${String(fit.degree)}, error ${fit.error.toExponential(0)}, ${fit.between.toExponential(0)} between every other point; exp(−iωt): poles below the axis decay`,
    ),
  );
  say(
    ink.dim(`  reciprocity |S − Sᵀ| ${reciprocity.toExponential(0)}, largest singular value ${significant(gain, 8)}`),
  );
  if (files.length > 0) {
    say();
    sayFacts(files.map((name, i): [string, string] => [i === 0 ? 'files' : '', name]));
  }
  sayCautions(cautions);
}

function sayDrive(title: string, inputs: readonly number[], drive: Float64Array): void {
  const parts = drivePairs(drive).map(([re, im], i) => {
    const angle = (Math.atan2(im, re) * 180) / Math.PI;
    return `port ${String(inputs[i] + 1)}: ${Math.hypot(re, im).toFixed(4)} ∠ ${angle.toFixed(2)}°`;
  });
  const more = parts.length > 8 ? ` and ${String(parts.length - 8)} more` : '';
  say(`${title}: ${parts.slice(0, 8).join(', ')}${more} (exp(+jωt), power 1)`);
}

function unitOf(hertz: number): { scale: number; unit: string } {
  const found = [
    { scale: 1e12, unit: 'THz' },
    { scale: 1e9, unit: 'GHz' },
    { scale: 1e6, unit: 'MHz' },
    { scale: 1e3, unit: 'kHz' },
  ].find(({ scale }) => hertz >= scale);
  return found ?? { scale: 1, unit: 'Hz' };
}
