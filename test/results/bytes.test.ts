// Do arrays come back from bytes as they went in, and is a broken record told apart from a run?

import { describe, expect, test } from 'vitest';

import { RunFormatError, checkRunRecord, packArrays, viewArray } from '../../src/results/bytes.ts';
import { syntheticRun } from './synthetic-run.ts';

// The record as loose JSON, to be spoiled.
// eslint-disable-next-line @typescript-eslint/no-explicit-any -- every part of it may become anything
type Loose = Record<string, any>;

describe('packing', () => {
  const arrays = {
    odd: Uint32Array.of(1, 2, 4294967295),
    values: Float64Array.of(Math.PI, -0, 1e-300, Infinity),
    none: new Int32Array(0),
    small: Float32Array.of(0.1, -7),
    signed: Int32Array.of(-1, 5),
  };

  test('every array comes back bit for bit, at offsets that a typed view takes', () => {
    const { bytes, entries } = packArrays(arrays);
    for (const [name, array] of Object.entries(arrays)) {
      expect(entries[name].offset % 8).toBe(0);
      expect(viewArray(bytes.buffer, entries[name], name)).toEqual(array);
    }
  });

  test('a part of the file serves as well', () => {
    const { bytes, entries } = packArrays(arrays);
    const from = entries['values'].offset;
    expect(viewArray(bytes.buffer.slice(from), entries['values'], 'values', from)).toEqual(arrays.values);
  });

  test('views of larger buffers are packed without their surroundings', () => {
    const window = Float64Array.of(9, 1, 2, 9).subarray(1, 3);
    const { bytes, entries } = packArrays({ window });
    expect(bytes.byteLength).toBe(16);
    expect(viewArray(bytes.buffer, entries['window'])).toEqual(Float64Array.of(1, 2));
  });

  test('no arrays, no bytes', () => expect(packArrays({}).bytes.byteLength).toBe(0));

  test('a truncated file is named as such', () => {
    const { bytes, entries } = packArrays(arrays);
    expect(() => viewArray(bytes.buffer.slice(0, 20), entries['values'], 'values')).toThrow(/values.*truncated/);
  });
});

describe('checking a record', () => {
  const { record, arrays } = syntheticRun('absorb', { rings: 5, sectors: 8, many: 2 });
  const { bytes, entries } = packArrays(arrays);
  const whole = (): Loose => JSON.parse(JSON.stringify({ ...record, arrays: entries }));

  test('a whole one passes', () => expect(checkRunRecord(whole(), bytes.byteLength).command).toBe('absorb'));

  test.each<[string, (run: Loose) => unknown, RegExp]>([
    ['another format', (run) => (run['format'] = 'other'), /format: came "other", expected 'wavewell-run'/],
    ['a newer version', (run) => (run['version'] = 2), /newer program.*update/],
    ['an odd version', (run) => (run['version'] = 'one'), /version: came "one", expected 1/],
    ['no sentence', (run) => delete run['sentence'], /sentence: came nothing, expected a text/],
    ['a NaN, which JSON makes null', (run) => (run['fields'][0].k = [1, null]), /fields\[0\].k\[1\].*NaN/],
    ['an unknown array', (run) => (run['display'].points = 'gone'), /display.points: came "gone"/],
    ['an inherited name', (run) => (run['display'].points = 'toString'), /display.points/],
    ['an array of the wrong type', (run) => (run['display'].points = 'display.regions'), /type i32, expected f64/],
    ['too few values', (run) => (run['fields'][0].display = 'short'), /fields\[0\].display: .* 2 numbers/],
    ['a mark of no field', (run) => (run['marks'][1].field = 'nobody'), /marks\[1\].field: came "nobody"/],
    ['two fields alike', (run) => (run['fields'][1].id = run['fields'][0].id), /fields\[1\].id/],
    ['a negative rim', (run) => (run['mesh'].rimRadius = -1), /mesh.rimRadius: came -1, expected a positive/],
    ['an array past the end', (run) => (run['arrays']['display.points'].length = 1e9), /arrays.display.points: ends/],
    ['a crooked offset', (run) => (run['arrays']['display.points'].offset = 3), /multiple of 8/],
    ['no arrays', (run) => (run['arrays'] = null), /arrays: came null, expected an object/],
  ])('%s is refused', (_, spoil, message) => {
    const run = whole();
    run['arrays'].short = { type: 'f32', offset: 0, length: 2 };
    spoil(run);
    expect(() => checkRunRecord(run, bytes.byteLength)).toThrow(RunFormatError);
    expect(() => checkRunRecord(run, bytes.byteLength)).toThrow(message);
  });

  test.each([null, 7, 'run', [], undefined])('%j is no record', (value) => {
    expect(() => checkRunRecord(value)).toThrow(/run.json: came/);
  });
});
