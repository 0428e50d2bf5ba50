// Is an answer of `modes` complete, as judges see it that share nothing with its search but the device?

import { countedSearch } from '../../src/accuracy/completeness.ts';
import { resolutionFor } from '../../src/accuracy/resolution.ts';
import { type Wedge, wedgeHolds } from '../../src/eigen/window.ts';
import { type Complex, modulus, subtract } from '../../src/numerics/complex.ts';
import { expectedModes } from '../../src/questions/mode-count.ts';
import { findModes, type ModesAnswer } from '../../src/questions/modes.ts';
import { familyOf, prepare } from '../../src/questions/prepare.ts';
import { countCluster, countLayered } from './exact-count.ts';
import type { RandomCase } from './random-devices.ts';

export interface Judgement {
  readonly found: number;
  /** By the exact equation: modes surely inside the window, and modes inside or on its edge. */
  readonly exact: readonly [number, number] | null;
  /** By a count with doubled points on a finer mesh: modes that the answer lacks, and that it has too many. */
  readonly misses: readonly Complex[];
  readonly extras: readonly Complex[];
  readonly said: NonNullable<ModesAnswer['complete']>;
  /** The judge's own count was settled. */
  readonly settled: boolean;
  /** Processor seconds of `findModes`. */
  readonly seconds: number;
}

/** Modes nearer to the edge of the window than this, relative, may be on either side of it. */
const EDGE = 2e-3;

/** The judge's triangles are smaller by this, one order higher than the answer's. */
const FINER = 0.7;

/** `both`: the finer mesh judges too where an exact equation does. */
export function judgeCase(c: RandomCase, both: boolean): Judgement {
  const started = process.cpuUsage();
  const answer = findModes(c.device, { digits: c.digits, qMin: c.qMin, assignment: c.assignment });
  const used = process.cpuUsage(started);
  const list = answer.modes.flatMap((m) => Array.from({ length: m.multiplicity }, () => m.k));
  const wedge = wholeWedge(c);
  const exact = exactCounts(c, wedge, list.length);
  const agreed = exact !== null && exact[0] === list.length;
  const fine = agreed && !both ? { misses: [], extras: [], settled: true } : judgeOnFinerMesh(c, wedge, list);
  return {
    found: list.length,
    exact,
    misses: fine.misses,
    extras: fine.extras,
    said: answer.complete!,
    settled: fine.settled,
    seconds: (used.user + used.system) / 1e6,
  };
}

/** The window asked for: both sides of the axis where there may be modes, with room where there can be none. */
function wholeWedge({ device, qMin, assignment }: RandomCase): Wedge {
  const slope = 1 / (2 * qMin);
  const gain = device.bodies.some((b) => b.permittivity.im < 0);
  const loss = device.bodies.some((b) => b.permittivity.im > 0);
  const { kMin, kMax } = device.band;
  return assignment === 'poles'
    ? { kMin, kMax, low: slope, high: gain ? slope : 0.01 }
    : { kMin, kMax, low: loss ? slope : 0.01, high: slope };
}

const grown = ({ kMin, kMax, low, high }: Wedge, by: number): Wedge => ({
  kMin: kMin * (1 - by),
  kMax: kMax * (1 + by),
  low: low + by,
  high: high + by,
});

function exactCounts(c: RandomCase, wedge: Wedge, found: number): readonly [number, number] | null {
  const kind = c.assignment === 'poles' ? 1 : 2;
  const count = (w: Wedge): number =>
    c.layers ? countLayered(c.layers, c.polarization, kind, w) : countCluster(c.cylinders!, c.polarization, kind, w);
  if (!c.layers && !c.cylinders) return null;
  const whole = count(wedge);
  return whole === found ? [whole, whole] : [count(grown(wedge, -EDGE)), count(grown(wedge, EDGE))];
}

/** Search and count anew with other seeds on a finer mesh, then both lists are matched. */
function judgeOnFinerMesh(
  c: RandomCase,
  wedge: Wedge,
  list: readonly Complex[],
): { misses: Complex[]; extras: Complex[]; settled: boolean } {
  const { device } = c;
  const wide = grown(wedge, 2 * EDGE);
  const prepared = prepare(
    device,
    { kMin: wide.kMin, kMax: wide.kMax, slope: Math.max(wide.low, wide.high) },
    resolutionFor(c.digits + 1),
    FINER,
  );
  const order = 6;
  const family = familyOf(prepared, order, c.assignment === 'poles' ? 'outgoing' : 'incoming', 'gain');
  const counted = countedSearch(device, prepared.layer, 1e-5, { doubled: true });
  counted.search(family, {
    wedge: wide,
    level: 0,
    expected: expectedModes(device),
    perTile: 12,
    tolerance: 1e-9,
    seed: 4242,
  });
  const known = counted.known().filter((k) => wedgeHolds(wide, k));
  const verdict = counted.judge(
    wide,
    known.map((k) => ({ k, multiplicity: 1 })),
  );
  const misses = [...known];
  const extras: Complex[] = [];
  for (const k of list) {
    const i = misses.reduce(
      (best, m, j) => (best < 0 || modulus(subtract(m, k)) < modulus(subtract(misses[best], k)) ? j : best),
      -1,
    );
    if (i >= 0 && modulus(subtract(misses[i], k)) < MATCH * modulus(k)) misses.splice(i, 1);
    else extras.push(k);
  }
  // on the edge either is right
  const inner = grown(wedge, -EDGE);
  return {
    misses: misses.filter((k) => wedgeHolds(inner, k)),
    extras,
    settled: verdict.proven,
  };
}

/** The same mode on two meshes, relative: ten times the error allowed at three digits. */
const MATCH = 1e-2;
