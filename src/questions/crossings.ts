// At which real k and real pump (or loss) do the modes of a device meet the real axis?

import { countedSearch, isCountable } from '../accuracy/completeness.ts';
import { layerShift, returnedToMode } from '../accuracy/layer-return.ts';
import { groupWidth } from '../accuracy/mode-ladder.ts';
import { DEFAULT_DIGITS, HIGHEST_ORDER, startResolution } from '../accuracy/resolution.ts';
import { type Device, isWalled } from '../device/model.ts';
import { embed } from '../elements/space.ts';
import { type Crossing, findCrossing, ROUNDING } from '../eigen/crossing.ts';
import type { ModePath } from '../eigen/follow.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import { modesInWindow, ownGroups, type WindowRequest } from '../eigen/window.ts';
import { type Complex, type ComplexArray, modulus } from '../numerics/complex.ts';
import type { DeviceFamily, LevelSense } from '../operator/device-family.ts';
import { multipoleJumps, multipoleOrder, type Multipoles } from '../scattering/contrast.ts';
import { angleOfSpaces } from '../scattering/drive-space.ts';
import { checkAtLevel, COUNT_ORDER, type CrossingsComplete } from './complete-crossings.ts';
import { fitToModes } from './fit.ts';
import { modeLabel } from './label.ts';
import { followAll } from './mode-clusters.ts';
import { expectedModes } from './mode-count.ts';
import { type Progress, wedgeFor } from './modes.ts';
import { familyOf, type Prepared, prepare, spaceOf } from './prepare.ts';
import { isSharp, type ResolvedGroup, resolveSharp } from './sharp-modes.ts';

export interface CrossingsRequest {
  readonly digits?: number;
  /** Largest pump or loss D; default a quarter of the largest |ε| among the active bodies. */
  readonly levelMax?: number;
  readonly progress?: Progress;
}

/** One mode on the real axis. */
export interface AxisMode {
  readonly k: number;
  readonly kError: number;
  readonly level: number;
  readonly levelError: number;
  readonly multiplicity: number;
  readonly label: string;
  /** size × multiplicity in the space of `order`. */
  readonly group: EigenGroup;
  readonly order: number;
  /** b_m − a_m of each member, m = −M … M. */
  readonly multipoles: readonly Multipoles[];
  /** Sine of the angle between the space of these amplitudes and that of the next order. */
  readonly multipolesError: number;
  readonly path: { readonly levels: readonly number[]; readonly ks: readonly Complex[] };
  /** The error is below the digits asked for. */
  readonly reached: boolean;
}

export interface CrossingsAnswer {
  readonly crossings: readonly AxisMode[];
  /** Modes that were followed and did not cross in the band below levelMax. */
  readonly others: readonly ModePath[];
  /** Modes of the band that lie beyond the axis at level 0, each member of a group: under gain they lase without pump. */
  readonly beyond: readonly Complex[];
  readonly levelMax: number;
  readonly covered: boolean;
  /** What the count at levelMax says of the list; null where there is no count yet. */
  readonly complete: CrossingsComplete | null;
  readonly digits: number;
  readonly prepared: Prepared;
  readonly sense: LevelSense;
}

const SEED = 7;

/** Largest level searched when none is given. */
export function defaultLevelMax(device: Device): number {
  const active = device.bodies.filter((b) => b.pumpWeight > 0);
  return Math.max(...active.map((b) => modulus(b.permittivity) / (4 * b.pumpWeight)));
}

/**
 * All crossings in the band below `levelMax`, lowest level first. Poles are followed under gain, zeros under loss; each
 * from level 0 to the axis. The window at level 0 is widened by what the level can move: |δk|/k ≈ D w / 2|ε|.
 *
 * @throws RangeError when no body is active, for walls around or symmetry lines, or for digits out of range.
 */
export function findCrossings(device: Device, sense: LevelSense, request: CrossingsRequest = {}): CrossingsAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const active = device.bodies.filter((b) => b.pumpWeight > 0);
  if (active.length === 0) throw new RangeError('no body is active; expected a pump section that names at least one');
  if (isWalled(device) || device.symmetry)
    throw new RangeError('the device has walls around it or symmetry lines; expected open space all around');
  const levelMax = request.levelMax ?? defaultLevelMax(device);
  if (!(levelMax > 0)) throw new RangeError(`the largest level came as ${levelMax}; expected a positive number`);
  const resolution = startResolution(digits);
  const { kMin, kMax } = device.band;
  const reach = Math.max(...active.map((b) => (levelMax * b.pumpWeight) / (2 * modulus(b.permittivity))));
  const slope = Math.min(1, 1.3 * reach + 0.01);
  const margin = Math.min(0.3 * slope, 0.25);
  const assignment = sense === 'gain' ? 'poles' : 'zeros';
  const direction = sense === 'gain' ? 'outgoing' : 'incoming';
  const wedge = wedgeFor(device, assignment, kMin * (1 - margin), kMax * (1 + margin), slope, 10 ** -digits);
  request.progress?.('meshing', 0);
  const fit = fitToModes(prepare(device, { kMin: wedge.kMin, kMax: wedge.kMax, slope }, resolution, 1, sharpOrders), {
    wedge,
    digits,
    direction,
    sense,
    wanted: (g) => isSharp(g, digits) || mayCross(g, levelMax, sense),
    ...(request.progress ? { progress: request.progress } : {}),
  });
  const { prepared, order } = fit;
  const family = familyOf(prepared, order, direction, sense);

  // 1 modes at level 0
  const width = groupWidth(digits, kMax);
  const window: WindowRequest = {
    wedge,
    level: 0,
    expected: expectedModes(device),
    perTile: 18,
    tolerance: 1e-8,
    seed: SEED,
    progress: (done) => request.progress?.('modes without pump', done),
  };
  const countable = isCountable(device);
  const found = countable
    ? countedSearch(device, prepared.layer, width / wedge.kMax, {
        countOn: familyOf(prepared, Math.min(order, COUNT_ORDER), direction, sense),
      }).search(family, window)
    : modesInWindow(family, window);
  const groups = found.tiles.map((t) => rayleighGroups(family, t.shift, 0, t.vectors, t.ks.length, width));
  const all = ownGroups(found.tiles, groups, width).map((o) => o.group);
  const broad = all.filter((g) => !isSharp(g, digits));
  const sharp = all
    .filter((g) => isSharp(g, digits) && inBand(device, g.k.re, 10 ** -digits))
    .flatMap((g) => resolveSharp(prepared, direction, sense, g, order))
    .filter((r) => inBand(device, r.group.k.re));
  const isBeyond = ({ group, step }: ResolvedGroup): boolean => toAxis(group.k, sense) < -step;
  const beyond = [...broad.filter((g) => toAxis(g.k, sense) < 0), ...sharp.filter(isBeyond).map((r) => r.group)]
    .filter(({ k }) => inBand(device, k.re))
    .flatMap(({ k, multiplicity }) => Array.from({ length: multiplicity }, () => k));
  const start = broad.filter((g) => g.k.re > 0 && mayCross(g, levelMax, sense));

  // 2 followed in clusters to the axis
  const paths = followAll(family, start, {
    kMax,
    levelMax,
    groupWidth: width,
    progress: (done) => request.progress?.('following modes to the axis', done),
  });

  // 3 polished with their errors
  const within = paths.filter((p) => p.crossing && inBand(device, p.crossing.k));
  const crossings = within.flatMap((path, i) => {
    request.progress?.('polishing', i / within.length);
    return climbCrossing(prepared, direction, sense, path, digits, width, order);
  });
  const lost: ModePath[] = [];
  for (const resolved of sharp.filter((r) => !isBeyond(r))) {
    const path = pathOfSharp(familyOf(prepared, resolved.order, direction, sense), resolved);
    if (path.crossing && path.crossing.level <= levelMax) {
      crossings.push(...climbCrossing(prepared, direction, sense, path, digits, width, resolved.order));
    } else lost.push(path);
  }

  // 4 compared with all modes beyond the axis at the largest level
  const outside = paths.filter((p) => p.crossing && !within.includes(p));
  const check = countable
    ? checkAtLevel(prepared, {
        sense,
        levelMax,
        wedge,
        groupWidth: width,
        order,
        listed: [...crossings, ...outside.map((p) => ({ ...p.crossing!, multiplicity: p.multiplicity }))].map((c) => ({
          ...c,
          slack: (LEVEL_SLACK * 10 ** -digits * c.k) / Math.abs(c.group.slope.im),
        })),
        beyond: all
          .filter((g) => toAxis(g.k, sense) < 0)
          .flatMap((g) => Array.from({ length: g.multiplicity }, () => g.k)),
        ...(request.progress ? { progress: request.progress } : {}),
      })
    : null;
  for (const path of check?.missed ?? []) {
    // a group that the list holds in part stands there anew, whole
    let held = path.crossing!.group.multiplicity - path.multiplicity;
    const near = (c: AxisMode): number => Math.abs(c.k - path.crossing!.k);
    for (const c of [...crossings].sort((x, y) => near(x) - near(y))) {
      if (held < c.multiplicity) break;
      held -= c.multiplicity;
      crossings.splice(crossings.indexOf(c), 1);
    }
    const late = climbCrossing(prepared, direction, sense, path, digits, width, order);
    crossings.push(...late.filter((c) => c.level <= levelMax && inBand(device, c.k)));
  }
  crossings.sort((a, b) => a.level - b.level || a.k - b.k);
  const members = crossings.reduce((sum, c) => sum + c.multiplicity, 0);
  return {
    crossings,
    complete: check && {
      below: levelMax,
      found: members,
      counted: members,
      proven: check.reason === '',
      reason: check.reason,
    },
    others: [...paths.filter((p) => !within.includes(p)), ...lost],
    beyond,
    levelMax,
    covered: found.covered,
    digits,
    prepared,
    sense,
  };
}

const inBand = ({ band }: Device, k: number, slack = 0): boolean =>
  k >= band.kMin * (1 - slack) && k <= band.kMax * (1 + slack);

/** What the order of the search may be off in Im k, times the digits asked for. */
const LEVEL_SLACK = 10;

/** A sharp mode is so close to the axis that its tangent leads there. */
function pathOfSharp(family: DeviceFamily, { group, step }: ResolvedGroup): ModePath {
  const { k, slope, multiplicity, vectors } = group;
  const level = -k.im / slope.im;
  const crossing = findCrossing(family, {
    k: k.re + slope.re * level,
    level,
    space: vectors,
    columns: multiplicity,
    groupWidth: Math.max(group.spread, step, ROUNDING * k.re),
    multiplicity,
  });
  if (!crossing) return { multiplicity, levels: [0], ks: [k], crossing, ended: 'lost' };
  const ks = [k, { re: crossing.k, im: 0 }];
  return { multiplicity, levels: [0, crossing.level], ks, crossing, ended: 'crossed' };
}

/** The width of a sharp mode hangs on multipoles that leave by tunnelling: the layer must serve these too. */
const sharpOrders = (x: number): number => x + 4 * Math.cbrt(x);

/** What a mode at level 0 lacks to the axis; negative beyond it. */
const toAxis = (k: Complex, sense: LevelSense): number => (sense === 'gain' ? -k.im : k.im);

/** A mode whose tangent needs much more than the largest level is not followed; twice leaves room for curvature. */
function mayCross(group: EigenGroup, levelMax: number, sense: LevelSense): boolean {
  const toward = sense === 'gain' ? group.slope.im : -group.slope.im;
  const distance = toAxis(group.k, sense);
  return distance > 0 && toward > 0 && distance / toward < 2 * levelMax;
}

/**
 * Share of the digits asked for that the step to the next order may use up. The level is the ratio of a small width to
 * a large k, and the powers of the forward check hang on it: it gets the margin.
 */
const SHARE_OF_GOAL = 0.1;

/** Share of its exact return by which a discrete layer may be off: the law was right within 16 % on all meshes measured. */
const LAYER_DISCRETE = 0.2;

/** Share of the layer's shift that first order misses, over the share of the wave that returns: measured 6 at most. */
const LEFT_OF_THE_SHIFT = 10;

/**
 * Raises the order until k and the level have their digits; the errors come from one order more. A group whose members
 * stay apart by more than the digits allow, whatever the order, is taken apart.
 */
function climbCrossing(
  prepared: Prepared,
  direction: 'outgoing' | 'incoming',
  sense: LevelSense,
  path: ModePath,
  digits: number,
  width: number,
  startOrder: number,
): AxisMode[] {
  const { device, layer } = prepared;
  let order = startOrder;
  let here: Crossing = path.crossing!;
  for (;;) {
    const up = familyOf(prepared, order + 1, direction, sense);
    const columns = here.group.multiplicity;
    const tried = findCrossing(up, {
      k: here.k,
      level: here.level,
      space: embed(spaceOf(prepared, order + 1), spaceOf(prepared, order), here.group.vectors, columns),
      columns,
      groupWidth: width,
      multiplicity: columns,
    });
    const next = tried?.group.multiplicity === columns ? tried : null;
    const kStep = next ? Math.abs(next.k - here.k) : Infinity;
    const levelStep = next ? Math.abs(next.level - here.level) : Infinity;
    const goal = SHARE_OF_GOAL * 10 ** -digits;
    const floor = (ROUNDING * here.k) / Math.abs(here.group.slope.im);
    const family = familyOf(prepared, order, direction, sense);
    if (next && trulyApart(here.group, next.group, kStep, 10 ** -digits * here.k)) {
      const parts = takeApart(family, here);
      if (parts) {
        const finer = here.group.spread / 2;
        return parts.flatMap((part) =>
          climbCrossing(prepared, direction, sense, pathTo(path, part), digits, finer, order),
        );
      }
    }
    // what still splits a degenerate pair, less with each order, is error too
    const levelSpread = imaginarySpread(family, here) / Math.abs(here.group.slope.im);
    const splitting = next && next.group.spread < here.group.spread / 2 ? levelSpread : 0;
    const reached =
      kStep <= goal * here.k && Math.max(levelStep, splitting) <= Math.max(goal * Math.abs(here.level), floor);
    if (reached || !next || order + 1 >= HIGHEST_ORDER) {
      const { vectors, multiplicity, spread, slope } = here.group;
      const M = multipoleOrder(device, prepared.bodyRadius, here.k);
      const jumpsOf = (of: Crossing, p: number): Multipoles[] => {
        const problem = { device, space: spaceOf(prepared, p), k: of.k, level: of.level, sense, order: M };
        return multipoleJumps(problem, membersOf(of.group), null);
      };
      const multipoles = jumpsOf(here, order);
      const { permittivity, permeability } = device.background;
      const moved = layerShift(family, layer, {
        k: here.k,
        level: here.level,
        background: 1 / (device.polarization === 'Ez' ? permeability : permittivity),
        vectors,
        multiplicity,
        jumps: multipoles,
      });
      const levelMoved = -moved.im / slope.im;
      const k = here.k + moved.re + slope.re * levelMoved;
      const level = here.level + levelMoved;
      const returned = returnedToMode(layer, { re: here.k, im: 0 }, multipoles);
      const left = Math.min(1, LAYER_DISCRETE + LEFT_OF_THE_SHIFT * returned);
      return [
        {
          k,
          // the order moves the complex k of the mode; its real part alone may stand still by chance. An error as large
          // as the number says that nothing is known
          kError: Math.min(
            k,
            Math.max(Math.hypot(kStep, slope.im * levelStep), spread) + left * Math.abs(k - here.k) + 1e-14 * k,
          ),
          // where the highest order cannot tell the side of the axis the level is nought within its error
          level: Math.max(0, level),
          levelError: Math.min(
            Math.max(Math.abs(level), floor),
            Math.max(levelStep, levelSpread, -level) + left * Math.abs(levelMoved) + floor,
          ),
          multiplicity,
          label: modeLabel(multipoles),
          group: here.group,
          order,
          multipoles,
          multipolesError: next ? angleOfSpaces(multipoles, jumpsOf(next, order + 1)) : 1,
          path: { levels: path.levels, ks: path.ks },
          reached,
        },
      ];
    }
    order++;
    here = next;
  }
}

/** Members are modes of their own when the next order leaves them as far apart, farther than it moves their mean. */
function trulyApart(group: EigenGroup, next: EigenGroup, kStep: number, goal: number): boolean {
  if (group.multiplicity === 1 || group.spread <= goal) return false;
  return group.spread > 3 * kStep && Math.abs(next.spread / group.spread - 1) < 0.2;
}

/** Crossings of the parts of a group, each found anew; null where they do not stay apart. */
function takeApart(family: DeviceFamily, { k, level, group }: Crossing): Crossing[] | null {
  const { vectors, multiplicity: columns, spread } = group;
  const parts = rayleighGroups(family, { re: k, im: 0 }, level, vectors, columns, spread / 2);
  const out: Crossing[] = [];
  for (const { k: from, slope, multiplicity } of parts) {
    const move = -from.im / slope.im;
    const found = findCrossing(family, {
      k: from.re + slope.re * move,
      level: level + move,
      space: vectors,
      columns,
      groupWidth: spread / 2,
      multiplicity,
    });
    const twin = found && out.some((o) => Math.abs(o.k - found.k) + Math.abs(o.level - found.level) < 0.01 * spread);
    if (!found?.converged || twin || !(found.level > 0) || found.group.multiplicity !== multiplicity) return null;
    out.push(found);
  }
  return out.length > 1 ? out : null;
}

/** The way of the group with the part's own end. */
function pathTo(path: ModePath, crossing: Crossing): ModePath {
  const keep = path.levels.map((level, i) => level < crossing.level && i + 1 < path.levels.length);
  return {
    ...path,
    multiplicity: crossing.group.multiplicity,
    levels: [...path.levels.filter((_, i) => keep[i]), crossing.level],
    ks: [...path.ks.filter((_, i) => keep[i]), { re: crossing.k, im: 0 }],
    crossing,
  };
}

/** Largest |Im k| of a member while the mean lies on the axis. */
function imaginarySpread(family: DeviceFamily, { k, level, group }: Crossing): number {
  if (group.multiplicity === 1) return 0;
  const members = rayleighGroups(family, { re: k, im: 0 }, level, group.vectors, group.multiplicity, 0, false);
  return Math.max(0, ...members.map((m) => Math.abs(m.k.im)));
}

function membersOf({ vectors, multiplicity }: EigenGroup): ComplexArray[] {
  const length = vectors.length / multiplicity;
  return Array.from({ length: multiplicity }, (_, i) => vectors.subarray(length * i, length * (i + 1)));
}
