// Is the exponent of a corner that of the published equation?

import { describe, expect, test } from 'vitest';
import { smallestExponent } from '../../src/accuracy/corner-exponent.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { body, disk, planFor, polygon, rectangle } from '../mesh/sample-bodies.ts';

const weights = (p: number) => ({ stiffness: Float64Array.of(1, 0, 1, 0, p, 0), mass: new Float64Array(6) });

/** p cot(λω/2) = −cot(λ(π − ω/2)), odd about the bisector: R. B. Kellogg, Applicable Analysis 4 (1975), two sectors. */
function published(p: number, angle: number): number {
  const f = (x: number): number => p / Math.tan((x * angle) / 2) + 1 / Math.tan(x * (Math.PI - angle / 2));
  let [low, high] = [0.1, 1];
  for (let i = 0; i < 60; i++) {
    const x = (low + high) / 2;
    if (f(x) > 0) low = x;
    else high = x;
  }
  return low;
}

describe('exponents', () => {
  const square = [body('square', rectangle([0, 0], 1.3, 1))];
  const onSquare = meshDevice(square, planFor(square));
  const triangle = [body('triangle', polygon([[-0.6, -0.4], [0.6, -0.4], [0, 0.6392305]]))]; // prettier-ignore
  const onTriangle = meshDevice(triangle, planFor(triangle));

  test.each([4, 5.76, 11, 100])('ε = %f in Hz, at 90° and at 60°', (permittivity) => {
    const p = 1 / permittivity;
    expect(smallestExponent(onSquare, weights(p))).toBeCloseTo(published(p, Math.PI / 2), 4);
    expect(smallestExponent(onTriangle, weights(p))).toBeCloseTo(published(p, Math.PI / 3), 4);
  });

  test('where p does not jump, or nothing has a corner, fields are as good as r² log r', () => {
    const round = [body('disk', disk([0, 0], 1))];
    expect(smallestExponent(onSquare, weights(1))).toBe(2);
    expect(smallestExponent(meshDevice(round, planFor(round)), weights(0.1))).toBe(2);
  });
});
