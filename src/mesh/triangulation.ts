// How is a constrained Delaunay triangulation kept while points come and go?

import { incircle, orient2d } from 'robust-predicates';

/** Positive when a, b, c run counterclockwise; the sign is exact. */
const turn = (ax: number, ay: number, bx: number, by: number, cx: number, cy: number): number =>
  -orient2d(ax, ay, bx, by, cx, cy);

/**
 * Triangles as half-edges: half-edge 3t + i runs from vertex i to vertex i + 1 of triangle t, triangle on its left.
 * Constrained half-edges carry a segment number; no flip crosses them, and they bound the regions.
 *
 * Incremental insertion with Lawson flips; constraints by Sloan's flips (S. W. Sloan, A fast algorithm for generating
 * constrained Delaunay triangulations, 1993); signs by robust predicates.
 */
export class Triangulation {
  readonly x: number[] = [];
  readonly y: number[] = [];
  /** Start vertex of each half-edge. */
  readonly start: number[] = [];
  /** Opposite half-edge, −1 on the outer square. */
  readonly twin: number[] = [];
  /** Segment number of each half-edge, −1 for none. */
  readonly segment: number[] = [];
  /** Region of each triangle. */
  readonly region: number[] = [];
  /** One half-edge that starts at each vertex. */
  readonly spoke: number[] = [];
  /** Triangles changed since the caller last emptied it. */
  readonly touched = new Set<number>();
  private last = 0;

  /** Vertices 0 … 3 are the corners of a square about (cx, cy), half side `reach`; all later points lie inside. */
  constructor(cx: number, cy: number, reach: number) {
    for (const [i, j] of [
      [-1, -1],
      [1, -1],
      [1, 1],
      [-1, 1],
    ]) {
      this.x.push(cx + i * reach);
      this.y.push(cy + j * reach);
    }
    this.start.push(0, 1, 2, 0, 2, 3);
    this.twin.push(-1, -1, 3, 2, -1, -1);
    this.segment.push(-1, -1, -1, -1, -1, -1);
    this.region.push(0, 0);
    this.spoke.push(0, 1, 2, 5);
  }

  get triangles(): number {
    return this.region.length;
  }

  /** The triangle that holds the point (on a border: either). */
  locate(px: number, py: number, from = this.last): number {
    const { x, y, start, twin } = this;
    let t = from;
    let came = -1;
    for (let steps = 0; steps < 3 * this.region.length + 50; steps++) {
      let next = -1;
      for (let i = 0; i < 3 && next < 0; i++) {
        // A changing first edge keeps the walk from circling.
        const e = 3 * t + ((i + steps) % 3);
        if (e === came || twin[e] < 0) continue;
        const a = start[e];
        const b = start[nextOf(e)];
        if (turn(x[a], y[a], x[b], y[b], px, py) < 0) next = twin[e];
      }
      if (next < 0) return (this.last = t);
      came = next;
      t = Math.floor(next / 3);
    }
    for (t = 0; t < this.region.length; t++) {
      let inside = true;
      for (let e = 3 * t; e < 3 * t + 3 && inside; e++) {
        const a = start[e];
        const b = start[nextOf(e)];
        inside = turn(x[a], y[a], x[b], y[b], px, py) >= 0;
      }
      if (inside) return (this.last = t);
    }
    return this.last;
  }

  /** Inserts a point and restores the Delaunay property; returns its vertex, or the old one at the same place. */
  insert(px: number, py: number, from = this.last): number {
    const { x, y, start } = this;
    const t = this.locate(px, py, from);
    let on = -1;
    for (let e = 3 * t; e < 3 * t + 3; e++) {
      const a = start[e];
      const b = start[nextOf(e)];
      if (x[a] === px && y[a] === py) return a;
      if (turn(x[a], y[a], x[b], y[b], px, py) === 0) on = e;
    }
    const v = x.length;
    x.push(px);
    y.push(py);
    this.spoke.push(-1);
    const suspects: number[] = [];
    if (on < 0) this.splitTriangle(t, v, suspects);
    else this.splitEdge(on, v, suspects);
    this.legalise(suspects);
    return v;
  }

  /** The half-edge from a to b, −1 if there is none. */
  findEdge(a: number, b: number): number {
    const { start, twin } = this;
    const first = this.spoke[a];
    let e = first;
    do {
      if (start[nextOf(e)] === b) return e;
      e = twin[previousOf(e)];
    } while (e >= 0 && e !== first);
    if (e >= 0) return -1;
    // The fan is open (a lies on the outer square): look the other way round too.
    e = first;
    while (twin[e] >= 0) {
      e = nextOf(twin[e]);
      if (start[nextOf(e)] === b) return e;
      if (e === first) break;
    }
    return -1;
  }

  /** All half-edges that start at an inner vertex, counterclockwise. */
  spokesOf(v: number): number[] {
    const result: number[] = [];
    const first = this.spoke[v];
    let e = first;
    do {
      result.push(e);
      e = this.twin[previousOf(e)];
    } while (e >= 0 && e !== first);
    return result;
  }

  /** Makes a–b an edge and marks it; false when another constraint or a vertex stands in the way. */
  constrain(a: number, b: number, segment: number): boolean {
    const { x, y, start, twin } = this;
    let e = this.findEdge(a, b);
    if (e < 0) {
      const crossing = this.crossedBy(a, b);
      if (!crossing) return false;
      const fresh: number[] = [];
      let guard = 0;
      while (crossing.length > 0) {
        if (guard++ > 50 * (crossing.length + 20) + 2000) return false;
        const [p, q] = crossing.shift()!;
        const d = this.findEdge(p, q);
        const o = twin[d];
        const r = start[previousOf(d)];
        const s = start[previousOf(o)];
        const convex = turn(x[r], y[r], x[s], y[s], x[p], y[p]) * turn(x[r], y[r], x[s], y[s], x[q], y[q]) < 0;
        if (!convex) {
          crossing.push([p, q]);
          continue;
        }
        this.flip(d);
        const crossesStill =
          r !== a &&
          r !== b &&
          s !== a &&
          s !== b &&
          turn(x[a], y[a], x[b], y[b], x[r], y[r]) * turn(x[a], y[a], x[b], y[b], x[s], y[s]) < 0;
        if (crossesStill) crossing.push([r, s]);
        else fresh.push(r, s);
      }
      e = this.findEdge(a, b);
      if (e < 0) return false;
      this.mark(e, segment);
      const suspects: number[] = [];
      for (let i = 0; i < fresh.length; i += 2) {
        const f = this.findEdge(fresh[i], fresh[i + 1]);
        if (f >= 0) suspects.push(f);
      }
      this.legalise(suspects);
      return true;
    }
    this.mark(e, segment);
    return true;
  }

  mark(e: number, segment: number): void {
    this.segment[e] = segment;
    this.touched.add(Math.floor(e / 3));
    const o = this.twin[e];
    if (o < 0) return;
    this.segment[o] = segment;
    this.touched.add(Math.floor(o / 3));
  }

  /** Moves a vertex (the caller has checked that its star stays positive) and restores the Delaunay property. */
  move(v: number, px: number, py: number): void {
    this.x[v] = px;
    this.y[v] = py;
    const suspects: number[] = [];
    for (const e of this.spokesOf(v)) suspects.push(e, nextOf(e));
    this.legalise(suspects);
  }

  /** Half-edges whose edge the open segment a–b crosses, as vertex pairs; null when it cannot become an edge. */
  private crossedBy(a: number, b: number): [number, number][] | null {
    const { x, y, start, twin, segment } = this;
    const result: [number, number][] = [];
    const side = (v: number): number => turn(x[a], y[a], x[b], y[b], x[v], y[v]);
    // First triangle at a whose far edge is crossed.
    let e = -1;
    for (const spoke of this.spokesOf(a)) {
      const right = start[nextOf(spoke)];
      const left = start[previousOf(spoke)];
      const ahead = (v: number): boolean => (x[v] - x[a]) * (x[b] - x[a]) + (y[v] - y[a]) * (y[b] - y[a]) > 0;
      if ((side(right) === 0 && ahead(right)) || (side(left) === 0 && ahead(left))) return null;
      if (side(right) < 0 && side(left) > 0) {
        e = nextOf(spoke);
        break;
      }
    }
    if (e < 0) return null;
    for (let guard = 0; guard < this.start.length; guard++) {
      if (segment[e] >= 0) return null;
      result.push([start[e], start[nextOf(e)]]);
      const o = twin[e];
      if (o < 0) return null;
      const apex = start[previousOf(o)];
      if (apex === b) return result;
      const s = side(apex);
      if (s === 0) return null;
      e = s > 0 ? nextOf(o) : previousOf(o);
    }
    return null;
  }

  private splitTriangle(t: number, v: number, suspects: number[]): void {
    const { start, twin, segment, region, spoke } = this;
    const [a, b, c] = [start[3 * t], start[3 * t + 1], start[3 * t + 2]];
    const outer = [twin[3 * t], twin[3 * t + 1], twin[3 * t + 2]];
    const marks = [segment[3 * t], segment[3 * t + 1], segment[3 * t + 2]];
    const t1 = region.length;
    const t2 = t1 + 1;
    region.push(region[t], region[t]);
    start.push(b, c, v, c, a, v);
    twin.push(-1, -1, -1, -1, -1, -1);
    segment.push(-1, -1, -1, -1, -1, -1);
    start[3 * t + 2] = v;
    segment[3 * t + 1] = segment[3 * t + 2] = -1;
    const own = [3 * t, 3 * t1, 3 * t2];
    for (let i = 0; i < 3; i++) {
      this.join(own[i], outer[i]);
      segment[own[i]] = marks[i];
      this.join(own[i] + 1, own[(i + 1) % 3] + 2);
      spoke[[a, b, c][i]] = own[i];
      suspects.push(own[i]);
    }
    spoke[v] = 3 * t + 2;
    this.touched.add(t).add(t1).add(t2);
  }

  private splitEdge(e: number, v: number, suspects: number[]): void {
    const { start, twin, segment, region, spoke } = this;
    const mark = segment[e];
    const halves: number[] = [];
    for (const h of [e, twin[e]]) {
      if (h < 0) continue;
      // Triangle (a, b, c) with h = a→b becomes (a, v, c) and (v, b, c).
      const t = Math.floor(h / 3);
      const n = nextOf(h);
      const p = previousOf(h);
      const b = start[n];
      const c = start[p];
      const t1 = region.length;
      region.push(region[t]);
      start.push(v, b, c);
      twin.push(-1, -1, -1);
      segment.push(mark, segment[n], -1);
      this.join(3 * t1 + 1, twin[n]);
      start[n] = v;
      segment[n] = -1;
      this.join(n, 3 * t1 + 2);
      spoke[b] = 3 * t1 + 1;
      spoke[c] = p;
      spoke[v] = 3 * t1;
      halves.push(h, 3 * t1);
      suspects.push(p, 3 * t1 + 1);
      this.touched.add(t).add(t1);
    }
    if (halves.length === 4) {
      this.join(halves[0], halves[3]);
      this.join(halves[1], halves[2]);
    } else {
      this.twin[halves[0]] = -1;
      this.twin[halves[1]] = -1;
    }
    for (const h of halves) spoke[start[h]] = h;
  }

  private join(e: number, o: number): void {
    this.twin[e] = o;
    if (o >= 0) this.twin[o] = e;
  }

  legalise(suspects: number[]): void {
    const { x, y, start, twin, segment } = this;
    while (suspects.length > 0) {
      const e = suspects.pop()!;
      const o = twin[e];
      if (o < 0 || segment[e] >= 0) continue;
      const a = start[e];
      const b = start[nextOf(e)];
      const c = start[previousOf(e)];
      const d = start[previousOf(o)];
      if (incircle(x[a], y[a], x[b], y[b], x[c], y[c], x[d], y[d]) <= 0) continue;
      this.flip(e);
      suspects.push(e, nextOf(e), previousOf(e), o, nextOf(o), previousOf(o));
    }
  }

  /** Edge a→b of (a, b, c), (b, a, d) becomes d→c: triangles (d, c, a) … in the same two slots. */
  private flip(e: number): void {
    const { start, twin, segment, spoke } = this;
    const o = twin[e];
    const en = nextOf(e);
    const ep = previousOf(e);
    const on = nextOf(o);
    const op = previousOf(o);
    const [a, b, c, d] = [start[e], start[en], start[ep], start[op]];
    const outer = [twin[ep], twin[en], twin[on], twin[op]];
    const marks = [segment[ep], segment[en], segment[on], segment[op]];
    // Slot of e: (d, c, a) with e = d→c, en = c→a, ep = a→d; slot of o: (c, d, b) with o = c→d, on = d→b, op = b→c.
    start[e] = d;
    start[en] = c;
    start[ep] = a;
    start[o] = c;
    start[on] = d;
    start[op] = b;
    this.join(en, outer[0]);
    segment[en] = marks[0];
    this.join(ep, outer[2]);
    segment[ep] = marks[2];
    this.join(on, outer[3]);
    segment[on] = marks[3];
    this.join(op, outer[1]);
    segment[op] = marks[1];
    spoke[a] = ep;
    spoke[b] = op;
    spoke[c] = en;
    spoke[d] = on;
    this.touched.add(Math.floor(e / 3)).add(Math.floor(o / 3));
  }
}

export const nextOf = (e: number): number => (e % 3 === 2 ? e - 2 : e + 1);
export const previousOf = (e: number): number => (e % 3 === 0 ? e + 2 : e - 1);
