// Does a mark stand where its stored path says, and is the right field shown there?

import { describe, expect, test } from 'vitest';

import type { RunMark } from '../../src/results/format.ts';
import { fieldAtLevel, firstMark, levelReach, positionAt } from '../../viewer/page/tracks.ts';
import type { Track } from '../../viewer/page/tracks.ts';

const mark: RunMark = {
  id: 'a',
  kind: 'pole',
  k: [4, -0.2],
  kError: 1e-6,
  q: 10,
  multiplicity: 1,
  label: '',
  field: 'cold',
  path: { parameter: 'pump', levels: 'l', ks: 'k' },
  crossing: { k: 4.2, kError: 1e-6, level: 0.25, levelError: 1e-9, field: 'hot' },
};
const track: Track = {
  mark,
  levels: Float64Array.of(0, 0.2, 0.3),
  ks: Float64Array.of(4, -0.2, 4.16, -0.04, 4.24, 0.04),
};

describe('position', () => {
  test.each([
    ['at the start', 0, [4, -0.2], true],
    ['between points', 0.1, [4.08, -0.12], true],
    ['on a point', 0.2, [4.16, -0.04], true],
    ['on the axis', 0.25, [4.2, 0], true],
    ['at the end', 0.3, [4.24, 0.04], true],
    ['beyond', 0.4, [4.24, 0.04], false],
  ] as const)('%s', (_, level, k, known) => {
    const found = positionAt(track, level);
    expect(found.known).toBe(known);
    k.forEach((part, i) => expect(found.k[i]).toBeCloseTo(part, 12));
  });

  test('without a path it is known at level zero only', () => {
    const still: Track = { mark: { ...mark, path: null }, levels: null, ks: null };
    expect(positionAt(still, 0)).toEqual({ k: mark.k, known: true });
    expect(positionAt(still, 0.1)).toEqual({ k: mark.k, known: false });
  });

  test('an empty path stands like none, a path of one point at that point', () => {
    expect(positionAt({ mark, levels: new Float64Array(0), ks: new Float64Array(0) }, 0).k).toEqual(mark.k);
    const single: Track = { mark: { ...mark, crossing: null }, levels: Float64Array.of(0), ks: Float64Array.of(4, -1) };
    expect(positionAt(single, 0)).toEqual({ k: [4, -1], known: true });
    expect(positionAt(single, 1)).toEqual({ k: [4, -1], known: false });
  });
});

test('the field on the axis is shown at the level of the crossing only, or where there is no other', () => {
  expect([0, 0.249, 0.25, 0.3].map((level) => fieldAtLevel(mark, level))).toEqual(['cold', 'cold', 'hot', 'cold']);
  expect(fieldAtLevel({ ...mark, field: null }, 0)).toBe('hot');
  expect(fieldAtLevel({ ...mark, field: null, crossing: null }, 0)).toBe(null);
});

test('the slider reaches past the last crossing, or to the end of the paths', () => {
  expect(levelReach([track])).toBeCloseTo(0.3, 12);
  expect(levelReach([{ ...track, mark: { ...mark, crossing: null } }])).toBe(0.3);
  expect(levelReach([])).toBe(0);
});

test('the first mark is the first to cross, or the one nearest to the axis', () => {
  const later = { ...mark, id: 'b', crossing: { ...mark.crossing!, level: 0.1 } };
  const plain = { ...mark, crossing: null };
  expect(firstMark([mark, later])?.id).toBe('b');
  expect(firstMark([plain, { ...plain, id: 'c', k: [4, -0.01] }])?.id).toBe('c');
  expect(firstMark([])).toBe(null);
});
