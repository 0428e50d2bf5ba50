// Into which vertices, edges and regions do overlapping shapes cut the plane?

import type { ArrangementEdge } from './arrangement-edge.ts';
import { turned } from './arrangement-edge.ts';
import { healCusps } from './cusps.ts';
import type { CurvePiece, Outline, Point, Shape } from './curves.ts';
import { pointAt } from './curves.ts';
import { refuseNarrowGaps } from './gaps.ts';
import { meetings } from './intersections.ts';
import { angleOfPoint, boxOf, parameterOfAngle, partOf, velocityAt } from './pieces.ts';

export type { ArrangementEdge } from './arrangement-edge.ts';

export interface Arrangement {
  /** [x0,y0,x1,y1,…] of the vertices. */
  readonly vertices: Float64Array;
  readonly edges: readonly ArrangementEdge[];
  /** What was changed so that it can be meshed, in words for the user. */
  readonly notes: readonly string[];
}

/** How an overlay is read; everything absent: the last shape that holds a point is its region. */
export interface OverlayRules {
  /** Region of a point from the parity of each shape about it; −1 for none. */
  readonly regionOf?: (inside: Uint8Array) => number;
  /** Regions that are not to be meshed, −1 among them: boundaries between two of them are dropped. */
  readonly isVoid?: (region: number) => boolean;
  /** Open chains of pieces that stay boundaries whatever lies beside them (outside the void). */
  readonly sheets?: readonly (readonly CurvePiece[])[];
}

/**
 * The overlay of the shapes, a later one covering an earlier one: every boundary between two different regions, cut at
 * vertices only. Points nearer than `tolerance` are one point, curves nearer than that are one curve.
 */
export function arrangeShapes(
  shapes: readonly Shape[],
  names: readonly string[],
  tolerance: number,
  rules: OverlayRules = {},
): Arrangement {
  const regionOf = rules.regionOf ?? ((inside: Uint8Array) => inside.lastIndexOf(1));
  const isVoid = rules.isVoid ?? ((region: number) => region < 0);
  const sources = sourcesOf(shapes, rules.sheets ?? []);
  const pool = new VertexPool(tolerance);
  const parts = unify(cutAtMeetings(sources, pool, tolerance), tolerance);
  const sides = sidesOfAll(parts, (part) => sidesOf(part, sources, shapes.length, tolerance, regionOf));
  const cut: ArrangementEdge[] = parts
    .map(({ piece, from, to, sources: own }, i): ArrangementEdge => {
      const sheet = own.map((s) => sources[s].sheet).find((s) => s !== undefined);
      return { piece, from, to, left: sides[i][0], right: sides[i][1], ...(sheet === undefined ? {} : { sheet }) };
    })
    .filter(({ left, right, sheet }) => (left !== right || sheet !== undefined) && !(isVoid(left) && isVoid(right)));
  const sizes = shapes.map(sizeOf);
  refuseNarrowGaps(cut, sizes, names, tolerance);
  const { edges, notes } = healCusps(joinChains(cut), pool.coordinates, names, rules.isVoid);
  return { ...dropUnused(pool, joinChains(edges)), notes };
}

/** Half the longer side of the shape's box: the radius of a disk. */
function sizeOf(shape: Shape): number {
  const box = [Infinity, Infinity, -Infinity, -Infinity];
  for (const piece of shape.flat()) {
    const [x0, y0, x1, y1] = boxOf(piece);
    box[0] = Math.min(box[0], x0);
    box[1] = Math.min(box[1], y0);
    box[2] = Math.max(box[2], x1);
    box[3] = Math.max(box[3], y1);
  }
  return Math.max(box[2] - box[0], box[3] - box[1]) / 2;
}

/** One piece of an outline, or of a sheet (shape −1), as it was given. */
interface Source {
  readonly shape: number;
  readonly sheet?: number;
  readonly piece: CurvePiece;
  readonly box: readonly [number, number, number, number];
}

/** A piece between two vertices, and all the sources that run along it. */
interface Part {
  readonly piece: CurvePiece;
  readonly from: number;
  readonly to: number;
  readonly sources: number[];
}

function sourcesOf(shapes: readonly Shape[], sheets: readonly (readonly CurvePiece[])[]): Source[] {
  const sources: Source[] = [];
  shapes.forEach((shape, index) =>
    shape.forEach((outline: Outline) =>
      outline.forEach((piece) => sources.push({ shape: index, piece, box: boxOf(piece) })),
    ),
  );
  sheets.forEach((pieces, sheet) =>
    pieces.forEach((piece) => sources.push({ shape: -1, sheet, piece, box: boxOf(piece) })),
  );
  return sources;
}

/** Points closer than the tolerance get one number; the first one's coordinates stay. */
class VertexPool {
  readonly coordinates: number[] = [];
  private readonly cells = new Map<string, number[]>();
  private readonly tolerance: number;

  constructor(tolerance: number) {
    this.tolerance = tolerance;
  }

  add([x, y]: Point): number {
    const { coordinates, cells, tolerance } = this;
    const i = Math.floor(x / (2 * tolerance));
    const j = Math.floor(y / (2 * tolerance));
    let found = -1;
    let least = tolerance;
    for (let di = -1; di <= 1; di++) {
      for (let dj = -1; dj <= 1; dj++) {
        for (const v of cells.get(`${i + di} ${j + dj}`) ?? []) {
          const d = Math.hypot(coordinates[2 * v] - x, coordinates[2 * v + 1] - y);
          if (d <= least) [found, least] = [v, d];
        }
      }
    }
    if (found >= 0) return found;
    const v = coordinates.length / 2;
    coordinates.push(x, y);
    const key = `${i} ${j}`;
    const cell = cells.get(key);
    if (cell) cell.push(v);
    else cells.set(key, [v]);
    return v;
  }
}

function cutAtMeetings(sources: readonly Source[], pool: VertexPool, tolerance: number): Part[] {
  // Atoms: arcs of at most a quarter turn, so that a pair has few meetings and no part closes on itself.
  const atoms: { source: number; piece: CurvePiece; cuts: { s: number; vertex: number }[]; box: number[] }[] = [];
  sources.forEach(({ piece }, source) => {
    const pieces = piece.kind === 'line' ? 1 : Math.max(1, Math.ceil(Math.abs(piece.sweep) / (Math.PI / 2) - 1e-9));
    for (let i = 0; i < pieces; i++) {
      const atom = pieces === 1 ? piece : partOf(piece, i / pieces, (i + 1) / pieces);
      const cuts = [0, 1].map((s) => ({ s, vertex: pool.add(pointAt(atom, s)) }));
      atoms.push({ source, piece: atom, cuts, box: boxOf(atom) });
    }
  });
  const order = atoms.map((_, i) => i).sort((a, b) => atoms[a].box[0] - atoms[b].box[0] || a - b);
  for (let i = 0; i < order.length; i++) {
    const a = atoms[order[i]];
    for (let j = i + 1; j < order.length; j++) {
      const b = atoms[order[j]];
      if (b.box[0] > a.box[2] + tolerance) break;
      if (b.box[1] > a.box[3] + tolerance || a.box[1] > b.box[3] + tolerance) continue;
      for (const { s, t, point } of meetings(a.piece, b.piece, tolerance)) {
        const vertex = pool.add(point);
        a.cuts.push({ s, vertex });
        b.cuts.push({ s: t, vertex });
      }
    }
  }
  const parts: Part[] = [];
  for (const { source, piece, cuts } of atoms) {
    cuts.sort((p, q) => p.s - q.s || p.vertex - q.vertex);
    let last = cuts[0];
    for (const cut of cuts) {
      if (cut.vertex === last.vertex) continue;
      const whole = last.s === 0 && cut.s === 1;
      const part = whole ? piece : partOf(piece, last.s, cut.s);
      parts.push({ piece: part, from: last.vertex, to: cut.vertex, sources: [source] });
      last = cut;
    }
  }
  return parts;
}

/** Parts that join the same vertices along the same way become one. */
function unify(parts: readonly Part[], tolerance: number): Part[] {
  const byEnds = new Map<string, Part[]>();
  const kept: Part[] = [];
  for (const part of parts) {
    const key = part.from < part.to ? `${part.from} ${part.to}` : `${part.to} ${part.from}`;
    const rivals = byEnds.get(key) ?? [];
    const [x, y] = pointAt(part.piece, 0.5);
    const twin = rivals.find(({ piece }) => {
      const [u, v] = pointAt(piece, 0.5);
      return Math.hypot(u - x, v - y) <= 4 * tolerance;
    });
    if (twin) {
      twin.sources.push(...part.sources);
      continue;
    }
    rivals.push(part);
    byEnds.set(key, rivals);
    kept.push(part);
  }
  return kept;
}

/** [left, right] of every part: found once a chain, since nothing changes where just two parts meet. */
function sidesOfAll(parts: readonly Part[], find: (part: Part) => [number, number]): [number, number][] {
  const atVertex = new Map<number, number[]>();
  parts.forEach(({ from, to }, i) => {
    for (const v of [from, to]) {
      const touching = atVertex.get(v);
      if (touching) touching.push(i);
      else atVertex.set(v, [i]);
    }
  });
  const sides: ([number, number] | undefined)[] = parts.map(() => undefined);
  for (let first = 0; first < parts.length; first++) {
    if (sides[first]) continue;
    sides[first] = find(parts[first]);
    const known = [first];
    while (known.length > 0) {
      const i = known.pop()!;
      for (const v of [parts[i].from, parts[i].to]) {
        const touching = atVertex.get(v)!;
        if (touching.length !== 2) continue;
        const j = touching[0] === i ? touching[1] : touching[0];
        if (sides[j]) continue;
        const onward = (parts[i].to === v) === (parts[j].from === v);
        // where a sheet ends or begins its two sides may be one region, and a boundary's are not
        if (parts[i].sources.length !== parts[j].sources.length) continue;
        const [left, right] = sides[i]!;
        sides[j] = onward ? [left, right] : [right, left];
        known.push(j);
      }
    }
  }
  return sides as [number, number][];
}

/**
 * [left, right] shape of a part: parity of the crossings of a ray that leaves the part's middle on its left, the part's
 * own sources left out; on the right, each of these flips its shape's parity once.
 */
function sidesOf(
  part: Part,
  sources: readonly Source[],
  shapes: number,
  tolerance: number,
  regionOf: (inside: Uint8Array) => number,
): [number, number] {
  const origin = pointAt(part.piece, 0.5);
  const [vx, vy] = velocityAt(part.piece, 0.5);
  const normal = Math.atan2(vx, -vy);
  const left = new Uint8Array(shapes);
  const best = new Uint8Array(shapes);
  let clearest = -1;
  // A ray that grazes a curve or passes an end of a piece cannot be trusted: try a fan of them, keep the clearest.
  for (const turn of [0.0137, -0.31, 0.42, -0.77, 0.63, 0.19, -0.14, 0.97, -1.1, 0.84, -0.55, 1.17]) {
    left.fill(0);
    const clearance = castRay(origin, normal + turn, part, sources, left);
    if (clearance > clearest) {
      clearest = clearance;
      best.set(left);
    }
    if (clearance > 1e4 * tolerance) break;
  }
  const right = best.slice();
  for (const source of part.sources) if (sources[source].shape >= 0) right[sources[source].shape] ^= 1;
  return [regionOf(best), regionOf(right)];
}

/** Flips parity[shape] for every crossing ahead; returns how far (a length) the nearest doubtful case was. */
function castRay([ox, oy]: Point, angle: number, part: Part, sources: readonly Source[], parity: Uint8Array): number {
  const dx = Math.cos(angle);
  const dy = Math.sin(angle);
  let clearance = Infinity;
  for (let i = 0; i < sources.length; i++) {
    const { shape, piece, box } = sources[i];
    if (shape < 0) continue;
    const own = part.sources.includes(i);
    // Distance of the box from the ray's line, quick refusal first.
    const mx = (box[0] + box[2]) / 2 - ox;
    const my = (box[1] + box[3]) / 2 - oy;
    const radius = Math.hypot(box[2] - box[0], box[3] - box[1]) / 2;
    const off = Math.abs(dx * my - dy * mx) - radius;
    const behind = -(dx * mx + dy * my) - radius;
    if (off > radius || behind > radius) continue;
    if (piece.kind === 'line') {
      if (own) continue;
      const { from, to } = piece;
      const ex = to[0] - from[0];
      const ey = to[1] - from[1];
      const length = Math.hypot(ex, ey);
      const cross = dx * ey - dy * ex;
      const px = from[0] - ox;
      const py = from[1] - oy;
      if (Math.abs(cross) < 1e-14 * length) {
        clearance = Math.min(clearance, Math.abs(dx * py - dy * px));
        continue;
      }
      const u = (px * dy - py * dx) / cross;
      const t = (px * ey - py * ex) / cross;
      const ends = Math.min(Math.abs(u), Math.abs(1 - u)) * Math.abs(cross);
      if (t > -clearance) clearance = Math.min(clearance, ends);
      if (u >= 0 && u < 1 && t > 0) parity[shape] ^= 1;
      continue;
    }
    const c = Math.cos(piece.tilt);
    const d = Math.sin(piece.tilt);
    const [rx, ry] = piece.radii;
    const px = (c * (ox - piece.center[0]) + d * (oy - piece.center[1])) / rx;
    const py = (c * (oy - piece.center[1]) - d * (ox - piece.center[0])) / ry;
    const qx = (c * dx + d * dy) / rx;
    const qy = (c * dy - d * dx) / ry;
    // |p + t q|² = 1
    const qq = qx * qx + qy * qy;
    const pq = px * qx + py * qy;
    const cross = px * qy - py * qx;
    const discriminant = qq - cross * cross;
    const small = Math.min(rx, ry);
    clearance = Math.min(clearance, (Math.abs(discriminant) / qq) * small);
    if (discriminant <= 0) continue;
    const root = Math.sqrt(discriminant);
    const far = pq > 0 ? -(pq + root) / qq : (root - pq) / qq;
    const near = (px * px + py * py - 1) / qq / far;
    const ownRoot = !own ? NaN : Math.abs(near) < Math.abs(far) ? near : far;
    const closed = Math.abs(piece.sweep) > 2 * Math.PI - 1e-12;
    for (const t of [near, far]) {
      if (t === ownRoot) continue;
      if (!closed) {
        const s = parameterOfAngle(piece, angleOfPoint(piece, ox + t * dx, oy + t * dy));
        const ends = Math.min(Math.abs(s), Math.abs(1 - s)) * Math.abs(piece.sweep) * small;
        if (t > -clearance) clearance = Math.min(clearance, ends);
        if (s < 0 || s >= 1) continue;
      }
      if (t > 0) parity[shape] ^= 1;
    }
  }
  return clearance;
}

/** Edges that go on along the same line or ellipse between the same regions become one. */
function joinChains(edges: ArrangementEdge[]): ArrangementEdge[] {
  let joined: (ArrangementEdge | null)[] = [...edges];
  const atVertex = new Map<number, number[]>();
  edges.forEach((edge, i) => {
    for (const v of [edge.from, edge.to]) atVertex.set(v, [...(atVertex.get(v) ?? []), i]);
  });
  const alias = edges.map((_, i) => i);
  const find = (i: number): number => (alias[i] === i ? i : (alias[i] = find(alias[i])));
  for (const [vertex, touching] of [...atVertex].sort((a, b) => a[0] - b[0])) {
    if (touching.length !== 2) continue;
    const i = find(touching[0]);
    const j = find(touching[1]);
    if (i === j) continue;
    const first = joined[i]!;
    const second = joined[j]!;
    // Turn both so that the first ends and the second starts at the vertex.
    const a = first.to === vertex ? first : turned(first);
    const b = second.from === vertex ? second : turned(second);
    if (a.to !== vertex || b.from !== vertex || a.left !== b.left || a.right !== b.right) continue;
    if (a.sheet !== b.sheet) continue;
    const piece = joinedPiece(a.piece, b.piece);
    if (!piece) continue;
    joined[i] = { ...a, piece, to: b.to };
    joined[j] = null;
    alias[j] = i;
  }
  joined = joined.filter((edge) => edge !== null);
  return joined as ArrangementEdge[];
}

function joinedPiece(a: CurvePiece, b: CurvePiece): CurvePiece | null {
  if (a.kind === 'line' && b.kind === 'line') {
    const ux = a.to[0] - a.from[0];
    const uy = a.to[1] - a.from[1];
    const vx = b.to[0] - b.from[0];
    const vy = b.to[1] - b.from[1];
    const straight = Math.abs(ux * vy - uy * vx) <= 1e-9 * Math.hypot(ux, uy) * Math.hypot(vx, vy);
    return straight && ux * vx + uy * vy > 0 ? { kind: 'line', from: a.from, to: b.to } : null;
  }
  if (a.kind !== 'arc' || b.kind !== 'arc' || a.sweep * b.sweep < 0) return null;
  const same = a.center[0] === b.center[0] && a.center[1] === b.center[1] && a.tilt === b.tilt;
  if (!same || a.radii[0] !== b.radii[0] || a.radii[1] !== b.radii[1]) return null;
  const gap = (b.start - a.start - a.sweep) / (2 * Math.PI);
  if (Math.abs(gap - Math.round(gap)) > 1e-9) return null;
  let sweep = a.sweep + b.sweep;
  if (Math.abs(Math.abs(sweep) - 2 * Math.PI) < 1e-9) sweep = Math.sign(sweep) * 2 * Math.PI;
  return { ...a, sweep };
}

function dropUnused(pool: VertexPool, edges: readonly ArrangementEdge[]) {
  const number = new Map<number, number>();
  const vertices: number[] = [];
  const renamed = (v: number): number => {
    let n = number.get(v);
    if (n === undefined) {
      number.set(v, (n = vertices.length / 2));
      vertices.push(pool.coordinates[2 * v], pool.coordinates[2 * v + 1]);
    }
    return n;
  };
  const renumbered = edges.map((edge) => ({ ...edge, from: renamed(edge.from), to: renamed(edge.to) }));
  return { vertices: new Float64Array(vertices), edges: renumbered };
}
