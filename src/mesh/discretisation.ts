// Into which segments are the curves cut, and how long may they be?

import Flatbush from 'flatbush';
import type { Arrangement, ArrangementEdge } from '../geometry/arrangement.ts';
import { pointAt } from '../geometry/curves.ts';
import { boxOf, curvatureAt, lengthOf, velocityAt } from '../geometry/pieces.ts';
import type { SizeWish } from './mesh.ts';

/** How fast the wanted size may grow with distance. */
export const GROWTH = 0.5;

/** More segments than this are not made for the sake of separation: the refinement will refuse the drawing. */
const MOST_SEGMENTS = 100_000;

/** A piece of an arrangement edge between two mesh vertices: parameters s0 → s1 of the edge's curve. */
export interface Segment {
  readonly a: number;
  readonly b: number;
  readonly edge: number;
  readonly s0: number;
  readonly s1: number;
  /** Ends at a sharp corner: never split, so that the corner's triangles fit together whatever its angle. */
  readonly fixed: boolean;
}

/** Sizes wanted, by arrangement label. */
export interface Sizes {
  readonly ofLabel: (label: number) => number;
  readonly cornerGrading: number;
  readonly largestArc: number;
  /** Of devices with walls: how an edge beside the outside ends the field, and which labels are one medium. */
  readonly endOf?: (edge: number) => 'zero' | 'free' | 'open';
  readonly mediumOf?: (label: number) => string;
  /** Size wanted at a wall corner as a share of the local one, from the lowest exponent of the field there. */
  readonly cornerShare?: (exponent: number) => number;
  readonly wishes: readonly SizeWish[];
}

export interface Discretisation {
  readonly x: number[];
  readonly y: number[];
  /** Size wanted at each vertex. */
  readonly size: number[];
  readonly segments: Segment[];
}

/** Cuts every edge evenly in (length / wanted size), no piece turning more than the largest arc. */
export function discretise(arrangement: Arrangement, sizes: Sizes): Discretisation {
  const { vertices, edges } = arrangement;
  const x: number[] = [];
  const y: number[] = [];
  const size: number[] = [];
  for (let v = 0; v < vertices.length / 2; v++) {
    x.push(vertices[2 * v]);
    y.push(vertices[2 * v + 1]);
    size.push(Infinity);
  }
  const near = sizeField([...cornersOf(arrangement, sizes), ...sizes.wishes]);
  const wanted = (edge: ArrangementEdge, px: number, py: number): number =>
    Math.min(sizes.ofLabel(edge.left), sizes.ofLabel(edge.right), near(px, py));
  let segments: Segment[] = [];
  const tips = tipsOf(arrangement, (edge, px, py) => wanted(edge, px, py));
  edges.forEach((edge, index) => {
    const [first, last0] = tips[index];
    const inner = evenMarks(edge, first, last0, (px, py) => wanted(edge, px, py), sizes.largestArc);
    const marks = [...(first > 0 ? [0] : []), ...inner, ...(last0 < 1 ? [1] : [])];
    let last = edge.from;
    for (let i = 1; i < marks.length; i++) {
      let next = edge.to;
      if (i < marks.length - 1) {
        const [px, py] = pointAt(edge.piece, marks[i]);
        next = x.length;
        x.push(px);
        y.push(py);
        size.push(wanted(edge, px, py));
      } else size[next] = Math.min(size[next], wanted(edge, x[next], y[next]));
      size[last] = Math.min(size[last], wanted(edge, x[last], y[last]));
      const fixed = (i === 1 && first > 0) || (i === marks.length - 1 && last0 < 1);
      segments.push({ a: last, b: next, edge: index, s0: marks[i - 1], s1: marks[i], fixed });
      last = next;
    }
  });
  segments = separate(segments, edges, x, y, size);
  for (const { a, b } of segments) {
    const length = Math.hypot(x[a] - x[b], y[a] - y[b]);
    size[a] = Math.min(size[a], 1.5 * length);
    size[b] = Math.min(size[b], 1.5 * length);
  }
  return { x, y, size, segments };
}

/** Corners sharper than this (radians) get their tips cut off beforehand. */
const SHARP = Math.PI / 3;

/**
 * Per edge the parameters [first, last] between which it may be cut freely. At a vertex with a wedge below 60° every
 * edge is cut at one common distance ρ, so that the tips are isosceles and need no more points (J. Ruppert 1995, §6):
 * ρ is the wanted size, at most 0.45 of the shortest edge and of the distance to anything else, and small enough for
 * the curves to take less than a third of the wedge.
 */
function tipsOf(
  { vertices, edges }: Arrangement,
  wanted: (edge: ArrangementEdge, x: number, y: number) => number,
): [number, number][] {
  const tips: [number, number][] = edges.map(() => [0, 1]);
  const spokes: { index: number; back: boolean; angle: number; bend: number }[][] = [];
  for (let v = 0; v < vertices.length / 2; v++) spokes.push([]);
  edges.forEach((edge, index) => {
    for (const back of [false, true]) {
      const [x, y] = velocityAt(edge.piece, back ? 1 : 0);
      const angle = back ? Math.atan2(-y, -x) : Math.atan2(y, x);
      spokes[back ? edge.to : edge.from].push({
        index,
        back,
        angle,
        bend: Math.abs(curvatureAt(edge.piece, back ? 1 : 0)),
      });
    }
  });
  const boxes = edges.map(({ piece }) => boxOf(piece));
  spokes.forEach((around, v) => {
    if (around.length < 2) return;
    const [x, y] = [vertices[2 * v], vertices[2 * v + 1]];
    around.sort((p, q) => p.angle - q.angle || p.index - q.index);
    let reach = Infinity;
    let sharp = false;
    around.forEach((p, i) => {
      const q = around[(i + 1) % around.length];
      const wedge = i + 1 < around.length ? q.angle - p.angle : q.angle + 2 * Math.PI - p.angle;
      if (wedge < SHARP) {
        sharp = true;
        reach = Math.min(reach, (0.6 * wedge) / (p.bend + q.bend));
      }
      const edge = edges[p.index];
      reach = Math.min(reach, wanted(edge, x, y), 0.45 * lengthOf(edge.piece), 0.45 * returnOf(edge, p.back, x, y));
    });
    if (!sharp) return;
    const own = new Set(around.map(({ index }) => index));
    edges.forEach(({ piece }, index) => {
      const [x0, y0, x1, y1] = boxes[index];
      if (own.has(index) || Math.hypot(Math.max(x0 - x, x - x1, 0), Math.max(y0 - y, y - y1, 0)) > 2.3 * reach) return;
      // The distance is sampled: an error of half a step in sixty-four does no harm below 0.45.
      for (let i = 0; i <= 64; i++) {
        const [px, py] = pointAt(piece, i / 64);
        reach = Math.min(reach, 0.45 * Math.hypot(px - x, py - y));
      }
    });
    for (const { index, back } of around) {
      const { piece } = edges[index];
      let low = 0;
      let high = 0.5;
      for (let step = 0; step < 60; step++) {
        const s = (low + high) / 2;
        const [px, py] = pointAt(piece, back ? 1 - s : s);
        if (Math.hypot(px - x, py - y) < reach) low = s;
        else high = s;
      }
      if (back) tips[index][1] = 1 - high;
      else tips[index][0] = high;
    }
  });
  return tips;
}

/** How near to its start an edge comes back, its far end included: the circle about the start cuts it once below that. */
function returnOf(edge: ArrangementEdge, back: boolean, x: number, y: number): number {
  const loop = edge.from === edge.to;
  const samples = 64;
  let before = 0;
  let least = Infinity;
  for (let i = 1; i <= (loop ? samples / 2 : samples); i++) {
    const [px, py] = pointAt(edge.piece, back ? 1 - i / samples : i / samples);
    const d = Math.hypot(px - x, py - y);
    if (d < before || i === samples) least = Math.min(least, d);
    before = d;
  }
  return least;
}

/**
 * Smallest of (size + growth × distance) over the wishes, at a point; of wishes of one size only the nearest matters.
 * Infinity without any.
 */
export function sizeField(wishes: readonly SizeWish[]): (x: number, y: number) => number {
  const bySize = new Map<number, SizeWish[]>();
  for (const wish of wishes) {
    const list = bySize.get(wish.size);
    if (list) list.push(wish);
    else bySize.set(wish.size, [wish]);
  }
  const groups = [...bySize].map(([size, list]) => {
    const index = new Flatbush(list.length);
    for (const { x, y } of list) index.add(x, y, x, y);
    index.finish();
    return { size, list, index };
  });
  return (x, y) => {
    let h = Infinity;
    for (const { size, list, index } of groups) {
      const { x: u, y: v } = list[index.neighbors(x, y, 1)[0]];
      h = Math.min(h, size + GROWTH * Math.hypot(x - u, y - v));
    }
    return h;
  };
}

/** True corners: a tangent jump of more than 5°, or where three or more edges meet. */
function cornersOf({ vertices, edges }: Arrangement, sizes: Sizes): SizeWish[] {
  if (sizes.cornerGrading >= 1) return [];
  const count = vertices.length / 2;
  const outward: [number, number][][] = Array.from({ length: count }, () => []);
  const local = new Float64Array(count).fill(Infinity);
  for (const edge of edges) {
    const [ax, ay] = velocityAt(edge.piece, 0);
    const [bx, by] = velocityAt(edge.piece, 1);
    outward[edge.from].push([ax, ay]);
    outward[edge.to].push([-bx, -by]);
    const h = Math.min(sizes.ofLabel(edge.left), sizes.ofLabel(edge.right));
    local[edge.from] = Math.min(local[edge.from], h);
    local[edge.to] = Math.min(local[edge.to], h);
  }
  const corners: SizeWish[] = [];
  const walled = wallVertices({ edges }, sizes);
  for (let v = 0; v < count; v++) {
    const spokes = outward[v];
    if (walled.has(v)) {
      const share = walled.get(v)!;
      if (share < 1) corners.push({ x: vertices[2 * v], y: vertices[2 * v + 1], size: share * local[v] });
      continue;
    }
    if (spokes.length === 2) {
      const [[ax, ay], [bx, by]] = spokes;
      const bend = Math.PI - Math.abs(Math.atan2(ax * by - ay * bx, ax * bx + ay * by));
      if (bend < (5 * Math.PI) / 180) continue;
    }
    corners.push({ x: vertices[2 * v], y: vertices[2 * v + 1], size: sizes.cornerGrading * local[v] });
  }
  return corners;
}

/**
 * Vertices that touch the outside of a device with walls, and the share of the local size wanted there (1: the field is smooth). In a wedge of one
 * medium and angle Ω it behaves like r^{nπ/Ω} between equal ends and r^{(n+½)π/Ω} between unequal ones: smooth when all
 * exponents are whole. An interface that meets a wall at a right angle is continued by reflection. All else is singular.
 */
function wallVertices({ edges }: Pick<Arrangement, 'edges'>, sizes: Sizes): Map<number, number> {
  const out = new Map<number, number>();
  const { endOf, mediumOf, cornerShare, cornerGrading } = sizes;
  if (!endOf || !mediumOf || !cornerShare) return out;
  const around = new Map<number, { angle: number; before: number; after: number; edge: number; sheet: boolean }[]>();
  edges.forEach((edge, i) => {
    for (const back of [false, true]) {
      const [x, y] = velocityAt(edge.piece, back ? 1 : 0);
      const v = back ? edge.to : edge.from;
      const spoke = {
        angle: back ? Math.atan2(-y, -x) : Math.atan2(y, x),
        // counterclockwise: the region met before the spoke, and after it
        before: back ? edge.left : edge.right,
        after: back ? edge.right : edge.left,
        edge: i,
        sheet: edge.sheet !== undefined,
      };
      around.set(v, [...(around.get(v) ?? []), spoke]);
    }
  });
  for (const [v, spokes] of around) {
    const isWall = (s: (typeof spokes)[number]): boolean => s.sheet || s.before < 0 || s.after < 0;
    if (!spokes.some(isWall)) continue;
    spokes.sort((a, b) => a.angle - b.angle || a.edge - b.edge);
    let share = 1;
    // from each wall counterclockwise to the next
    spokes.forEach((first, i) => {
      if (!isWall(first) || first.after < 0) return;
      const wedges: { medium: string; angle: number }[] = [];
      let here = first;
      let last = first;
      for (let step = 1; step <= spokes.length; step++) {
        last = spokes[(i + step) % spokes.length];
        let angle = last.angle - here.angle;
        if (angle <= 0) angle += 2 * Math.PI;
        const medium = mediumOf(here.after);
        const top = wedges.at(-1);
        if (top?.medium === medium) top.angle += angle;
        else wedges.push({ medium, angle });
        here = last;
        if (isWall(last)) break;
      }
      const ends = [endOf(first.edge), endOf(last.edge)];
      if (ends.includes('open')) return;
      const exponent = lowestExponent(wedges, ends[0] === ends[1]);
      if (exponent === null) share = Math.min(share, cornerGrading);
      else if (Number.isFinite(exponent)) share = Math.min(share, cornerShare(exponent));
    });
    out.set(v, share);
  }
  return out;
}

/** Lowest exponent of the field about a wall corner; Infinity where it is smooth, null where several media meet. */
function lowestExponent(wedges: readonly { medium: string; angle: number }[], equalEnds: boolean): number | null {
  if (wedges.length === 1) {
    const exponent = Math.PI / wedges[0].angle / (equalEnds ? 1 : 2);
    const whole = Math.abs(exponent - Math.round(exponent)) < 1e-6 && Math.round(exponent) > 0;
    return whole ? Infinity : exponent;
  }
  const right = (angle: number): boolean => Math.abs(angle - Math.PI / 2) < 1e-6;
  return wedges.length === 2 && equalEnds && wedges.every(({ angle }) => right(angle)) ? Infinity : null;
}

/** Parameters first = s₀ < s₁ < … = last with equal shares of ∫ max(|dp|/h, |dθ|/largest arc, |dt|/largest arc). */
function evenMarks(
  edge: ArrangementEdge,
  first: number,
  last: number,
  wanted: (x: number, y: number) => number,
  largestArc: number,
): number[] {
  const { piece } = edge;
  const range = last - first;
  // A line much shorter than its size needs no fine sampling.
  const middle = pointAt(piece, (first + last) / 2);
  const short = piece.kind === 'line' && lengthOf(piece) < 0.5 * wanted(...middle);
  const samples = short ? 8 : 128;
  const cumulative = new Float64Array(samples + 1);
  for (let i = 0; i < samples; i++) {
    const s = first + (range * (i + 0.5)) / samples;
    const [px, py] = pointAt(piece, s);
    const speed = Math.hypot(...velocityAt(piece, s));
    // Sides may exceed the wanted size by a tenth before another piece pays.
    let density = speed / (1.1 * wanted(px, py));
    if (piece.kind === 'arc')
      density = Math.max(
        density,
        Math.max(speed * Math.abs(curvatureAt(piece, s)), Math.abs(piece.sweep)) / largestArc,
      );
    cumulative[i + 1] = cumulative[i] + (range * density) / samples;
  }
  const total = cumulative[samples];
  const pieces = Math.max(edge.from === edge.to ? 3 : 1, Math.ceil(total - 1e-9));
  const marks = [first];
  let i = 0;
  for (let k = 1; k < pieces; k++) {
    const target = (k / pieces) * total;
    while (cumulative[i + 1] < target) i++;
    marks.push(first + (range * (i + (target - cumulative[i]) / (cumulative[i + 1] - cumulative[i]))) / samples);
  }
  marks.push(last);
  return marks;
}

/** Angle by which a segment's curve turns: twice the largest angle between chord and tangent, about. */
export function turnOf(edge: ArrangementEdge, segment: Segment): number {
  if (edge.piece.kind === 'line') return 0;
  const [ax, ay] = velocityAt(edge.piece, segment.s0);
  const [bx, by] = velocityAt(edge.piece, segment.s1);
  return Math.abs(Math.atan2(ax * by - ay * bx, ax * bx + ay * by));
}

/**
 * Splits curved segments until each stays clear of all others: chord to chord more than 1.5 × the sum of the bulges,
 * and in a corner the bulges take less than half of the angle.
 */
function separate(
  segments: Segment[],
  edges: readonly ArrangementEdge[],
  x: number[],
  y: number[],
  size: number[],
): Segment[] {
  for (let round = 0; round < 40; round++) {
    const n = segments.length;
    const index = new Flatbush(n);
    const bulge = new Float64Array(n);
    const turns = new Float64Array(n);
    segments.forEach((segment, i) => {
      const { a, b } = segment;
      const length = Math.hypot(x[a] - x[b], y[a] - y[b]);
      turns[i] = turnOf(edges[segment.edge], segment);
      bulge[i] = (length * turns[i]) / 8;
      index.add(
        Math.min(x[a], x[b]) - 1.5 * bulge[i],
        Math.min(y[a], y[b]) - 1.5 * bulge[i],
        Math.max(x[a], x[b]) + 1.5 * bulge[i],
        Math.max(y[a], y[b]) + 1.5 * bulge[i],
      );
    });
    index.finish();
    const split = new Uint8Array(n);
    for (let i = 0; i < n; i++) {
      if (bulge[i] === 0) continue;
      const { a, b } = segments[i];
      const near = index.search(
        Math.min(x[a], x[b]) - 1.5 * bulge[i],
        Math.min(y[a], y[b]) - 1.5 * bulge[i],
        Math.max(x[a], x[b]) + 1.5 * bulge[i],
        Math.max(y[a], y[b]) + 1.5 * bulge[i],
      );
      for (const j of near) {
        if (j === i || (bulge[j] > 0 && j < i)) continue;
        const other = segments[j];
        const shared = [other.a, other.b].filter((v) => v === a || v === b);
        let clash: boolean;
        if (shared.length === 2) clash = true;
        else if (shared.length === 1) {
          const v = shared[0];
          const [ux, uy] = awayFrom(edges[segments[i].edge], segments[i], v);
          const [wx, wy] = awayFrom(edges[other.edge], other, v);
          const angle = Math.abs(Math.atan2(ux * wy - uy * wx, ux * wx + uy * wy));
          clash = (turns[i] + turns[j]) / 2 > 0.5 * angle;
        } else clash = distance(x, y, a, b, other.a, other.b) < 1.5 * (bulge[i] + bulge[j]);
        if (!clash) continue;
        const longer = bulge[i] >= bulge[j] ? i : j;
        const chosen = segments[longer].fixed ? i + j - longer : longer;
        // Splitting the flatter of two helps no longer once it is flat.
        if (!segments[chosen].fixed && 4 * bulge[chosen] > bulge[longer]) split[chosen] = 1;
      }
    }
    if (!split.includes(1) || n > MOST_SEGMENTS) return segments;
    segments = segments.flatMap((segment, i) => {
      if (!split[i]) return [segment];
      const { a, b, edge, s0, s1, fixed } = segment;
      const middle = (s0 + s1) / 2;
      const [px, py] = pointAt(edges[edge].piece, middle);
      x.push(px);
      y.push(py);
      size.push(Math.min(size[a], size[b]));
      const m = x.length - 1;
      return [
        { a, b: m, edge, s0, s1: middle, fixed },
        { a: m, b, edge, s0: middle, s1, fixed },
      ];
    });
  }
  return segments;
}

/** Direction in which a segment's true curve leaves vertex v. */
function awayFrom(edge: ArrangementEdge, segment: Segment, v: number): readonly [number, number] {
  if (segment.a === v) return velocityAt(edge.piece, segment.s0);
  const [vx, vy] = velocityAt(edge.piece, segment.s1);
  return [-vx, -vy];
}

/** Distance between the segments a–b and c–d (0 where they cross). */
function distance(x: number[], y: number[], a: number, b: number, c: number, d: number): number {
  const side = (p: number, q: number, r: number): number =>
    (x[q] - x[p]) * (y[r] - y[p]) - (y[q] - y[p]) * (x[r] - x[p]);
  if (side(a, b, c) * side(a, b, d) < 0 && side(c, d, a) * side(c, d, b) < 0) return 0;
  return Math.min(
    pointToSegment(x[a], y[a], x[c], y[c], x[d], y[d]),
    pointToSegment(x[b], y[b], x[c], y[c], x[d], y[d]),
    pointToSegment(x[c], y[c], x[a], y[a], x[b], y[b]),
    pointToSegment(x[d], y[d], x[a], y[a], x[b], y[b]),
  );
}

export function pointToSegment(px: number, py: number, ax: number, ay: number, bx: number, by: number): number {
  const dx = bx - ax;
  const dy = by - ay;
  const t = Math.max(0, Math.min(1, ((px - ax) * dx + (py - ay) * dy) / (dx * dx + dy * dy)));
  return Math.hypot(px - ax - t * dx, py - ay - t * dy);
}
