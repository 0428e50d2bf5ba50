// How does a device become a mesh?

import type { Body } from '../device/model.ts';
import { arrangeShapes } from '../geometry/arrangement.ts';
import type { Arrangement, ArrangementEdge, OverlayRules } from '../geometry/arrangement.ts';
import type { Outline, Point, Shape } from '../geometry/curves.ts';
import { pointAt } from '../geometry/curves.ts';
import { GeometryError } from '../geometry/geometry-error.ts';
import { cutAlong } from './cut-along.ts';
import { CURVE_ORDER, Draft, OUTSIDE } from './delaunay-refinement.ts';
import { discretise, sizeField } from './discretisation.ts';
import type { EdgeCause, Mesh, MeshPlan, WallPlan } from './mesh.ts';
import { BACKGROUND, LAYER } from './mesh.ts';

/** Points nearer than this share of the end radius are one point. */
const SNAP = 1e-10;

/** Triangles whose Jacobian varies by more than this factor get smaller curved sides. */
const LEAST_JACOBIAN_RATIO = 0.2;

/** A mesh that would need more vertices than this is refused. */
const MOST_VERTICES = 50_000;

/** The mesh of a device, and what had to be changed for it, in words. */
export interface MeshedDevice {
  readonly mesh: Mesh;
  readonly notes: readonly string[];
}

/**
 * The mesh of the bodies inside the rim, of the background between them and of the layer outside the rim.
 * Throws a GeometryError when the drawing cannot be meshed.
 */
export const meshDevice = (bodies: readonly Body[], plan: MeshPlan): Mesh => meshDeviceWithNotes(bodies, plan).mesh;

export function meshDeviceWithNotes(bodies: readonly Body[], plan: MeshPlan): MeshedDevice {
  checkPlan(bodies, plan);
  const { center, endRadius } = plan;
  const { shapes, names, rules } = overlayOf(bodies, plan);
  const full = arrangeShapes(shapes, names, SNAP * endRadius, rules);
  if (!plan.walls?.spaces.length) checkInsideRim(full, names, bodies.length);
  // what is not meshed is all one outside
  const outer = (label: number): number => (rules.isVoid(label) ? OUTSIDE : label);
  const arrangement: Arrangement = {
    ...full,
    edges: full.edges.map((edge) => ({ ...edge, left: outer(edge.left), right: outer(edge.right) })),
  };
  const base = (label: number): number =>
    label >= 2
      ? plan.bodySizes[label - 2]
      : label === 1
        ? plan.backgroundSize
        : label === 0
          ? plan.layerSize
          : Infinity;
  const { cornerGrading, largestArc, wishes = [] } = plan;
  const { walls } = plan;
  const discretisation = discretise(arrangement, {
    ofLabel: base,
    cornerGrading,
    largestArc,
    wishes,
    ...(walls
      ? {
          endOf: (i: number) => {
            const edge = full.edges[i];
            const [x, y] = pointAt(edge.piece, 0.5);
            return walls.endOf(walls.tagOf({ ...causeOf(edge, bodies.length, walls), middle: [x, y] }));
          },
          cornerShare: walls.cornerShare,
          mediumOf: (label: number) => walls.mediumOf(label - 2 < 0 ? -1 : label - 2),
        }
      : {}),
  });
  const field = sizeField(wishes);
  const draft = new Draft(arrangement, names, discretisation, base, field, center, endRadius, MOST_VERTICES);
  for (const stretch of [1.1]) {
    draft.refine(24, stretch);
    draft.smooth(4);
  }
  draft.refine(28);
  draft.smooth(4);
  draft.refine(28);
  for (let round = 0; draft.straighten(LEAST_JACOBIAN_RATIO) > 0; round++) {
    if (round === 20)
      throw new GeometryError('The curved outlines cannot be meshed: their triangles stay folded.', [], center);
    draft.refine(28);
  }
  const { mesh, sheets } = meshOf(draft, plan, full, bodies.length);
  return { mesh: sheets.size > 0 ? cutAlong(mesh, sheets) : mesh, notes: arrangement.notes };
}

interface Overlay {
  readonly shapes: readonly Shape[];
  readonly names: readonly string[];
  readonly rules: Required<OverlayRules>;
}

/**
 * Labels of the arrangement: 0 the layer, 1 the background, 2 + i body i, 2 + n + j half plane j beyond a symmetry line.
 * The first shapes stand for these labels; further spaces and layers follow them and share the labels 1 and 0.
 */
function overlayOf(bodies: readonly Body[], plan: MeshPlan): Overlay {
  const { center, rimRadius, endRadius, walls } = plan;
  const n = bodies.length;
  const spaces = walls?.spaces.length ? walls.spaces : [[circle(center, rimRadius)]];
  const layers = walls?.spaces.length ? walls.layers : [[circle(center, endRadius)]];
  const beyond = walls?.beyond ?? [];
  const tail = 2 + n + beyond.length;
  const moreSpaces = spaces.slice(1);
  const shapes = [
    layers[0] ?? spaces[0],
    spaces[0],
    ...bodies.map((body) => body.shape),
    ...beyond,
    ...moreSpaces,
    ...layers.slice(1),
  ];
  const names = [
    'end of the layer',
    walls?.spaces.length ? 'enclosure' : 'rim',
    ...bodies.map((body) => body.name),
    ...beyond.map(() => 'symmetry line'),
  ];
  const inSome = (inside: Uint8Array, from: number, to: number): boolean => {
    for (let i = from; i < to; i++) if (inside[i]) return true;
    return false;
  };
  return {
    shapes,
    names,
    rules: {
      regionOf: (inside) => {
        for (let i = tail - 1; i >= 2 + n; i--) if (inside[i]) return i;
        const inSpace = inside[1] === 1 || inSome(inside, tail, tail + moreSpaces.length);
        const inLayer =
          (layers.length > 0 && inside[0] === 1) || inSome(inside, tail + moreSpaces.length, shapes.length);
        if (!inSpace && !walls?.spaces.length) {
          // bodies that leave the rim are told apart from the layer, to be refused
          for (let i = 1 + n; i >= 2; i--) if (inside[i]) return i;
        }
        if (!inSpace) return inLayer ? 0 : -1;
        for (let i = 1 + n; i >= 2; i--) if (inside[i]) return i;
        return 1;
      },
      isVoid: (label) => label < 0 || label >= 2 + n || (walls?.metal.has(label - 2) ?? false),
      sheets: walls?.sheets.map((sheet) => sheet.pieces) ?? [],
    },
  };
}

const circle = (center: Point, radius: number): Outline => [
  { kind: 'arc', center, radii: [radius, radius], tilt: 0, start: 0, sweep: 2 * Math.PI },
];

function checkPlan(bodies: readonly Body[], plan: MeshPlan): void {
  const { rimRadius, endRadius, bodySizes, backgroundSize, layerSize, cornerGrading, largestArc } = plan;
  if (!(rimRadius > 0) || !(plan.walls ? endRadius >= rimRadius : endRadius > rimRadius) || !Number.isFinite(endRadius))
    throw new RangeError(`meshDevice: expected 0 < rimRadius < endRadius, got ${rimRadius} and ${endRadius}.`);
  if (bodySizes.length !== bodies.length)
    throw new RangeError(`meshDevice: expected one size a body (${bodies.length}), got ${bodySizes.length}.`);
  if (![...bodySizes, backgroundSize, layerSize].every((h) => h > 0))
    throw new RangeError(
      `meshDevice: sizes must be positive, got ${[...bodySizes, backgroundSize, layerSize].join(', ')}.`,
    );
  if (!(cornerGrading > 0) || !(largestArc > 0 && largestArc <= 1))
    throw new RangeError(
      `meshDevice: expected cornerGrading > 0 and 0 < largestArc ≤ 1, got ${cornerGrading} and ${largestArc}.`,
    );
}

function checkInsideRim(arrangement: Arrangement, names: readonly string[], bodies: number): void {
  for (const { left, right, piece } of arrangement.edges) {
    const body = Math.max(left, right);
    if (body < 2 || body >= 2 + bodies || Math.min(left, right) >= 1) continue;
    const place = pointAt(piece, 0.5);
    throw new GeometryError(
      `Body '${names[body]}' reaches the rim near (${place[0].toPrecision(6)}, ${place[1].toPrecision(6)}); every body must lie strictly inside it.`,
      [names[body]],
      place,
    );
  }
}

/** The mesh, and the tag of every edge along which it must be cut. */
function meshOf(
  draft: Draft,
  plan: MeshPlan,
  arrangement: Arrangement,
  bodies: number,
): { mesh: Mesh; sheets: ReadonlyMap<number, number> } {
  const { walls } = plan;
  const edgeFree: number[] = [];
  const sheets = new Map<number, number>();
  const t = draft.triangulation;
  const number = new Int32Array(t.x.length).fill(-1);
  const vertices: number[] = [];
  const triangles: number[] = [];
  const regions: number[] = [];
  const kept: number[] = [];
  for (let i = 0; i < t.triangles; i++) {
    if (t.region[i] === OUTSIDE) continue;
    kept.push(i);
    for (let e = 3 * i; e < 3 * i + 3; e++) {
      const v = t.start[e];
      if (number[v] < 0) {
        number[v] = vertices.length / 2;
        vertices.push(t.x[v], t.y[v]);
      }
      triangles.push(number[v]);
    }
    const label = t.region[i];
    regions.push(label === 0 ? LAYER : label === 1 ? BACKGROUND : label - 2);
  }
  const edgeOf = new Int32Array(t.start.length).fill(-1);
  const edges: number[] = [];
  const edgeTriangles: number[] = [];
  const triangleEdges: number[] = [];
  const edgeCurve: number[] = [];
  const curves: number[] = [];
  kept.forEach((i, index) => {
    for (let e = 3 * i; e < 3 * i + 3; e++) {
      const o = t.twin[e];
      if (o >= 0 && edgeOf[o] >= 0) {
        edgeOf[e] = edgeOf[o];
        edgeTriangles[2 * edgeOf[e] + 1] = index;
        triangleEdges.push(edgeOf[e]);
        continue;
      }
      const from = t.start[e];
      const to = t.start[e % 3 === 2 ? e - 2 : e + 1];
      const [low, high] = number[from] < number[to] ? [from, to] : [to, from];
      edgeOf[e] = edges.length / 2;
      edges.push(number[low], number[high]);
      edgeTriangles.push(index, -1);
      triangleEdges.push(edgeOf[e]);
      const nodes = t.segment[e] >= 0 ? draft.nodesOf(t.segment[e], low) : null;
      edgeFree.push(-1);
      if (walls && t.segment[e] >= 0) {
        const index = edgeOf[e];
        const edge = arrangement.edges[draft.segments[t.segment[e]]!.edge];
        const outside = o < 0 || t.region[Math.floor(o / 3)] === OUTSIDE;
        const middle: Point = [(t.x[from] + t.x[to]) / 2, (t.y[from] + t.y[to]) / 2];
        if (outside) edgeFree[index] = walls.tagOf({ ...causeOf(edge, bodies, walls), middle });
        else if (edge.sheet !== undefined) sheets.set(index, walls.tagOf({ by: 'sheet', index: edge.sheet, middle }));
      }
      edgeCurve.push(nodes ? curves.length / (2 * CURVE_ORDER + 2) : -1);
      if (nodes) curves.push(...nodes);
    }
  });
  const mesh: Mesh = {
    vertices: new Float64Array(vertices),
    triangles: new Int32Array(triangles),
    regions: new Int32Array(regions),
    edges: new Int32Array(edges),
    triangleEdges: new Int32Array(triangleEdges),
    edgeTriangles: new Int32Array(edgeTriangles),
    edgeCurve: new Int32Array(edgeCurve),
    curveOrder: CURVE_ORDER,
    curves: new Float64Array(curves),
    center: [plan.center[0], plan.center[1]],
    rimRadius: plan.rimRadius,
    endRadius: plan.endRadius,
    ...(walls ? { edgeFree: new Int32Array(edgeFree) } : {}),
  };
  return { mesh, sheets };
}

/** What lies beyond an outer edge. */
function causeOf(edge: ArrangementEdge, bodies: number, walls: WallPlan): Omit<EdgeCause, 'middle'> {
  if (edge.sheet !== undefined) return { by: 'sheet', index: edge.sheet };
  const isVoid = (label: number): boolean => label < 0 || label >= 2 + bodies || walls.metal.has(label - 2);
  const label = isVoid(edge.left) ? edge.left : edge.right;
  if (label >= 2 + bodies) return { by: 'beyond', index: label - 2 - bodies };
  return label >= 2 ? { by: 'body', index: label - 2 } : { by: 'space', index: 0 };
}
