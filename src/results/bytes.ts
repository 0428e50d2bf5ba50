// How do the arrays of a run become bytes, and is a record that was read back a run at all?

import { RUN_FORMAT, RUN_VERSION } from './format.ts';
import type { ArrayEntry, RunArray, RunRecord } from './format.ts';

/** A record or its bytes are not what `format.ts` says; the message tells where, what came and what was expected. */
export class RunFormatError extends Error {
  override readonly name = 'RunFormatError';
}

/** Every array starts at a multiple of this many bytes, so that a typed view needs no copy. */
const ALIGNMENT = 8;

const ELEMENT_BYTES = { f64: 8, f32: 4, i32: 4, u32: 4 } as const;

const HOST_IS_LITTLE_ENDIAN = new Uint8Array(new Uint16Array([1]).buffer)[0] === 1;

/**
 * Lays arrays one behind the other, little-endian, each aligned to 8 bytes, in the order of the record's keys.
 * @returns the bytes of `arrays.bin` and where each array sits in them.
 */
export function packArrays(arrays: Readonly<Record<string, RunArray>>): {
  readonly bytes: Uint8Array<ArrayBuffer>;
  readonly entries: Record<string, ArrayEntry>;
} {
  const entries: Record<string, ArrayEntry> = {};
  let end = 0;
  for (const [name, array] of Object.entries(arrays)) {
    const offset = Math.ceil(end / ALIGNMENT) * ALIGNMENT;
    entries[name] = { type: typeOf(name, array), offset, length: array.length };
    end = offset + array.byteLength;
  }
  const bytes = new Uint8Array(end);
  for (const [name, array] of Object.entries(arrays)) {
    const raw = new Uint8Array(array.buffer, array.byteOffset, array.byteLength);
    const entry = entries[name];
    bytes.set(HOST_IS_LITTLE_ENDIAN ? raw : reverseElements(raw, ELEMENT_BYTES[entry.type]), entry.offset);
  }
  return { bytes, entries };
}

/**
 * One array of a run.
 * @param buffer all of `arrays.bin`, or a part of it that begins at byte `from`.
 * @returns a view that shares memory with the buffer (a copy on big-endian hosts).
 * @throws RunFormatError when the entry reaches outside the buffer.
 */
export function viewArray(buffer: ArrayBuffer, entry: ArrayEntry, name = 'array', from = 0): RunArray {
  const start = entry.offset - from;
  const bytes = entryBytes(entry);
  if (start < 0 || start + bytes > buffer.byteLength)
    throw new RunFormatError(
      `${name}: needs bytes ${entry.offset} to ${entry.offset + bytes}, but the file holds ${from + buffer.byteLength} (truncated?)`,
    );
  if (HOST_IS_LITTLE_ENDIAN) return typedView(buffer, entry, start);
  const swapped = reverseElements(new Uint8Array(buffer, start, bytes), ELEMENT_BYTES[entry.type]);
  return typedView(swapped.buffer, entry, 0);
}

/** Length of an entry in bytes. */
export const entryBytes = (entry: ArrayEntry): number => entry.length * ELEMENT_BYTES[entry.type];

/**
 * The parsed `run.json` as a record, once everything the readers rely on has been checked: kinds, finite numbers,
 * and that every array that is named exists with the right type and length.
 * @param byteLength size of `arrays.bin`, when known: every entry must end inside it.
 * @throws RunFormatError with the place, what came and what was expected.
 */
export function checkRunRecord(value: unknown, byteLength?: number): RunRecord {
  const run = object(value, 'run.json');
  if (run['format'] !== RUN_FORMAT) fail('format', run['format'], `'${RUN_FORMAT}'`);
  checkVersion(run['version']);
  const program = object(run['program'], 'program');
  text(program['version'], 'program.version');
  text(run['command'], 'command');
  object(run['options'], 'options');
  if (run['when'] !== null) text(run['when'], 'when');
  text(run['sentence'], 'sentence');
  list(run['cautions'], 'cautions', text);
  object(run['answer'], 'answer');
  const arrays = checkEntries(run['arrays'], byteLength);
  checkDevice(run['device'], arrays);
  checkMesh(run['mesh'], arrays);
  const points = checkDisplay(run['display'], arrays);
  const fields = checkFields(run['fields'], arrays, points);
  checkMarks(run['marks'], arrays, fields);
  return value as RunRecord;
}

function checkVersion(version: unknown): void {
  if (typeof version === 'number' && Number.isInteger(version) && version > RUN_VERSION)
    throw new RunFormatError(
      `version: this run was written by a newer program (format ${version}; this one reads up to ${RUN_VERSION}): update wavewell`,
    );
  if (version !== RUN_VERSION) fail('version', version, String(RUN_VERSION));
}

type Entries = Readonly<Record<string, ArrayEntry>>;

function checkEntries(value: unknown, byteLength: number | undefined): Entries {
  const entries = object(value, 'arrays');
  for (const [name, item] of Object.entries(entries)) {
    const at = `arrays.${name}`;
    const entry = object(item, at);
    oneOf(entry['type'], `${at}.type`, Object.keys(ELEMENT_BYTES));
    const offset = count(entry['offset'], `${at}.offset`);
    count(entry['length'], `${at}.length`);
    if (offset % ALIGNMENT !== 0) fail(`${at}.offset`, offset, `a multiple of ${ALIGNMENT}`);
    const end = offset + entryBytes(item as ArrayEntry);
    if (byteLength !== undefined && end > byteLength)
      throw new RunFormatError(
        `${at}: ends at byte ${end}, but arrays.bin holds ${byteLength} (truncated, or of another run)`,
      );
  }
  return entries as Entries;
}

function checkDevice(value: unknown, arrays: Entries): void {
  const device = object(value, 'device');
  text(device['file'], 'device.file');
  text(device['title'], 'device.title');
  oneOf(device['lengthUnit'], 'device.lengthUnit', ['none', 'nm', 'um', 'mm', 'cm', 'm']);
  if (device['metres'] !== null) number(device['metres'], 'device.metres');
  oneOf(device['polarization'], 'device.polarization', ['Ez', 'Hz']);
  const band = object(device['band'], 'device.band');
  oneOf(band['quantity'], 'device.band.quantity', ['wavelength', 'frequency', 'energy', 'wavenumber']);
  pair(band['limits'], 'device.band.limits');
  text(band['unit'], 'device.band.unit');
  number(band['kMin'], 'device.band.kMin');
  number(band['kMax'], 'device.band.kMax');
  const background = object(device['background'], 'device.background');
  text(background['material'], 'device.background.material');
  number(background['permittivity'], 'device.background.permittivity');
  list(device['bodies'], 'device.bodies', (item, at) => {
    const body = object(item, at);
    text(body['name'], `${at}.name`);
    text(body['material'], `${at}.material`);
    pair(body['permittivity'], `${at}.permittivity`);
    number(body['pumpWeight'], `${at}.pumpWeight`);
    list(body['outlines'], `${at}.outlines`, (name, where) =>
      arrayNamed(arrays, name, where, ['f64'], { multiple: 2 }),
    );
  });
}

const MESH_ARRAYS = {
  vertices: { types: ['f64'], multiple: 2 },
  triangles: { types: ['i32'], multiple: 3 },
  regions: { types: ['i32'], multiple: 1 },
  edges: { types: ['i32'], multiple: 2 },
  triangleEdges: { types: ['i32'], multiple: 3 },
  edgeTriangles: { types: ['i32'], multiple: 2 },
  edgeCurve: { types: ['i32'], multiple: 1 },
  curves: { types: ['f64'], multiple: 2 },
} as const;

function checkMesh(value: unknown, arrays: Entries): void {
  const mesh = object(value, 'mesh');
  count(mesh['order'], 'mesh.order');
  count(mesh['curveOrder'], 'mesh.curveOrder');
  pair(mesh['center'], 'mesh.center');
  positive(mesh['rimRadius'], 'mesh.rimRadius');
  positive(mesh['endRadius'], 'mesh.endRadius');
  const names = object(mesh['arrays'], 'mesh.arrays');
  const length: Record<string, number> = {};
  for (const [key, { types, multiple }] of Object.entries(MESH_ARRAYS))
    length[key] = arrayNamed(arrays, names[key], `mesh.arrays.${key}`, types, { multiple });
  const same = (key: string, expected: number): void => {
    if (length[key] !== expected) mismatch(`mesh.arrays.${key}`, `${length[key]} numbers`, `${expected}`);
  };
  same('regions', length['triangles'] / 3);
  same('triangleEdges', length['triangles']);
  same('edgeTriangles', length['edges']);
  same('edgeCurve', length['edges'] / 2);
  if (names['edgeFree'] !== undefined)
    arrayNamed(arrays, names['edgeFree'], 'mesh.arrays.edgeFree', ['i32'], { exact: length['edges'] / 2 });
  if (mesh['shifts'] !== undefined)
    arrayNamed(arrays, mesh['shifts'], 'mesh.shifts', ['i32'], { exact: length['regions'] });
}

/** @returns the number of display points. */
function checkDisplay(value: unknown, arrays: Entries): number {
  const display = object(value, 'display');
  number(display['tolerance'], 'display.tolerance');
  const points = arrayNamed(arrays, display['points'], 'display.points', ['f64'], { multiple: 2 }) / 2;
  const triangles = arrayNamed(arrays, display['triangles'], 'display.triangles', ['u32'], { multiple: 3 }) / 3;
  arrayNamed(arrays, display['regions'], 'display.regions', ['i32'], { exact: triangles });
  if (display['walls'] !== undefined) arrayNamed(arrays, display['walls'], 'display.walls', ['f64'], { multiple: 4 });
  if (display['enclosed'] !== undefined && display['enclosed'] !== true)
    fail('display.enclosed', JSON.stringify(display['enclosed']), 'true, or nothing');
  return points;
}

/** @returns the ids of the fields. */
function checkFields(value: unknown, arrays: Entries, points: number): Set<string> {
  const ids = new Set<string>();
  list(value, 'fields', (item, at) => {
    const field = object(item, at);
    const id = text(field['id'], `${at}.id`);
    if (ids.has(id)) fail(`${at}.id`, id, 'an id of its own');
    ids.add(id);
    text(field['label'], `${at}.label`);
    oneOf(field['kind'], `${at}.kind`, ['mode', 'lasing', 'absorbing', 'driven']);
    pair(field['k'], `${at}.k`);
    if (field['level'] !== null) number(field['level'], `${at}.level`);
    positive(field['scale'], `${at}.scale`);
    arrayNamed(arrays, field['coefficients'], `${at}.coefficients`, ['f64'], { multiple: 2 });
    arrayNamed(arrays, field['display'], `${at}.display`, ['f32'], { exact: 2 * points });
    if (field['drive'] !== null) list(field['drive'], `${at}.drive`, driveTerm);
    if (field['farField'] !== null) arrayNamed(arrays, field['farField'], `${at}.farField`, ['f64'], { exact: 360 });
  });
  return ids;
}

function driveTerm(value: unknown, at: string): void {
  const term = object(value, at);
  if (!Number.isInteger(term['m'])) fail(`${at}.m`, term['m'], 'a whole number');
  pair(term['amplitude'], `${at}.amplitude`);
}

function checkMarks(value: unknown, arrays: Entries, fields: ReadonlySet<string>): void {
  const fieldOrNull = (id: unknown, at: string): void => {
    if (id !== null && !fields.has(text(id, at))) fail(at, id, 'the id of one of the fields, or null');
  };
  list(value, 'marks', (item, at) => {
    const mark = object(item, at);
    text(mark['id'], `${at}.id`);
    oneOf(mark['kind'], `${at}.kind`, ['pole', 'zero']);
    pair(mark['k'], `${at}.k`);
    number(mark['kError'], `${at}.kError`);
    number(mark['q'], `${at}.q`);
    number(mark['multiplicity'], `${at}.multiplicity`);
    text(mark['label'], `${at}.label`);
    fieldOrNull(mark['field'], `${at}.field`);
    if (mark['path'] !== null) {
      const path = object(mark['path'], `${at}.path`);
      text(path['parameter'], `${at}.path.parameter`);
      const steps = arrayNamed(arrays, path['levels'], `${at}.path.levels`, ['f64'], {});
      arrayNamed(arrays, path['ks'], `${at}.path.ks`, ['f64'], { exact: 2 * steps });
    }
    if (mark['crossing'] !== null) {
      const crossing = object(mark['crossing'], `${at}.crossing`);
      for (const key of ['k', 'kError', 'level', 'levelError']) number(crossing[key], `${at}.crossing.${key}`);
      fieldOrNull(crossing['field'], `${at}.crossing.field`);
    }
  });
}

/** @returns the length, in elements, of the array that is named. */
function arrayNamed(
  arrays: Entries,
  name: unknown,
  at: string,
  types: readonly string[],
  size: { readonly multiple?: number; readonly exact?: number },
): number {
  const entry = Object.hasOwn(arrays, text(name, at)) ? arrays[name as string] : undefined;
  if (!entry) fail(at, name, 'the name of one of the arrays');
  if (!types.includes(entry.type)) mismatch(at, `'${String(name)}' of type ${entry.type}`, types.join(' or '));
  if (size.exact !== undefined && entry.length !== size.exact)
    mismatch(at, `'${String(name)}' with ${entry.length} numbers`, `${size.exact}`);
  if (size.multiple !== undefined && entry.length % size.multiple !== 0)
    mismatch(at, `'${String(name)}' with ${entry.length} numbers`, `a multiple of ${size.multiple}`);
  return entry.length;
}

function object(value: unknown, at: string): Record<string, unknown> {
  if (typeof value !== 'object' || value === null || Array.isArray(value)) fail(at, value, 'an object');
  return value as Record<string, unknown>;
}

function list(value: unknown, at: string, check: (item: unknown, at: string) => unknown): void {
  if (!Array.isArray(value)) fail(at, value, 'a list');
  value.forEach((item, index) => check(item, `${at}[${index}]`));
}

function text(value: unknown, at: string): string {
  if (typeof value !== 'string') fail(at, value, 'a text');
  return value;
}

function number(value: unknown, at: string): number {
  if (typeof value !== 'number' || !Number.isFinite(value))
    fail(at, value, value === null ? 'a finite number (NaN and infinity cannot be stored)' : 'a finite number');
  return value;
}

function positive(value: unknown, at: string): void {
  if (number(value, at) <= 0) fail(at, value, 'a positive number');
}

function count(value: unknown, at: string): number {
  if (typeof value !== 'number' || !Number.isSafeInteger(value) || value < 0) fail(at, value, 'a whole number ≥ 0');
  return value;
}

function pair(value: unknown, at: string): void {
  if (!Array.isArray(value) || value.length !== 2) fail(at, value, 'two numbers');
  value.forEach((item, index) => number(item, `${at}[${index}]`));
}

function oneOf(value: unknown, at: string, choices: readonly string[]): void {
  if (typeof value !== 'string' || !choices.includes(value)) fail(at, value, `one of ${choices.join(', ')}`);
}

function fail(at: string, came: unknown, expected: string): never {
  const shown = came === undefined ? 'nothing' : JSON.stringify(came);
  mismatch(at, shown.length > 60 ? shown.slice(0, 57) + '…' : shown, expected);
}

function mismatch(at: string, came: string, expected: string): never {
  throw new RunFormatError(`${at}: came ${came}, expected ${expected}`);
}

function typeOf(name: string, array: RunArray): ArrayEntry['type'] {
  if (array instanceof Float64Array) return 'f64';
  if (array instanceof Float32Array) return 'f32';
  if (array instanceof Int32Array) return 'i32';
  if (array instanceof Uint32Array) return 'u32';
  throw new RunFormatError(
    `${name}: came ${typeof array}, expected a Float64Array, Float32Array, Int32Array or Uint32Array`,
  );
}

function typedView(buffer: ArrayBuffer, { type, length }: ArrayEntry, start: number): RunArray {
  if (type === 'f64') return new Float64Array(buffer, start, length);
  if (type === 'f32') return new Float32Array(buffer, start, length);
  if (type === 'i32') return new Int32Array(buffer, start, length);
  return new Uint32Array(buffer, start, length);
}

/** A copy with the bytes of every element in reverse order. */
function reverseElements(bytes: Uint8Array, size: number): Uint8Array<ArrayBuffer> {
  const out = new Uint8Array(bytes.length);
  for (let i = 0; i < bytes.length; i += size) for (let j = 0; j < size; j++) out[i + j] = bytes[i + size - 1 - j]!;
  return out;
}
