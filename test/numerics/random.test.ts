// Is the stream repeatable, and is it what its source says?

import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/numerics/random.ts';

describe('random stream', () => {
  it('gives the words of xoshiro128** 1.1 from the state 1, 2, 3, 4 (the algorithm run apart, in 64-bit Python integers)', () => {
    const stream = randomStream([1, 2, 3, 4]);
    expect(Array.from({ length: 8 }, () => stream.bits())).toEqual([
      11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849,
    ]);
  });

  it('same seed, same stream; other seed, other stream', () => {
    const a = randomStream(7);
    const b = randomStream(7);
    const c = randomStream(8);
    const first = Array.from({ length: 20 }, () => a.uniform());
    expect(Array.from({ length: 20 }, () => b.uniform())).toEqual(first);
    expect(Array.from({ length: 20 }, () => c.uniform())).not.toEqual(first);
    expect(randomStream(0).uniform()).toBeGreaterThan(0);
  });

  it('uniform, normal and integer have the moments they should', () => {
    const stream = randomStream(3);
    const n = 40000;
    let [u, uu, g, gg, gggg] = [0, 0, 0, 0, 0];
    const counts = new Int32Array(7);
    for (let i = 0; i < n; i++) {
      const x = stream.uniform();
      const y = stream.normal();
      expect(x >= 0 && x < 1).toBe(true);
      u += x / n;
      uu += (x * x) / n;
      g += y / n;
      gg += (y * y) / n;
      gggg += y ** 4 / n;
      counts[stream.integer(7)]++;
    }
    // Five standard errors each.
    expect(Math.abs(u - 1 / 2)).toBeLessThan(5 * Math.sqrt(1 / 12 / n));
    expect(Math.abs(uu - 1 / 3)).toBeLessThan(5 * Math.sqrt(4 / 45 / n));
    expect(Math.abs(g)).toBeLessThan(5 / Math.sqrt(n));
    expect(Math.abs(gg - 1)).toBeLessThan(5 * Math.sqrt(2 / n));
    expect(Math.abs(gggg - 3)).toBeLessThan(5 * Math.sqrt(96 / n));
    for (const count of counts) expect(Math.abs(count - n / 7)).toBeLessThan(5 * Math.sqrt(n / 7));
  });

  it('shuffles in place without losing anything, and refuses nonsense', () => {
    const stream = randomStream(5);
    const list = Int32Array.from({ length: 50 }, (_, i) => i);
    expect(stream.shuffle(list)).toBe(list);
    expect([...list]).not.toEqual(Array.from({ length: 50 }, (_, i) => i));
    expect([...list].sort((a, b) => a - b)).toEqual(Array.from({ length: 50 }, (_, i) => i));
    expect(stream.integer(1)).toBe(0);
    expect(() => stream.integer(0)).toThrow(/bound 0/);
    expect(() => randomStream(NaN)).toThrow(/NaN/);
    expect(() => randomStream([0, 0, 0, 0])).toThrow(RangeError);
  });
});
