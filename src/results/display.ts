// Which points and triangles draw a high-order field faithfully?

import { tabulateBasis } from '../elements/basis.ts';
import { MAP_STRIDE, mapInto, tabulateMap } from '../elements/curved-map.ts';
import { evaluateInto } from '../elements/evaluate.ts';
import type { Space } from '../elements/space.ts';
import { LAYER, type Mesh } from '../mesh/mesh.ts';
import type { ComplexArray } from '../numerics/complex.ts';

/** Straight triangles that follow curved ones; each mesh triangle has its own points. */
export interface DisplayMesh {
  readonly points: Float64Array;
  readonly triangles: Uint32Array;
  readonly regions: Int32Array;
  /** Of the largest |u|: what linear interpolation between the points may be off by. */
  readonly tolerance: number;
  /** Sub-division of each mesh triangle (0: not drawn), for sampling fields. */
  readonly cuts: Int32Array;
}

export const DISPLAY_TOLERANCE = 0.01;
const MOST_CUTS = 24;

/**
 * Cuts every triangle inside the rim into N² parts with (κh/N)²/8 ≤ tolerance, κ the local wavenumber and h the longest
 * side: the error of linear interpolation of a wave.
 *
 * @param wavenumber of each region inside the rim, 1/length unit: index body + 1, 0 the background.
 */
export function displayMesh(mesh: Mesh, wavenumber: readonly number[]): DisplayMesh {
  const triangles = mesh.regions.length;
  const cuts = new Int32Array(triangles);
  for (let t = 0; t < triangles; t++) {
    if (mesh.regions[t] === LAYER) continue;
    let side = 0;
    for (let e = 0; e < 3; e++) {
      const a = mesh.triangles[3 * t + e];
      const b = mesh.triangles[3 * t + ((e + 1) % 3)];
      side = Math.max(
        side,
        Math.hypot(mesh.vertices[2 * a] - mesh.vertices[2 * b], mesh.vertices[2 * a + 1] - mesh.vertices[2 * b + 1]),
      );
    }
    const phase = wavenumber[mesh.regions[t] + 1] * side;
    cuts[t] = Math.max(2, Math.min(MOST_CUTS, Math.ceil(phase / Math.sqrt(8 * DISPLAY_TOLERANCE))));
  }
  const points: number[] = [];
  const faces: number[] = [];
  const regions: number[] = [];
  for (let t = 0; t < triangles; t++) {
    const n = cuts[t];
    if (n === 0) continue;
    const base = points.length / 2;
    const places = mapInto(
      new Float64Array(MAP_STRIDE * pointCount(n)),
      mesh,
      t,
      cached(MAPS, `${n} ${mesh.curveOrder}`, () => tabulateMap(lattice(n), mesh.curveOrder)),
    );
    for (let i = 0; i < pointCount(n); i++) points.push(places[MAP_STRIDE * i], places[MAP_STRIDE * i + 1]);
    const at = (row: number, column: number): number => base + row * (n + 1) - (row * (row - 1)) / 2 + column;
    for (let row = 0; row < n; row++) {
      for (let column = 0; column < n - row; column++) {
        faces.push(at(row, column), at(row, column + 1), at(row + 1, column));
        regions.push(mesh.regions[t]);
        if (column + 1 < n - row) {
          faces.push(at(row, column + 1), at(row + 1, column + 1), at(row + 1, column));
          regions.push(mesh.regions[t]);
        }
      }
    }
  }
  return {
    points: Float64Array.from(points),
    triangles: Uint32Array.from(faces),
    regions: Int32Array.from(regions),
    tolerance: DISPLAY_TOLERANCE,
    cuts,
  };
}

/** The field at every display point, interleaved (f32). */
export function sampleField(space: Space, display: DisplayMesh, field: ComplexArray): Float32Array {
  const out = new Float32Array(display.points.length);
  let at = 0;
  const work = new Float64Array(2 * pointCount(MOST_CUTS));
  for (let t = 0; t < display.cuts.length; t++) {
    const n = display.cuts[t];
    if (n === 0) continue;
    const table = cached(TABLES, `${n} ${space.order}`, () => tabulateBasis(space.order, lattice(n)));
    evaluateInto(work, space, field, t, table);
    for (let i = 0; i < 2 * pointCount(n); i++) out[at++] = work[i]!;
  }
  return out;
}

const pointCount = (n: number): number => ((n + 1) * (n + 2)) / 2;

/** Points (column/n, row/n) of the reference triangle, row by row. */
function lattice(n: number): Float64Array {
  const out = new Float64Array(2 * pointCount(n));
  let at = 0;
  for (let row = 0; row <= n; row++) {
    for (let column = 0; column <= n - row; column++) {
      out[at++] = column / n;
      out[at++] = row / n;
    }
  }
  return out;
}

const MAPS = new Map<string, ReturnType<typeof tabulateMap>>();
const TABLES = new Map<string, ReturnType<typeof tabulateBasis>>();

function cached<T>(store: Map<string, T>, key: string, make: () => T): T {
  let value = store.get(key);
  if (value === undefined) {
    value = make();
    store.set(key, value);
  }
  return value;
}
