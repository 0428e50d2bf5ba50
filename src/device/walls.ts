// Which walls, sheets and symmetry lines does the file describe?

import type { Point, Shape } from '../geometry/curves.ts';
import { findMaterial } from './bodies.ts';
import type { Path } from './findings.ts';
import type { Material } from './materials.ts';
import { ELECTRIC_WALL } from './materials.ts';
import type { Device, Enclosure, Sheet, SymmetryLine, Wall } from './model.ts';
import type { Log, NumberReader } from './numbers.ts';
import type { DeviceInput } from './schema.ts';
import { readShape, usable } from './shapes.ts';

export type WalledParts = Pick<Device, 'enclosure' | 'sheets' | 'symmetry'>;

/** What the file says of them; parts with findings are left out. */
export function readWalls(
  input: DeviceInput,
  materials: ReadonlyMap<string, Material | null>,
  numbers: NumberReader,
  log: Log,
): WalledParts {
  const enclosure = input.enclosure && readEnclosure(input.enclosure, materials, numbers, log);
  const sheets = (input.sheets ?? []).flatMap((sheet, i): Sheet[] => {
    const path: Path = ['sheets', i];
    const wall = wallOf(sheet.wall, [...path, 'wall'], materials, log);
    const points = sheet.points.map((p, j): Point => numbers.readPoint(p, [...path, 'points', j]));
    if (wall === null || !usable(...points.flat())) return [];
    const twin = points.findIndex((p, j) => j > 0 && p[0] === points[j - 1][0] && p[1] === points[j - 1][1]);
    if (twin > 0) {
      log.report([...path, 'points', twin], 'the same point twice', 'points apart', 'remove one of the two');
      return [];
    }
    return [{ name: sheet.name ?? `sheet${i + 1}`, wall, points }];
  });
  const symmetry = (input.symmetry ?? []).flatMap((line, i): SymmetryLine[] => {
    const path: Path = ['symmetry', i];
    if ((line.x === undefined) === (line.y === undefined)) {
      log.report(
        path,
        'a symmetry line without, or with both of, x and y',
        'exactly one of "x" or "y"',
        'keep one',
        'key',
      );
      return [];
    }
    const across = line.x !== undefined ? 'x' : 'y';
    const at = numbers.read((line.x ?? line.y)!, [...path, across]);
    return Number.isNaN(at) ? [] : [{ across, at, parity: line.field }];
  });
  if (symmetry.length === 2 && symmetry[0].across === symmetry[1].across)
    log.report(['symmetry', 1], 'two parallel symmetry lines', 'one across x and one across y', 'remove one', 'key');
  return {
    ...(enclosure ? { enclosure } : {}),
    ...(sheets.length > 0 ? { sheets } : {}),
    ...(symmetry.length > 0 ? { symmetry } : {}),
  };
}

function readEnclosure(
  input: NonNullable<DeviceInput['enclosure']>,
  materials: ReadonlyMap<string, Material | null>,
  numbers: NumberReader,
  log: Log,
): Enclosure | null {
  const wall = wallOf(input.wall, ['enclosure', 'wall'], materials, log);
  const spaces = input.spaces.flatMap((space, i): Shape[] => {
    const shape = readShape(space, ['enclosure', 'spaces', i], numbers, log);
    return shape === null ? [] : [shape];
  });
  return wall === null || spaces.length < input.spaces.length ? null : { wall, spaces };
}

/** The wall that a material makes; null with a finding made. */
export function wallOf(
  name: string | undefined,
  path: Path,
  materials: ReadonlyMap<string, Material | null>,
  log: Log,
): Wall | null {
  const material = findMaterial(name ?? ELECTRIC_WALL, path, materials, log);
  if (material === null) return null;
  if (material.wall) return material.wall;
  log.report(
    path,
    `${name ?? ''}, which waves can enter`,
    '"electric wall", "magnetic wall", or a material given by its conductivity',
    'give the material a conductivity, or name a perfect wall',
  );
  return null;
}
