// Where do outlines touch so that a wedge without an angle is left, and how is it closed?

import type { ArrangementEdge } from './arrangement-edge.ts';
import { turned } from './arrangement-edge.ts';
import type { CurvePiece, Point } from './curves.ts';
import { pointAt } from './curves.ts';
import { GeometryError } from './geometry-error.ts';
import { lengthOf, partOf, velocityAt } from './pieces.ts';

/**
 * Width of the neck by which touching outlines are joined, as a share of the smaller radius. No triangle with straight
 * inner sides fits into a cusp. Two equal disks of radius r are joined over ± 0.03 r; the joint's area is 2e-5 r².
 */
export const NECK = 1e-3;

/** Wedges of curves sharper than this (radians) are closed too: they need as many triangles as a cusp. */
const SHARPEST_WEDGE = 0.03;

/** Straight sides that meet more sharply than this (radians) are refused. */
const SHARPEST_CORNER = 2e-3;

/**
 * Closes every cusp: where the gap has grown to the neck's width a straight edge is drawn across, and what lies before
 * it is given to the later of the two regions beside the cusp. New vertices are appended to `coordinates`.
 * Throws a GeometryError when a wedge can be neither meshed nor closed, or when the regions do not fit together.
 */
export function healCusps(
  given: readonly ArrangementEdge[],
  coordinates: number[],
  names: readonly string[],
  isVoid: (region: number) => boolean = () => false,
): { edges: ArrangementEdge[]; notes: string[] } {
  const edges: (ArrangementEdge | null)[] = [...given];
  const atVertex = new Map<number, Set<number>>();
  const register = (i: number): void => {
    const edge = edges[i]!;
    for (const v of [edge.from, edge.to]) {
      const set = atVertex.get(v) ?? new Set();
      set.add(i);
      atVertex.set(v, set);
    }
  };
  edges.forEach((_, i) => register(i));
  const replace = (i: number, by: ArrangementEdge[]): void => {
    const old = edges[i]!;
    atVertex.get(old.from)!.delete(i);
    atVertex.get(old.to)!.delete(i);
    edges[i] = null;
    for (const edge of by) {
      if (edge.left === edge.right) continue;
      edges.push(edge);
      register(edges.length - 1);
    }
  };
  const notes: string[] = [];
  for (const v of [...atVertex.keys()].sort((a, b) => a - b)) {
    const place: Point = [coordinates[2 * v], coordinates[2 * v + 1]];
    for (let closed = 0; ; closed++) {
      const spokes = spokesAt(v, place, edges, atVertex.get(v)!);
      checkConsistent(spokes, place, names, isVoid);
      const at =
        spokes.length < 2 || closed > 50
          ? -1
          : spokes.findIndex(({ edge }, i) => !isVoid(edge.left) && isCusp(spokes, i));
      if (at < 0) break;
      const right = spokes[at];
      const left = spokes[(at + 1) % spokes.length];
      const sides = [right.edge.right, left.edge.left];
      const filler = Math.max(...sides);
      const bodies = ownersOf([right.edge, left.edge], names);
      const wide = NECK * Math.min(scaleOf(right.edge.piece), scaleOf(left.edge.piece));
      const cut = cutAt(right.edge, left.edge, wide);
      const width = cut ? cut.width : wide;
      if (!cut)
        throw new GeometryError(
          `${touching(bodies)} at (${place[0].toPrecision(8)}, ${place[1].toPrecision(8)}) and stay within ` +
            `${width.toPrecision(2)} of each other on a stretch too long to be joined: move them apart, or let them overlap clearly.`,
          bodies,
          place,
        );
      const p = coordinates.length / 2;
      const q = p + 1;
      coordinates.push(...cut.from, ...cut.to);
      const neck: CurvePiece = { kind: 'line', from: cut.from, to: cut.to };
      const own = right.index === left.index;
      if (own) {
        // A loop that ends where it starts: cut at both ends.
        const { piece } = right.edge;
        replace(right.index, [
          { ...right.edge, piece: partOf(piece, 0, cut.s), to: p, left: filler },
          { ...right.edge, piece: partOf(piece, cut.s, 1 - cut.t), from: p, to: q },
          { ...right.edge, piece: partOf(piece, 1 - cut.t, 1), from: q, left: filler },
        ]);
      } else {
        replace(right.index, [
          { ...right.edge, piece: partOf(right.edge.piece, 0, cut.s), to: p, left: filler },
          { ...right.edge, piece: partOf(right.edge.piece, cut.s, 1), from: p },
        ]);
        replace(left.index, [
          { ...left.edge, piece: partOf(left.edge.piece, 0, cut.t), to: q, right: filler },
          { ...left.edge, piece: partOf(left.edge.piece, cut.t, 1), from: q },
        ]);
      }
      edges.push({ piece: neck, from: p, to: q, left: filler, right: right.edge.left });
      register(edges.length - 1);
      if (closed === 0)
        notes.push(
          `${touching(bodies)} at (${place[0].toPrecision(6)}, ${place[1].toPrecision(6)}): ` +
            `joined by a neck ${width.toPrecision(2)} wide.`,
        );
    }
  }
  return { edges: edges.filter((edge) => edge !== null), notes };
}

/** An edge as seen from one of its ends. */
interface Spoke {
  readonly index: number;
  readonly edge: ArrangementEdge;
  /** Direction of the edge a little way out: tells curves with a common tangent apart. */
  readonly angle: number;
}

function spokesAt(
  v: number,
  [x, y]: Point,
  edges: readonly (ArrangementEdge | null)[],
  touching: ReadonlySet<number>,
): Spoke[] {
  const outward: { index: number; edge: ArrangementEdge }[] = [];
  for (const index of touching) {
    const edge = edges[index]!;
    if (edge.from === v) outward.push({ index, edge });
    if (edge.to === v) outward.push({ index, edge: turned(edge) });
  }
  const reach = Math.min(...outward.map(({ edge }) => 1e-3 * Math.min(lengthOf(edge.piece), scaleOf(edge.piece))));
  return outward
    .map(({ index, edge }) => {
      const [px, py] = pointAt(edge.piece, Math.min(0.5, reach / Math.hypot(...velocityAt(edge.piece, 0))));
      return { index, edge, angle: Math.atan2(py - y, px - x) };
    })
    .sort((a, b) => a.angle - b.angle || a.index - b.index);
}

/** Whether the wedge from spoke i to the next one (counterclockwise) must be closed. */
function isCusp(spokes: readonly Spoke[], i: number): boolean {
  const a = spokes[i].edge.piece;
  const b = spokes[(i + 1) % spokes.length].edge.piece;
  const [ax, ay] = velocityAt(a, 0);
  const [bx, by] = velocityAt(b, 0);
  const angle = Math.abs(Math.atan2(ax * by - ay * bx, ax * bx + ay * by));
  return angle < (a.kind === 'line' && b.kind === 'line' ? SHARPEST_CORNER : SHARPEST_WEDGE);
}

const scaleOf = (piece: CurvePiece): number =>
  piece.kind === 'line' ? lengthOf(piece) : Math.min(piece.radii[0], piece.radii[1]);

/**
 * Parameters on both edges where the gap between them, seen from their common start, reaches the width; a smaller width,
 * down to a hundredth, where the edges end before that. Null when not even that is reached.
 */
function cutAt(
  right: ArrangementEdge,
  left: ArrangementEdge,
  wide: number,
): { s: number; t: number; from: Point; to: Point; width: number } | null {
  const speedRight = Math.hypot(...velocityAt(right.piece, 0));
  const speedLeft = Math.hypot(...velocityAt(left.piece, 0));
  const longest =
    0.4 * Math.min(lengthOf(right.piece), lengthOf(left.piece), scaleOf(right.piece), scaleOf(left.piece));
  const gapAt = (d: number): number => {
    const [px, py] = pointAt(right.piece, d / speedRight);
    const [qx, qy] = pointAt(left.piece, d / speedLeft);
    return Math.hypot(px - qx, py - qy);
  };
  const width = Math.min(wide, 0.5 * gapAt(longest));
  if (!(width >= 0.01 * wide)) return null;
  let low = 0;
  let high = longest;
  for (let step = 0; step < 60; step++) {
    const d = (low + high) / 2;
    if (gapAt(d) > width) high = d;
    else low = d;
  }
  const s = high / speedRight;
  const t = high / speedLeft;
  return { s, t, from: pointAt(right.piece, s), to: pointAt(left.piece, t), width };
}

/** Around a vertex the region between neighbouring spokes must be one. */
function checkConsistent(
  spokes: readonly Spoke[],
  place: Point,
  names: readonly string[],
  isVoid: (region: number) => boolean,
): void {
  spokes.forEach(({ edge }, i) => {
    const next = spokes[(i + 1) % spokes.length].edge;
    if (edge.left === next.right || (isVoid(edge.left) && isVoid(next.right))) return;
    const bodies = ownersOf([edge, next], names);
    throw new GeometryError(
      `The outlines of ${quoted(bodies)} come so close near (${place[0].toPrecision(8)}, ${place[1].toPrecision(8)}) that ` +
        `inside and outside cannot be told apart; move them apart, or let them overlap clearly.`,
      bodies,
      place,
    );
  });
}

/** Whose outlines these are: of the two regions beside an edge the later one has drawn it. */
const ownersOf = (edges: readonly ArrangementEdge[], names: readonly string[]): string[] =>
  [...new Set(edges.map(({ left, right }) => Math.max(left, right)))].sort((a, b) => a - b).map((i) => names[i]);

const touching = (bodies: readonly string[]): string =>
  bodies.length === 1 ? `Outlines of ${quoted(bodies)} touch` : `${quoted(bodies)} touch`;

const quoted = (bodies: readonly string[]): string => bodies.map((name) => `'${name}'`).join(' and ');
