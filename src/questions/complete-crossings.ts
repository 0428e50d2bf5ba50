// Has every mode that lies beyond the axis at the largest level a crossing in the list?

import { countedSearch } from '../accuracy/completeness.ts';
import type { ModePath } from '../eigen/follow.ts';
import type { EigenProblem } from '../eigen/problem.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import { ownGroups, type Wedge, wedgeHolds } from '../eigen/window.ts';
import { type Complex, modulus, subtract } from '../numerics/complex.ts';
import type { LevelSense } from '../operator/device-family.ts';
import { followAll } from './mode-clusters.ts';
import { expectedModes } from './mode-count.ts';
import { familyOf, type Prepared } from './prepare.ts';

/** What is known of the list of crossings below a level; members of groups one by one. */
export interface CrossingsComplete {
  /** The list is complete below this level. */
  readonly below: number;
  readonly found: number;
  readonly counted: number;
  readonly proven: boolean;
  /** Why it is not proven, else "". */
  readonly reason: string;
}

/** A crossing that is known already, in the band or beside it. */
export interface ListedCrossing {
  readonly k: number;
  readonly level: number;
  readonly multiplicity: number;
  /** What the order of the check may be off in the level. */
  readonly slack: number;
}

export interface LevelCheckRequest {
  readonly sense: LevelSense;
  /** Order that the listed modes were followed at. */
  readonly order: number;
  readonly levelMax: number;
  /** The window at level 0: its band holds what the level can move into the device's own. */
  readonly wedge: Wedge;
  /** Absolute distance within which modes are one group. */
  readonly groupWidth: number;
  readonly listed: readonly ListedCrossing[];
  /** Modes beyond the axis at level 0. */
  readonly beyond: readonly Complex[];
  readonly progress?: (stage: string, done: number) => void;
}

export interface LevelCheck {
  /** Crossings in the band that the list lacks, in the space of the order asked for. */
  readonly missed: readonly ModePath[];
  /** Why nothing is proven, or "". */
  readonly reason: string;
}

/** Modes are counted, not measured: the determinant needs no higher order. */
export const COUNT_ORDER = 5;

/**
 * All modes beyond the axis at levelMax, counted; each is followed back to the axis. Modes that entered the band from its
 * sides or were born with the level end at a crossing that the list may lack. What rose above the axis and fell back
 * below it before levelMax is not seen here.
 */
export function checkAtLevel(prepared: Prepared, request: LevelCheckRequest): LevelCheck {
  const { sense, levelMax, wedge, groupWidth, progress } = request;
  const { device } = prepared;
  const direction = sense === 'gain' ? 'outgoing' : 'incoming';
  const family = familyOf(prepared, request.order, direction, sense);
  const slope = Math.max(wedge.low, wedge.high);
  const window = {
    ...wedge,
    low: sense === 'gain' ? ON_THE_AXIS : slope,
    high: sense === 'gain' ? slope : ON_THE_AXIS,
  };
  const counted = countedSearch(device, prepared.layer, groupWidth / wedge.kMax, {
    countOn: familyOf(prepared, Math.min(request.order, COUNT_ORDER), direction, sense),
  });
  const { tiles } = counted.search(family, {
    wedge: window,
    level: levelMax,
    expected: expectedModes(device),
    perTile: 18,
    tolerance: 1e-8,
    seed: SEED,
    progress: (done) => progress?.('modes at the largest level', done),
  });
  const groups = tiles.map((t) => rayleighGroups(family, t.shift, levelMax, t.vectors, t.ks.length, groupWidth));
  const seen = ownGroups(tiles, groups, groupWidth)
    .map((o) => o.group)
    .filter((g) => wedgeHolds(window, g.k));
  const verdict = counted.judge(window, seen);
  const beyond = seen.filter((g) => beyondAxis(g.k, sense) > 0);
  const paths = followAll(reversed(family, levelMax), beyond.map(turned), {
    kMax: wedge.kMax,
    levelMax,
    groupWidth,
    progress: (done) => progress?.('following modes back', done),
  });
  const { missed, reason } = compare(request, prepared, paths);
  return { missed, reason: verdict.proven ? reason : `at D = ${levelMax} ${verdict.reason}` };
}

/** Share of Re k on the near side of the axis that the window takes in. */
const ON_THE_AXIS = 1e-3;

const SEED = 77;

const beyondAxis = (k: Complex, sense: LevelSense): number => (sense === 'gain' ? k.im : -k.im);

/** The same family with the level counted down from `top`. */
const reversed = (problem: EigenProblem, top: number): EigenProblem => ({
  size: problem.size,
  terms: problem.terms,
  termFactor: (j, k) => problem.termFactor(j, k),
  multiplyTermInto: (out, j, level, x, columns) => problem.multiplyTermInto(out, j, top - level, x, columns),
  multiplyInto(out, k, level, part, x, columns) {
    problem.multiplyInto(out, k, top - level, part, x, columns);
    if (part === 'byLevel') for (let s = 0; s < out.length; s++) out[s] = -out[s];
    return out;
  },
  factorize: (k, level) => problem.factorize(k, top - level),
});

const turned = (group: EigenGroup): EigenGroup => ({
  ...group,
  slope: { re: -group.slope.re, im: -group.slope.im },
});

/** Differences between a crossing and the same one in the list, relative: the list is polished at higher orders. */
const SAME_K = 3e-3;
const SAME_LEVEL = 0.03;

/** Assigns the end of every path to crossings of the list, member by member. */
function compare(
  { listed, beyond, levelMax }: LevelCheckRequest,
  { device }: Prepared,
  paths: readonly ModePath[],
): { missed: ModePath[]; reason: string } {
  const free = listed.map((c) => ({ ...c }));
  const alone = [...beyond];
  const missed: ModePath[] = [];
  let reason = '';
  const { kMin, kMax } = device.band;
  const inBand = (k: number): boolean => k >= kMin && k <= kMax;
  for (const path of paths) {
    const last = path.ks[path.ks.length - 1];
    if (path.crossing) {
      const { k } = path.crossing;
      const level = levelMax - path.crossing.level;
      let open = path.multiplicity;
      const near = free
        .filter((c) => Math.abs(c.k - k) <= SAME_K * k)
        .filter((c) => Math.abs(c.level - level) <= SAME_LEVEL * level + c.slack)
        .sort((a, b) => Math.abs(a.k - k) - Math.abs(b.k - k));
      for (const c of near) {
        const taken = Math.min(open, c.multiplicity);
        c.multiplicity -= taken;
        open -= taken;
      }
      if (open > 0 && inBand(k)) missed.push(forward(path, levelMax, open));
      continue;
    }
    if (!inBand(last.re)) continue;
    // it lay beyond the axis without a level, or so little before it that this order cannot tell
    let open = path.multiplicity;
    for (let i = alone.length - 1; i >= 0 && open > 0; i--) {
      if (modulus(subtract(alone[i], last)) > 0.02 * last.re) continue;
      alone.splice(i, 1);
      open--;
    }
    for (const c of free) {
      if (open === 0 || Math.abs(c.k - last.re) > SAME_K * last.re || c.level > c.slack) continue;
      const taken = Math.min(open, c.multiplicity);
      c.multiplicity -= taken;
      open -= taken;
    }
    if (open > 0) {
      const where = `k = ${last.re.toPrecision(6)}, D = ${(levelMax - path.levels[path.levels.length - 1]).toPrecision(3)}`;
      reason = `a mode beyond the axis could not be followed back farther than ${where}`;
    }
  }
  return { missed, reason };
}

/** The path with levels that rise; it begins at the crossing. */
function forward(path: ModePath, levelMax: number, multiplicity: number): ModePath {
  const crossing = path.crossing!;
  const { slope } = crossing.group;
  const level = levelMax - crossing.level;
  return {
    multiplicity,
    levels: [level],
    ks: [{ re: crossing.k, im: 0 }],
    crossing: {
      ...crossing,
      level,
      group: { ...crossing.group, slope: { re: -slope.re, im: -slope.im } },
    },
    ended: 'crossed',
  };
}
