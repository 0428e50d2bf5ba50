// Is the published schema a JSON Schema of draft 2020-12 that says what the check does?

import { expect, test } from 'vitest';
import { deviceJsonSchema } from '../../src/device/schema.ts';

type Node = Record<string, unknown>;
const schema = deviceJsonSchema() as Node;

/** Calls `visit` with every subschema and its path. */
function walk(node: Node, path: string, visit: (node: Node, path: string) => void): void {
  visit(node, path);
  for (const [key, inner] of Object.entries((node['properties'] as Node | undefined) ?? {}))
    walk(inner as Node, `${path}.${key}`, visit);
  for (const key of ['anyOf', 'prefixItems'])
    ((node[key] as Node[] | undefined) ?? []).forEach((inner, i) => walk(inner, `${path}.${key}[${i}]`, visit));
  for (const key of ['items', 'additionalProperties'])
    if (typeof node[key] === 'object') walk(node[key] as Node, `${path}.${key}`, visit);
}

test('it names its draft, refuses unknown keys and requires the version', () => {
  expect(schema['$schema']).toBe('https://json-schema.org/draft/2020-12/schema');
  expect(schema['required']).toEqual(['wavewell', 'polarization', 'band', 'bodies']);
  expect(JSON.parse(JSON.stringify(schema))).toEqual(schema);
  walk(schema, '', (node, path) => {
    if (node['properties'] !== undefined) expect(node['additionalProperties'], path).toBe(false);
  });
});

test('only words of the draft are used', () => {
  const words = [
    '$schema',
    'title',
    'description',
    'type',
    'properties',
    'required',
    'additionalProperties',
    'propertyNames',
    'items',
    'prefixItems',
    'minItems',
    'maxItems',
    'anyOf',
    'oneOf',
    'enum',
    'const',
    'pattern',
  ];
  walk(schema, '', (node, path) => {
    for (const key of Object.keys(node)) expect(words, `${path}: ${key}`).toContain(key);
  });
});

test('every key has a description', () => {
  walk(schema, '', (node, path) => {
    for (const [key, inner] of Object.entries((node['properties'] as Node | undefined) ?? {}))
      expect((inner as Node)['description'], `${path}.${key}`).toMatch(/\S{2,}/);
  });
});

test('alternatives that the check demands stand in it', () => {
  const body = ((schema['properties'] as Node)['bodies'] as Node)['items'] as Node;
  expect((body['oneOf'] as Node[]).map((one) => (one['required'] as string[])[0])).toEqual([
    'disk',
    'ring',
    'ellipse',
    'rectangle',
    'polygon',
    'regular_polygon',
  ]);
});
