// How does each unknown on an opening project on the opening's functions?

import type { Opening } from '../boundary/openings.ts';
import { outerEdgeTraces } from '../elements/edge-trace.ts';
import type { Space } from '../elements/space.ts';

/** C: c_j[i] = ∮ N_i φ_j ds, real. */
export interface OpeningFunctionals {
  readonly opening: Opening;
  /** Unknowns with a trace on the opening. */
  readonly unknowns: Int32Array;
  /** Functions. */
  readonly count: number;
  /** count × unknowns.length, column-major: c_j of the i-th at j + i·count. */
  readonly values: Float64Array;
}

/** Gauss–Legendre along each edge, with nodes enough for the fastest function; at least `atLeast` functions. */
export function openingFunctionals(space: Space, opening: Opening, atLeast: number): OpeningFunctionals {
  const chosen = (tag: number): boolean => tag === opening.tag;
  const place = new Map<number, number>();
  let longest = 0;
  for (const { unknowns, weights } of outerEdgeTraces(space, chosen, 4)) {
    for (const g of unknowns) if (g >= 0 && !place.has(g)) place.set(g, place.size);
    longest = Math.max(
      longest,
      weights.reduce((a, b) => a + b, 0),
    );
  }
  const count = Math.max(atLeast, opening.functionsFor(place.size));
  const nodes = space.order + 8 + Math.ceil((opening.variation(count - 1) * longest) / 2);
  const values = new Float64Array(count * place.size);
  const phi = new Float64Array(count);
  for (const trace of outerEdgeTraces(space, chosen, nodes)) {
    for (let q = 0; q < nodes; q++) {
      opening.functionsInto(phi, trace.points[2 * q], trace.points[2 * q + 1], count);
      trace.unknowns.forEach((g, i) => {
        if (g < 0) return;
        const w = trace.weights[q] * trace.values[i * nodes + q];
        const at = place.get(g)! * count;
        for (let j = 0; j < count; j++) values[at + j] += w * phi[j];
      });
    }
  }
  return { opening, unknowns: Int32Array.from(place.keys()), count, values };
}
