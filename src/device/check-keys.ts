// Does a read file have the keys and kinds of values of a device file?

import type { z } from 'zod';
import { DeviceError, MOST_FINDINGS, formatPath, listNames, nearestName, showValue } from './findings.ts';
import type { Finding, Path } from './findings.ts';
import { deviceJsonSchema, deviceSchema } from './schema.ts';
import type { DeviceInput } from './schema.ts';
import type { Source } from './source.ts';

type Issue = z.core.$ZodIssue;
type JsonSchema = Record<string, unknown>;

/** @throws DeviceError with one finding for every key or value that does not fit the schema. */
export function checkKeys(source: Source): DeviceInput {
  const result = deviceSchema.safeParse(source.value);
  if (result.success) return result.data;
  const root = deviceJsonSchema();
  const findings: Finding[] = [];
  // Unknown keys first: a key that is missing because it is misspelt is told once, as misspelt.
  const issues = result.error.issues.toSorted((a, b) => rank(a) - rank(b));
  for (const issue of issues) {
    if (findings.length >= MOST_FINDINGS) break;
    for (const finding of findingsOf(source, root, issue, []))
      if (!isMisspelt(finding, findings)) findings.push(finding);
  }
  findings.sort((a, b) => a.line - b.line || a.column - b.column);
  throw new DeviceError(findings.slice(0, MOST_FINDINGS));
}

const rank = (issue: Issue): number => (issue.code === 'unrecognized_keys' ? 0 : 1);

function isMisspelt(missing: Finding, findings: readonly Finding[]): boolean {
  const key = /^no key "(.*)"$/.exec(missing.came)?.[1];
  if (key === undefined) return false;
  const holder = (path: string): string => path.slice(0, Math.max(0, path.lastIndexOf('.')));
  return findings.some(
    ({ path, mend }) => mend === `write ${JSON.stringify(key)} instead` && holder(path) === holder(missing.path),
  );
}

function findingsOf(source: Source, root: JsonSchema, issue: Issue, above: Path): Finding[] {
  const path = [...above, ...(issue.path as (string | number)[])];
  if (issue.code === 'unrecognized_keys')
    return issue.keys.slice(0, MOST_FINDINGS).map((key) => unknownKey(source, root, path, key));
  if (issue.code === 'invalid_union') {
    const nested = nearestOption(issue);
    if (nested !== undefined)
      return nested
        .toSorted((a, b) => rank(a) - rank(b))
        .reduce<Finding[]>(
          (all, inner) => [...all, ...findingsOf(source, root, inner, path).filter((one) => !isMisspelt(one, all))],
          [],
        );
  }
  if (issue.code === 'invalid_key') return [badName(source, path)];
  const value = valueAt(source.value, path);
  const describe = describeAt(root, path);
  const where = (part: 'key' | 'value') => ({
    file: source.file,
    ...source.placeOf(path, part),
    path: formatPath(path),
  });
  if (value === undefined || value === null) {
    const key = String(path.at(-1));
    const missing = value === undefined;
    return [
      {
        ...where('value'),
        came: missing ? `no key "${key}"` : 'nothing (an empty value)',
        expected: describe === '' ? expectation(issue, value) : `${expectation(issue, value)}: ${describe}`,
        mend: missing ? `add the key "${key}"${exampleOf(issue)}` : `give "${key}" a value${exampleOf(issue)}`,
      },
    ];
  }
  return [
    {
      ...where('value'),
      came: showValue(value),
      expected: describe === '' ? expectation(issue, value) : `${expectation(issue, value)}: ${describe}`,
      mend: mendOf(issue, value),
    },
  ];
}

/** The issues of the union member whose kind fits the value; undefined when none fits (the union's own text says more). */
function nearestOption(issue: Extract<Issue, { code: 'invalid_union' }>): Issue[] | undefined {
  const fitting = issue.errors.filter(
    (issues) => !issues.some((i) => i.path.length === 0 && i.code === 'invalid_type'),
  );
  return fitting.sort((a, b) => a.length - b.length)[0];
}

function unknownKey(source: Source, root: JsonSchema, path: Path, key: string): Finding {
  const known = keysAt(root, path);
  const free = known.filter((name) => !Object.hasOwn(Object(valueAt(source.value, path)) as object, name));
  const near = nearestName(key, free) ?? nearestName(key, known);
  return {
    file: source.file,
    ...source.placeOf([...path, key], 'key'),
    path: formatPath([...path, key]),
    came: `the unknown key ${JSON.stringify(key)}`,
    expected: known.length > 0 ? `one of the keys ${listNames(known)}` : 'no key here',
    mend: near === undefined ? 'remove the key' : `write ${JSON.stringify(near)} instead`,
  };
}

function badName(source: Source, path: Path): Finding {
  return {
    file: source.file,
    ...source.placeOf(path, 'key'),
    path: formatPath(path),
    came: `the name ${JSON.stringify(path.at(-1))}`,
    expected: path[0] === 'knobs' ? KNOB_NAMES : NAMES,
    mend: 'rename it',
  };
}

const KNOB_NAMES = 'a name of letters, digits and _, a letter first';
const NAMES = 'a name of at most 64 letters, digits, blanks, _ . -, a letter first';

function expectation(issue: Issue, value: unknown): string {
  switch (issue.code) {
    case 'invalid_union':
      return issue.message;
    case 'invalid_value':
      return listNames(issue.values.map(String)).replaceAll(/"(\d+)"/g, '$1');
    case 'invalid_type':
      return KINDS[issue.expected] ?? issue.expected;
    case 'too_small':
      return Array.isArray(value) && issue.exact !== true && isOpenList(issue)
        ? `${issue.minimum} entries or more`
        : `${issue.minimum} entries`;
    case 'too_big':
      return `${issue.maximum} entries`;
    case 'invalid_format':
      return NAMES;
    default:
      return issue.message;
  }
}

/** Whether the length limit belongs to a list (bodies, points) rather than to a pair. */
const isOpenList = (issue: Issue): boolean => issue.path.at(-1) === 'points' || issue.path.at(-1) === 'bodies';

const KINDS: Readonly<Record<string, string>> = {
  object: 'keys with values',
  record: 'names with values',
  array: 'a list [ … ]',
  tuple: 'a list of two entries [ …, … ]',
  string: 'text',
  boolean: 'true or false',
};

function exampleOf(issue: Issue): string {
  if (issue.code === 'invalid_value') return `, for example ${String(issue.values[0])}`;
  const example = EXAMPLES[String(issue.path.at(-1))];
  return example === undefined ? '' : `, for example ${example}`;
}

const EXAMPLES: Readonly<Record<string, string>> = {
  band: 'band: { wavenumber: [1, 2] }',
  bodies: 'bodies: [ { material: glass, disk: { center: [0, 0], radius: 1 } } ]',
  center: 'center: [0, 0]',
  material: 'material: glass',
  pitch: 'pitch: [1, 1]',
  points: 'points: [[0, 0], [1, 0], [0, 1]]',
  radius: 'radius: 1',
  seed: 'seed: 1',
};

function mendOf(issue: Issue, value: unknown): string {
  if (issue.code === 'invalid_value') {
    const near = typeof value === 'string' ? nearestName(value, issue.values.map(String)) : undefined;
    return near === undefined ? `write ${listNames(issue.values.map(String)).replaceAll('"', '')}` : `write ${near}`;
  }
  if (issue.code === 'too_small') return 'add what is missing';
  if (issue.code === 'too_big') return 'remove what is too much';
  if (issue.code === 'invalid_format') return 'rename it';
  if (typeof value === 'number' && !Number.isFinite(value)) return 'give a finite number';
  return 'replace the value by the kind expected';
}

function valueAt(root: unknown, path: Path): unknown {
  let value = root;
  for (const part of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, part)) return undefined;
    value = (value as Record<string | number, unknown>)[part];
  }
  return value;
}

/** The schemas that a path leads to (several where alternatives exist). */
function schemasAt(root: JsonSchema, path: Path): JsonSchema[] {
  let schemas = alternatives(root);
  for (const part of path) {
    schemas = schemas.flatMap((schema) => {
      const inner =
        typeof part === 'number'
          ? ((schema['prefixItems'] as JsonSchema[] | undefined)?.[part] ?? schema['items'])
          : ((schema['properties'] as Record<string, JsonSchema> | undefined)?.[part] ??
            schema['additionalProperties']);
      return typeof inner === 'object' ? alternatives(inner as JsonSchema) : [];
    });
  }
  return schemas;
}

const alternatives = (schema: JsonSchema): JsonSchema[] => [
  schema,
  ...((schema['anyOf'] as JsonSchema[] | undefined) ?? []).flatMap(alternatives),
];

const keysAt = (root: JsonSchema, path: Path): string[] => [
  ...new Set(
    schemasAt(root, path).flatMap((schema) => Object.keys((schema['properties'] as object | undefined) ?? {})),
  ),
];

/** Description of the key, its first letter small and without a final stop, so that it can follow a colon. */
function describeAt(root: JsonSchema, path: Path): string {
  const text = schemasAt(root, path).find((schema) => typeof schema['description'] === 'string')?.['description'];
  return typeof text === 'string' ? text.replace(/\.$/, '') : '';
}
