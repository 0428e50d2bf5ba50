// Where are the walls of a device or a run, as lines to draw?

import { walledSpaces } from '../device/guides.ts';
import type { Device } from '../device/model.ts';
import { sheetPieces } from '../device/reach.ts';
import { FIRST_OPENING, LAYER, type Mesh } from '../mesh/mesh.ts';
import { polyline } from './bodies.ts';
import { edgeLines } from './mesh.ts';

/** Outlines of the spaces between walls, and the sheets. */
export function wallsOfDevice(device: Pick<Device, 'enclosure' | 'guides' | 'sheets'>): {
  readonly spaces: readonly Float64Array[];
  readonly sheets: readonly Float64Array[];
} {
  return {
    spaces: walledSpaces(device).flatMap((shape) => shape.map(polyline)),
    sheets: (device.sheets ?? []).map((sheet) => {
      const pieces = sheetPieces(sheet);
      return Float64Array.from([
        ...pieces.flatMap((p) => (p.kind === 'line' ? [...p.from] : [])),
        ...sheet.points.at(-1)!,
      ]);
    }),
  };
}

/** Outer edges of the mesh that end a field: none for an open device, whose outer edge is the layer's end or its rim. */
export function wallsOfMesh(mesh: Mesh, pixelsPerLength: number): Float64Array[] {
  const { edgeFree } = mesh;
  if (!edgeFree) return [];
  return edgeLines(mesh, pixelsPerLength).filter(
    (_, e) =>
      mesh.edgeTriangles[2 * e + 1] < 0 &&
      mesh.regions[mesh.edgeTriangles[2 * e]] !== LAYER &&
      edgeFree[e] < FIRST_OPENING,
  );
}
