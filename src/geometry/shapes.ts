// Which outlines make a disk, a ring, an ellipse, a rectangle, a polygon?

import type { ArcPiece, CurvePiece, LinePiece, Outline, Point, Shape } from './curves.ts';

// Lengths in the length unit, angles in radians. Outer outlines run counterclockwise, holes clockwise.

/** Four quarter circles, from the right-hand point on. */
export const disk = (center: Point, radius: number): Shape => ellipse(center, [radius, radius], 0);

/** Disk of radius `outer` with a concentric hole of radius `inner`. */
export function ring(center: Point, outer: number, inner: number): Shape {
  if (!(inner < outer)) throw new RangeError(`expected inner < outer, got ${inner} and ${outer}`);
  const hole = disk(center, inner)[0];
  return [disk(center, outer)[0], reversed(hole)];
}

/** Semi-axes `radii`, the first one turned counterclockwise from the x axis by `angle`. */
export function ellipse(center: Point, radii: Point, angle: number): Shape {
  requirePositive('radii', radii);
  const arcs = [0, 1, 2, 3].map((q): ArcPiece => {
    return { kind: 'arc', center, radii, tilt: angle, start: (q * Math.PI) / 2, sweep: Math.PI / 2 };
  });
  return [arcs];
}

/** Width × height, turned by `angle` about its center; corners rounded by quarter circles of `cornerRadius`. */
export function rectangle(center: Point, size: Point, angle: number, cornerRadius: number): Shape {
  requirePositive('size', size);
  const a = size[0] / 2;
  const b = size[1] / 2;
  if (!(cornerRadius >= 0 && cornerRadius <= Math.min(a, b)))
    throw new RangeError(`expected a corner radius from 0 to half the shorter side, got ${cornerRadius}`);
  const place = placement(center, angle);
  // Corners counterclockwise from the lower left one: the arc at each turns from the outward normal of the side before.
  const corners: Point[] = [
    [-1, -1],
    [1, -1],
    [1, 1],
    [-1, 1],
  ];
  if (cornerRadius === 0) return [closedLines(corners.map(([sx, sy]) => place([sx * a, sy * b])))];
  const pieces: CurvePiece[] = [];
  const ends = corners.map(([sx, sy], i) => {
    const middle: Point = [sx * (a - cornerRadius), sy * (b - cornerRadius)];
    const r = cornerRadius;
    // i = 0: from (-1,0) to (0,-1); i = 1: from (0,-1) to (1,0); …
    const from: Point = i % 2 === 0 ? [middle[0] + sx * r, middle[1]] : [middle[0], middle[1] + sy * r];
    const to: Point = i % 2 === 0 ? [middle[0], middle[1] + sy * r] : [middle[0] + sx * r, middle[1]];
    return { middle: place(middle), from: place(from), to: place(to) };
  });
  ends.forEach((end, i) => {
    const radii: Point = [cornerRadius, cornerRadius];
    const start = Math.PI + (i * Math.PI) / 2;
    pieces.push({ kind: 'arc', center: end.middle, radii, tilt: angle, start, sweep: Math.PI / 2 });
    const next = ends[(i + 1) % 4];
    const straight = i % 2 === 0 ? a > cornerRadius : b > cornerRadius;
    if (straight) pieces.push({ kind: 'line', from: end.to, to: next.from });
  });
  return [pieces];
}

/** Straight sides through the points, closed. Either sense is taken; the outline runs counterclockwise. */
export function polygon(points: readonly Point[]): Shape {
  if (points.length < 3) throw new RangeError(`expected three points or more, got ${points.length}`);
  let twice = 0;
  const [x0, y0] = points[0];
  for (let i = 1; i + 1 < points.length; i++) {
    const [x1, y1] = points[i];
    const [x2, y2] = points[i + 1];
    twice += (x1 - x0) * (y2 - y0) - (x2 - x0) * (y1 - y0);
  }
  return [closedLines(twice < 0 ? [...points].reverse() : points)];
}

/** Corners on a circle of the given radius, the first at `angle` from the x axis. */
export function regularPolygon(center: Point, radius: number, sides: number, angle: number): Shape {
  requirePositive('radius', [radius]);
  if (!(Number.isInteger(sides) && sides >= 3)) throw new RangeError(`expected three sides or more, got ${sides}`);
  return polygon(
    Array.from({ length: sides }, (_, i): Point => {
      const t = angle + (2 * Math.PI * i) / sides;
      return [center[0] + radius * Math.cos(t), center[1] + radius * Math.sin(t)];
    }),
  );
}

/** The shape shifted by `offset`. */
export function moved(shape: Shape, offset: Point): Shape {
  const shift = (p: Point): Point => [p[0] + offset[0], p[1] + offset[1]];
  return mapPieces(shape, shift, 0);
}

/** The shape turned counterclockwise by `angle` about `about`. */
export function turned(shape: Shape, angle: number, about: Point): Shape {
  const turn = placement([0, 0], angle);
  const rotate = (p: Point): Point => {
    const [x, y] = turn([p[0] - about[0], p[1] - about[1]]);
    return [about[0] + x, about[1] + y];
  };
  return mapPieces(shape, rotate, angle);
}

/** The mirror image across the line x = at, or y = at. */
export function mirrored(shape: Shape, across: 'x' | 'y', at: number): Shape {
  const flip = ([x, y]: Point): Point => (across === 'x' ? [2 * at - x, y] : [x, 2 * at - y]);
  return shape.map((outline) =>
    outline.map((piece): CurvePiece => {
      if (piece.kind === 'line') return { kind: 'line', from: flip(piece.from), to: flip(piece.to) };
      return {
        ...piece,
        center: flip(piece.center),
        tilt: -piece.tilt,
        start: across === 'x' ? Math.PI - piece.start : -piece.start,
        sweep: -piece.sweep,
      };
    }),
  );
}

function mapPieces(shape: Shape, map: (p: Point) => Point, angle: number): Shape {
  return shape.map((outline) =>
    outline.map((piece): CurvePiece => {
      if (piece.kind === 'line') return { kind: 'line', from: map(piece.from), to: map(piece.to) };
      return { ...piece, center: map(piece.center), tilt: piece.tilt + angle };
    }),
  );
}

function reversed(outline: Outline): Outline {
  return [...outline].reverse().map((piece): CurvePiece => {
    if (piece.kind === 'line') return { kind: 'line', from: piece.to, to: piece.from };
    return { ...piece, start: piece.start + piece.sweep, sweep: -piece.sweep };
  });
}

const closedLines = (points: readonly Point[]): LinePiece[] =>
  points.map((from, i) => ({ kind: 'line', from, to: points[(i + 1) % points.length] }));

/** Turn by `angle` about the origin, then shift to `center`. */
function placement(center: Point, angle: number): (p: Point) => Point {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return ([x, y]) => [center[0] + c * x - s * y, center[1] + s * x + c * y];
}

function requirePositive(what: string, values: readonly number[]): void {
  if (!values.every((v) => v > 0 && Number.isFinite(v)))
    throw new RangeError(`expected ${what} above 0, got ${values.join(', ')}`);
}
