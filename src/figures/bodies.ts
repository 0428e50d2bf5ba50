// How are the bodies of a device drawn: outlines where they can be seen, a hatch where they are active?

import type { Device } from '../device/model.ts';
import { pointAt, type Outline } from '../geometry/curves.ts';
import type { RunView } from '../results/run-view.ts';

/** A body as closed polylines, length units of the device; the points inside by even-odd. */
export interface DrawnBody {
  readonly name: string;
  readonly group: string;
  readonly material: string;
  readonly permittivity: readonly [re: number, im: number];
  readonly active: boolean;
  readonly outlines: readonly ArrayLike<number>[];
}

export type Box = readonly [x0: number, y0: number, x1: number, y1: number];

/** Bodies of a checked device, in file order; arcs are followed to 1/4000 of their radius. */
export function bodiesOfDevice(device: Pick<Device, 'bodies'>): DrawnBody[] {
  return device.bodies.map((body) => ({
    name: body.name,
    group: body.group,
    material: body.material,
    permittivity: [body.permittivity.re, body.permittivity.im],
    active: body.pumpWeight !== 0,
    outlines: body.shape.map(polyline),
  }));
}

/** Bodies of a stored run, in file order. */
export function bodiesOfRun(run: RunView): DrawnBody[] {
  return run.record.device.bodies.map((body) => ({
    name: body.name,
    group: body.group,
    material: body.material,
    permittivity: body.permittivity,
    active: body.pumpWeight !== 0,
    outlines: body.outlines.map((name) => run.array(name)),
  }));
}

/** Smallest box around all outlines; null without any. */
export function boxAround(lines: Iterable<ArrayLike<number>>): Box | null {
  let [x0, y0, x1, y1] = [Infinity, Infinity, -Infinity, -Infinity];
  for (const line of lines) {
    for (let i = 0; i + 1 < line.length; i += 2) {
      x0 = Math.min(x0, line[i]);
      x1 = Math.max(x1, line[i]);
      y0 = Math.min(y0, line[i + 1]);
      y1 = Math.max(y1, line[i + 1]);
    }
  }
  return x0 <= x1 ? [x0, y0, x1, y1] : null;
}

/**
 * The pieces of each outline that no later body covers, as open polylines. A side is hidden when the later body holds
 * its middle; sides are first cut where a later body's outline crosses them.
 */
export function visibleOutlines(bodies: readonly DrawnBody[]): Float64Array[][] {
  const boxes = bodies.map((b) => boxAround(b.outlines));
  return bodies.map((body, i) => {
    const own = boxes[i];
    if (!own) return [];
    const over = bodies.filter((_, j) => j > i && boxes[j] !== null && meet(own, boxes[j]));
    return body.outlines.flatMap((outline) => visiblePieces(outline, over));
  });
}

/**
 * Parallel hatch lines (rising to the right at 45°, `spacing` apart) over what is visible of each active body.
 * Lengths in the unit of the outlines.
 */
export function hatchLines(bodies: readonly DrawnBody[], spacing: number): Float64Array[] {
  const boxes = bodies.map((b) => boxAround(b.outlines));
  const lines: Float64Array[] = [];
  bodies.forEach((body, i) => {
    const own = boxes[i];
    if (!body.active || !own) return;
    const over = bodies.filter((_, j) => j > i && boxes[j] !== null && meet(own, boxes[j]));
    // Lines are v = y − x = const, counted from the origin so that neighbours' hatches join; u = x + y runs along them.
    const [vLow, vHigh] = [own[1] - own[2], own[3] - own[0]];
    const step = spacing * Math.SQRT2;
    for (let n = Math.ceil(vLow / step); n * step <= vHigh; n++) {
      const v = n * step;
      let spans = spansAlong(body.outlines, v);
      for (const cover of over) spans = without(spans, spansAlong(cover.outlines, v));
      for (let s = 0; s < spans.length; s += 2) {
        const [u0, u1] = [spans[s], spans[s + 1]];
        lines.push(Float64Array.of((u0 - v) / 2, (u0 + v) / 2, (u1 - v) / 2, (u1 + v) / 2));
      }
    }
  });
  return lines;
}

/** Largest turn between neighbouring points of an arc, radians: sagitta 1/4000 of the radius. */
const TURN = 0.045;

export function polyline(outline: Outline): Float64Array {
  const points: number[] = [];
  for (const piece of outline) {
    const steps = piece.kind === 'line' ? 1 : Math.max(1, Math.ceil(Math.abs(piece.sweep) / TURN));
    for (let i = 0; i < steps; i++) points.push(...pointAt(piece, i / steps));
  }
  return Float64Array.from(points);
}

const meet = (a: Box, b: Box): boolean => a[0] <= b[2] && b[0] <= a[2] && a[1] <= b[3] && b[1] <= a[3];

function visiblePieces(outline: ArrayLike<number>, over: readonly DrawnBody[]): Float64Array[] {
  const n = outline.length / 2;
  const pieces: number[][] = [];
  let open: number[] | null = null;
  for (let i = 0; i < n; i++) {
    const j = (i + 1) % n;
    const [ax, ay, bx, by] = [outline[2 * i], outline[2 * i + 1], outline[2 * j], outline[2 * j + 1]];
    const cuts = [0, ...over.flatMap((body) => body.outlines.flatMap((o) => crossingsOf(ax, ay, bx, by, o))), 1];
    cuts.sort((a, b) => a - b);
    for (let c = 0; c + 1 < cuts.length; c++) {
      const [t0, t1] = [cuts[c], cuts[c + 1]];
      if (t1 <= t0) continue;
      const t = (t0 + t1) / 2;
      const [x, y] = [ax + t * (bx - ax), ay + t * (by - ay)];
      if (over.some((body) => holds(body.outlines, x, y))) {
        open = null;
        continue;
      }
      if (!open) pieces.push((open = [ax + t0 * (bx - ax), ay + t0 * (by - ay)]));
      open.push(ax + t1 * (bx - ax), ay + t1 * (by - ay));
    }
  }
  return pieces.map((p) => Float64Array.from(p));
}

/** Shares t of the way from a to b at which the closed polyline crosses. */
function crossingsOf(ax: number, ay: number, bx: number, by: number, ring: ArrayLike<number>): number[] {
  const found: number[] = [];
  const [dx, dy] = [bx - ax, by - ay];
  const n = ring.length;
  for (let i = 0; i < n; i += 2) {
    const j = i + 2 < n ? i + 2 : 0;
    const [ex, ey] = [ring[j] - ring[i], ring[j + 1] - ring[i + 1]];
    const det = dx * ey - dy * ex;
    if (det === 0) continue;
    const [fx, fy] = [ring[i] - ax, ring[i + 1] - ay];
    const t = (fx * ey - fy * ex) / det;
    const s = (fx * dy - fy * dx) / det;
    if (t > 0 && t < 1 && s >= 0 && s <= 1) found.push(t);
  }
  return found;
}

/** Even-odd of all rings together. */
export function holds(rings: readonly ArrayLike<number>[], x: number, y: number): boolean {
  let inside = false;
  for (const ring of rings) {
    const n = ring.length;
    for (let i = 0; i < n; i += 2) {
      const j = i + 2 < n ? i + 2 : 0;
      const [y0, y1] = [ring[i + 1], ring[j + 1]];
      if (y0 > y !== y1 > y && x < ring[i] + ((y - y0) / (y1 - y0)) * (ring[j] - ring[i])) inside = !inside;
    }
  }
  return inside;
}

/** Sorted u where the line y − x = v enters and leaves the rings: [in, out, in, out, …]. */
function spansAlong(rings: readonly ArrayLike<number>[], v: number): number[] {
  const cuts: number[] = [];
  for (const ring of rings) {
    const n = ring.length;
    for (let i = 0; i < n; i += 2) {
      const j = i + 2 < n ? i + 2 : 0;
      const v0 = ring[i + 1] - ring[i];
      const v1 = ring[j + 1] - ring[j];
      if (v0 > v === v1 > v) continue;
      const t = (v - v0) / (v1 - v0);
      const [u0, u1] = [ring[i] + ring[i + 1], ring[j] + ring[j + 1]];
      cuts.push(u0 + t * (u1 - u0));
    }
  }
  return cuts.sort((a, b) => a - b);
}

/** Spans minus other spans, both as sorted ends. */
function without(spans: readonly number[], holes: readonly number[]): number[] {
  const left: number[] = [];
  for (let s = 0; s + 1 < spans.length; s += 2) {
    let from = spans[s];
    const to = spans[s + 1];
    for (let h = 0; h + 1 < holes.length; h += 2) {
      if (holes[h + 1] <= from || holes[h] >= to) continue;
      if (holes[h] > from) left.push(from, holes[h]);
      from = holes[h + 1];
    }
    if (from < to) left.push(from, to);
  }
  return left;
}
