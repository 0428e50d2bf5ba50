// Which gaps between outlines are too narrow to mesh?

import type { ArrangementEdge } from './arrangement-edge.ts';
import { GeometryError } from './geometry-error.ts';
import { closestApproach } from './intersections.ts';
import { boxOf } from './pieces.ts';

/** A gap narrower than this share of the smaller body's size needs thousands of triangles to no purpose. */
export const NARROWEST_GAP = 1e-6;

/**
 * Throws a GeometryError where two edges without a common vertex come nearer than NARROWEST_GAP × the smaller of the
 * shapes beside them. (Edges nearer than `tolerance` have been joined before.)
 */
export function refuseNarrowGaps(
  edges: readonly ArrangementEdge[],
  sizes: readonly number[],
  names: readonly string[],
  tolerance: number,
): void {
  const boxes = edges.map(({ piece }) => boxOf(piece));
  const scales = edges.map(({ left, right }) =>
    Math.min(...[left, right].filter((label) => label >= 0).map((label) => sizes[label])),
  );
  const order = edges.map((_, i) => i).sort((a, b) => boxes[a][0] - boxes[b][0] || a - b);
  // The widest edge box decides how far the sweep must look: boxes are compared with the margin of the larger scale.
  const widest = NARROWEST_GAP * Math.max(0, ...scales);
  for (let i = 0; i < order.length; i++) {
    const p = order[i];
    for (let j = i + 1; j < order.length; j++) {
      const q = order[j];
      if (boxes[q][0] > boxes[p][2] + widest) break;
      const least = Math.max(NARROWEST_GAP * Math.min(scales[p], scales[q]), tolerance);
      if (boxes[q][1] > boxes[p][3] + least || boxes[p][1] > boxes[q][3] + least) continue;
      const [a, b] = [edges[p], edges[q]];
      if (a.from === b.from || a.from === b.to || a.to === b.from || a.to === b.to) continue;
      const nearest = closestApproach(a.piece, b.piece);
      if (!nearest || nearest.gap >= least) continue;
      const labels = [...new Set([a, b].map(({ left, right }) => Math.max(left, right)))];
      const bodies = labels.map((label) => names[label]);
      const who =
        bodies.length === 1 ? `Two outlines of '${bodies[0]}' come` : `'${bodies[0]}' and '${bodies[1]}' come`;
      const where = `(${nearest.point[0].toPrecision(8)}, ${nearest.point[1].toPrecision(8)})`;
      throw new GeometryError(
        `${who} within ${nearest.gap.toPrecision(3)} of each other at ${where}, too near to mesh what lies between: ` +
          `let them touch or overlap, or keep them at least ${least.toPrecision(2)} apart.`,
        bodies,
        nearest.point,
      );
    }
  }
}
