// Are windows with near-degenerate traps solved with the right multiplicity, and said to be complete?

import { describe, expect, test } from 'vitest';
import { judgeCase } from '../validate/judge-complete.ts';
import { randomCase } from '../validate/random-devices.ts';
import { clusterDevice } from '../validate/devices.ts';
import { countCluster } from '../validate/exact-count.ts';
import { readDevice } from '../../src/device/read.ts';
import { findModes, type ModesAnswer } from '../../src/questions/modes.ts';

const members = (answer: ModesAnswer): number => answer.modes.reduce((sum, m) => sum + m.multiplicity, 0);

const complete = (count: number): object => ({ found: count, counted: count, proven: true, reason: '' });

describe('three traps', () => {
  test('two disks far apart: the doublets of sharp modes split by less than the digits', () => {
    // index 3.3, radius 0.6: m = 8, k = 3.334576535/0.6, Q = 1.4e5 (test/checks/disk-modes.json)
    const device = clusterDevice(
      [
        { x: -1.6, y: 0, radius: 0.6, eps: 10.89 },
        { x: 1.6, y: 0, radius: 0.6, eps: 10.89 },
      ],
      { polarization: 'Ez', band: [5.54, 5.575] },
    );
    const answer = findModes(device, { digits: 4, qMin: 1000 });
    expect(members(answer)).toBe(4);
    expect(answer.complete).toMatchObject(complete(4));
    for (const m of answer.modes) expect(Math.abs(m.k.re - 3.334576535014394 / 0.6)).toBeLessThan(1e-4 * m.k.re);
  });

  test('a disk dented by 1e-4: the pair splits, each member counts', () => {
    const file = {
      wavewell: 1,
      polarization: 'Ez',
      band: { wavenumber: [4.75, 4.86] },
      materials: { glass: { index: 2 } },
      bodies: [{ name: 'a', material: 'glass', ellipse: { center: [0, 0], radii: [1, 1.0001] } }],
    };
    const answer = findModes(readDevice(JSON.stringify(file), 'dented.json'), { digits: 6, qMin: 50 });
    expect(members(answer)).toBe(2);
    expect(answer.complete).toMatchObject(complete(2));
  });

  test('an exceptional point: a disk with loss beside one with gain, tuned until two modes are one', () => {
    // tuned with this program by the secant on (k₁ − k₂)² = 0 in the complex permittivity of the first disk
    const cylinders = [
      { x: -1.25, y: 0, radius: 1, eps: { re: 3.988967859413888, im: 0.013659794101387398 } },
      { x: 1.25, y: 0, radius: 1, eps: { re: 4, im: -0.02 } },
    ];
    const file = {
      wavewell: 1,
      polarization: 'Ez',
      band: { wavenumber: [4.81, 4.83] },
      materials: {
        lossy: { permittivity: [cylinders[0].eps.re, cylinders[0].eps.im] },
        gaining: { permittivity: [4, -0.02], gain: true },
      },
      bodies: cylinders.map(({ x, y, radius }, i) => ({
        name: `b${i}`,
        material: i === 0 ? 'lossy' : 'gaining',
        disk: { center: [x, y], radius },
      })),
    };
    const exact = countCluster(cylinders, 'Ez', 1, { kMin: 4.81, kMax: 4.83, low: 1 / 60, high: 1 / 60 });
    const answer = findModes(readDevice(JSON.stringify(file), 'exceptional.json'), { digits: 5, qMin: 30 });
    expect(exact).toBe(3);
    expect(members(answer)).toBe(exact);
    expect(answer.complete).toMatchObject(complete(exact));
    const pair = answer.modes.filter((m) => Math.abs(m.k.re - 4.813841) < 1e-3);
    expect(pair.reduce((sum, m) => sum + m.multiplicity, 0)).toBe(2);
  });
});

// 98: its plans of orders once went round in a circle
test.each([0, 1, 2, 3, 20, 24, 98])('random device %i: nothing missed, nothing invented, complete', (i) => {
  const j = judgeCase(randomCase(1, i), false);
  expect(j.said.proven && j.settled).toBe(true);
  expect([j.misses, j.extras]).toEqual([[], []]);
  if (j.exact) expect(j.exact).toEqual([j.found, j.found]);
});
