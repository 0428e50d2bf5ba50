// Where do the members of an array or a scatter stand?

import { boundingCircle } from '../geometry/bounding-circle.ts';
import type { Point, Shape } from '../geometry/curves.ts';
import { distanceToShape } from '../geometry/distance.ts';
import { containsPoint } from '../geometry/inside.ts';
import { moved, turned } from '../geometry/shapes.ts';
import { randomStream } from '../numerics/random.ts';
import { showNumber } from './findings.ts';
import type { Path } from './findings.ts';
import { aboveZero, wholeFrom, zeroOrMore } from './numbers.ts';
import type { Demand, Log, NumberReader } from './numbers.ts';
import type { ArrayInput, ScatterInput } from './schema.ts';
import { readShape, toRadians, usable } from './shapes.ts';

/** Bodies of one device, members counted singly. */
export const MOST_BODIES = 100000;

const memberCount: Demand = {
  ...wholeFrom(1, MOST_BODIES, 'a number of members'),
  mend: 'give a whole number in these limits; a device holds at most 100000 bodies',
};

/** Gives the members of a shape; counting first, so that nothing is built when there would be too many. */
export interface Copies {
  readonly count: number;
  readonly place: (shape: Shape) => readonly Shape[] | null;
}

/** Rows and columns, or a circle of members. Null with findings made. */
export function readArray(input: ArrayInput, path: Path, numbers: NumberReader, log: Log): Copies | null {
  return 'pitch' in input ? readGrid(input, path, numbers, log) : readWheel(input, path, numbers);
}

function readGrid(
  input: Extract<ArrayInput, { pitch: unknown }>,
  path: Path,
  numbers: NumberReader,
  log: Log,
): Copies | null {
  const [columns, rows] = numbers.readPoint(input.count, [...path, 'count'], memberCount);
  const [dx, dy] = numbers.readPoint(input.pitch, [...path, 'pitch']);
  const count = columns * rows;
  if (!usable(count, dx, dy)) return null;
  if (!checkCount(count, [...path, 'count'], log)) return null;
  if ((columns > 1 && dx === 0) || (rows > 1 && dy === 0)) {
    log.report(
      [...path, 'pitch'],
      `[${dx}, ${dy}]`,
      'steps other than 0, or members lie on each other',
      'give the distance between members',
    );
    return null;
  }
  return {
    count,
    place: (shape) =>
      Array.from({ length: count }, (_, i) => moved(shape, [(i % columns) * dx, Math.floor(i / columns) * dy])),
  };
}

function readWheel(input: Extract<ArrayInput, { around: unknown }>, path: Path, numbers: NumberReader): Copies | null {
  const around = numbers.readPoint(input.around, [...path, 'around']);
  const radius = numbers.read(input.radius, [...path, 'radius'], aboveZero('a radius'));
  const count = numbers.read(input.count, [...path, 'count'], memberCount);
  const start = input.start_angle === undefined ? 0 : numbers.read(input.start_angle, [...path, 'start_angle']);
  if (!usable(...around, radius, count, start)) return null;
  const turn = input.turn ?? true;
  const placeMember = (shape: Shape, i: number): Shape => {
    const angle = toRadians(start + (360 * i) / count);
    const x = around[0] + radius * Math.cos(angle);
    const y = around[1] + radius * Math.sin(angle);
    return moved(turn && angle !== 0 ? turned(shape, angle, [0, 0]) : shape, [x, y]);
  };
  return { count, place: (shape) => Array.from({ length: count }, (_, i) => placeMember(shape, i)) };
}

/** Seeded random places wholly inside a region. Null with findings made. */
export function readScatter(input: ScatterInput, path: Path, numbers: NumberReader, log: Log): Copies | null {
  const region = readShape(input.inside, [...path, 'inside'], numbers, log);
  const count = numbers.read(input.count, [...path, 'count'], memberCount);
  const seed = numbers.read(input.seed, [...path, 'seed'], wholeFrom(0, 2 ** 32 - 1, 'a seed'));
  const gap = numbers.read(input.minimum_gap, [...path, 'minimum_gap'], zeroOrMore('a gap'));
  if (region === null || !usable(count, seed, gap)) return null;
  const place = (shape: Shape): readonly Shape[] | null => {
    const { center, radius } = boundingCircle([shape]);
    const centers = throwDarts(region, count, seed, radius, gap);
    if (centers.length < count) {
      log.report(
        [...path, 'count'],
        `${count} members, of which ${centers.length} found a place after ${MISSES_IN_A_ROW} misses in a row`,
        `as many as fit: each in a circle of radius ${showNumber(radius)}, ${showNumber(gap)} from the next, inside the region`,
        'ask for fewer or smaller members, a smaller minimum_gap, or a larger region',
      );
      return null;
    }
    return centers.map(([x, y]) => moved(shape, [x - center[0], y - center[1]]));
  };
  return { count, place };
}

const MISSES_IN_A_ROW = 3000;

/**
 * Dart throwing: uniform points of the region, kept when their circle lies inside it and clear of all others; gives up after a
 * fixed number of misses in a row. A grid of cells one diameter wide bounds the search to nine cells.
 */
function throwDarts(region: Shape, count: number, seed: number, radius: number, gap: number): readonly Point[] {
  const random = randomStream(seed);
  const box = boundingCircle([region]);
  const apart = 2 * radius + gap;
  const cells = new Map<string, Point[]>();
  const cellOf = (v: number): number => Math.floor(v / apart);
  const placed: Point[] = [];
  for (let misses = 0; placed.length < count && misses < MISSES_IN_A_ROW; misses++) {
    const x = box.center[0] + (2 * random.uniform() - 1) * box.radius;
    const y = box.center[1] + (2 * random.uniform() - 1) * box.radius;
    if (!isFree(x, y) || !containsPoint(region, [x, y]) || distanceToShape(region, [x, y]) < radius) continue;
    const key = `${cellOf(x)},${cellOf(y)}`;
    const cell = cells.get(key);
    if (cell === undefined) cells.set(key, [[x, y]]);
    else cell.push([x, y]);
    placed.push([x, y]);
    misses = -1;
  }
  return placed;

  function isFree(x: number, y: number): boolean {
    for (let i = cellOf(x) - 1; i <= cellOf(x) + 1; i++)
      for (let j = cellOf(y) - 1; j <= cellOf(y) + 1; j++)
        for (const [px, py] of cells.get(`${i},${j}`) ?? []) if (Math.hypot(px - x, py - y) < apart) return false;
    return true;
  }
}

/** Reports a count above the limit of the device. */
export function checkCount(count: number, path: Path, log: Log): boolean {
  if (count <= MOST_BODIES) return true;
  log.report(path, `${showNumber(count)} bodies`, `at most ${MOST_BODIES} bodies in a device`, 'ask for fewer');
  return false;
}
