// What does a mesh look like?

import { BACKGROUND, LAYER, type Mesh } from '../mesh/mesh.ts';
import { lagrangeBasis, lagrangeInto, type LagrangeBasis } from '../numerics/polynomials.ts';
import { gaussLobatto } from '../numerics/quadrature.ts';
import type { RunView } from '../results/run-view.ts';
import { bytesOf, hexOf, type Palette } from '../results/colours.ts';
import { fill, stroke, type Drawing, type Item } from './drawing.ts';
import { heading, MARGIN, scaleBar, settle, viewOf, type FigureOptions } from './frame.ts';

export interface MeshFigureOptions extends FigureOptions {
  /** 'none' if absent. */
  readonly lengthUnit?: string;
  /** Whether body i is active; those are tinted. */
  readonly active?: readonly boolean[];
  /** Order of the elements, for the caption. */
  readonly order?: number;
  /** Draws the stretched layer too; true if absent. */
  readonly layer?: boolean;
}

/** The triangles with their true curved edges, tinted by what they belong to; edges between regions are heavier. */
export function meshFigure(mesh: Mesh, options: MeshFigureOptions = {}): Drawing {
  const settled = settle(options);
  const { palette, width } = settled;
  const withLayer = options.layer ?? true;
  const below = captionOf(mesh, options.order);
  const head = heading(options.title ?? 'Mesh', below, settled);
  const side = width - 2 * MARGIN;
  const reach = (withLayer ? mesh.endRadius : mesh.rimRadius) * 1.01;
  const [cx, cy] = mesh.center;
  const view = viewOf([cx - reach, cy - reach, cx + reach, cy + reach], MARGIN, head.bottom, side, side);

  const edges = edgeLines(mesh, view.scale).map((l) => view.line(l));
  const shown = (region: number): boolean => withLayer || region !== LAYER;
  const tinted = new Map<string, Float64Array[]>();
  for (let t = 0; t < mesh.regions.length; t++) {
    if (!shown(mesh.regions[t])) continue;
    const tint = tintOf(mesh.regions[t], options.active ?? [], palette);
    const rings = tinted.get(tint);
    if (rings) rings.push(triangleRing(mesh, t, edges));
    else tinted.set(tint, [triangleRing(mesh, t, edges)]);
  }
  const inner: Float64Array[] = [];
  const between: Float64Array[] = [];
  for (let e = 0; e < edges.length; e++) {
    const sides = [mesh.edgeTriangles[2 * e], mesh.edgeTriangles[2 * e + 1]];
    const regions = sides.filter((t) => t >= 0).map((t) => mesh.regions[t]);
    if (!regions.some(shown)) continue;
    (regions.length === 2 && regions[0] === regions[1] ? inner : between).push(edges[e]);
  }
  const items: Item[] = [
    ...head.items,
    ...[...tinted].map(([tint, rings]) => fill(rings, tint)),
    stroke(inner, palette.muted, 0.6, { opacity: 0.75 }),
    stroke(between, palette.ink, 1.3),
    ...scaleBar(view, options.lengthUnit ?? 'none', MARGIN, head.bottom + side - 2, side / 5, palette),
  ];
  return {
    width,
    height: Math.ceil(head.bottom + side + MARGIN * 0.7),
    ground: palette.ground,
    description: `Mesh: ${below}.`,
    items,
  };
}

/** The mesh stored in a run. */
export function meshOfRun(run: RunView): Mesh {
  const { mesh } = run.record;
  const get = (name: Exclude<keyof typeof mesh.arrays, 'edgeFree'>): never => run.array(mesh.arrays[name]) as never;
  return {
    vertices: get('vertices'),
    triangles: get('triangles'),
    regions: get('regions'),
    edges: get('edges'),
    triangleEdges: get('triangleEdges'),
    edgeTriangles: get('edgeTriangles'),
    edgeCurve: get('edgeCurve'),
    curves: get('curves'),
    curveOrder: mesh.curveOrder,
    center: mesh.center,
    rimRadius: mesh.rimRadius,
    endRadius: mesh.endRadius,
    ...(mesh.arrays.edgeFree === undefined ? {} : { edgeFree: run.array(mesh.arrays.edgeFree) as Int32Array }),
  };
}

/** Every edge as a polyline from its lower vertex to its higher one, length units. */
export function edgeLines(mesh: Mesh, pixelsPerLength: number): Float64Array[] {
  const { vertices, edges, edgeCurve, curves, curveOrder } = mesh;
  const g = curveOrder;
  const basis = lagrangeBasis(gaussLobatto(Math.max(1, g) + 1).nodes);
  return Array.from({ length: edges.length / 2 }, (_, e) => {
    const [a, b] = [edges[2 * e], edges[2 * e + 1]];
    const ends = [vertices[2 * a], vertices[2 * a + 1], vertices[2 * b], vertices[2 * b + 1]];
    if (edgeCurve[e] < 0) return Float64Array.from(ends);
    const nodes = curves.subarray(2 * (g + 1) * edgeCurve[e], 2 * (g + 1) * (edgeCurve[e] + 1));
    const long = Math.hypot(ends[2] - ends[0], ends[3] - ends[1]) * pixelsPerLength;
    return curveLine(nodes, basis, Math.min(32, Math.max(4, Math.ceil(long / 6))));
  });
}

function curveLine(nodes: Float64Array, basis: LagrangeBasis, steps: number): Float64Array {
  const line = new Float64Array(2 * (steps + 1));
  const values = new Float64Array(basis.nodes.length);
  for (let i = 0; i <= steps; i++) {
    lagrangeInto(values, basis, -1 + (2 * i) / steps);
    for (let j = 0; j < values.length; j++) {
      line[2 * i] += values[j] * nodes[2 * j];
      line[2 * i + 1] += values[j] * nodes[2 * j + 1];
    }
  }
  return line;
}

/** The three edges of a triangle end to end, as one closed polyline. */
function triangleRing(mesh: Mesh, t: number, edges: readonly Float64Array[]): Float64Array {
  const ring: number[] = [];
  for (let i = 0; i < 3; i++) {
    const e = mesh.triangleEdges[3 * t + i];
    const line = edges[e];
    const n = line.length / 2;
    const forward = mesh.triangles[3 * t + i] === mesh.edges[2 * e];
    for (let s = 0; s + 1 < n; s++) {
      const at = forward ? s : n - 1 - s;
      ring.push(line[2 * at], line[2 * at + 1]);
    }
  }
  return Float64Array.from(ring);
}

function tintOf(region: number, active: readonly boolean[], palette: Palette): string {
  if (region === BACKGROUND) return palette.ground;
  if (region === LAYER) return mixed(palette.ground, palette.muted, 0.16);
  return active[region] ? mixed(palette.ground, palette.accent, 0.16) : mixed(palette.ground, palette.faint, 0.6);
}

function mixed(a: string, b: string, share: number): string {
  const [from, to] = [bytesOf(a), bytesOf(b)];
  return hexOf(from.map((v, i) => Math.round(v + share * (to[i] - v))));
}

function captionOf(mesh: Mesh, order: number | undefined): string {
  const count = mesh.regions.length;
  const curved = mesh.edgeCurve.reduce((sum, c) => sum + (c >= 0 ? 1 : 0), 0);
  return [
    `${count.toLocaleString('en-US')} triangles`,
    curved > 0
      ? `${curved.toLocaleString('en-US')} curved edges of degree ${String(mesh.curveOrder)}`
      : 'straight edges',
    order === undefined ? '' : `elements of order ${String(order)}`,
    `smallest angle ${smallestAngle(mesh).toFixed(1)}°`,
  ]
    .filter((s) => s !== '')
    .join('  ·  ');
}

/** Of the straight triangles, degrees. */
function smallestAngle({ vertices, triangles }: Mesh): number {
  let least = Infinity;
  for (let t = 0; t < triangles.length; t += 3) {
    for (let i = 0; i < 3; i++) {
      const [a, b, c] = [0, 1, 2].map((k) => triangles[t + ((i + k) % 3)]);
      const [ux, uy] = [vertices[2 * b] - vertices[2 * a], vertices[2 * b + 1] - vertices[2 * a + 1]];
      const [vx, vy] = [vertices[2 * c] - vertices[2 * a], vertices[2 * c + 1] - vertices[2 * a + 1]];
      least = Math.min(least, Math.atan2(Math.abs(ux * vy - uy * vx), ux * vx + uy * vy));
    }
  }
  return (least * 180) / Math.PI;
}
