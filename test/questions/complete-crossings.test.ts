// Does the count at the largest level find crossings that a list lacks?

import { describe, expect, test } from 'vitest';
import { checkAtLevel, type LevelCheckRequest, type ListedCrossing } from '../../src/questions/complete-crossings.ts';
import { findCrossings } from '../../src/questions/crossings.ts';
import type { AxisMode } from '../../src/questions/polish-crossing.ts';
import { diskDevice } from '../validate/devices.ts';

const listed = (crossings: readonly AxisMode[]): ListedCrossing[] => crossings.map((c) => ({ ...c, slack: 1e-3 }));

describe.each(['gain', 'loss'] as const)('disk n = 2, Ez, 2.8 < k < 3.8, %s', (sense) => {
  const device = diskDevice(2, { polarization: 'Ez', band: [2.8, 3.8] });
  const levelMax = 0.4;
  const answer = findCrossings(device, sense, { digits: 3, levelMax });
  const slope = 0.1;
  const request: LevelCheckRequest = {
    sense,
    levelMax,
    wedge: { kMin: 2.6, kMax: 4, low: sense === 'gain' ? slope : 1e-3, high: sense === 'gain' ? 1e-3 : slope },
    groupWidth: 4e-4,
    order: 5,
    listed: listed(answer.crossings),
    beyond: [],
  };

  test('the whole list is complete', () => {
    expect(answer.complete).toMatchObject({ below: levelMax, found: 4, counted: 4, proven: true, reason: '' });
    expect(checkAtLevel(answer.prepared, request)).toMatchObject({ missed: [], reason: '' });
  });

  test('a crossing that the list lacks is found again by following back', () => {
    answer.crossings.forEach((left, i) => {
      const { missed } = checkAtLevel(answer.prepared, {
        ...request,
        listed: listed(answer.crossings.filter((_, j) => j !== i)),
      });
      expect(missed).toHaveLength(1);
      const [path] = missed;
      expect(path.multiplicity).toBe(2);
      expect(Math.abs(path.crossing!.k - left.k)).toBeLessThan(1e-3 * left.k);
      expect(Math.abs(path.crossing!.level - left.level)).toBeLessThan(1e-2 * left.level);
      // with pump the mode goes on outwards
      expect(Math.sign(path.crossing!.group.slope.im)).toBe(sense === 'gain' ? 1 : -1);
    });
  });

  test('one member of a pair is missed too', () => {
    const [first, ...rest] = answer.crossings;
    const { missed } = checkAtLevel(answer.prepared, {
      ...request,
      listed: listed([{ ...first, multiplicity: 1 }, ...rest]),
    });
    expect(missed.map((p) => p.multiplicity)).toEqual([1]);
  });
});

test('a mode that gain in the file holds beyond the axis is no crossing and hinders no proof', () => {
  const device = diskDevice(2, { polarization: 'Ez', band: [3.4, 3.8] });
  const gaining = {
    ...device,
    bodies: device.bodies.map((b) => ({ ...b, permittivity: { re: 4, im: -0.2 } })),
  };
  const answer = findCrossings(gaining, 'gain', { digits: 3, levelMax: 0.1 });
  expect(answer.beyond).toHaveLength(2);
  expect(answer.complete).toMatchObject({ proven: true, reason: '' });
});
