// npx tsx test/validate/spectrum.ts: does the projected model keep what it certifies, on points it has never seen?

import { readFileSync } from 'node:fs';
import { readDevice } from '../../src/device/read.ts';
import type { ComplexArray } from '../../src/numerics/complex.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { certifiedError } from '../../src/projected/certified-error.ts';
import { modelSolver } from '../../src/projected/pole-residue.ts';
import { qOf, sharpPoles } from '../../src/projected/sharp-poles.ts';
import { findSpectrum } from '../../src/questions/spectrum.ts';

/** The five posts of test/checks/cluster-modes.json. */
const five = (permittivity: string): string => `wavewell: 1
polarization: Ez
band: { wavenumber: [1.5, 3] }
materials: { glass: { permittivity: 6.25 }, other: { permittivity: ${permittivity} } }
bodies:
  - { material: glass, disk: { center: [0, 0], radius: 0.8 } }
  - { material: other, disk: { center: [1.9, 0.6], radius: 0.7 } }
  - { material: other, disk: { center: [-0.7, 2.1], radius: 0.9 } }
  - { material: other, disk: { center: [-1.8, -1.2], radius: 0.75 } }
  - { material: other, disk: { center: [1.0, -2.0], radius: 0.85 } }
`;

const disk = (index: number, band: string): string => `wavewell: 1
polarization: Ez
band: { wavenumber: ${band} }
materials: { glass: { index: ${index} } }
bodies: [ { material: glass, disk: { center: [0.1, 0.05], radius: 1 } } ]
`;

interface Case {
  readonly name: string;
  readonly text: string;
  readonly multipoles: number;
  readonly points: number;
  /** Modes from this Q on are looked at closely. */
  readonly qMin: number;
  /** Of test/checks/cluster-modes.json: whose poles are looked at as well. */
  readonly structure?: string;
}

interface Poles {
  readonly poles: readonly {
    readonly name: string;
    readonly pol: string;
    readonly k: readonly (readonly number[])[];
  }[];
}

/** Exact poles of a structure with Q of 30 and more, mpmath at 32 digits. */
function exactPoles(structure: string | undefined): { re: number; im: number }[] {
  const { poles } = JSON.parse(readFileSync(new URL('../checks/cluster-modes.json', import.meta.url), 'utf8')) as Poles;
  const own = poles.filter(({ name, pol }) => name === structure && pol === 'Ez').flatMap(({ k }) => k);
  return own.map(([re, im]) => ({ re, im })).filter(({ re, im }) => re > -60 * im);
}

const CASES: readonly Case[] = [
  { name: 'five posts, lossless', text: five('6.25'), multipoles: 20, points: 2001, qMin: 100, structure: 'five' },
  {
    name: 'five posts, lossy',
    text: five('[6.25, 0.03]'),
    multipoles: 20,
    points: 2001,
    qMin: 100,
    structure: 'five_lossy',
  },
  { name: 'disk n = 3, Q to 2e4', text: disk(3, '[3.2, 4.4]'), multipoles: 14, points: 401, qMin: 1000 },
  { name: 'disk n = 3, Q to 1e7', text: disk(3, '[4.7, 5.2]'), multipoles: 14, points: 401, qMin: 1e5 },
];

/** Seconds of all threads: other work on the machine does not count. */
const seconds = (): number => {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
};

const largest = (a: ComplexArray, b: ComplexArray): number => {
  let worst = 0;
  for (let i = 0; i < a.length; i += 2) worst = Math.max(worst, Math.hypot(a[i] - b[i], a[i + 1] - b[i + 1]));
  return worst;
};

const say = (text: string): void => void process.stdout.write(`${text}\n`);
const power = (v: number): string => v.toExponential(1);
let broken = 0;

const chosen = process.argv[2];
for (const { name, text, multipoles, points, qMin, structure } of CASES) {
  if (chosen !== undefined && !name.includes(chosen)) continue;
  const device = readDevice(text, `${name}.yaml`);
  const { kMin, kMax } = device.band;
  const start = seconds();
  const ks = Array.from({ length: points }, (_, i) => kMin + ((kMax - kMin) * i) / (points - 1));
  const answer = findSpectrum(device, ks, { multipoles });
  const spent = seconds() - start;
  const { model, factorizations } = answer;
  const { order, witnesses, snapshots } = factorizations;
  const estimate = Math.max(...answer.points.map((p) => p.modelError));
  const unitarity = Math.max(...answer.points.map((p) => p.unitarity ?? 0));
  const reciprocity = Math.max(...answer.points.map((p) => p.reciprocity));
  say(
    `${name}: ${answer.channels.length} channels, ${answer.points.length} points, order ${answer.order}, ` +
      `${order + witnesses + snapshots} factorizations (${order} to settle the order), ${model.snapshots.length} snapshots, basis ${model.size}, ` +
      `${spent.toFixed(1)} s; certified ${power(estimate)}, with discretisation ${power(Math.max(...answer.points.map((p) => p.error)))}, ` +
      `unitarity ${power(unitarity)}, reciprocity ${power(reciprocity)}`,
  );
  const closed = answer.openings.closed(answer.order, 'loss');
  const solver = modelSolver(model, 4);
  const compare = (what: string, at: readonly number[]): void => {
    let [worst, ratio] = [0, 0];
    for (const k of at) {
      const { S, estimate: residual } = solver.at(k, { estimate: true });
      const error = largest(S, closed.scatter({ re: k, im: 0 }, 0).matrix);
      worst = Math.max(worst, error);
      ratio = Math.max(ratio, error / certifiedError(model, k, residual!));
    }
    const good = ratio <= 3;
    if (!good) broken++;
    say(`  ${what}: true error ${power(worst)}, true/certified at most ${ratio.toFixed(2)}${good ? '' : '  BROKEN'}`);
  };
  const random = randomStream(11);
  const about = (from: number, to: number): number[] =>
    Array.from({ length: 50 }, () => from + (to - from) * random.uniform());
  compare('50 random points', about(kMin, kMax));
  for (const k of [...sharpPoles(model, qMin).map((pole) => pole.k), ...exactPoles(structure)]) {
    if (!(k.re > kMin && k.re < kMax)) continue;
    const width = 2 * Math.abs(k.im);
    const near = about(Math.max(kMin, k.re - 3 * width), Math.min(kMax, k.re + 3 * width));
    compare(`50 within 3 widths of k = ${k.re.toFixed(6)}, Q = ${qOf(k).toPrecision(3)}`, near);
  }
}
process.exitCode = broken > 0 ? 1 : 0;
