// At which real k and real pump (or loss) do the modes of a device meet the real axis?

import { countedSearch, isCountable } from '../accuracy/completeness.ts';
import type { Limits, Stop } from '../accuracy/memory.ts';
import { groupWidth } from '../accuracy/mode-ladder.ts';
import { DEFAULT_DIGITS, startResolution } from '../accuracy/resolution.ts';
import { type Device, isWalled } from '../device/model.ts';
import { findCrossing, ROUNDING } from '../eigen/crossing.ts';
import type { ModePath } from '../eigen/follow.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import { modesInWindow, ownGroups, type WindowRequest } from '../eigen/window.ts';
import { type Complex, modulus } from '../numerics/complex.ts';
import type { DeviceFamily, LevelSense } from '../operator/device-family.ts';
import { checkAtLevel, COUNT_ORDER, type CrossingsComplete } from './complete-crossings.ts';
import { fitToModes } from './fit.ts';
import { followAll } from './mode-clusters.ts';
import { expectedModes } from './mode-count.ts';
import { type Progress, wedgeFor } from './modes.ts';
import { type AxisMode, polishCrossing } from './polish-crossing.ts';
import { familyOf, type Prepared, prepare } from './prepare.ts';
import { isSharp, type ResolvedGroup, resolveSharp } from './sharp-modes.ts';

export interface CrossingsRequest {
  readonly digits?: number;
  /** Largest pump or loss D; default a quarter of the largest |ε| among the active bodies. */
  readonly levelMax?: number;
  readonly limits?: Limits;
  readonly progress?: Progress;
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
  /** What kept a crossing from its digits; null when all have them. */
  readonly stopped: Stop | null;
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
    wanted: (g) => isSharp(g, digits) || mayCross(g, levelMax, sense, LARGEST_COARSE_ERROR * modulus(g.k)),
    ...(request.limits ? { limits: request.limits } : {}),
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
  const polish = (path: ModePath, from: number): AxisMode[] =>
    polishCrossing({ prepared, direction, sense, digits, limits: request.limits ?? {} }, path, width, from);
  const within = paths.filter((p) => p.crossing && inBand(device, p.crossing.k));
  const crossings = within.flatMap((path, i) => {
    request.progress?.('polishing', i / within.length);
    return polish(path, order);
  });
  const lost: ModePath[] = [];
  for (const resolved of sharp.filter((r) => !isBeyond(r))) {
    const path = pathOfSharp(familyOf(prepared, resolved.order, direction, sense), resolved);
    if (path.crossing && path.crossing.level <= levelMax) {
      crossings.push(...polish(path, resolved.order));
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
    const late = polish(path, order);
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
    stopped: crossings.every((c) => c.reached)
      ? null
      : (crossings.find((c) => c.stopped)?.stopped ?? fit.stopped ?? 'order'),
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

/** What the search at low order may be off by, relative (measured: 1e-3): so near the axis nothing is decided yet. */
const LARGEST_COARSE_ERROR = 2e-3;

/**
 * A mode whose tangent needs much more than the largest level is not followed; twice leaves room for curvature, `slack`
 * for what k may be off by.
 */
function mayCross(group: EigenGroup, levelMax: number, sense: LevelSense, slack = 0): boolean {
  const toward = sense === 'gain' ? group.slope.im : -group.slope.im;
  const distance = toAxis(group.k, sense);
  return distance > -slack && toward > 0 && distance < 2 * levelMax * toward + slack;
}
