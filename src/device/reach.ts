// Which circle holds a device, its walls and mirror images included?

import { boundingCircle, type Circle } from '../geometry/bounding-circle.ts';
import type { CurvePiece } from '../geometry/curves.ts';
import { mirrored } from '../geometry/shapes.ts';
import { walledSpaces } from './guides.ts';
import type { Device, Sheet } from './model.ts';

type Drawn = Pick<Device, 'bodies' | 'enclosure' | 'guides' | 'sheets' | 'symmetry'>;

/**
 * The circle around everything that can hold a field: the spaces between walls, or else the bodies and sheets. A symmetry
 * line passes through its center.
 */
export function deviceCircle(device: Drawn): Circle {
  const spaces = walledSpaces(device);
  let shapes =
    spaces.length > 0
      ? spaces
      : [...device.bodies.map((body) => body.shape), ...(device.sheets ?? []).map((sheet) => [sheetPieces(sheet)])];
  for (const { across, at } of device.symmetry ?? [])
    shapes = [...shapes, ...shapes.map((shape) => mirrored(shape, across, at))];
  const { center, radius } = boundingCircle(shapes);
  const place = (across: 'x' | 'y', value: number): number =>
    device.symmetry?.find((line) => line.across === across)?.at ?? value;
  const moved: [number, number] = [place('x', center[0]), place('y', center[1])];
  return { center: moved, radius: radius + Math.hypot(moved[0] - center[0], moved[1] - center[1]) };
}

/** The lines of a sheet. */
export const sheetPieces = ({ points }: Pick<Sheet, 'points'>): readonly CurvePiece[] =>
  points.slice(1).map((to, i) => ({ kind: 'line', from: points[i], to }));
