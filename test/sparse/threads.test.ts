// Do several threads give the same bytes as one?

import { afterAll, describe, expect, it } from 'vitest';
import { analyse } from '../../src/sparse/analyse.ts';
import { findThreads, splitWork, startThreads, stopThreads } from '../../src/sparse/threads.ts';
import { layeredSquare } from '../bench/layered-square.ts';
import { randomNumbers } from './matrices.ts';

afterAll(stopThreads);

describe('threads', () => {
  it('give the same bytes, whatever their number', { timeout: 120000 }, async () => {
    const { pattern, fill } = layeredSquare(56, 3);
    const n = pattern.unknowns;
    const b = randomNumbers(8 * n, 2);
    const analysis = analyse(pattern);
    const alone = analysis.factorize(fill);
    const x = alone.solveInto(new Float64Array(8 * n), b, 4);
    for (const threads of [2, 4]) {
      const count = await startThreads(threads);
      expect(count).toBe(threads);
      expect(findThreads()?.threads).toBe(threads);
      for (let round = 0; round < 3; round++) {
        const together = analysis.factorize(fill);
        expect(together.report).toEqual(alone.report);
        expect(together.logDeterminant).toEqual(alone.logDeterminant);
        const y = together.solveInto(new Float64Array(8 * n), b, 4);
        expect(Buffer.compare(Buffer.from(x.buffer), Buffer.from(y.buffer))).toBe(0);
        together.release();
      }
      // Matrices that need rows passed on go back to one thread.
      const bare = analysis.factorize((e, into) => {
        fill(e, into);
        const nd = pattern.starts[e + 1] - pattern.starts[e];
        if (e % 50 === 0) for (let i = 0; i < nd; i++) into.fill(0, 2 * (i + i * nd), 2 * (i + i * nd) + 2);
      });
      expect(bare.report.smallestPivot).toBeGreaterThan(0);
      // A fill that throws leaves the threads usable.
      expect(() =>
        analysis.factorize((e) => {
          if (e === 3000) throw new Error('no element');
        }),
      ).toThrow('no element');
      const after = analysis.factorize(fill);
      expect(after.logDeterminant).toEqual(alone.logDeterminant);
      await stopThreads();
    }
  });

  it('refuse a count that makes no sense', () => {
    expect(() => startThreads(0)).toThrow('threads is 0');
  });

  it('split the tree into whole subtrees and what lies above', () => {
    // A chain 0 → 1 → 4 and 2 → 3 → 4 with equal fronts.
    const tables = {
      count: 5,
      parent: Int32Array.of(1, 4, 3, 4, -1),
      pivotStarts: Int32Array.of(0, 20, 40, 60, 80, 100),
      boundaryStarts: Float64Array.of(0, 20, 40, 60, 80, 80),
      boundaryInParent: new Int32Array(80),
      childStarts: Int32Array.of(0, 0, 1, 1, 2, 4),
      children: Int32Array.of(0, 2, 1, 3),
      elementStarts: new Int32Array(6),
      elements: new Int32Array(0),
      listInFront: new Int32Array(0),
      panelStarts: new Float64Array(6),
      elementListStarts: Int32Array.of(0),
    };
    const { own, together } = splitWork(tables, 2);
    expect([...own[0]]).toEqual([0, 1]);
    expect([...own[1]]).toEqual([2, 3]);
    expect([...together]).toEqual([4]);
  });
});
