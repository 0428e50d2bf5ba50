// Which outlines does a shape of the file stand for?

import type { Point, Shape } from '../geometry/curves.ts';
import { polygonFault } from '../geometry/polygon-fault.ts';
import { disk, ellipse, polygon, rectangle, regularPolygon, ring } from '../geometry/shapes.ts';
import { listNames, showNumber } from './findings.ts';
import type { Path } from './findings.ts';
import { aboveZero, wholeFrom, zeroOrMore } from './numbers.ts';
import type { Log, NumberReader } from './numbers.ts';
import { SHAPE_KEYS } from './schema.ts';
import type { ShapesInput } from './schema.ts';

const RADIANS_PER_DEGREE = Math.PI / 180;

/** More sides than this are a circle. */
const MOST_SIDES = 10000;

/** The one shape among the keys of a body or region; null with findings made. */
export function readShape(input: ShapesInput, path: Path, numbers: NumberReader, log: Log): Shape | null {
  const given = SHAPE_KEYS.filter((key) => input[key] !== undefined);
  if (given.length !== 1) {
    log.report(
      given.length === 0 ? path : [...path, given[1]],
      given.length === 0 ? 'no shape' : `${given.length} shapes: ${given.join(', ')}`,
      `exactly one of ${listNames(SHAPE_KEYS)}`,
      given.length === 0
        ? 'add a shape, such as disk: { center: [0, 0], radius: 1 }'
        : 'give each shape a body of its own',
      'key',
    );
    return null;
  }
  const before = log.findings.length;
  const build = shapeBuilder(input, [...path, given[0]], numbers, log);
  return build === null || log.findings.length > before ? null : build();
}

/** Reads all numbers at once, so that every fault is found; the shape is built only when there is none. */
function shapeBuilder(input: ShapesInput, path: Path, numbers: NumberReader, log: Log): (() => Shape) | null {
  const { read, readPoint } = numbers;
  const at = (key: string): Path => [...path, key];
  const angleOf = (angle: number | string | undefined): number =>
    angle === undefined ? 0 : toRadians(read(angle, at('angle')));
  if (input.disk) {
    const center = readPoint(input.disk.center, at('center'));
    const radius = read(input.disk.radius, at('radius'), aboveZero('a radius'));
    return usable(radius) ? () => disk(center, radius) : null;
  }
  if (input.ring) {
    const center = readPoint(input.ring.center, at('center'));
    const outer = read(input.ring.outer, at('outer'), aboveZero('an outer radius'));
    const inner = read(input.ring.inner, at('inner'), aboveZero('an inner radius'));
    if (inner >= outer)
      log.report(
        at('inner'),
        showNumber(inner),
        `an inner radius below the outer one, ${showNumber(outer)}`,
        'make inner smaller or outer larger',
      );
    return usable(outer, inner) && inner < outer ? () => ring(center, outer, inner) : null;
  }
  if (input.ellipse) {
    const center = readPoint(input.ellipse.center, at('center'));
    const radii = readPoint(input.ellipse.radii, at('radii'), aboveZero('a semi-axis'));
    const angle = angleOf(input.ellipse.angle);
    return usable(...radii) ? () => ellipse(center, radii, angle) : null;
  }
  if (input.rectangle) {
    const center = readPoint(input.rectangle.center, at('center'));
    const size = readPoint(input.rectangle.size, at('size'), aboveZero('a side'));
    const angle = angleOf(input.rectangle.angle);
    const most = Math.min(...size) / 2;
    const corner = input.rectangle.corner_radius;
    const r = corner === undefined ? 0 : read(corner, at('corner_radius'), zeroOrMore('a corner radius'));
    // Half the side written as an expression may exceed it in the last digit.
    const rounded = Math.abs(r - most) <= 1e-12 * most ? most : r;
    if (rounded > most)
      log.report(
        at('corner_radius'),
        showNumber(r),
        `at most half the shorter side, ${showNumber(most)}`,
        'make the corner radius smaller',
      );
    return usable(...size, r) && rounded <= most ? () => rectangle(center, size, angle, rounded) : null;
  }
  if (input.polygon) {
    const points = input.polygon.points.map((point, i): Point => readPoint(point, [...path, 'points', i]));
    return points.flat().every(Number.isFinite) && isSimple(points, path, log) ? () => polygon(points) : null;
  }
  const regular = input.regular_polygon!;
  const center = readPoint(regular.center, at('center'));
  const radius = read(regular.radius, at('radius'), aboveZero('a radius'));
  const sides = read(regular.sides, at('sides'), wholeFrom(3, MOST_SIDES, 'a number of sides'));
  const angle = angleOf(regular.angle);
  return usable(radius, sides) ? () => regularPolygon(center, radius, sides, angle) : null;
}

function isSimple(points: readonly Point[], path: Path, log: Log): boolean {
  const fault = polygonFault(points);
  if (fault === null) return true;
  const place = `[${fault.place.map(showNumber).join(', ')}]`;
  const sides = `sides ${fault.first + 1} and ${fault.second + 1}`;
  const came = {
    'repeated point': `the point ${place} twice, as entries ${fault.first} and ${fault.second}`,
    'crossing sides': `a polygon whose ${sides} cross at ${place}`,
    'touching sides': `a polygon whose ${sides} touch at ${place}`,
    'no area': `a polygon without area: all points lie on one line`,
  }[fault.kind];
  const mend = {
    'repeated point': 'remove one of the two; a polygon closes by itself',
    'crossing sides': 'put the points in order around the shape',
    'touching sides': 'make two bodies of it, or move a corner',
    'no area': 'move a corner off the line',
  }[fault.kind];
  log.report([...path, 'points', fault.second], came, 'a polygon whose sides meet only at common corners', mend);
  return false;
}

/** Exact at whole quarter turns. */
export const toRadians = (degrees: number): number => degrees * RADIANS_PER_DEGREE;

/** No number of them is a fault already reported. */
export const usable = (...values: number[]): boolean => values.every((value) => !Number.isNaN(value));
