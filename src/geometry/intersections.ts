// Where do two pieces of boundary meet?

import type { CurvePiece, Point } from './curves.ts';

/** A common point: parameter s on the first piece, t on the second. */
export interface Meeting {
  readonly s: number;
  readonly t: number;
  readonly point: Point;
}

export function meetings(_a: CurvePiece, _b: CurvePiece, _tolerance: number): Meeting[] {
  return [];
}
