// Are modes followed to the axis, also when groups part or join on the way?

import { describe, expect, test } from 'vitest';
import { findCrossing } from '../../src/eigen/crossing.ts';
import { followCluster, type ModePath } from '../../src/eigen/follow.ts';
import { complex } from '../../src/numerics/complex.ts';
import { farModes, firstVectors, smallCrossing, type SmallMode, smallProblem } from './small-problem.ts';

const WIDTH = 1e-4;

function follow(modes: readonly SmallMode[], columns: number, levelMax = 0.2, coupling = complex(0)) {
  const all = [...modes, ...farModes(8)];
  const problem = smallProblem(all, coupling);
  const paths = followCluster(problem, {
    k: modes[0].k,
    vectors: firstVectors(all.length, columns),
    columns,
    levelMax,
    groupWidth: WIDTH,
    clusterWidth: 2e-3,
  });
  return { problem, paths };
}

const members = (paths: readonly ModePath[]): number => paths.reduce((sum, p) => sum + p.multiplicity, 0);

/** Every path crossed, and the crossings are those of the modes: each member's within the spread of its group. */
function expectCrossings(paths: readonly ModePath[], modes: readonly SmallMode[], within: number): void {
  expect(paths.map((p) => p.ended)).toEqual(paths.map(() => 'crossed'));
  expect(members(paths)).toBe(modes.length);
  const exact = modes.map(smallCrossing).sort((a, b) => a.level - b.level);
  const found = paths
    .flatMap((p) => Array.from({ length: p.multiplicity }, () => p.crossing!))
    .sort((a, b) => a.level - b.level);
  found.forEach((c, i) => {
    expect(Math.abs(c.level / exact[i].level - 1)).toBeLessThan(within);
    expect(Math.abs(c.k / exact[i].k - 1)).toBeLessThan(within);
  });
}

test('one mode: k and level of the formula', () => {
  const mode = { k: complex(4, -0.04), weight: 1 };
  const { paths } = follow([mode], 1);
  expectCrossings(paths, [mode], 1e-12);
  expect(paths[0].levels[0]).toBe(0);
  expect(paths[0].ks.at(-1)!.im).toBe(0);
});

test('an exact pair stays one group', () => {
  const modes = [0, 1].map(() => ({ k: complex(4, -0.04), weight: 1 }));
  const { paths } = follow(modes, 2);
  expect(paths.length).toBe(1);
  expectCrossings(paths, modes, 1e-12);
});

describe('a dented disk: a pair split by about the group width', () => {
  test('one group at level 0, two modes on the way', () => {
    const modes = [
      { k: complex(4, -0.04), weight: 1 },
      { k: complex(4 * (1 + 0.7 * WIDTH), -0.04), weight: 0.98 },
    ];
    const { paths, problem } = follow(modes, 2);
    expect(paths.length).toBe(2);
    expectCrossings(paths, modes, 1e-10);
    expect(problem.factored).toBeLessThan(40);
  });

  test('two modes at level 0, together on the axis', () => {
    const modes = [
      { k: complex(4, -0.04), weight: 1 },
      { k: complex(4, -0.04 * (1 + 2 * 100 * WIDTH)), weight: 1.02 },
    ];
    const { paths } = follow(modes, 2);
    expectCrossings(paths, modes, 0.01);
  });

  test.each([0.5, 0.9, 1.1, 2, 3.9, 4.1, 10])('split by %f of the width all the way', (share) => {
    const modes = [
      { k: complex(4, -0.04), weight: 1 },
      { k: complex(4 * (1 + share * WIDTH), -0.04), weight: 1 },
    ];
    const { paths } = follow(modes, 2);
    expectCrossings(paths, modes, 1.01 * share * WIDTH);
  });
});

test('three modes, two of which part', () => {
  const modes = [
    { k: complex(4, -0.04), weight: 1 },
    { k: complex(4 * (1 + 0.9 * WIDTH), -0.04), weight: 0.97 },
    { k: complex(4.004, -0.03), weight: 1 },
  ];
  const { paths } = follow(modes, 3);
  expect(paths.length).toBe(3);
  expectCrossings(paths, modes, 1e-10);
});

test('three modes, the middle one in the middle: none swallows the others', () => {
  const modes = [-1, 0, 1].map((i) => ({ k: complex(4 + 0.004 * i, -0.04), weight: 1 }));
  const { paths } = follow(modes, 3);
  expect(paths.length).toBe(3);
  expectCrossings(paths, modes, 1e-10);
});

test('an avoided crossing: both modes are followed, and what crosses is singular on the axis', () => {
  // the stronger pumped one would overtake the other at once; the coupling keeps them apart
  const modes = [
    { k: complex(4, -0.04), weight: 1 },
    { k: complex(4.001, -0.05), weight: 0.4 },
  ];
  const { paths, problem } = follow(modes, 2, 0.3, complex(0.08, 0.01));
  expect(members(paths)).toBe(2);
  expect(paths.some((p) => p.ended === 'lost')).toBe(false);
  const crossed = paths.filter((p) => p.crossing);
  expect(crossed.length).toBeGreaterThan(0);
  for (const { crossing } of crossed) {
    const { group, k, level } = crossing!;
    const residual = problem.multiplyInto(
      new Float64Array(2 * problem.size),
      complex(k),
      level,
      'value',
      group.vectors,
      1,
    );
    expect(Math.hypot(...residual)).toBeLessThan(1e-11);
  }
});

test('a mode that the level drives away from the axis ends at once, with the reason', () => {
  const { paths } = follow([{ k: complex(4, -0.04), weight: -1 }], 1);
  expect(paths.map((p) => p.ended)).toEqual(['range']);
  expect(paths[0].crossing).toBe(null);
});

test('a mode whose crossing lies beyond the largest level does not count', () => {
  const { paths } = follow([{ k: complex(4, -0.04), weight: 1 }], 1, 0.01);
  expect(paths.map((p) => p.ended)).toEqual(['range']);
});

describe('crossing alone', () => {
  test('slope dk/dD is the difference quotient', () => {
    const mode = { k: complex(4, -0.04), weight: 0.7 };
    const modes = [mode, ...farModes(6)];
    const problem = smallProblem(modes);
    const { k, level } = smallCrossing(mode);
    const found = findCrossing(problem, {
      k: 1.001 * k,
      level: 0.98 * level,
      space: firstVectors(modes.length, 1),
      columns: 1,
      groupWidth: 1e-6,
    })!;
    expect(found.converged).toBe(true);
    expect(found.k).toBeCloseTo(k, 12);
    expect(found.level).toBeCloseTo(level, 12);
    // k² = κ²/(1 − iDw): dk/dD = i w k / 2(1 − iDw)
    const denominator = 2 * (1 + (level * 0.7) ** 2);
    expect(found.group.slope.re).toBeCloseTo((-0.7 * k * level * 0.7) / denominator, 10);
    expect(found.group.slope.im).toBeCloseTo((0.7 * k) / denominator, 10);
  });

  test('a level that does nothing gives no crossing', () => {
    const modes = [{ k: complex(4, -0.04), weight: 0 }, ...farModes(6).map((m) => ({ ...m, weight: 0 }))];
    const problem = smallProblem(modes);
    const request = { k: 4, level: 0.1, space: firstVectors(modes.length, 1), columns: 1, groupWidth: 1e-6 };
    expect(findCrossing(problem, request)).toBe(null);
  });
});
