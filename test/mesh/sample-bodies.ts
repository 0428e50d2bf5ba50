// Which bodies do the mesh tests share?

import type { Body } from '../../src/device/model.ts';
import type { Outline, Point, Shape } from '../../src/geometry/curves.ts';
import type { MeshPlan } from '../../src/mesh/mesh.ts';

export const ellipse = (center: Point, rx: number, ry: number, tilt = 0): Shape => [
  [{ kind: 'arc', center, radii: [rx, ry], tilt, start: 0, sweep: 2 * Math.PI }],
];
export const disk = (center: Point, radius: number): Shape => ellipse(center, radius, radius);
export const ring = (center: Point, outer: number, inner: number): Shape => [
  ...disk(center, outer),
  ...disk(center, inner),
];
export const polygon = (points: readonly Point[]): Shape => [
  points.map((from, i): Outline[number] => ({ kind: 'line', from, to: points[(i + 1) % points.length] })),
];
export function rectangle([x, y]: Point, width: number, height: number, angle = 0): Shape {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  const corners: Point[] = [
    [-width / 2, -height / 2],
    [width / 2, -height / 2],
    [width / 2, height / 2],
    [-width / 2, height / 2],
  ];
  return polygon(corners.map(([u, v]) => [x + c * u - s * v, y + s * u + c * v]));
}

export const body = (name: string, shape: Shape): Body => ({
  name,
  material: 'glass',
  permittivity: { re: 4, im: 0 },
  permeability: { re: 1, im: 0 },
  shape,
  pumpWeight: 0,
  group: name,
});

export const planFor = (bodies: readonly Body[], changes: Partial<MeshPlan> = {}): MeshPlan => ({
  center: [0, 0],
  rimRadius: 2,
  endRadius: 3,
  bodySizes: bodies.map(() => 0.5),
  backgroundSize: 0.8,
  layerSize: 0.8,
  cornerGrading: 1,
  largestArc: 0.6,
  ...changes,
});

/** Whether the point lies in the shape: parity, computed here without the program's geometry. */
export function holds(shape: Shape, [x, y]: Point): boolean {
  let parity = false;
  for (const outline of shape)
    for (const piece of outline) {
      if (piece.kind === 'arc') {
        // Whole ellipses only.
        const c = Math.cos(piece.tilt);
        const s = Math.sin(piece.tilt);
        const u = (c * (x - piece.center[0]) + s * (y - piece.center[1])) / piece.radii[0];
        const v = (c * (y - piece.center[1]) - s * (x - piece.center[0])) / piece.radii[1];
        if (u * u + v * v < 1) parity = !parity;
        continue;
      }
      const [x0, y0] = piece.from;
      const [x1, y1] = piece.to;
      if (y0 > y !== y1 > y && x < x0 + ((y - y0) * (x1 - x0)) / (y1 - y0)) parity = !parity;
    }
  return parity;
}
