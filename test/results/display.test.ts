// Do display triangles follow the mesh, and do sampled and evaluated fields agree?

import { describe, expect, test } from 'vitest';
import { buildSpace } from '../../src/elements/space.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { LAYER } from '../../src/mesh/mesh.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { DISPLAY_TOLERANCE, displayMesh, sampleField } from '../../src/results/display.ts';
import { fieldSampler, meshFrom } from '../../src/results/evaluate.ts';
import type { RunArray, RunRecord } from '../../src/results/format.ts';
import type { RunView } from '../../src/results/run-view.ts';
import { body, ellipse, planFor } from '../mesh/sample-bodies.ts';

const bodies = [body('core', ellipse([0.1, 0.2], 1.2, 0.7, 0.5))];
const mesh = meshDevice(bodies, planFor(bodies));
const K = [3, 6];
const display = displayMesh(mesh, K);
const order = 4;
const space = buildSpace(mesh, order);
const random = randomStream(8);
const field = Float64Array.from({ length: 2 * space.unknowns }, () => random.normal());

const count = display.regions.length;
const corner = (t: number, i: number): readonly [number, number] => {
  const p = display.triangles[3 * t + i];
  return [display.points[2 * p], display.points[2 * p + 1]];
};

test('display triangles run counterclockwise and fill the regions; nothing of the layer is drawn', () => {
  const areas = new Map<number, number>();
  for (let t = 0; t < count; t++) {
    const [[ax, ay], [bx, by], [cx, cy]] = [corner(t, 0), corner(t, 1), corner(t, 2)];
    const area = ((bx - ax) * (cy - ay) - (cx - ax) * (by - ay)) / 2;
    expect(area).toBeGreaterThan(0);
    areas.set(display.regions[t], (areas.get(display.regions[t]) ?? 0) + area);
  }
  const core = Math.PI * 1.2 * 0.7;
  expect([...areas.keys()].sort()).toEqual([-1, 0]);
  expect(areas.get(0)! / core).toBeCloseTo(1, 2);
  expect(areas.get(-1)! / (4 * Math.PI - core)).toBeCloseTo(1, 2);
});

test('sides are short enough for a wave drawn straight: (κh)²/8 within the tolerance, by the longest chord', () => {
  for (let t = 0; t < mesh.regions.length; t++) {
    if (mesh.regions[t] === LAYER) {
      expect(display.cuts[t]).toBe(0);
      continue;
    }
    let side = 0;
    for (let e = 0; e < 3; e++) {
      const [a, b] = [mesh.triangles[3 * t + e], mesh.triangles[3 * t + ((e + 1) % 3)]];
      side = Math.max(
        side,
        Math.hypot(mesh.vertices[2 * a] - mesh.vertices[2 * b], mesh.vertices[2 * a + 1] - mesh.vertices[2 * b + 1]),
      );
    }
    const phase = (K[mesh.regions[t] + 1] * side) / display.cuts[t];
    expect((phase * phase) / 8).toBeLessThanOrEqual(DISPLAY_TOLERANCE * (1 + 1e-12));
  }
});

describe('fields', () => {
  const arrays: Record<string, RunArray> = {
    vertices: mesh.vertices,
    triangles: mesh.triangles,
    regions: mesh.regions,
    edges: mesh.edges,
    triangleEdges: mesh.triangleEdges,
    edgeTriangles: mesh.edgeTriangles,
    edgeCurve: mesh.edgeCurve,
    curves: mesh.curves,
    'field-1': field,
  };
  const names = Object.fromEntries(Object.keys(arrays).map((name) => [name, name]));
  const run = {
    record: {
      fields: [{ id: 'one', coefficients: 'field-1', order }],
      mesh: {
        order: 9,
        curveOrder: mesh.curveOrder,
        center: mesh.center,
        rimRadius: mesh.rimRadius,
        endRadius: mesh.endRadius,
        arrays: names,
      },
    } as unknown as RunRecord,
    array: (name: string) => arrays[name],
  } satisfies RunView;
  const sample = fieldSampler(run);

  test('the mesh comes back as it was', () => {
    expect(meshFrom(run)).toEqual(mesh);
  });

  test('evaluated at display points the field is the sampled one', () => {
    const shown = sampleField(space, display, field);
    expect(shown.length).toBe(display.points.length);
    let worst = 0;
    let known = 0;
    for (let i = 0; i < display.points.length / 2; i += 11) {
      const value = sample('one', display.points[2 * i], display.points[2 * i + 1]);
      // points of the rim may lie a rounding error outside
      if (!value) continue;
      known++;
      worst = Math.max(worst, Math.abs(value.re - shown[2 * i]), Math.abs(value.im - shown[2 * i + 1]));
    }
    expect(known).toBeGreaterThan(100);
    expect(worst).toBeLessThan(1e-5);
  });

  test('bodies are told; beyond the rim nothing is known; an unknown field is named', () => {
    expect(sample('one', 0.1, 0.2)!.body).toBe(0);
    expect(sample('one', -1.5, 1)!.body).toBe(-1);
    expect(sample('one', 2.5, 0)).toBe(null);
    expect(sample('one', 99, 0)).toBe(null);
    expect(() => sample('two', 0, 0)).toThrow('it holds: one');
  });
});
