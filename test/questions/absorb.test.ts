// Are coherent-absorption points those of the exact solutions, and do their drives leave nothing? A part of `npm run validate`.

import { describe, test } from 'vitest';
import { CASE_TIMEOUT, expectKept } from '../validate/expect.ts';

describe('against exact values', () => {
  test.each([
    // lossless devices: the twin of the laser, same k and D
    'disk n=2 Hz m=4 k=3.457 absorption',
    'disk n=3.3 Ez m=7 k=2.985 absorption',
    'layered ring Ez m=4 pumped 1 absorption',
    // with losses of its own a device absorbs at another k and D than it lases
    'layered metal_core Hz m=3 pumped 1 absorption',
    'cluster five_lossy Ez pumped 0 k=2.450 absorption',
  ])('%s', expectKept, CASE_TIMEOUT);
});
