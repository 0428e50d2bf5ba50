// How far apart are the spaces that two lists of drives span?

import { addProduct, adjointProduct, columnNorm, orthonormalBasis } from '../eigen/columns.ts';
import type { Multipoles } from './contrast.ts';

/** Sine of the angle by which drives of the second list, at unit power, leave the space of the first; 0 … 1. */
export function angleOfSpaces(of: readonly Multipoles[], from: readonly Multipoles[]): number {
  const n = of[0].length / 2;
  const basis = orthonormalBasis(side(of), of.length, n);
  const rest = orthonormalBasis(side(from), from.length, n);
  addProduct(rest, basis, of.length, adjointProduct(basis, of.length, rest, from.length, n), from.length, n, -1);
  return Math.min(1, Math.hypot(...from.map((_, j) => columnNorm(rest, j, n))));
}

/** The drives side by side, drives × (2M + 1). */
function side(drives: readonly Multipoles[]): Float64Array {
  const out = new Float64Array(drives.length * drives[0].length);
  drives.forEach((drive, j) => out.set(drive, j * drive.length));
  return out;
}
