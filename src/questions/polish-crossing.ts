// How exactly does a mode lie on the real axis?

import { layerShift, returnedToMode } from '../accuracy/layer-return.ts';
import { type Limits, type Stop, stopBefore } from '../accuracy/memory.ts';
import { remainingStep } from '../accuracy/remaining-step.ts';
import { HIGHEST_ORDER } from '../accuracy/resolution.ts';
import { embed } from '../elements/space.ts';
import { type Crossing, findCrossing, ROUNDING } from '../eigen/crossing.ts';
import type { ModePath } from '../eigen/follow.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import { complex, type Complex, type ComplexArray } from '../numerics/complex.ts';
import type { Direction } from '../numerics/conventions.ts';
import type { DeviceFamily, LevelSense } from '../operator/device-family.ts';
import { multipoleJumps, multipoleOrder, type Multipoles } from '../scattering/contrast.ts';
import { angleOfSpaces } from '../scattering/drive-space.ts';
import { modeLabel } from './label.ts';
import { familyOf, type Prepared, spaceOf } from './prepare.ts';

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
  /** What kept it from them. */
  readonly stopped: Stop | null;
}

export interface PolishRequest {
  readonly prepared: Prepared;
  readonly direction: Direction;
  readonly sense: LevelSense;
  readonly digits: number;
  readonly limits: Limits;
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
 *
 * @param width      absolute distance within which modes are one group
 * @param startOrder order of the space that the path ends in
 */
export function polishCrossing(request: PolishRequest, path: ModePath, width: number, startOrder: number): AxisMode[] {
  const { prepared, direction, sense, digits, limits } = request;
  const { device, layer, mesh } = prepared;
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
        return parts.flatMap((part) => polishCrossing(request, pathTo(path, part), finer, order));
      }
    }
    // what still splits a degenerate pair, less with each order, is error too
    const levelSpread = imaginarySpread(family, here) / Math.abs(here.group.slope.im);
    const splitting = next && next.group.spread < here.group.spread / 2 ? levelSpread : 0;
    const reached =
      kStep <= goal * here.k && Math.max(levelStep, splitting) <= Math.max(goal * Math.abs(here.level), floor);
    const top = order + 1 >= HIGHEST_ORDER ? 'order' : stopBefore(limits, mesh, spaceOf(prepared, order + 1).orders);
    if (reached || !next || top) {
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
      // the order moves the complex k of the mode; its real part alone may stand still by chance
      const step = Math.max(Math.hypot(kStep, slope.im * levelStep), ROUNDING * k);
      const tail = next ? beyondTheStep(family, up, here, next, step) : 1;
      return [
        {
          k,
          // an error as large as the number says that nothing is known
          kError: Math.min(k, Math.max(tail * step, spread) + left * Math.abs(k - here.k) + ROUNDING * k),
          // where the highest order cannot tell the side of the axis the level is nought within its error
          level: Math.max(0, level),
          levelError: Math.min(
            Math.max(Math.abs(level), floor),
            Math.max(tail * levelStep, levelSpread, -level) + left * Math.abs(levelMoved) + floor,
          ),
          multiplicity,
          label: modeLabel(multipoles),
          group: here.group,
          order,
          multipoles,
          multipolesError: next ? angleOfSpaces(multipoles, jumpsOf(next, order + 1)) : 1,
          path: { levels: path.levels, ks: path.ks },
          reached,
          stopped: reached ? null : top,
        },
      ];
    }
    order++;
    here = next;
  }
}

/**
 * All that the orders beyond may still move the mode by, over the step to the next one; at least 1. Parts of the step may
 * cancel in k and in the level alike, so the level's step gets the same factor.
 */
function beyondTheStep(family: DeviceFamily, up: DeviceFamily, here: Crossing, next: Crossing, step: number): number {
  const { vectors, multiplicity } = here.group;
  const rest = remainingStep(family, up, complex(here.k), here.level, vectors, next.group.vectors, multiplicity);
  return Math.max(1, rest / step);
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
