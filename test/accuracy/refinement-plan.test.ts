// Does the decay of hierarchical parts choose order where it is fast and size where it is slow?

import { describe, expect, test } from 'vitest';
import { type ModePicture, planRefinement } from '../../src/accuracy/refinement-plan.ts';
import { cornerVertices } from '../../src/mesh/corners.ts';
import { meshDevice } from '../../src/mesh/mesh-device.ts';
import { body, disk, planFor, rectangle } from '../mesh/sample-bodies.ts';

const TOP = 6;
const strategy = { highestOrder: 13, cornerOrder: 4 };

/** Parts of degree j of size first · decay(j) in every triangle. */
function picture(triangles: number, first: number, decay: (j: number) => number, goal: number): ModePicture {
  const stride = TOP + 1;
  const energies = new Float64Array(stride * triangles);
  for (let t = 0; t < triangles; t++) for (let j = 1; j <= TOP; j++) energies[t * stride + j] = first * decay(j);
  return { parts: { energies, stride }, goal, outside: 1, exponent: 1 };
}

describe('a smooth field', () => {
  const bodies = [body('disk', disk([0, 0], 1))];
  const mesh = meshDevice(bodies, planFor(bodies));
  const count = mesh.regions.length;
  const top = new Int32Array(count).fill(TOP);
  const inBody = [...mesh.regions.keys()].filter((t) => mesh.regions[t] === 0);
  const orderAt = (goal: number, ratio: number): number => {
    const { orders, wishes } = planRefinement(mesh, top, [picture(count, 1, (j) => ratio ** j, goal)], strategy);
    expect(wishes).toEqual([]);
    return Math.max(...inBody.map((t) => orders[t]));
  };

  test('each two digits ask for one order more where a part is a hundredth of the one before', () => {
    const orders = [1e-9, 1e-11, 1e-13, 1e-15].map((goal) => orderAt(goal, 1e-2));
    for (let i = 1; i < orders.length; i++) expect(orders[i] - orders[i - 1]).toBe(1);
  });

  test('slower decay asks for more, but never for more at once than decay can foretell', () => {
    expect(orderAt(1e-6, 0.1)).toBeGreaterThan(orderAt(1e-6, 0.01));
    expect(orderAt(1e-12, 0.6)).toBe(TOP + 4);
  });

  test('orders fall where little is at stake, to a floor that depends on the size', () => {
    const { orders } = planRefinement(mesh, top, [picture(count, 1e-20, (j) => 0.5 ** j, 1e-3)], strategy);
    expect(Math.max(...orders)).toBe(4);
    expect(Math.min(...orders)).toBe(2);
  });

  test('the worst of several modes decides', () => {
    const modes = [1e-3, 1e-9].map((goal) => picture(count, 1, (j) => 1e-2 ** j, goal));
    const both = planRefinement(mesh, top, modes, strategy).orders;
    const worst = planRefinement(mesh, top, [modes[1]], strategy).orders;
    expect(both).toEqual(worst);
  });

  test('a low highest order asks for smaller triangles instead', () => {
    const low = { highestOrder: 5, cornerOrder: 3 };
    const { orders, wishes } = planRefinement(mesh, top, [picture(count, 1, (j) => 0.1 ** j, 1e-9)], low);
    expect(Math.max(...orders)).toBe(5);
    expect(wishes.length).toBeGreaterThan(0);
  });
});

describe('a corner', () => {
  const bodies = [body('square', rectangle([0, 0], 2, 2))];
  const mesh = meshDevice(bodies, planFor(bodies));
  const count = mesh.regions.length;
  const top = new Int32Array(count).fill(TOP);
  // s_j ∝ j^(−4λ−1), λ = 3/4
  const algebraic = (j: number): number => j ** -4;

  test('gets smaller triangles, at the corner itself, and the more so the more digits', () => {
    const sizes = [1e-6, 1e-7, 1e-8].map((goal) => {
      const { orders, wishes } = planRefinement(mesh, top, [picture(count, 1e-3, algebraic, goal)], strategy);
      const atCorners = wishes.filter(({ x, y }) => Math.abs(x) === 1 && Math.abs(y) === 1);
      expect(atCorners.length).toBe(4);
      const corners = new Set(cornerVertices(mesh));
      for (let i = 0; i < mesh.triangles.length; i++) {
        if (corners.has(mesh.triangles[i])) expect(orders[Math.floor(i / 3)]).toBeLessThanOrEqual(4);
      }
      return Math.min(...atCorners.map((w) => w.size));
    });
    expect(sizes[1]).toBeLessThan(sizes[0]);
    expect(sizes[2]).toBeLessThanOrEqual(sizes[1]);
  });
});
