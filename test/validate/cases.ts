// Which devices with exact answers are there, and what is asked of each?

import { readFileSync } from 'node:fs';
import type { Polarization } from '../../src/numerics/conventions.ts';
import { type Cylinder, clusterDevice, diskDevice, type Layers, layeredDevice, polygonDevice } from './devices.ts';
import {
  absorptionRows,
  agreementRows,
  conjugateRows,
  type CrossingCase,
  driveRows,
  type ExactMode,
  growthRows,
  modeRows,
  type Row,
  thresholdRows,
} from './rows.ts';

import { walledCases } from './walled-cases.ts';

export { driveRows };

/** A question with an exact answer. */
export interface Case {
  /** "disk poles n=2 Ez 1-2 digits 8": parts are words, so that a few words choose cases. */
  readonly id: string;
  /** Takes minutes. */
  readonly long: boolean;
  readonly rows: () => Row[];
}

type Pair = readonly [number, number];

interface DiskPoles {
  readonly n: number;
  readonly pol: Polarization;
  readonly m: number;
  readonly to: number;
  readonly k: readonly Pair[];
}

interface Threshold {
  readonly pol: Polarization;
  readonly k: number;
  readonly D: number;
  readonly absorber?: { readonly k: number; readonly D: number };
}

const load = (name: string) => JSON.parse(readFileSync(new URL(`../checks/${name}.json`, import.meta.url), 'utf8'));

const disks: {
  readonly lowQ: number;
  readonly poles: readonly DiskPoles[];
  readonly thresholds: readonly (Threshold & { readonly n: number; readonly m: number })[];
} = load('disk-modes');

const layered: {
  readonly structures: Readonly<Record<string, Layers>>;
  readonly poles: readonly {
    readonly name: string;
    readonly pol: Polarization;
    readonly m: number;
    readonly k: readonly Pair[];
  }[];
  readonly thresholds: readonly (Threshold & {
    readonly name: string;
    readonly m: number;
    readonly pumped: readonly number[];
  })[];
} = load('layered-modes');

const clusters: {
  readonly structures: Readonly<Record<string, readonly Cylinder[]>>;
  readonly poles: readonly {
    readonly name: string;
    readonly pol: Polarization;
    readonly ellipses: readonly (readonly [number, number, number, number])[];
    readonly k: readonly Pair[];
  }[];
  readonly thresholds: readonly (Threshold & { readonly name: string; readonly pumped: readonly number[] })[];
} = load('cluster-modes');

const POLARIZATIONS: readonly Polarization[] = ['Ez', 'Hz'];
const INDICES = [1.5, 2, 3.3];
const OCTAVES: readonly Pair[] = [
  [0.25, 0.5],
  [0.5, 1],
  [1, 2],
  [2, 2.5],
  [2.5, 5],
  [5, 10],
  [10, 20],
];

/** Index of the background in the check of scaling: silica, common practice. */
const OUTSIDE = 1.444;

/** Half width of the band about a crossing, relative. */
const CROSSING_BAND = 0.01;

/** The largest level searched is a little above the exact one. */
const LEVEL_ROOM = 1.05;

const LOSSLESS_PAIR = 1e-10;

/** Poles of clusters. */
const CLUSTER_DIGITS = 7;

/** All crossings: the energy balance of the forward check follows the digits of D, and 1e-9 is asked of it. */
const CROSSING_DIGITS = 8;

export function allCases(): Case[] {
  return [
    ...diskPoles(),
    ...diskScaling(),
    ...diskCrossings(),
    ...layeredPoles(),
    ...layeredCrossings(),
    ...clusterPoles(),
    ...clusterCrossings(),
    ...growth(),
    ...polygons(),
    ...walledCases(),
  ];
}

function diskPoles(): Case[] {
  const out: Case[] = [];
  for (const n of INDICES) {
    for (const pol of POLARIZATIONS) {
      for (const band of OCTAVES) {
        const { exact, complete } = diskModes(n, pol, band);
        if (exact.length === 0) continue;
        const device = diskDevice(n, { polarization: pol, band });
        const common = { device, exact, qMin: disks.lowQ, complete };
        const place = `n=${n} ${pol} ${band[0]}-${band[1]}`;
        const long = band[1] * n > 16;
        out.push(
          { id: `disk poles ${place} digits 5`, long, rows: () => modeRows({ ...common, digits: 5 }) },
          {
            id: `disk poles zeros ${place} digits 8`,
            long,
            rows: () => conjugateRows({ ...common, digits: 8 }, LOSSLESS_PAIR),
          },
        );
      }
    }
  }
  return out;
}

/** Poles of the table with Q ≥ 2 in the band, and where the table is complete. */
function diskModes(
  n: number,
  pol: Polarization,
  band: Pair,
): { exact: ExactMode[]; complete: (m: { label: string }) => boolean } {
  const exact: ExactMode[] = [];
  const known = new Set<string>();
  for (const entry of disks.poles) {
    if (entry.n !== n || entry.pol !== pol || entry.to < band[1]) continue;
    known.add(`m = ${entry.m}`);
    for (const [re, im] of entry.k) {
      if (re < band[0] || re > band[1]) continue;
      exact.push({ k: { re, im }, multiplicity: entry.m === 0 ? 1 : 2, label: `m = ${entry.m}` });
    }
  }
  // up to 5 the table holds every order that has a pole; above, those up to 10
  return { exact, complete: band[1] <= 5 ? () => true : (m) => known.has(m.label) };
}

/** n and k scale with the index outside: a disk of index 1.444 n at k/1.444 is the disk n in vacuum at k. */
function diskScaling(): Case[] {
  return POLARIZATIONS.flatMap((pol) => {
    const band: Pair = [1, 2];
    const { exact, complete } = diskModes(2, pol, band);
    const scaled = exact.map((e) => ({ ...e, k: { re: e.k.re / OUTSIDE, im: e.k.im / OUTSIDE } }));
    const setting = { polarization: pol, band: [band[0] / OUTSIDE, band[1] / OUTSIDE] as Pair, outside: OUTSIDE };
    const threshold = disks.thresholds.find((t) => t.n === 2 && t.pol === pol && t.m === 4)!;
    const scaledThreshold = { ...threshold, k: threshold.k / OUTSIDE, D: threshold.D * OUTSIDE ** 2 };
    const around = { polarization: pol, band: bandAbout(scaledThreshold.k), outside: OUTSIDE };
    return [
      {
        id: `disk poles in background ${OUTSIDE} ${pol} digits 8`,
        long: false,
        rows: () =>
          modeRows({ device: diskDevice(2 * OUTSIDE, setting), exact: scaled, digits: 8, qMin: disks.lowQ, complete }),
      },
      ...both(`disk in background ${OUTSIDE} ${pol} m=4`, scaledThreshold, 2, CROSSING_DIGITS, 'm = 4', () =>
        diskDevice(2 * OUTSIDE, around),
      ),
    ];
  });
}

function diskCrossings(): Case[] {
  return disks.thresholds.flatMap((t) =>
    both(
      `disk n=${t.n} ${t.pol} m=${t.m} k=${t.k.toFixed(3)}`,
      t,
      t.m === 0 ? 1 : 2,
      CROSSING_DIGITS,
      `m = ${t.m}`,
      () => diskDevice(t.n, { polarization: t.pol, band: bandAbout(t.k) }),
    ),
  );
}

function layeredPoles(): Case[] {
  const out: Case[] = [];
  const lowQ = 3;
  for (const name of Object.keys(layered.structures)) {
    const structure = layered.structures[name];
    const lossless = structure.eps.every((e) => typeof e === 'number');
    for (const pol of POLARIZATIONS) {
      for (const band of [
        [0.5, 1],
        [1, 2],
        [2, 2.5],
        [2.5, 5],
      ] as const) {
        const exact: ExactMode[] = [];
        const known = new Set<string>();
        for (const entry of layered.poles) {
          if (entry.name !== name || entry.pol !== pol) continue;
          known.add(`m = ${entry.m}`);
          for (const [re, im] of entry.k) {
            if (re < band[0] || re > band[1] || -im * 2 * lowQ > re) continue;
            exact.push({ k: { re, im }, multiplicity: entry.m === 0 ? 1 : 2, label: `m = ${entry.m}` });
          }
        }
        if (exact.length === 0) continue;
        // boxes of the table reach down to Im k = −0.6
        const complete = (mode: { label: string; k: { im: number } }): boolean =>
          known.has(mode.label) && Math.abs(mode.k.im) < 0.6;
        const common = { device: layeredDevice(structure, { polarization: pol, band }), exact, qMin: lowQ, complete };
        const place = `${name} ${pol} ${band[0]}-${band[1]}`;
        out.push({
          id: `layered poles ${place} digits 5`,
          long: false,
          rows: () => modeRows({ ...common, digits: 5 }),
        });
        out.push({
          id: `layered poles ${lossless ? 'zeros ' : ''}${place} digits 8`,
          long: false,
          rows: () =>
            lossless ? conjugateRows({ ...common, digits: 8 }, LOSSLESS_PAIR) : modeRows({ ...common, digits: 8 }),
        });
      }
    }
  }
  return out;
}

function layeredCrossings(): Case[] {
  return layered.thresholds.flatMap((t) =>
    both(
      `layered ${t.name} ${t.pol} m=${t.m} pumped ${t.pumped.join('+')}`,
      t,
      t.m === 0 ? 1 : 2,
      8,
      `m = ${t.m}`,
      (k) => layeredDevice(layered.structures[t.name], { polarization: t.pol, band: bandAbout(k), pumped: t.pumped }),
    ),
  );
}

function clusterPoles(): Case[] {
  const out: Case[] = [];
  for (const entry of clusters.poles) {
    for (const [re, im, halfRe, halfIm] of entry.ellipses) {
      const inside = (k: { re: number; im: number }): boolean =>
        ((k.re - re) / halfRe) ** 2 + ((k.im - im) / halfIm) ** 2 < 1;
      const exact = entry.k
        .map(([x, y]) => ({ k: { re: x, im: y }, multiplicity: 1, label: '' }))
        .filter((e) => inside(e.k));
      if (exact.length === 0) continue;
      const band: Pair = [re - halfRe, re + halfRe];
      const lowQ = 0.98 * Math.min(...exact.map(({ k }) => k.re / (-2 * k.im)));
      out.push({
        id: `cluster poles ${entry.name} ${entry.pol} ${band[0].toFixed(2)}-${band[1].toFixed(2)}`,
        long: entry.name === 'twelve',
        rows: () =>
          modeRows({
            device: clusterDevice(clusters.structures[entry.name], { polarization: entry.pol, band }),
            exact,
            digits: CLUSTER_DIGITS,
            qMin: lowQ,
            complete: ({ k }) => inside(k),
          }),
      });
    }
  }
  return out;
}

function clusterCrossings(): Case[] {
  return clusters.thresholds.flatMap((t) =>
    both(
      `cluster ${t.name} ${t.pol} pumped ${t.pumped.join('+')} k=${t.k.toFixed(3)}`,
      t,
      1,
      CROSSING_DIGITS,
      '',
      (k) => clusterDevice(clusters.structures[t.name], { polarization: t.pol, band: bandAbout(k), pumped: t.pumped }),
      t.name === 'twelve',
    ),
  );
}

/** What the growth of work is measured by. */
const GROWTH_DIGITS = [4, 6, 8, 10];
const MOST_GROWTH = 8;

/** Smooth devices at 4 to 10 digits: each promise kept, and ten digits cost at most eight times the unknowns of four. */
function growth(): Case[] {
  const disk = diskModes(2, 'Ez', [1, 2]);
  const ringPoles = (name: string): ExactMode[] =>
    layered.poles
      .filter((e) => e.name === name && e.pol === 'Ez')
      .flatMap((e) =>
        e.k
          .filter(([re, im]) => re >= 1 && re <= 2 && -im * 6 <= re)
          .map(([re, im]) => ({ k: { re, im }, multiplicity: e.m === 0 ? 1 : 2, label: `m = ${e.m}` })),
      );
  const band: Pair = [1, 2];
  const setting = { polarization: 'Ez', band } as const;
  const five = clusters.poles.find((e) => e.name === 'five' && e.pol === 'Ez')!;
  const [re, im, halfRe, halfIm] = five.ellipses[0];
  const inside = (k: { re: number; im: number }): boolean =>
    ((k.re - re) / halfRe) ** 2 + ((k.im - im) / halfIm) ** 2 < 1;
  const posts = five.k
    .map(([x, y]) => ({ k: { re: x, im: y }, multiplicity: 1, label: '' }))
    .filter((e) => inside(e.k));
  const rows = (c: Parameters<typeof growthRows>[0]) => () => growthRows(c, GROWTH_DIGITS, MOST_GROWTH);
  return [
    {
      id: 'growth disk n=2 Ez',
      long: false,
      rows: rows({ device: diskDevice(2, setting), exact: disk.exact, qMin: disks.lowQ, complete: disk.complete }),
    },
    {
      id: 'growth ring Ez',
      long: false,
      rows: rows({
        device: layeredDevice(layered.structures['ring'], setting),
        exact: ringPoles('ring'),
        qMin: 3,
        complete: () => false,
      }),
    },
    {
      id: 'growth five posts Ez',
      long: false,
      rows: rows({
        device: clusterDevice(clusters.structures['five'], { polarization: 'Ez', band: [re - halfRe, re + halfRe] }),
        exact: posts,
        qMin: 0.98 * Math.min(...posts.map(({ k }) => k.re / (-2 * k.im))),
        complete: ({ k }) => inside(k),
      }),
    },
  ];
}

/** Order leads everywhere, or size does. */
const ORDER_LED = { highestOrder: 13, cornerOrder: 13 };
const SIZE_LED = { highestOrder: 5, cornerOrder: 3 };

/** Polygons have no exact solution: two refinements that share nothing must agree within their errors. */
function polygons(): Case[] {
  return (['square', 'triangle'] as const).flatMap((shape) =>
    POLARIZATIONS.flatMap((polarization) => {
      const agree = (id: string, side: number, band: Pair, qMin: number, long: boolean): Case => ({
        id,
        long,
        rows: () =>
          agreementRows(polygonDevice(shape, side, 2.4, { polarization, band }), { digits: 6, qMin }, [
            ORDER_LED,
            SIZE_LED,
          ]),
      });
      return [
        // sides of four vacuum wavelengths at k = 2π
        agree(`polygon ${shape} ${polarization} of 4 wavelengths`, 4, [6.24, 6.3], 20, true),
        agree(`polygon ${shape} ${polarization} of half a wavelength`, 0.5, [5, 7.5], 3, false),
      ];
    }),
  );
}

const bandAbout = (k: number): Pair => [k * (1 - CROSSING_BAND), k * (1 + CROSSING_BAND)];

/** Threshold and absorbing twin: at the same k and D, unless the device is lossy and has an absorber of its own. */
function both(
  id: string,
  t: Threshold,
  multiplicity: number,
  digits: number,
  label: string,
  device: (k: number) => CrossingCase['device'],
  long = false,
): Case[] {
  const twin = t.absorber ?? { k: t.k, D: t.D };
  const at = (k: number, level: number): CrossingCase => ({
    device: device(k),
    exact: { k, level, label, multiplicity },
    digits,
    levelMax: LEVEL_ROOM * level,
  });
  return [
    { id: `${id} threshold`, long, rows: () => thresholdRows(at(t.k, t.D)) },
    { id: `${id} absorption`, long, rows: () => absorptionRows(at(twin.k, twin.D)) },
  ];
}
