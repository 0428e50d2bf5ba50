// What is a boundary made of?

export type Point = readonly [x: number, y: number];

/** Straight piece from one point to another. */
export interface LinePiece {
  readonly kind: 'line';
  readonly from: Point;
  readonly to: Point;
}

/**
 * Piece of an ellipse (a circle when both radii agree): p(t) = center + R(tilt)·(rx cos t, ry sin t),
 * t from `start` to `start + sweep` radians. Positive sweep runs counterclockwise.
 */
export interface ArcPiece {
  readonly kind: 'arc';
  readonly center: Point;
  readonly radii: Point;
  readonly tilt: number;
  readonly start: number;
  readonly sweep: number;
}

export type CurvePiece = LinePiece | ArcPiece;

/** A closed loop of pieces, each starting where the last one ends. */
export type Outline = readonly CurvePiece[];

/** A shape: the points with an odd winding parity with respect to all its outlines together. */
export type Shape = readonly Outline[];

/** Point of the piece at s ∈ [0, 1]. */
export function pointAt(piece: CurvePiece, s: number): Point {
  if (piece.kind === 'line') {
    const { from, to } = piece;
    return s === 1 ? to : [from[0] + s * (to[0] - from[0]), from[1] + s * (to[1] - from[1])];
  }
  const t = piece.start + s * piece.sweep;
  const x = piece.radii[0] * Math.cos(t);
  const y = piece.radii[1] * Math.sin(t);
  const c = Math.cos(piece.tilt);
  const d = Math.sin(piece.tilt);
  return [piece.center[0] + c * x - d * y, piece.center[1] + d * x + c * y];
}
