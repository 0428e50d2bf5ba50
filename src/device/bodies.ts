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
  const bodies: PlacedBody[] = [];
  let total = 0;
  inputs.forEach((input, i) => {
    const path: Path = ['bodies', i];
    const material = findMaterial(input.material, [...path, 'material'], materials, log);
    const copies = readCopies(input, path, numbers, log);
    const shape = readShape(input, path, numbers, log);
    total += copies === 'none' || copies === null ? 1 : copies.count;
    if (total > MOST_BODIES) return;
    if (material === null || copies === null || shape === null) return;
    const group = nameOf(input, i);
    const shapes = copies === 'none' ? [shape] : (copies.place(shape) ?? []);
    shapes.forEach((member, n) => {
      const name = copies === 'none' ? group : `${group}[${n}]`;
      bodies.push({ body: makeBody(name, group, input.material, material, member), path });
    });
  });
  if (total > MOST_BODIES)
    log.report(
      ['bodies'],
      `${total} bodies in all`,
      `at most ${MOST_BODIES} bodies in a device`,
      'make arrays and scatters smaller',
      'key',
    );
  return bodies;
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
