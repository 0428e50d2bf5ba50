// Which bodies are active, and with which weights?

import { listNames, nearestName } from './findings.ts';
import type { Body } from './model.ts';
import { aboveZero } from './numbers.ts';
import type { Log, NumberReader } from './numbers.ts';
import type { DeviceInput } from './schema.ts';

/**
 * The bodies with their pump weights. A name addresses a body, all members of an array or scatter, or one member
 * (`posts[3]`), which then goes before its group.
 */
export function weighBodies(
  bodies: readonly Body[],
  pump: DeviceInput['pump'],
  numbers: NumberReader,
  log: Log,
): readonly Body[] {
  if (pump === undefined) return bodies;
  const entries = Object.entries(pump.bodies);
  if (entries.length === 0) {
    log.report(
      ['pump', 'bodies'],
      'a pump without an active body',
      'at least one body with its weight',
      'name a body, such as { core: 1 }',
      'key',
    );
    return bodies;
  }
  const groups = new Set(bodies.map((body) => body.group));
  const names = new Set(bodies.map((body) => body.name));
  const weights = new Map<string, number>();
  for (const [name, value] of entries) {
    const path = ['pump', 'bodies', name];
    weights.set(name, numbers.read(value, path, aboveZero('a weight')));
    const metal = bodies.find((body) => (body.name === name || body.group === name) && body.wall !== undefined);
    if (metal) log.report(path, `${name}, a body of metal`, 'a body that waves can enter', 'leave it out', 'key');
    if (names.has(name) || groups.has(name)) continue;
    const member = /^(.*)\[.*\]$/.exec(name)?.[1];
    const size = member !== undefined && groups.has(member) ? bodies.filter((b) => b.group === member).length : 0;
    const near = nearestName(name, groups);
    log.report(
      path,
      `the unknown body ${JSON.stringify(name)}`,
      size > 0 ? `${member}[0] to ${member}[${size - 1}]` : `one of the bodies ${listNames(groups)}`,
      near === undefined || size > 0 ? 'name a body of this file' : `write ${JSON.stringify(near)} instead`,
      'key',
    );
  }
  return bodies.map((body) => {
    const pumpWeight = weights.get(body.name) ?? weights.get(body.group);
    return pumpWeight === undefined ? body : { ...body, pumpWeight };
  });
}
