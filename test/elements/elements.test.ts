// Do elements and spaces keep their laws: area, energy, conformity, embedding, derivatives?

import { describe, expect, test } from 'vitest';
import { tabulateBasis } from '../../src/elements/basis.ts';
import { assembleElements } from '../../src/elements/element-matrices.ts';
import { evaluateInto } from '../../src/elements/evaluate.ts';
import { buildSpace, embed, largestElement, type Space } from '../../src/elements/space.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { BACKGROUND, LAYER, type Mesh } from '../../src/mesh/mesh.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { body, ellipse, planFor } from '../mesh/sample-bodies.ts';

const bodies = [body('core', ellipse([0.1, 0.2], 1.2, 0.7, 0.5))];
const mesh: Mesh = meshDevice(bodies, planFor(bodies));
const plain = (_x: number, _y: number, out: Float64Array): void => {
  out.set([1, 0, 0, 0, 1, 0, 1, 0]);
};

const triangles = mesh.regions.length;
const vertexCoefficients = (space: Space, t: number, of: (v: number) => number): Float64Array =>
  Float64Array.from({ length: space.starts[t + 1] - space.starts[t] }, (_, i) => {
    const f = space.functions[space.starts[t] + i];
    return f < 3 ? of(mesh.triangles[3 * t + f]) : 0;
  });

/** xᵀ B y of the real (or real part of the complex) matrix of triangle t. */
function form(B: Float64Array, isComplex: boolean, x: Float64Array, y: Float64Array): number {
  let sum = 0;
  const width = isComplex ? 2 : 1;
  for (let j = 0; j < y.length; j++) {
    for (let i = 0; i < x.length; i++) sum += x[i] * B[width * (i + j * x.length)] * y[j];
  }
  return sum;
}

describe.each([1, 2, 5, 8])('order %i', (order) => {
  const space = buildSpace(mesh, order);
  const elements = assembleElements(space, plain);

  test('constants have no stiffness, and their mass is the area', () => {
    const areas = new Map<number, number>();
    for (let t = 0; t < triangles; t++) {
      const one = vertexCoefficients(space, t, () => 1);
      const isComplex = elements.complex[t] === 1;
      const stiff = new Float64Array(one.length).map((_, i) => {
        const unit = new Float64Array(one.length);
        unit[i] = 1;
        return form(elements.stiffness[t], isComplex, unit, one);
      });
      expect(Math.max(...stiff.map(Math.abs))).toBeLessThan(1e-11);
      const region = mesh.regions[t];
      areas.set(region, (areas.get(region) ?? 0) + form(elements.mass[t], isComplex, one, one));
    }
    const core = Math.PI * 1.2 * 0.7;
    expect(areas.get(0)).toBeCloseTo(core, 9);
    expect(areas.get(BACKGROUND)).toBeCloseTo(Math.PI * 4 - core, 9);
    expect(areas.get(LAYER)).toBeCloseTo(Math.PI * (9 - 4), 9);
  });

  test('matrices are symmetric, mass positive on the diagonal', () => {
    let skew = 0;
    let least = Infinity;
    for (let t = 0; t < triangles; t += 3) {
      const nd = space.starts[t + 1] - space.starts[t];
      const width = elements.complex[t] === 1 ? 2 : 1;
      for (const B of [elements.stiffness[t], elements.mass[t]]) {
        for (let j = 0; j < nd; j++) {
          for (let i = 0; i < j; i++)
            skew = Math.max(skew, Math.abs(B[width * (i + j * nd)] - B[width * (j + i * nd)]));
        }
      }
      for (let j = 0; j < nd; j++) least = Math.min(least, elements.mass[t][width * (j + j * nd)]);
    }
    expect(skew).toBeLessThan(1e-12);
    expect(least).toBeGreaterThan(0);
  });

  test('fields are continuous across edges, and zero on the end', () => {
    const random = randomStream(order);
    const field = Float64Array.from({ length: 2 * space.unknowns }, () => random.normal());
    const s = 0.31;
    // the point at share s of each local edge, from its first to its second corner, and backwards
    const points = (at: number): number[] => [at, 0, 1 - at, at, 0, 1 - at];
    const tables = [tabulateBasis(order, points(s)), tabulateBasis(order, points(1 - s))];
    const seen = new Map<number, number>();
    const work = new Float64Array(6);
    for (let t = 0; t < triangles; t++) {
      for (let e = 0; e < 3; e++) {
        const edge = mesh.triangleEdges[3 * t + e];
        const forwards = mesh.triangles[3 * t + e] === mesh.edges[2 * edge];
        evaluateInto(work, space, field, t, tables[forwards ? 0 : 1]);
        const value = work[2 * e];
        if (seen.has(edge)) expect(value).toBeCloseTo(seen.get(edge)!, 10);
        else seen.set(edge, value);
        if (mesh.edgeTriangles[2 * edge + 1] < 0 || mesh.edgeTriangles[2 * edge] < 0) expect(value).toBeCloseTo(0, 12);
      }
    }
  });
});

test('embedding keeps the field', () => {
  const [low, high] = [buildSpace(mesh, 3), buildSpace(mesh, 6)];
  const random = randomStream(4);
  const x = Float64Array.from({ length: 4 * low.unknowns }, () => random.normal());
  const y = embed(high, low, x, 2);
  expect(y.length).toBe(4 * high.unknowns);
  const points = [0.2, 0.3, 0.7, 0.1, 0, 0.4];
  const [before, after] = [new Float64Array(6), new Float64Array(6)];
  for (let t = 0; t < triangles; t += 3) {
    for (const c of [0, 1]) {
      const part = (of: Float64Array, n: number): Float64Array => of.subarray(2 * n * c, 2 * n * (c + 1));
      evaluateInto(before, low, part(x, low.unknowns), t, tabulateBasis(3, points));
      evaluateInto(after, high, part(y, high.unknowns), t, tabulateBasis(6, points));
      before.forEach((v, i) => expect(after[i]).toBeCloseTo(v, 12));
    }
  }
});

test('basis: gradients are difference quotients', () => {
  const [x, y, h] = [0.23, 0.41, 1e-6];
  const { values, dx, dy } = tabulateBasis(9, [x - h, y, x + h, y, x, y - h, x, y + h, x, y]);
  const nd = values.length / 5;
  for (let f = 0; f < nd; f++) {
    expect((values[nd + f] - values[f]) / (2 * h)).toBeCloseTo(dx[4 * nd + f], 6);
    expect((values[3 * nd + f] - values[2 * nd + f]) / (2 * h)).toBeCloseTo(dy[4 * nd + f], 6);
  }
});

describe('spaces', () => {
  test('Euler: unknowns of order p are inner vertices, edges and triangles with their functions', () => {
    for (const p of [1, 2, 3, 7]) {
      const space = buildSpace(mesh, p);
      const edges = mesh.edges.length / 2;
      const outer = Array.from({ length: edges }, (_, e) => e).filter(
        (e) => mesh.edgeTriangles[2 * e] < 0 || mesh.edgeTriangles[2 * e + 1] < 0,
      ).length;
      const vertices = mesh.vertices.length / 2 - outer;
      expect(space.unknowns).toBe(vertices + (p - 1) * (edges - outer) + (triangles * (p - 1) * (p - 2)) / 2);
      expect(largestElement(space)).toBe(((p + 1) * (p + 2)) / 2);
    }
  });

  test('mixed orders: an edge takes the higher of its two triangles', () => {
    const orders = Int32Array.from({ length: triangles }, (_, t) => 2 + (t % 3));
    const space = buildSpace(mesh, orders);
    expect(space.order).toBe(4);
    for (let t = 0; t < triangles; t++) {
      const count = space.starts[t + 1] - space.starts[t];
      expect(count).toBeGreaterThanOrEqual(((orders[t] + 1) * (orders[t] + 2)) / 2);
    }
  });

  test.each([0, 21, NaN])('order %d is refused', (order) => {
    expect(() => buildSpace(mesh, order)).toThrow('order');
  });
});
