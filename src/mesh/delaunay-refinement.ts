// Which points make a triangulation of the curves one of good triangles of the wanted size?

import type { Arrangement } from '../geometry/arrangement.ts';
import type { Point } from '../geometry/curves.ts';
import { pointAt } from '../geometry/curves.ts';
import { GeometryError } from '../geometry/geometry-error.ts';
import { gaussLobatto } from '../numerics/quadrature.ts';
import type { TriangleCurves } from './curved-triangles.ts';
import { boundJacobian, bulgeOfNodes } from './curved-triangles.ts';
import type { Discretisation, Segment } from './discretisation.ts';
import { GROWTH } from './discretisation.ts';
import { Triangulation, nextOf, previousOf } from './triangulation.ts';

/** Label of triangles outside the outermost curve. */
export const OUTSIDE = -1;

/** Degree of the edge polynomials: on spans of 0.6 rad they equal the arc to rounding. */
export const CURVE_ORDER = 10;

const NODES = gaussLobatto(CURVE_ORDER + 1).nodes;

/** Circumradius, in wanted sizes, from which on a triangle has room for a point of the advancing front. */
const FRONT = 1.2;

const UNKNOWN = -9;
const degrees = Math.PI / 180;

/**
 * A triangulation under refinement: Delaunay refinement with circumcentres and off-centres (Chew 1993, Ruppert 1995,
 * Üngör 2004), segments split on their true curves. A point encroaches on a segment that it sees under more than 120°;
 * so no vertex ever comes between a chord and its arc.
 */
export class Draft {
  readonly triangulation: Triangulation;
  readonly segments: (Segment | null)[];
  /** Size wanted at each vertex of the triangulation. */
  readonly size: number[];
  /** 1 where the vertex lies on a curve. */
  readonly onCurve: number[] = [];
  private readonly arrangement: Arrangement;
  private readonly names: readonly string[];
  private readonly base: (label: number) => number;
  private readonly field: (x: number, y: number) => number;
  private stretch = 1;
  private readonly floor: number;
  private readonly limit: number;

  constructor(
    arrangement: Arrangement,
    names: readonly string[],
    discretisation: Discretisation,
    base: (label: number) => number,
    field: (x: number, y: number) => number,
    center: Point,
    reach: number,
    limit: number,
  ) {
    this.arrangement = arrangement;
    this.names = names;
    this.base = base;
    this.field = field;
    this.floor = 1e-8 * reach;
    this.limit = limit;
    const t = new Triangulation(center[0], center[1], 4 * reach);
    this.triangulation = t;
    this.size = [reach, reach, reach, reach];
    this.onCurve.push(1, 1, 1, 1);
    const { x, y, size, segments } = discretisation;
    for (let i = 0; i < x.length; i++) {
      const v = t.insert(x[i], y[i]);
      if (v !== i + 4) throw this.failure('two vertices fall together', [x[i], y[i]]);
      this.size.push(size[i]);
      this.onCurve.push(1);
    }
    this.segments = segments.map((s) => ({ ...s, a: s.a + 4, b: s.b + 4 }));
    segments.forEach((s, i) => {
      if (!t.constrain(s.a + 4, s.b + 4, i)) throw this.failure('two outlines cross', [x[s.a], y[s.a]]);
    });
    for (let i = 0; i < t.triangles; i++) t.touched.add(i);
    t.region.fill(OUTSIDE);
    this.relabel();
  }

  /** Inserts points until every triangle has its size and angles ≥ `angle` degrees (or cannot be helped). */
  refine(angle: number, stretch = 1): void {
    this.stretch = stretch;
    const t = this.triangulation;
    this.clearSegments();
    let sulking = false;
    for (let pass = 0; pass < 400; pass++) {
      const bad: { key: number; e: number; a: number; b: number; c: number; large: boolean; slim: boolean }[] = [];
      for (let i = 0; i < t.triangles; i++) {
        const found = this.judge(i, angle);
        if (found)
          bad.push({
            ...found,
            e: 3 * i,
            a: t.start[3 * i],
            b: t.start[3 * i + 1],
            c: t.start[3 * i + 2],
          });
      }
      bad.sort((p, q) => q.key - p.key || p.e - q.e);
      const front = bad.filter(({ e, large }) => large && this.isFront(e / 3));
      let done = 0;
      for (const { e, a, b, c, large, slim } of front.length > 0 && !sulking ? front : bad) {
        if (t.start[e] !== a || t.start[e + 1] !== b || t.start[e + 2] !== c) continue;
        if (this.mend(e / 3, large, slim, angle)) done++;
        if (t.x.length > this.limit)
          throw this.failure(
            `more than ${this.limit} vertices would be needed; a gap, a wall or a wanted size there is too small beside the rest`,
            [t.x[a], t.y[a]],
          );
      }
      // Only the front was served: its failures must not hide the rest.
      if (done === 0 && front.length > 0 && !sulking) {
        sulking = true;
        continue;
      }
      if (done === 0) return;
      sulking = false;
    }
  }

  /**
   * Splits the curved sides of triangles whose map is folded or too uneven (Jacobian ratio below `least`); returns how
   * many such triangles there were. A triangle whose sides are all fixed must only not be folded.
   */
  straighten(least: number): number {
    const t = this.triangulation;
    const bad: { sides: number[]; folded: boolean; place: Point }[] = [];
    for (let i = 0; i < t.triangles; i++) {
      if (t.region[i] === OUTSIDE) continue;
      const curves = this.curvesOf(i);
      if (!curves) continue;
      const { lower, upper } = boundJacobian(curves, CURVE_ORDER, least);
      if (lower >= least * upper) continue;
      const sides = [0, 1, 2].map((j) => t.segment[3 * i + j]).filter((s) => s >= 0 && this.isCurved(s));
      bad.push({ sides, folded: lower <= 0, place: [t.x[t.start[3 * i]], t.y[t.start[3 * i]]] });
    }
    let split = 0;
    for (const { sides, folded, place } of bad) {
      const free = sides.filter((s) => this.segments[s] && !this.segments[s].fixed);
      const stillThere = sides.every((s) => this.segments[s]);
      if (stillThere && free.length === 0 && folded) throw this.failure('curves meet too sharply', place);
      for (const s of free) {
        if (!this.segments[s]) continue;
        this.split(s);
        split++;
      }
    }
    return split;
  }

  private isCurved(segment: number): boolean {
    return this.arrangement.edges[this.segments[segment]!.edge].piece.kind === 'arc';
  }

  /** The map of triangle i, null when all its sides are straight. */
  private curvesOf(i: number): TriangleCurves | null {
    const { x, y, start, segment } = this.triangulation;
    const corners = new Float64Array(6);
    const bulges: [Float64Array | null, Float64Array | null, Float64Array | null] = [null, null, null];
    let curved = false;
    for (let j = 0; j < 3; j++) {
      const v = start[3 * i + j];
      corners[2 * j] = x[v];
      corners[2 * j + 1] = y[v];
      const nodes = segment[3 * i + j] >= 0 ? this.nodesOf(segment[3 * i + j], v) : null;
      if (!nodes) continue;
      bulges[j] = bulgeOfNodes(nodes);
      curved = true;
    }
    return curved ? { corners, bulges } : null;
  }

  /** The Gauss–Lobatto points [x0,y0,…] of a segment's curve from its end `from` on; null for a straight segment. */
  nodesOf(segment: number, from: number): Float64Array | null {
    const { a, b, edge, s0, s1 } = this.segments[segment]!;
    const { piece } = this.arrangement.edges[edge];
    if (piece.kind === 'line') return null;
    const { x, y } = this.triangulation;
    const [first, last, to] = a === from ? [s0, s1, b] : [s1, s0, a];
    const points = new Float64Array(2 * (CURVE_ORDER + 1));
    for (let j = 1; j < CURVE_ORDER; j++)
      [points[2 * j], points[2 * j + 1]] = pointAt(piece, (first * (1 - NODES[j]) + last * (1 + NODES[j])) / 2);
    // The ends belong to vertices: the same numbers, bit for bit.
    [points[0], points[1]] = [x[from], y[from]];
    [points[2 * CURVE_ORDER], points[2 * CURVE_ORDER + 1]] = [x[to], y[to]];
    return points;
  }

  /** Moves free vertices toward the size-weighted middle of their stars, never to a worse smallest angle. */
  smooth(rounds: number): void {
    const t = this.triangulation;
    const { x, y, start } = t;
    for (let round = 0; round < rounds; round++) {
      for (let v = 4; v < x.length; v++) {
        if (this.onCurve[v]) continue;
        const star = t.spokesOf(v);
        let sx = 0;
        let sy = 0;
        let weights = 0;
        for (const e of star) {
          // Optimal-Delaunay weights (L. Chen 2004): circumcentres by area, density by the wanted size.
          const b = start[nextOf(e)];
          const c = start[previousOf(e)];
          const [ox, oy] = this.circumcenter(v, b, c);
          const area = (x[b] - x[v]) * (y[c] - y[v]) - (y[b] - y[v]) * (x[c] - x[v]);
          const h = (this.size[b] + this.size[c] + this.size[v]) / 3;
          const w = area / h ** 3;
          sx += w * (x[v] + ox);
          sy += w * (y[v] + oy);
          weights += w;
        }
        const old: Point = [x[v], y[v]];
        const before = this.starQuality(v, star);
        let moved = false;
        for (const share of [1, 0.5, 0.25]) {
          x[v] = old[0] + share * (sx / weights - old[0]);
          y[v] = old[1] + share * (sy / weights - old[1]);
          if (this.starQuality(v, star) <= before) continue;
          moved = true;
          break;
        }
        if (moved) t.move(v, x[v], y[v]);
        else {
          x[v] = old[0];
          y[v] = old[1];
        }
      }
    }
  }

  /** Sine of the smallest angle of the star; negative when a triangle is turned over or a segment is encroached. */
  private starQuality(v: number, star: readonly number[]): number {
    const t = this.triangulation;
    let least = Infinity;
    for (const e of star) {
      const far = nextOf(e);
      const q = this.smallestSine(v, t.start[far], t.start[previousOf(e)]);
      if (q <= 0) return -1;
      least = Math.min(least, q);
      if (t.segment[far] >= 0 && this.sees(v, t.start[far], t.start[nextOf(far)])) return -1;
    }
    return least;
  }

  /** Sine of the smallest angle of a triangle; ≤ 0 when it is turned over. */
  private smallestSine(a: number, b: number, c: number): number {
    const { x, y } = this.triangulation;
    const area = (x[b] - x[a]) * (y[c] - y[a]) - (y[b] - y[a]) * (x[c] - x[a]);
    const ab = (x[b] - x[a]) ** 2 + (y[b] - y[a]) ** 2;
    const bc = (x[c] - x[b]) ** 2 + (y[c] - y[b]) ** 2;
    const ca = (x[a] - x[c]) ** 2 + (y[a] - y[c]) ** 2;
    // Twice the area over the two longer sides.
    return area / Math.sqrt((ab * bc * ca) / Math.min(ab, bc, ca));
  }

  /** Why a triangle is bad, and how bad; null when it is good. */
  private judge(i: number, angle: number): { key: number; large: boolean; slim: boolean } | null {
    const t = this.triangulation;
    if (t.region[i] === OUTSIDE) return null;
    const { x, y, start } = t;
    const a = start[3 * i];
    const b = start[3 * i + 1];
    const c = start[3 * i + 2];
    const ab = Math.sqrt((x[b] - x[a]) ** 2 + (y[b] - y[a]) ** 2);
    const bc = Math.sqrt((x[c] - x[b]) ** 2 + (y[c] - y[b]) ** 2);
    const ca = Math.sqrt((x[a] - x[c]) ** 2 + (y[a] - y[c]) ** 2);
    const wanted = this.wantedIn(i) * this.stretch;
    const area = (x[b] - x[a]) * (y[c] - y[a]) - (y[b] - y[a]) * (x[c] - x[a]);
    const radius = (ab * bc * ca) / (2 * area);
    const tooLarge = Math.max(radius / (0.7 * wanted), Math.max(ab, bc, ca) / (1.2 * wanted));
    const shortest = Math.min(ab, bc, ca);
    // Smallest angle: sin = shortest / 2R.
    const sine = shortest / (2 * radius);
    const slim = sine < Math.sin(angle * degrees) && !this.isTip(i);
    if (tooLarge > 1) return { key: 1e6 * tooLarge, large: true, slim };
    return slim ? { key: 1 / sine, large: false, slim } : null;
  }

  /** Size wanted in triangle i: the mean of its vertices' sizes, or what has grown from all of them to its middle. */
  private wantedIn(i: number): number {
    const { x, y, start, region } = this.triangulation;
    const { size } = this;
    const [a, b, c] = [start[3 * i], start[3 * i + 1], start[3 * i + 2]];
    const mx = (x[a] + x[b] + x[c]) / 3;
    const my = (y[a] + y[b] + y[c]) / 3;
    // In an even triangle the middle lies about 0.6 sizes away: growth counts from there.
    const grown = (v: number): number => {
      const d = Math.sqrt((x[v] - mx) ** 2 + (y[v] - my) ** 2);
      return size[v] + GROWTH * Math.max(0, d - 0.6 * size[v]);
    };
    const mean = (size[a] + size[b] + size[c]) / 3;
    return Math.min(this.base(region[i]), this.field(mx, my), Math.max(mean, Math.min(grown(a), grown(b), grown(c))));
  }

  /** Whether two sides of the triangle are fixed segments: the tip of a sharp corner. */
  private isTip(i: number): boolean {
    const { segment } = this.triangulation;
    let fixed = 0;
    for (let e = 3 * i; e < 3 * i + 3; e++) if (segment[e] >= 0 && this.segments[segment[e]]!.fixed) fixed++;
    return fixed >= 2;
  }

  /** Removes a bad triangle by a new point or a split segment; false when neither may be done. */
  private mend(i: number, large: boolean, slim: boolean, angle: number): boolean {
    const t = this.triangulation;
    const { x, y, start } = t;
    const label = t.region[i];
    const target = large ? this.frontPoint(i) : this.offcenter(i, angle);
    const { at, blockedBy } = this.walk(i, target);
    if (blockedBy >= 0) return this.trySplit(blockedBy, slim, label);
    // Segments on the border of the point's cavity.
    const seen = this.encroachedBy(at, target);
    if (seen >= 0) return this.trySplit(seen, slim, label);
    let size = Math.min(this.base(label), this.field(target[0], target[1]));
    for (let e = 3 * at; e < 3 * at + 3; e++)
      size = Math.min(
        size,
        this.size[start[e]] + GROWTH * Math.hypot(x[start[e]] - target[0], y[start[e]] - target[1]),
      );
    const before = x.length;
    const v = t.insert(target[0], target[1], at);
    if (v < before) return false;
    t.touched.clear();
    this.size.push(size);
    this.onCurve.push(0);
    return true;
  }

  private trySplit(segment: number, slim: boolean, label: number): boolean {
    const { a, b, fixed } = this.segments[segment]!;
    if (fixed) return false;
    const { x, y } = this.triangulation;
    const length = Math.hypot(x[a] - x[b], y[a] - y[b]);
    const wanted = Math.min(this.base(label), this.sizeBetween(a, b, length));
    if (!slim && length < 1.15 * wanted) return false;
    if (length < this.floor) return false;
    this.split(segment);
    return true;
  }

  /** Size wanted in the middle between two vertices. */
  private sizeBetween(a: number, b: number, length: number): number {
    const { size } = this;
    const least = Math.min(size[a], size[b]);
    return Math.max((size[a] + size[b]) / 2, least + GROWTH * Math.max(0, length / 2 - 0.6 * least));
  }

  /** Splits a segment on its true curve, and then every segment that sees a vertex inside its 120° lens. */
  split(segment: number): void {
    const t = this.triangulation;
    const { a, b, edge, s0, s1 } = this.segments[segment]!;
    const s = (s0 + s1) / 2;
    const [px, py] = pointAt(this.arrangement.edges[edge].piece, s);
    t.mark(t.findEdge(a, b), -1);
    const before = t.x.length;
    const v = t.insert(px, py, Math.floor(t.spoke[a] / 3));
    if (v < before) throw this.failure('a segment cannot be split', [px, py]);
    const length = Math.hypot(t.x[a] - t.x[b], t.y[a] - t.y[b]);
    const size = Math.min(1.5 * (length / 2), this.sizeBetween(a, b, length));
    this.size.push(size);
    this.size[a] = Math.min(this.size[a], 1.5 * size);
    this.size[b] = Math.min(this.size[b], 1.5 * size);
    this.onCurve.push(1);
    const n = this.segments.length;
    this.segments[segment] = null;
    this.segments.push({ a, b: v, edge, s0, s1: s, fixed: false }, { a: v, b, edge, s0: s, s1, fixed: false });
    if (!t.constrain(a, v, n) || !t.constrain(v, b, n + 1)) throw this.failure('a segment cannot be split', [px, py]);
    this.relabel();
    for (const part of [n, n + 1]) this.clear(part);
  }

  private clearSegments(): void {
    for (let s = 0; s < this.segments.length; s++) this.clear(s);
  }

  /** Splits a segment while an apex beside it lies in its lens. */
  private clear(segment: number): void {
    const s = this.segments[segment];
    if (!s || s.fixed) return;
    const t = this.triangulation;
    const e = t.findEdge(s.a, s.b);
    for (const h of [e, t.twin[e]]) {
      if (h < 0 || t.region[Math.floor(h / 3)] === OUTSIDE) continue;
      const apex = t.start[previousOf(h)];
      if (this.sees(apex, s.a, s.b) && Math.hypot(t.x[s.a] - t.x[s.b], t.y[s.a] - t.y[s.b]) > this.floor) {
        this.split(segment);
        return;
      }
    }
  }

  /** Whether vertex v sees a–b under more than 120°. */
  private sees(v: number, a: number, b: number): boolean {
    const { x, y } = this.triangulation;
    return inLens(x[v], y[v], x[a], y[a], x[b], y[b]);
  }

  /** A segment on the border of the Delaunay cavity of the point that the point encroaches on, −1 for none. */
  private encroachedBy(at: number, [px, py]: Point): number {
    const t = this.triangulation;
    const { x, y, start, twin, segment } = t;
    const seen = new Set([at]);
    const queue = [at];
    let worst = -1;
    let widest = -0.5;
    while (queue.length > 0) {
      const i = queue.pop()!;
      for (let e = 3 * i; e < 3 * i + 3; e++) {
        const a = start[e];
        const b = start[nextOf(e)];
        if (segment[e] >= 0) {
          const cosine = cosineAt(px, py, x[a], y[a], x[b], y[b]);
          if (cosine < widest) [worst, widest] = [segment[e], cosine];
          continue;
        }
        const o = twin[e];
        const j = Math.floor(o / 3);
        if (o < 0 || seen.has(j)) continue;
        const [u, v, w] = [start[3 * j], start[3 * j + 1], start[3 * j + 2]];
        const [cx, cy] = this.circumcenter(u, v, w);
        if (Math.hypot(px - cx, py - cy) >= Math.hypot(x[u] - cx, y[u] - cy)) continue;
        seen.add(j);
        queue.push(j);
      }
    }
    return worst;
  }

  /** Walks from triangle i straight to the point: the triangle that holds it, or the first segment in the way. */
  private walk(i: number, [px, py]: Point): { at: number; blockedBy: number } {
    const t = this.triangulation;
    const { x, y, start, twin, segment } = t;
    const ox = (x[start[3 * i]] + x[start[3 * i + 1]] + x[start[3 * i + 2]]) / 3;
    const oy = (y[start[3 * i]] + y[start[3 * i + 1]] + y[start[3 * i + 2]]) / 3;
    const side = (v: number): number => (px - ox) * (y[v] - oy) - (py - oy) * (x[v] - ox);
    let at = i;
    let came = -1;
    for (let guard = 0; guard < 3 * t.triangles; guard++) {
      let out = -1;
      for (let e = 3 * at; e < 3 * at + 3; e++) {
        if (e === came) continue;
        const a = start[e];
        const b = start[nextOf(e)];
        if ((x[b] - x[a]) * (py - y[a]) - (y[b] - y[a]) * (px - x[a]) >= 0) continue;
        if (side(a) <= 0 && side(b) >= 0) {
          out = e;
          break;
        }
        if (out < 0) out = e;
      }
      if (out < 0) return { at, blockedBy: -1 };
      if (segment[out] >= 0) return { at, blockedBy: segment[out] };
      came = twin[out];
      at = Math.floor(came / 3);
    }
    return { at, blockedBy: -1 };
  }

  private circumcenter(a: number, b: number, c: number): Point {
    const { x, y } = this.triangulation;
    const bx = x[b] - x[a];
    const by = y[b] - y[a];
    const cx = x[c] - x[a];
    const cy = y[c] - y[a];
    const d = 2 * (bx * cy - by * cx);
    const bb = bx * bx + by * by;
    const cc = cx * cx + cy * cy;
    return [x[a] + (cy * bb - by * cc) / d, y[a] + (bx * cc - cx * bb) / d];
  }

  private isFront(i: number): boolean {
    const { twin, segment } = this.triangulation;
    for (let e = 3 * i; e < 3 * i + 3; e++) if (segment[e] >= 0 || !this.judge(Math.floor(twin[e] / 3), 0)) return true;
    return false;
  }

  /**
   * Where the triangle of the wanted size on the shortest finished side has its apex, if the circumcircle has room for
   * it, else the circumcentre (S. Rebay 1993: points of an advancing front, triangles of Delaunay).
   */
  private frontPoint(i: number): Point {
    const t = this.triangulation;
    const { x, y, start, twin, segment } = t;
    const center = this.circumcenter(start[3 * i], start[3 * i + 1], start[3 * i + 2]);
    const radius = Math.hypot(center[0] - x[start[3 * i]], center[1] - y[start[3 * i]]);
    const wanted = this.wantedIn(i);
    if (radius < FRONT * wanted) return center;
    let best = -1;
    let least = Infinity;
    for (let e = 3 * i; e < 3 * i + 3; e++) {
      if (segment[e] < 0 && this.judge(Math.floor(twin[e] / 3), 0)) continue;
      const d = Math.hypot(x[start[e]] - x[start[nextOf(e)]], y[start[e]] - y[start[nextOf(e)]]);
      if (d < least) [best, least] = [e, d];
    }
    if (best < 0) return center;
    const a = start[best];
    const b = start[nextOf(best)];
    const mx = (x[a] + x[b]) / 2;
    const my = (y[a] + y[b]) / 2;
    // Up to the circumcentre only: nothing lies nearer than the triangle's own vertices.
    const height = Math.sqrt(Math.max(wanted * wanted - (least * least) / 4, (wanted * wanted) / 4));
    const up = (x[b] - x[a]) * (center[1] - my) - (y[b] - y[a]) * (center[0] - mx);
    const q = up > 0 ? Math.hypot(center[0] - mx, center[1] - my) : 0;
    const share = Math.min(height, q) / least;
    return [mx - (y[b] - y[a]) * share, my + (x[b] - x[a]) * share];
  }

  /** The point on the bisector of the shortest side that makes just the wanted angle, or the circumcentre if nearer. */
  private offcenter(i: number, angle: number): Point {
    const { x, y, start } = this.triangulation;
    let best = 3 * i;
    let least = Infinity;
    for (let e = 3 * i; e < 3 * i + 3; e++) {
      const d = Math.hypot(x[start[e]] - x[start[nextOf(e)]], y[start[e]] - y[start[nextOf(e)]]);
      if (d < least) [best, least] = [e, d];
    }
    const a = start[best];
    const b = start[nextOf(best)];
    const [ox, oy] = this.circumcenter(a, b, start[previousOf(best)]);
    const mx = (x[a] + x[b]) / 2;
    const my = (y[a] + y[b]) / 2;
    const height = Math.hypot(ox - mx, oy - my);
    // Two degrees to spare: sides 1, apex angle = wanted angle.
    const wanted = least / 2 / Math.tan(((angle + 2) * degrees) / 2);
    if (height <= wanted) return [ox, oy];
    return [mx + ((ox - mx) * wanted) / height, my + ((oy - my) * wanted) / height];
  }

  /** Gives the touched triangles their labels again, from segments and from untouched neighbours. */
  private relabel(): void {
    const t = this.triangulation;
    const touched = [...t.touched];
    t.touched.clear();
    const known: number[] = [];
    for (const i of touched) t.region[i] = UNKNOWN;
    for (const i of touched) {
      let label = UNKNOWN;
      for (let e = 3 * i; e < 3 * i + 3 && label === UNKNOWN; e++) {
        const s = t.segment[e] >= 0 ? this.segments[t.segment[e]] : null;
        if (s) {
          const edge = this.arrangement.edges[s.edge];
          label = t.start[e] === s.a ? edge.left : edge.right;
        } else if (t.twin[e] < 0) label = OUTSIDE;
        else label = t.region[Math.floor(t.twin[e] / 3)];
      }
      if (label === UNKNOWN) continue;
      t.region[i] = label;
      known.push(i);
    }
    while (known.length > 0) {
      const i = known.pop()!;
      for (let e = 3 * i; e < 3 * i + 3; e++) {
        const j = Math.floor(t.twin[e] / 3);
        if (t.twin[e] < 0 || t.segment[e] >= 0 || t.region[j] !== UNKNOWN) continue;
        t.region[j] = t.region[i];
        known.push(j);
      }
    }
  }

  private failure(what: string, place: Point): GeometryError {
    const where = `(${place[0].toPrecision(6)}, ${place[1].toPrecision(6)})`;
    // Whose outline is nearest: the edges of the segments at the nearest vertices.
    const { x, y } = this.triangulation;
    let nearest: Segment | null = null;
    let least = Infinity;
    for (const s of this.segments ?? []) {
      if (!s) continue;
      const d = Math.min(
        Math.hypot(x[s.a] - place[0], y[s.a] - place[1]),
        Math.hypot(x[s.b] - place[0], y[s.b] - place[1]),
      );
      if (d < least) [nearest, least] = [s, d];
    }
    const edge = nearest ? this.arrangement.edges[nearest.edge] : null;
    const bodies = edge ? [this.names[Math.max(edge.left, edge.right)]] : [];
    const beside = bodies.length > 0 ? `, beside '${bodies[0]}'` : '';
    return new GeometryError(`Cannot mesh the drawing near ${where}${beside}: ${what}.`, bodies, place);
  }
}

function cosineAt(px: number, py: number, ax: number, ay: number, bx: number, by: number): number {
  const ux = ax - px;
  const uy = ay - py;
  const vx = bx - px;
  const vy = by - py;
  return (ux * vx + uy * vy) / Math.sqrt((ux * ux + uy * uy) * (vx * vx + vy * vy));
}

const inLens = (px: number, py: number, ax: number, ay: number, bx: number, by: number): boolean =>
  cosineAt(px, py, ax, ay, bx, by) < -0.5;
