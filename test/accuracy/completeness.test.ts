// Does the independent count refuse a list with a mode too few or too many, and find what a search has missed?

import { describe, expect, test } from 'vitest';
import { countedSearch } from '../../src/accuracy/completeness.ts';
import { judgeAll, provenWindow } from '../../src/eigen/proven-window.ts';
import { modesInWindow, type Tile, type Wedge } from '../../src/eigen/window.ts';
import { type Complex, modulus, subtract } from '../../src/numerics/complex.ts';
import { closeByChannels } from '../../src/operator/channel-boundary.ts';
import { expectedModes } from '../../src/questions/mode-count.ts';
import { familyOf, prepare } from '../../src/questions/prepare.ts';
import { resolutionFor } from '../../src/accuracy/resolution.ts';
import { diskDevice } from '../validate/devices.ts';

const device = diskDevice(2, { polarization: 'Ez', band: [2.2, 4] });
const prepared = prepare(device, { kMin: 2.2, kMax: 4, slope: 0.05 }, resolutionFor(3));
const wedge: Wedge = { kMin: 2.2, kMax: 4, low: 0.05, high: 1e-3 };
const window = { wedge, level: 0, expected: expectedModes(device), perTile: 22, tolerance: 1e-9, seed: 3 };

// Source: test/checks/disk-modes.json, n = 2, Ez (mpmath, 50 digits: secant on the exact equation); each twice.
const EXACT = [
  [3, 2.3840470536572864, -0.12169591498222694],
  [4, 3.0025726023236294, -0.08178067598728185],
  [5, 3.612478876010815, -0.0528871786083244],
] as const;

describe.each(['outgoing', 'incoming'] as const)('%s', (direction) => {
  const family = familyOf(prepared, 4, direction, 'gain');
  const facing = direction === 'outgoing' ? wedge : { ...wedge, low: wedge.high, high: wedge.low };
  const counted = countedSearch(device, prepared.layer, 1e-4);
  counted.search(family, { ...window, wedge: facing });
  const inside = counted.known().filter((k) => k.re > 2.2 && k.re < 4 && Math.abs(k.im) < 0.05 * k.re);
  const modes = inside.map((k) => ({ k, multiplicity: 1 }));

  test('what the search has found is all there is', () => {
    const answer = counted.judge(facing, modes);
    expect(answer).toMatchObject({ proven: true, found: modes.length, counted: modes.length, reason: '' });
    const sharp = EXACT.filter(([, re, im]) => -im < 0.05 * re);
    expect(modes).toHaveLength(2 * sharp.length);
    for (const [, re, im] of sharp) {
      const near = inside.filter((k) => modulus(subtract(k, { re, im: direction === 'outgoing' ? im : -im })) < 1e-2);
      expect(near).toHaveLength(2);
    }
  });

  test('one mode less: the count finds it and tells where', () => {
    modes.forEach((left, i) => {
      const answer = counted.judge(
        facing,
        modes.filter((_, j) => j !== i),
      );
      expect(answer).toMatchObject({ proven: false, found: modes.length - 1, counted: modes.length });
      const place = Number(/near k = ([\d.]+)/.exec(answer.reason)?.[1]);
      expect(Math.abs(place - left.k.re)).toBeLessThan(0.02 * left.k.re);
    });
  });

  test('one mode more: the count refuses it', () => {
    const answer = counted.judge(facing, [...modes, modes[0]]);
    expect(answer).toMatchObject({ proven: false, found: modes.length + 1, counted: modes.length });
  });
});

test('a window that cuts between a mode and its neighbour, or through a mode, is proven', () => {
  const family = familyOf(prepared, 4, 'outgoing', 'gain');
  for (const kMin of [3.6124, 3.6125, 3.6126]) {
    const cut = { ...wedge, kMin };
    const counted = countedSearch(device, prepared.layer, 1e-4);
    counted.search(family, { ...window, wedge: cut });
    const inside = counted.known().filter((k) => k.re > kMin && k.re < 4 && Math.abs(k.im) < 0.05 * k.re);
    const answer = counted.judge(
      cut,
      inside.map((k) => ({ k, multiplicity: 1 })),
    );
    expect(answer).toMatchObject({ proven: true, found: inside.length });
  }
});

test('a search that misses modes is told by the count and finds them the second time', () => {
  const family = familyOf(prepared, 4, 'outgoing', 'gain');
  const closed = closeByChannels(device, family, 20);
  const request = {
    ...window,
    groupWidth: 4e-4,
    logDeterminant: (k: Complex) => closed.logDeterminant(k, 0),
    isForeign: () => false,
  };
  const whole = provenWindow(family, request);
  expect(whole.proof.searchedAgain).toBe(0);
  const forgetful = provenWindow(family, {
    ...request,
    find: (problem, asked) => {
      const { tiles, covered } = modesInWindow(problem, asked);
      return { tiles: tiles.map((t) => without(t, problem.size, (k) => Math.abs(k.re - 3.61) < 0.05)), covered };
    },
  });
  expect(forgetful.proof.searchedAgain).toBeGreaterThan(0);
  expect(forgetful.proof.known.length).toBeGreaterThanOrEqual(whole.proof.known.length);
  expect(judgeAll(forgetful.proof, forgetful.proof.known)).toMatchObject({ proven: true, missing: [], surplus: 0 });
});

/** The tile without the modes that the rule names. */
function without(tile: Tile, size: number, drop: (k: Complex) => boolean): Tile {
  const kept = tile.ks.flatMap((k, i) => (drop(k) ? [] : [i]));
  const vectors = new Float64Array(2 * size * kept.length);
  kept.forEach((i, j) => vectors.set(tile.vectors.subarray(2 * size * i, 2 * size * (i + 1)), 2 * size * j));
  return { ...tile, ks: kept.map((i) => tile.ks[i]), vectors };
}
