// Where do two pieces of boundary meet?

import type { ArcPiece, CurvePiece, LinePiece, Point } from './curves.ts';
import { pointAt } from './curves.ts';
import { angleOfPoint, parameterOfAngle, velocityAt } from './pieces.ts';

/** A common point: parameter s ∈ [0, 1] on the first piece, t on the second. */
export interface Meeting {
  readonly s: number;
  readonly t: number;
  readonly point: Point;
}

/**
 * The points that two pieces (arcs of at most half a turn) share: crossings, touches to within `tolerance`, and ends
 * that lie on the other piece. Where pieces run together within the tolerance only their ends are given.
 *
 * One piece is put into the implicit equation of the other: a trigonometric polynomial f of degree ≤ 2 in the angle. Its
 * extrema, isolated by bounds of f″ and f‴, cut the arc into stretches where f is monotone: one root each at most.
 */
export function meetings(a: CurvePiece, b: CurvePiece, tolerance: number): Meeting[] {
  // The smaller arc goes into the equation of the larger piece: less cancellation.
  const swap = a.kind === 'line' ? b.kind === 'arc' : b.kind === 'arc' && largest(b) < largest(a);
  if (swap) return meetings(b, a, tolerance).map(({ s, t, point }) => ({ s: t, t: s, point }));
  const found = endsOn(a, b, tolerance);
  if (runTogether(a, b, tolerance)) return found;
  const ends = found.map(({ s }) => s);
  const f = offsetOf(a, b);
  const marks = [0, ...extremaOf(f), 1];
  const touches = marks.map((s) => Math.abs(f.distance(s)) <= tolerance);
  const accept = (s: number): void => {
    const point = pointAt(a, s);
    const t = parameterOn(b, point, tolerance);
    if (!Number.isNaN(t)) found.push({ s, t, point });
  };
  const holdsEnd = (i: number): boolean => ends.some((s) => s >= marks[i] && s <= marks[i + 1]);
  for (let i = 1; i < marks.length - 1; i++)
    // A touch beside an end that lies on the other piece is that end.
    if (touches[i] && !holdsEnd(i - 1) && !holdsEnd(i)) accept(marks[i]);
  for (let i = 0; i < marks.length - 1; i++) {
    if (touches[i] || touches[i + 1] || holdsEnd(i)) continue;
    if (f.distance(marks[i]) * f.distance(marks[i + 1]) < 0) accept(rootBetween(f, marks[i], marks[i + 1]));
  }
  return found;
}

/**
 * The place where two pieces that do not meet come nearest, if that is at an end or where they run parallel: the gap
 * there (first order: right when it is small against both radii) and a point of the gap.
 */
export function closestApproach(a: CurvePiece, b: CurvePiece): { gap: number; point: Point } | null {
  if (a.kind === 'line' && b.kind === 'arc') return closestApproach(b, a);
  let best: { gap: number; point: Point } | null = null;
  const consider = (on: CurvePiece, s: number, other: CurvePiece): void => {
    const [x, y] = pointAt(on, s);
    const t = parameterOn(other, [x, y], 0);
    if (Number.isNaN(t)) return;
    const [u, v] = pointAt(other, t);
    const gap = Math.hypot(x - u, y - v);
    if (!best || gap < best.gap) best = { gap, point: [(x + u) / 2, (y + v) / 2] };
  };
  for (const s of [0, ...extremaOf(offsetOf(a, b)), 1]) consider(a, s, b);
  for (const t of [0, 1]) consider(b, t, a);
  for (const s of [0, 1])
    for (const t of [0, 1]) {
      const [x, y] = pointAt(a, s);
      const [u, v] = pointAt(b, t);
      const gap = Math.hypot(x - u, y - v);
      if (!best || gap < (best as { gap: number }).gap) best = { gap, point: [(x + u) / 2, (y + v) / 2] };
    }
  return best;
}

const largest = (arc: ArcPiece): number => Math.max(arc.radii[0], arc.radii[1]);

/** Ends of either piece that lie on the other. */
function endsOn(a: CurvePiece, b: CurvePiece, tolerance: number): Meeting[] {
  const found: Meeting[] = [];
  for (const end of [0, 1]) {
    const p = pointAt(a, end);
    const t = incidence(b, p, tolerance);
    if (!Number.isNaN(t)) found.push({ s: end, t, point: p });
    const q = pointAt(b, end);
    const s = incidence(a, q, tolerance);
    if (!Number.isNaN(s)) found.push({ s, t: end, point: q });
  }
  return found;
}

/** Parameter of the nearest point of the piece when the point lies on it, else NaN. */
function incidence(piece: CurvePiece, point: Point, tolerance: number): number {
  const s = parameterOn(piece, point, tolerance);
  if (Number.isNaN(s)) return NaN;
  const [x, y] = pointAt(piece, s);
  return Math.hypot(x - point[0], y - point[1]) <= tolerance ? s : NaN;
}

/** Parameter of the foot of the point, clamped when it passes an end by no more than the tolerance; else NaN. */
function parameterOn(piece: CurvePiece, [x, y]: Point, tolerance: number): number {
  let s: number;
  if (piece.kind === 'line') {
    const [dx, dy] = velocityAt(piece, 0);
    s = ((x - piece.from[0]) * dx + (y - piece.from[1]) * dy) / (dx * dx + dy * dy);
  } else {
    s = parameterOfAngle(piece, angleOfPoint(piece, x, y));
    // Two Newton steps to the foot: (p − q)·p′ = 0, the term in p″ left out (the point is near or it does not matter).
    for (let step = 0; step < 2; step++) {
      const [px, py] = pointAt(piece, s);
      const [vx, vy] = velocityAt(piece, s);
      const change = ((x - px) * vx + (y - py) * vy) / (vx * vx + vy * vy);
      if (Math.abs(change) > 0.1) break;
      s += change;
    }
  }
  const slack = tolerance / Math.hypot(...velocityAt(piece, Math.max(0, Math.min(1, s))));
  if (s < -slack || s > 1 + slack) return NaN;
  return Math.max(0, Math.min(1, s));
}

/** Whether the curves that carry both pieces are one within the tolerance. */
function runTogether(a: CurvePiece, b: CurvePiece, tolerance: number): boolean {
  if (a.kind !== b.kind) return false;
  if (a.kind === 'line') {
    const f = offsetOf(a, b);
    return Math.abs(f.distance(0)) <= tolerance && Math.abs(f.distance(1)) <= tolerance;
  }
  const whole: ArcPiece = { ...a, start: 0, sweep: 2 * Math.PI };
  const f = offsetOf(whole, b);
  for (let i = 0; i < 8; i++) if (Math.abs(f.distance((i + 0.3) / 8)) > tolerance) return false;
  return true;
}

/** How far, with sign, the point s of one piece lies off the curve that carries another. */
interface Offset {
  readonly distance: (s: number) => number;
  /** Harmonics 1, cos, sin, cos 2·, sin 2· of the implicit equation in the angle; null for a line (linear in s). */
  readonly harmonics: readonly number[] | null;
  /** Angle = start + s sweep. */
  readonly start: number;
  readonly sweep: number;
  /** About how much length one unit of f is worth. */
  readonly length: number;
}

function offsetOf(a: CurvePiece, b: CurvePiece): Offset {
  const distance = b.kind === 'line' ? distanceToLine(b) : distanceToEllipse(b);
  const at = (s: number): number => distance(pointAt(a, s));
  if (a.kind === 'line') return { distance: at, harmonics: null, start: 0, sweep: 1, length: 1 };
  // p(t) = center + P cos t + Q sin t
  const c = Math.cos(a.tilt);
  const d = Math.sin(a.tilt);
  const p: Point = [c * a.radii[0], d * a.radii[0]];
  const q: Point = [-d * a.radii[1], c * a.radii[1]];
  const { start, sweep } = a;
  if (b.kind === 'line') {
    const [dx, dy] = velocityAt(b, 0);
    const length = Math.hypot(dx, dy);
    const across = ([x, y]: Point): number => (dx * y - dy * x) / length;
    const offset = across([a.center[0] - b.from[0], a.center[1] - b.from[1]]);
    return { distance: at, harmonics: [offset, across(p), across(q), 0, 0], start, sweep, length: 1 };
  }
  const cb = Math.cos(b.tilt);
  const db = Math.sin(b.tilt);
  const inner = ([x, y]: Point): Point => [(cb * x + db * y) / b.radii[0], (cb * y - db * x) / b.radii[1]];
  const o = inner([a.center[0] - b.center[0], a.center[1] - b.center[1]]);
  const u = inner(p);
  const v = inner(q);
  const dot = (m: Point, n: Point): number => m[0] * n[0] + m[1] * n[1];
  const harmonics = [
    dot(o, o) - 1 + (dot(u, u) + dot(v, v)) / 2,
    2 * dot(o, u),
    2 * dot(o, v),
    (dot(u, u) - dot(v, v)) / 2,
    dot(u, v),
  ];
  return { distance: at, harmonics, start, sweep, length: Math.min(b.radii[0], b.radii[1]) / 2 };
}

function distanceToLine(b: LinePiece): (p: Point) => number {
  const [dx, dy] = velocityAt(b, 0);
  const length = Math.hypot(dx, dy);
  return ([x, y]) => (dx * (y - b.from[1]) - dy * (x - b.from[0])) / length;
}

/** To first order: F/|∇F| with F = |w| − 1 in the frame where the ellipse is the unit circle. */
function distanceToEllipse(b: ArcPiece): (p: Point) => number {
  const c = Math.cos(b.tilt);
  const d = Math.sin(b.tilt);
  const [rx, ry] = b.radii;
  return ([px, py]) => {
    const x = c * (px - b.center[0]) + d * (py - b.center[1]);
    const y = c * (py - b.center[1]) - d * (px - b.center[0]);
    const w = Math.hypot(x / rx, y / ry);
    if (rx === ry) return Math.hypot(x, y) - rx;
    if (w === 0) return -Math.min(rx, ry);
    return ((w - 1) * w) / Math.hypot(x / rx / rx, y / ry / ry);
  };
}

/** Extrema of f between s = 0 and 1, in increasing order. */
function extremaOf({ harmonics, start, sweep, length }: Offset): number[] {
  if (!harmonics) return [];
  const [, c1, s1, c2, s2] = harmonics;
  const first = Math.hypot(c1, s1);
  const second = Math.hypot(c2, s2);
  const scale = Math.abs(harmonics[0]) + first + second;
  // Nearly constant: concentric circles.
  if (first + second <= 1e-14 * scale || (first + second) * length === 0) return [];
  const slope = (t: number): number =>
    -c1 * Math.sin(t) + s1 * Math.cos(t) - 2 * c2 * Math.sin(2 * t) + 2 * s2 * Math.cos(2 * t);
  const bend = (t: number): number =>
    -c1 * Math.cos(t) - s1 * Math.sin(t) - 4 * c2 * Math.cos(2 * t) - 4 * s2 * Math.sin(2 * t);
  const found: number[] = [];
  const search = (a: number, b: number): void => {
    const m = (a + b) / 2;
    const w = (b - a) / 2;
    if (Math.abs(slope(m)) > (first + 4 * second) * w) return;
    if (Math.abs(bend(m)) > (first + 8 * second) * w) {
      if (slope(a) * slope(b) < 0) found.push(bisect(slope, a, b));
      return;
    }
    if (w < 1e-8) {
      found.push(m);
      return;
    }
    search(a, m);
    search(m, b);
  };
  search(Math.min(start, start + sweep), Math.max(start, start + sweep));
  return found
    .map((t) => (t - start) / sweep)
    .filter((s) => s > 0 && s < 1)
    .sort((p, q) => p - q);
}

const rootBetween = (f: Offset, a: number, b: number): number => bisect(f.distance, a, b);

/** Root of f where f(a) f(b) < 0, to rounding: regula falsi with Illinois weights, then bisection. */
function bisect(f: (x: number) => number, a: number, b: number): number {
  let fa = f(a);
  let fb = f(b);
  for (let step = 0; step < 200; step++) {
    // Every third step halves, so that the interval surely shrinks.
    let m = step % 3 === 2 ? (a + b) / 2 : a - (fa * (b - a)) / (fb - fa);
    if (!(m > a && m < b)) m = (a + b) / 2;
    const fm = f(m);
    if (fm === 0 || m === a || m === b) return m;
    if (fm * fb < 0) {
      a = b;
      fa = fb;
    } else fa /= 2;
    b = m;
    fb = fm;
    if (Math.abs(b - a) <= 4e-16 * Math.max(Math.abs(a), Math.abs(b))) break;
    if (a > b) [a, b, fa, fb] = [b, a, fb, fa];
  }
  return Math.abs(fa) < Math.abs(fb) ? a : b;
}
