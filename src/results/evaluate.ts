// What is a stored field's exact value at a point?

import { tabulateBasis } from '../elements/basis.ts';
import { evaluateInto } from '../elements/evaluate.ts';
import { buildSpace, ordersAt, type Space } from '../elements/space.ts';
import { meshLocator } from '../mesh/locate.ts';
import { LAYER, type Mesh } from '../mesh/mesh.ts';
import { type FieldSampler, fieldOf, type RunView } from './run-view.ts';

/** The run's mesh, from its arrays. */
export function meshFrom(run: RunView): Mesh {
  const { mesh } = run.record;
  const { arrays } = mesh;
  const f64 = (name: string): Float64Array => run.array(name) as Float64Array;
  const i32 = (name: string): Int32Array => run.array(name) as Int32Array;
  return {
    vertices: f64(arrays.vertices),
    triangles: i32(arrays.triangles),
    regions: i32(arrays.regions),
    edges: i32(arrays.edges),
    triangleEdges: i32(arrays.triangleEdges),
    edgeTriangles: i32(arrays.edgeTriangles),
    edgeCurve: i32(arrays.edgeCurve),
    curves: f64(arrays.curves),
    curveOrder: mesh.curveOrder,
    center: mesh.center,
    rimRadius: mesh.rimRadius,
    endRadius: mesh.endRadius,
    ...(arrays.edgeFree === undefined ? {} : { edgeFree: i32(arrays.edgeFree) }),
  };
}

/**
 * Evaluates stored fields at full order, in the normalisation of their coefficients; null outside the rim. The one
 * source of values for exports and for the viewer's read-out.
 */
export function fieldSampler(run: RunView): FieldSampler {
  const mesh = meshFrom(run);
  const locate = meshLocator(mesh);
  const spaces = new Map<number, Space>();
  const { shifts: named } = run.record.mesh;
  const shifts = named === undefined ? null : (run.array(named) as Int32Array);
  return (fieldId, x, y) => {
    const entry = fieldOf(run.record, fieldId);
    const place = locate(x, y);
    if (!place || mesh.regions[place.triangle] === LAYER) return null;
    const order = entry.order ?? run.record.mesh.order;
    let space = spaces.get(order);
    if (!space) {
      space = buildSpace(mesh, ordersAt(order, shifts));
      spaces.set(order, space);
    }
    const table = tabulateBasis(space.order, [place.l1, place.l2]);
    const value = evaluateInto(
      new Float64Array(2),
      space,
      run.array(entry.coefficients) as Float64Array,
      place.triangle,
      table,
    );
    return { re: value[0], im: value[1], body: mesh.regions[place.triangle] };
  };
}
