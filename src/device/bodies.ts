// Which bodies does the file describe, members of arrays and scatters included?

import type { Shape } from '../geometry/curves.ts';
import { MOST_BODIES, readArray, readScatter } from './copies.ts';
import type { Copies } from './copies.ts';
import { listNames, nearestName } from './findings.ts';
import type { Path } from './findings.ts';
import type { Material } from './materials.ts';
import type { Body } from './model.ts';
import type { Log, NumberReader } from './numbers.ts';
import type { BodyInput } from './schema.ts';
import { readShape } from './shapes.ts';

/** A body and the place of its entry in the file. */
export interface PlacedBody {
  readonly body: Body;
  readonly path: Path;
}

/** Bodies in file order, without pump. Entries with findings are left out. */
export function readBodies(
  inputs: readonly BodyInput[],
  materials: ReadonlyMap<string, Material | null>,
  numbers: NumberReader,
  log: Log,
): readonly PlacedBody[] {
  checkNames(inputs, log);
  // First all entries are read and counted: nothing is built for a device with too many bodies.
  const entries = inputs.map((input, i) => {
    const path: Path = ['bodies', i];
    return {
      group: nameOf(input, i),
      path,
      materialName: input.material,
      material: findMaterial(input.material, [...path, 'material'], materials, log),
      copies: readCopies(input, path, numbers, log),
      shape: readShape(input, path, numbers, log),
    };
  });
  const total = entries.reduce((sum, { copies }) => sum + (copies === null || copies === 'none' ? 1 : copies.count), 0);
  if (total > MOST_BODIES) {
    const limit = `at most ${MOST_BODIES} bodies in a device`;
    log.report(['bodies'], `${total} bodies in all`, limit, 'make arrays and scatters smaller', 'key');
    return [];
  }
  return entries.flatMap(({ group, path, materialName, material, copies, shape }): PlacedBody[] => {
    if (material === null || copies === null || shape === null) return [];
    if (copies === 'none') return [{ body: makeBody(group, group, materialName, material, shape), path }];
    const members = copies.place(shape) ?? [];
    return members.map((member, n) => ({
      body: makeBody(`${group}[${n}]`, group, materialName, material, member),
      path,
    }));
  });
}

const nameOf = (input: BodyInput, index: number): string => input.name ?? `body${index + 1}`;

function makeBody(name: string, group: string, material: string, values: Material, shape: Shape): Body {
  return { name, material, ...values, shape, pumpWeight: 0, group };
}

function checkNames(inputs: readonly BodyInput[], log: Log): void {
  const first = new Map<string, number>();
  inputs.forEach((input, i) => {
    const name = nameOf(input, i);
    const other = first.get(name);
    if (other === undefined) {
      first.set(name, i);
      return;
    }
    const { line } = log.source.placeOf(['bodies', other, 'name']);
    log.report(
      ['bodies', i, 'name'],
      `the name ${JSON.stringify(name)} a second time (first on line ${line})`,
      'a name of its own for each body',
      'rename one of the two',
    );
  });
}

/** The material of a name; null with a finding made here or at the material itself. */
export function findMaterial(
  name: string,
  path: Path,
  materials: ReadonlyMap<string, Material | null>,
  log: Log,
): Material | null {
  const material = materials.get(name);
  if (material !== undefined) return material;
  const near = nearestName(name, materials.keys());
  log.report(
    path,
    `the unknown material ${JSON.stringify(name)}`,
    `one of the materials ${listNames(materials.keys())}`,
    near === undefined ? `define ${JSON.stringify(name)} under materials` : `write ${JSON.stringify(near)} instead`,
  );
  return null;
}

function readCopies(input: BodyInput, path: Path, numbers: NumberReader, log: Log): Copies | 'none' | null {
  if (input.array !== undefined && input.scatter !== undefined) {
    log.report([...path, 'scatter'], 'array and scatter together', 'one of the two', 'keep one of them', 'key');
    return null;
  }
  if (input.array !== undefined) return readArray(input.array, [...path, 'array'], numbers, log);
  if (input.scatter !== undefined) return readScatter(input.scatter, [...path, 'scatter'], numbers, log);
  return 'none';
}
