// Where does metal with a surface impedance touch the mesh?

import { edgeMass, outerEdgeTraces } from '../elements/edge-trace.ts';
import type { Space } from '../elements/space.ts';
import type { SurfacePart, SurfaceTerms } from './open-operator.ts';

/** Boundary masses of the metals whose tags are first, first + 1, … */
export function surfaceTerms(space: Space, first: number, count: number): SurfaceTerms {
  const parts = new Map<number, SurfacePart[]>();
  for (let metal = 0; metal < count; metal++)
    // curved edges are polynomials of degree 10
    for (const trace of outerEdgeTraces(space, (tag) => tag === first + metal, space.order + 8)) {
      const list = parts.get(trace.triangle) ?? [];
      list.push({ metal, local: trace.local, mass: edgeMass(trace) });
      parts.set(trace.triangle, list);
    }
  return { count, parts };
}
