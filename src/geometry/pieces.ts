// Where does a piece of boundary go, how fast does it turn, and what is a part of it?

import type { CurvePiece, Point } from './curves.ts';
import { pointAt } from './curves.ts';

/** Derivative dp/ds at s ∈ [0, 1]. */
export function velocityAt(piece: CurvePiece, s: number): Point {
  if (piece.kind === 'line') return [piece.to[0] - piece.from[0], piece.to[1] - piece.from[1]];
  const t = piece.start + s * piece.sweep;
  const x = -piece.radii[0] * Math.sin(t) * piece.sweep;
  const y = piece.radii[1] * Math.cos(t) * piece.sweep;
  const c = Math.cos(piece.tilt);
  const d = Math.sin(piece.tilt);
  return [c * x - d * y, d * x + c * y];
}

/** Signed curvature at s ∈ [0, 1], 1/length: positive where the piece turns left. κ = rx ry / |dp/dt|³. */
export function curvatureAt(piece: CurvePiece, s: number): number {
  if (piece.kind === 'line') return 0;
  const [rx, ry] = piece.radii;
  const t = piece.start + s * piece.sweep;
  const speed = Math.hypot(rx * Math.sin(t), ry * Math.cos(t));
  return (Math.sign(piece.sweep) * ((rx / speed) * (ry / speed))) / speed;
}

/** The part from s0 to s1; s0 > s1 gives it reversed. */
export function partOf(piece: CurvePiece, s0: number, s1: number): CurvePiece {
  if (piece.kind === 'line') return { kind: 'line', from: pointAt(piece, s0), to: pointAt(piece, s1) };
  return { ...piece, start: piece.start + s0 * piece.sweep, sweep: (s1 - s0) * piece.sweep };
}

export const reversed = (piece: CurvePiece): CurvePiece => partOf(piece, 1, 0);

/** Smallest box around the piece: [xmin, ymin, xmax, ymax]. */
export function boxOf(piece: CurvePiece): [number, number, number, number] {
  const a = pointAt(piece, 0);
  const b = pointAt(piece, 1);
  const box: [number, number, number, number] = [
    Math.min(a[0], b[0]),
    Math.min(a[1], b[1]),
    Math.max(a[0], b[0]),
    Math.max(a[1], b[1]),
  ];
  if (piece.kind === 'line') return box;
  const [rx, ry] = piece.radii;
  const c = Math.cos(piece.tilt);
  const d = Math.sin(piece.tilt);
  for (const angle of [Math.atan2(-d * ry, c * rx), Math.atan2(c * ry, d * rx)]) {
    for (const t of [angle, angle + Math.PI]) {
      const s = parameterOfAngle(piece, t);
      if (s < 0 || s > 1) continue;
      const p = pointAt(piece, s);
      box[0] = Math.min(box[0], p[0]);
      box[1] = Math.min(box[1], p[1]);
      box[2] = Math.max(box[2], p[0]);
      box[3] = Math.max(box[3], p[1]);
    }
  }
  return box;
}

/** The s that belongs to angle t of an arc, moved by turns so that it lies as near to [0, 1] as it can. */
export function parameterOfAngle(piece: CurvePiece & { kind: 'arc' }, t: number): number {
  const turn = (2 * Math.PI) / Math.abs(piece.sweep);
  let s = (t - piece.start) / piece.sweep;
  s -= Math.floor(s / turn) * turn;
  // s ∈ [0, turn): a little below one turn may mean a little below zero.
  return s > 1 && turn - s < s - 1 ? s - turn : s;
}

/** Angle parameter of the ellipse point nearest in the affine sense to (x, y). */
export function angleOfPoint(piece: CurvePiece & { kind: 'arc' }, x: number, y: number): number {
  const c = Math.cos(piece.tilt);
  const d = Math.sin(piece.tilt);
  const dx = x - piece.center[0];
  const dy = y - piece.center[1];
  return Math.atan2((c * dy - d * dx) / piece.radii[1], (c * dx + d * dy) / piece.radii[0]);
}

/** Length by Gauss–Legendre quadrature of the speed, 16 panels of 4 points for an arc. */
export function lengthOf(piece: CurvePiece): number {
  if (piece.kind === 'line') return Math.hypot(piece.to[0] - piece.from[0], piece.to[1] - piece.from[1]);
  if (piece.radii[0] === piece.radii[1]) return Math.abs(piece.radii[0] * piece.sweep);
  const nodes = [-0.8611363115940526, -0.3399810435848563, 0.3399810435848563, 0.8611363115940526];
  const weights = [0.3478548451374538, 0.6521451548625461, 0.6521451548625461, 0.3478548451374538];
  const panels = 16;
  let sum = 0;
  for (let i = 0; i < panels; i++)
    for (let j = 0; j < 4; j++) sum += weights[j] * Math.hypot(...velocityAt(piece, (i + 0.5 + nodes[j] / 2) / panels));
  return sum / (2 * panels);
}
