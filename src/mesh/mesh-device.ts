// How does a device become a mesh?

import type { Body } from '../device/model.ts';
import { arrangeShapes } from '../geometry/arrangement.ts';
import type { Arrangement } from '../geometry/arrangement.ts';
import type { Outline, Point } from '../geometry/curves.ts';
import { pointAt } from '../geometry/curves.ts';
import { GeometryError } from '../geometry/geometry-error.ts';
import { CURVE_ORDER, Draft, OUTSIDE } from './delaunay-refinement.ts';
import { discretise } from './discretisation.ts';
import type { Mesh, MeshPlan } from './mesh.ts';
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
  // Labels of the arrangement: 0 the layer's disk, 1 the rim's disk, 2 + i body i.
  const { center, rimRadius, endRadius } = plan;
  const shapes = [[circle(center, endRadius)], [circle(center, rimRadius)], ...bodies.map((body) => body.shape)];
  const names = ['end of the layer', 'rim', ...bodies.map((body) => body.name)];
  const arrangement = arrangeShapes(shapes, names, SNAP * endRadius);
  checkInsideRim(arrangement, names);
  const base = (label: number): number =>
    label >= 2
      ? plan.bodySizes[label - 2]
      : label === 1
        ? plan.backgroundSize
        : label === 0
          ? plan.layerSize
          : Infinity;
  const { cornerGrading, largestArc } = plan;
  const discretisation = discretise(arrangement, { ofLabel: base, cornerGrading, largestArc });
  const draft = new Draft(arrangement, names, discretisation, base, center, endRadius, MOST_VERTICES);
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
  return { mesh: meshOf(draft, plan), notes: arrangement.notes };
}

const circle = (center: Point, radius: number): Outline => [
  { kind: 'arc', center, radii: [radius, radius], tilt: 0, start: 0, sweep: 2 * Math.PI },
];

function checkPlan(bodies: readonly Body[], plan: MeshPlan): void {
  const { rimRadius, endRadius, bodySizes, backgroundSize, layerSize, cornerGrading, largestArc } = plan;
  if (!(rimRadius > 0) || !(endRadius > rimRadius) || !Number.isFinite(endRadius))
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

function checkInsideRim(arrangement: Arrangement, names: readonly string[]): void {
  for (const { left, right, piece } of arrangement.edges) {
    const body = Math.max(left, right);
    if (body < 2 || Math.min(left, right) >= 1) continue;
    const place = pointAt(piece, 0.5);
    throw new GeometryError(
      `Body '${names[body]}' reaches the rim near (${place[0].toPrecision(6)}, ${place[1].toPrecision(6)}); every body must lie strictly inside it.`,
      [names[body]],
      place,
    );
  }
}

function meshOf(draft: Draft, plan: MeshPlan): Mesh {
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
      edgeCurve.push(nodes ? curves.length / (2 * CURVE_ORDER + 2) : -1);
      if (nodes) curves.push(...nodes);
    }
  });
  return {
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
  };
}
