// What is thrown when a drawing cannot be meshed?

import type { Point } from './curves.ts';

/** The drawing itself is at fault: the message names the bodies, the place, the figure and the mend. */
export class GeometryError extends Error {
  override readonly name = 'GeometryError';
  /** Names of the bodies concerned. */
  readonly bodies: readonly string[];
  readonly place: Point;

  constructor(message: string, bodies: readonly string[], place: Point) {
    super(message);
    this.bodies = bodies;
    this.place = place;
  }
}
