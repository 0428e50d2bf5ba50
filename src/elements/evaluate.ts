// What is the value of a finite-element field at a point of a triangle?

import type { ComplexArray } from '../numerics/complex.ts';
import { functionCount, tabulateBasis } from './basis.ts';
import type { Space } from './space.ts';

/** Values of a field on triangle t at tabulated reference points, interleaved, into `out`. */
export function evaluateInto(
  out: ComplexArray,
  space: Space,
  field: ComplexArray,
  t: number,
  table: ReturnType<typeof tabulateBasis>,
): ComplexArray {
  const { starts, list, functions, signs } = space;
  const width = functionCount(space.order);
  const points = table.values.length / width;
  out.fill(0, 0, 2 * points);
  for (let i = starts[t]; i < starts[t + 1]; i++) {
    const g = list[i];
    if (g < 0) continue;
    const re = signs[i] * field[2 * g];
    const im = signs[i] * field[2 * g + 1];
    const f = functions[i];
    for (let q = 0; q < points; q++) {
      const value = table.values[q * width + f];
      out[2 * q] = out[2 * q] + value * re;
      out[2 * q + 1] = out[2 * q + 1] + value * im;
    }
  }
  return out;
}
