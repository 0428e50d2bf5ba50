// What is an edge of an arrangement?

import type { CurvePiece } from './curves.ts';
import { partOf } from './pieces.ts';

/** A curve between two vertices with a region on each side; a loop has `from === to`. */
export interface ArrangementEdge {
  readonly piece: CurvePiece;
  readonly from: number;
  readonly to: number;
  /** Index of the last shape that holds the points just left (right) of the edge, −1 where there is none. */
  readonly left: number;
  readonly right: number;
  /** Number of the sheet that lies on the edge; absent for none. A sheet may have the same region on both sides. */
  readonly sheet?: number;
}

/** The same edge walked the other way. */
export const turned = (edge: ArrangementEdge): ArrangementEdge => ({
  piece: partOf(edge.piece, 1, 0),
  from: edge.to,
  to: edge.from,
  left: edge.right,
  right: edge.left,
  ...(edge.sheet === undefined ? {} : { sheet: edge.sheet }),
});
