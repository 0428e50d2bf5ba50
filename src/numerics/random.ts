// Where does repeatable randomness come from?

/** A stream of pseudo-random numbers, wholly determined by its seed. */
export interface RandomStream {
  /** Uniform in [0, 1), 53 bits. */
  uniform(): number;
  /** Normal, mean 0, variance 1. */
  normal(): number;
  /** Whole number 0 … bound − 1, each equally likely; bound from 1 to 2^32. */
  integer(bound: number): number;
  /** Shuffles the list in place (Fisher–Yates) and returns it. */
  shuffle<L extends { length: number; [index: number]: unknown }>(list: L): L;
  /** The next 32 raw bits as a whole number 0 … 2^32 − 1. */
  bits(): number;
}

/**
 * A stream from a seed (any number; its 32 low bits of the integer part count) or from a full state of four words, not
 * all zero.
 *
 * Generator: xoshiro128** 1.1, D. Blackman, S. Vigna, Scrambled linear pseudorandom number generators, ACM Trans.
 * Math. Software 47, 36 (2021); public-domain reference at prng.di.unimi.it. The seed is spread by the 32-bit
 * finaliser of MurmurHash3 over a Weyl sequence. Normal: Marsaglia's polar method.
 */
export function randomStream(seed: number | readonly [number, number, number, number]): RandomStream {
  let [s0, s1, s2, s3] = typeof seed === 'number' ? spread(seed) : seed;
  if (!Number.isFinite(s0 + s1 + s2 + s3) || (s0 | s1 | s2 | s3) === 0)
    throw new RangeError(`randomStream: seed ${String(seed)}; expected a finite number, or four words not all zero`);
  let spare = NaN;

  const bits = (): number => {
    const five = Math.imul(s1, 5);
    const result = Math.imul((five << 7) | (five >>> 25), 9) >>> 0;
    const t = s1 << 9;
    s2 ^= s0;
    s3 ^= s1;
    s1 ^= s2;
    s0 ^= s3;
    s2 ^= t;
    s3 = (s3 << 11) | (s3 >>> 21);
    return result;
  };
  const uniform = (): number => ((bits() >>> 5) * 0x4000000 + (bits() >>> 6)) / 0x20000000000000;
  const normal = (): number => {
    if (!Number.isNaN(spare)) {
      const kept = spare;
      spare = NaN;
      return kept;
    }
    for (;;) {
      const u = 2 * uniform() - 1;
      const v = 2 * uniform() - 1;
      const q = u * u + v * v;
      if (q >= 1 || q === 0) continue;
      const factor = Math.sqrt((-2 * Math.log(q)) / q);
      spare = v * factor;
      return u * factor;
    }
  };
  const integer = (bound: number): number => {
    if (!Number.isInteger(bound) || bound < 1 || bound > 0x100000000)
      throw new RangeError(`integer: bound ${bound}; expected a whole number from 1 to 2^32`);
    // Reject the incomplete last block, so that no remainder is favoured.
    const limit = 0x100000000 - (0x100000000 % bound);
    for (;;) {
      const draw = bits();
      if (draw < limit) return draw % bound;
    }
  };
  return {
    bits,
    uniform,
    normal,
    integer,
    shuffle(list) {
      for (let i = list.length - 1; i > 0; i--) {
        const j = integer(i + 1);
        const kept = list[i];
        list[i] = list[j];
        list[j] = kept;
      }
      return list;
    },
  };
}

function spread(seed: number): [number, number, number, number] {
  let weyl = seed | 0;
  const word = (): number => {
    weyl = (weyl + 0x9e3779b9) | 0;
    let h = weyl;
    h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
    h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
    return h ^ (h >>> 16);
  };
  return Number.isFinite(seed) ? [word(), word(), word(), word()] : [NaN, 0, 0, 0];
}
