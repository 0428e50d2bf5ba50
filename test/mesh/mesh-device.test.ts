// Does every device become a sound mesh of its true shape, or a refusal with a reason?

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Body } from '../../src/device/model.ts';
import type { Point, Shape } from '../../src/geometry/curves.ts';
import { GeometryError } from '../../src/geometry/geometry-error.ts';
import { mapPoint } from '../../src/mesh/curved-triangles.ts';
import { meshDevice, meshDeviceWithNotes } from '../../src/mesh/mesh-device.ts';
import { BACKGROUND, LAYER } from '../../src/mesh/mesh.ts';
import type { Mesh, MeshPlan } from '../../src/mesh/mesh.ts';
import { measureMesh } from '../../src/mesh/quality.ts';
import { body, disk, ellipse, holds, planFor, polygon, rectangle, ring } from './sample-bodies.ts';

const areas = (mesh: Mesh): Map<number, number> =>
  new Map(measureMesh(mesh).regions.map(({ region, area }) => [region, area]));

function expectSound(mesh: Mesh, smallestAngle = 25): void {
  const quality = measureMesh(mesh);
  expect(quality.faults).toEqual([]);
  expect(quality.eulerCharacteristic).toBe(1);
  expect(quality.smallestJacobianRatio).toBeGreaterThan(0.15);
  expect(quality.smallestAngle).toBeGreaterThanOrEqual(smallestAngle);
  const total = quality.regions.reduce((sum, { area }) => sum + area, 0);
  expect(Math.abs(total / (Math.PI * mesh.endRadius ** 2) - 1)).toBeLessThan(1e-12);
}

/** Largest share of triangles whose middle lies in another body than their region says. */
function wrongRegions(mesh: Mesh, bodies: readonly Body[]): number {
  let wrong = 0;
  for (let t = 0; t < mesh.regions.length; t++) {
    const p = mapPoint(mesh, t, 1 / 3, 1 / 3);
    let region = BACKGROUND;
    bodies.forEach(({ shape }, i) => {
      if (holds(shape, p)) region = i;
    });
    if (Math.hypot(p[0] - mesh.center[0], p[1] - mesh.center[1]) > mesh.rimRadius) region = LAYER;
    if (region !== mesh.regions[t]) wrong++;
  }
  return wrong;
}

const near = (value: number | undefined, expected: number, relative = 1e-12): void =>
  expect(Math.abs(value! / expected - 1)).toBeLessThan(relative);

describe('areas', () => {
  test('no body: background and layer', () => {
    const mesh = meshDevice([], planFor([]));
    expectSound(mesh);
    const found = areas(mesh);
    near(found.get(BACKGROUND), 4 * Math.PI);
    near(found.get(LAYER), 5 * Math.PI);
  });

  test('disk, ring and ellipse', () => {
    const bodies = [
      body('disk', disk([-1, 0.5], 0.6)),
      body('ring', ring([0.9, 0.5], 0.8, 0.55)),
      body('ellipse', ellipse([0.1, -1], 0.9, 0.2, 0.3)),
    ];
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh);
    const found = areas(mesh);
    near(found.get(0), Math.PI * 0.36);
    near(found.get(1), Math.PI * (0.64 - 0.3025));
    near(found.get(2), Math.PI * 0.18);
    expect(wrongRegions(mesh, bodies)).toBe(0);
  });

  test('a slender ellipse', () => {
    const bodies = [body('needle', ellipse([0, 0], 1.5, 0.05, 1))];
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh);
    near(areas(mesh).get(0), Math.PI * 0.075);
  });

  test('overlapping disks: the later one is whole, the earlier one loses the lens', () => {
    const bodies = [body('a', disk([-0.3, 0], 0.5)), body('b', disk([0.3, 0], 0.5))];
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh);
    // Lens of two circles of radius r at distance d: 2 r² acos(d/2r) − d/2 √(4r² − d²).
    const lens = 0.5 * Math.acos(0.6) - 0.3 * Math.sqrt(1 - 0.36);
    near(areas(mesh).get(0), Math.PI / 4 - lens);
    near(areas(mesh).get(1), Math.PI / 4);
  });

  test('a device away from the origin', () => {
    const bodies = [body('disk', disk([101, 50], 0.6)), body('box', rectangle([99.8, 50], 0.5, 0.7, 0.2))];
    const mesh = meshDevice(bodies, planFor(bodies, { center: [100, 50] }));
    expectSound(mesh);
    near(areas(mesh).get(0), Math.PI * 0.36);
    near(areas(mesh).get(1), 0.35);
  });

  test.each([1e-9, 1e9])('scaled by %g', (scale) => {
    const at = (x: number, y: number): Point => [x * scale, y * scale];
    const bodies = [
      body('disk', disk(at(0.2, 0), 0.7 * scale)),
      body('box', rectangle(at(-0.8, 0.1), scale, 0.4 * scale)),
    ];
    const mesh = meshDevice(
      bodies,
      planFor(bodies, {
        rimRadius: 2 * scale,
        endRadius: 3 * scale,
        bodySizes: [0.5 * scale, 0.5 * scale],
        backgroundSize: 0.8 * scale,
        layerSize: 0.8 * scale,
      }),
    );
    expectSound(mesh);
    const total = areas(mesh);
    near(total.get(1), 0.4 * scale * scale);
  });
});

describe('bodies that touch', () => {
  test('duplicates, covered bodies, the hole of a ring filled exactly', () => {
    const bodies = [
      body('covered', disk([0.1, 0], 0.2)),
      body('twin', disk([0, 0], 1)),
      body('twin again', disk([0, 0], 1)),
      body('ring', ring([0, 0], 0.8, 0.4)),
      body('plug', disk([0, 0], 0.4)),
    ];
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh);
    const found = areas(mesh);
    expect([...found.keys()]).toEqual([LAYER, BACKGROUND, 2, 3, 4]);
    near(found.get(2), Math.PI * 0.36);
    near(found.get(3), Math.PI * 0.48);
    near(found.get(4), Math.PI * 0.16);
  });

  test('abutting rectangles share their edge; a shifted one shares a part of it', () => {
    const bodies = [
      body('left', rectangle([-0.5, 0], 1, 1)),
      body('right', rectangle([0.5, 0.2], 1, 1)),
      body('top', rectangle([-0.5, 0.75], 1, 0.5)),
    ];
    const { mesh, notes } = meshDeviceWithNotes(bodies, planFor(bodies));
    expectSound(mesh);
    expect(notes).toEqual([]);
    expect(wrongRegions(mesh, bodies)).toBe(0);
    near(areas(mesh).get(0), 1);
    near(areas(mesh).get(1), 1);
    near(areas(mesh).get(2), 0.5);
  });

  test('a corner on an arc, a corner on an edge', () => {
    const bodies = [
      body('disk', disk([0, 0], 0.5)),
      body('wedge', polygon([[0.5, 0], [1.2, -0.4], [1.2, 0.4]])), // prettier-ignore
      body('tile', rectangle([1.2 + Math.SQRT1_2 / 2, 0], 0.5, 0.5, Math.PI / 4)),
    ];
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh);
    near(areas(mesh).get(0), Math.PI / 4);
    near(areas(mesh).get(1), 0.28);
    near(areas(mesh).get(2), 0.25);
  });

  test('tangent disks are joined by a neck, with a note', () => {
    const bodies = [body('left', disk([-0.5, 0], 0.5)), body('right', disk([0.5, 0], 0.5))];
    const { mesh, notes } = meshDeviceWithNotes(bodies, planFor(bodies));
    expectSound(mesh);
    expect(notes).toHaveLength(1);
    expect(notes[0]).toMatch(/'left' and 'right' touch at \(.*\): joined by a neck 0.00050 wide/);
    // The later disk grows by the joint: 2/3 x w at ± x, x² ≈ w r.
    const grown = areas(mesh).get(1)! - Math.PI / 4;
    expect(grown).toBeGreaterThan(0);
    expect(grown).toBeLessThan(1e-5);
    near(areas(mesh).get(0), Math.PI / 4);
  });

  test('a disk tangent from inside; a disk on a slab', () => {
    const inside = [body('outer', disk([0, 0], 1)), body('inner', disk([0.5, 0], 0.5))];
    const first = meshDeviceWithNotes(inside, planFor(inside));
    expectSound(first.mesh);
    expect(first.notes).toHaveLength(1);
    const onSlab = [body('slab', rectangle([0, 0], 2, 0.3)), body('disk', disk([0, 0.65], 0.5))];
    const second = meshDeviceWithNotes(onSlab, planFor(onSlab));
    expectSound(second.mesh);
    expect(second.notes).toHaveLength(1);
  });

  test('a gap too narrow to mesh is refused with both names, the place and the figure', () => {
    const bodies = [body('left', disk([-0.5, 0], 0.5)), body('right', disk([0.5 + 1e-9, 0], 0.5))];
    const act = (): Mesh => meshDevice(bodies, planFor(bodies));
    expect(act).toThrow(GeometryError);
    expect(act).toThrow(
      /'left' and 'right' come within 1.00e-9 of each other at \(4.9999999e-10, .*\).*at least 5.0e-7/,
    );
  });

  test('a narrow gap that can be meshed is kept', () => {
    const bodies = [body('left', disk([-0.5, 0], 0.5)), body('right', disk([0.5 + 1e-3, 0], 0.5))];
    const { mesh, notes } = meshDeviceWithNotes(bodies, planFor(bodies));
    expectSound(mesh);
    expect(notes).toEqual([]);
    near(areas(mesh).get(0), Math.PI / 4);
    near(areas(mesh).get(1), Math.PI / 4);
  });

  test('a body across the rim is refused', () => {
    const bodies = [body('far', disk([1.8, 0], 0.5))];
    expect(() => meshDevice(bodies, planFor(bodies))).toThrow(/'far' reaches the rim near/);
  });
});

describe('sizes', () => {
  test('sides keep to the wanted size and do not waste it', () => {
    const bodies = [body('disk', disk([0, 0], 1.2))];
    const mesh = meshDevice(bodies, planFor(bodies, { bodySizes: [0.12], backgroundSize: 0.2, layerSize: 0.3 }));
    expectSound(mesh);
    const wanted = new Map([[0, 0.12], [BACKGROUND, 0.2], [LAYER, 0.3]]); // prettier-ignore
    for (const { region, longestSide, meanSide } of measureMesh(mesh).regions) {
      expect(longestSide / wanted.get(region)!).toBeLessThan(1.25);
      expect(meanSide / wanted.get(region)!).toBeGreaterThan(0.75);
    }
  });

  test('corner grading makes the sides at corners small and lets them grow', () => {
    const bodies = [body('box', rectangle([0, 0], 1.2, 0.8))];
    const mesh = meshDevice(bodies, planFor(bodies, { cornerGrading: 0.1 }));
    expectSound(mesh);
    const region = measureMesh(mesh).regions.find(({ region }) => region === 0)!;
    expect(region.shortestSide).toBeLessThan(0.08);
    expect(region.longestSide).toBeGreaterThan(0.25);
  });

  test('a sharp corner costs few triangles and is the only small angle', () => {
    // Tip angle 2 atan(0.05/1) = 5.7°.
    const bodies = [body('spike', polygon([[1, 0], [0, 0.05], [-0.5, 0.6], [-0.5, -0.6], [0, -0.05]]))]; // prettier-ignore
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh, 5);
    expect(mesh.regions.length).toBeLessThan(900);
  });

  test('no curved side turns more than the largest arc', () => {
    const bodies = [body('disk', disk([0, 0], 0.3)), body('ellipse', ellipse([1, 0], 0.5, 0.1))];
    const mesh = meshDevice(bodies, planFor(bodies));
    const sides = measureMesh(mesh).regions.find(({ region }) => region === 0)!;
    expect(sides.longestSide).toBeLessThan(Math.max(2 * 0.3 * Math.sin(0.3), 0.36));
    // Eleven sides around the small disk: 2π / 0.6 = 10.5.
    const curves = [...mesh.edgeCurve].filter((curve) => curve >= 0).length;
    expect(curves).toBeGreaterThanOrEqual(4 * 11);
  });
});

test('the same device gives the same mesh, bit for bit', () => {
  const bodies = [body('a', disk([-0.3, 0.1], 0.5)), body('b', rectangle([0.3, 0], 0.7, 0.5, 0.4))];
  expect(meshDevice(bodies, planFor(bodies))).toEqual(meshDevice(bodies, planFor(bodies)));
});

test.each<[string, Partial<MeshPlan>]>([
  ['rim outside the end', { rimRadius: 4 }],
  ['a missing size', { bodySizes: [] }],
  ['a size of zero', { backgroundSize: 0 }],
  ['no arc', { largestArc: 0 }],
])('a senseless plan is refused: %s', (_, changes) => {
  const bodies = [body('a', disk([0, 0], 0.5))];
  expect(() => meshDevice(bodies, planFor(bodies, changes))).toThrow(RangeError);
});

describe('smallest cases of former faults', () => {
  test('two edges between the same two near vertices: the tips must not reach around', () => {
    const bodies = [
      body('disk', disk([0.25, 0.85], 0.5)),
      body('needle', ellipse([-0.1, 0.7], 0.028403372718459868, 0.41119572389610737)),
    ];
    const mesh = meshDevice(bodies, planFor(bodies));
    expectSound(mesh, 0.5);
    expect(wrongRegions(mesh, bodies)).toBe(0);
  });

  test('a third body cuts off a cusp before the neck has its width', () => {
    const bodies = [
      body('a', disk([0.121114557, 0.85], 0.5)),
      body('b', disk([0.046114557, 0.7200961894323344], 0.35)),
      body('c', disk([0.15, 0.246040907], 0.3)),
    ];
    const { mesh, notes } = meshDeviceWithNotes(bodies, planFor(bodies));
    expectSound(mesh, 1);
    expect(notes).toHaveLength(1);
  });
});

describe('random devices', () => {
  const coordinate = fc.oneof(
    fc.integer({ min: -18, max: 18 }).map((i) => i / 20),
    fc.integer({ min: -9e8, max: 9e8 }).map((i) => i / 1e9),
  );
  const length = fc.oneof(
    fc.integer({ min: 1, max: 10 }).map((i) => i / 20),
    fc.integer({ min: 2e7, max: 5e8 }).map((i) => i / 1e9),
  );
  const angle = fc.oneof(
    fc.constant(0),
    fc.integer({ min: 0, max: 3000 }).map((i) => i / 1000),
  );
  const point = fc.tuple(coordinate, coordinate);
  const shapes = fc.oneof(
    fc.tuple(point, length).map(([p, r]): Shape[] => [disk(p, r)]),
    fc
      .tuple(point, length, fc.integer({ min: 10, max: 95 }))
      .map(([p, r, share]): Shape[] => [ring(p, r, (r * share) / 100)]),
    fc.tuple(point, length, length, angle).map(([p, a, b, tilt]): Shape[] => [ellipse(p, a, b, tilt)]),
    fc.tuple(point, length, length, angle).map(([p, w, h, tilt]): Shape[] => [rectangle(p, w, h, tilt)]),
    fc.tuple(point, fc.integer({ min: 3, max: 8 }), length, angle).map(([[x, y], n, r, turn]): Shape[] => [
      polygon(
        Array.from({ length: n }, (_, i): Point => {
          const t = (2 * Math.PI * i) / n + turn;
          const reach = i % 2 ? 0.6 * r : r;
          return [x + reach * Math.cos(t), y + reach * Math.sin(t)];
        }),
      ),
    ]),
    // Two disks that touch from outside or inside; a disk on a rectangle.
    fc.tuple(point, length, length, angle, fc.boolean()).map(([p, a, b, t, within]): Shape[] => {
      const d = within ? Math.abs(a - b) : a + b;
      return [disk(p, a), disk([p[0] + d * Math.cos(t), p[1] + d * Math.sin(t)], b)];
    }),
    fc
      .tuple(point, length, length, angle)
      .map(([p, w, h, t]): Shape[] => [
        rectangle(p, w, h, t),
        disk([p[0] - Math.sin(t) * (h / 2 + w), p[1] + Math.cos(t) * (h / 2 + w)], w),
      ]),
  );
  const devices = fc.array(shapes, { minLength: 1, maxLength: 4 }).map((lists) => lists.flat());

  test('are meshed soundly or refused with a reason', { timeout: 300_000 }, () => {
    fc.assert(
      fc.property(devices, (list) => {
        const bodies = list.map((shape, i) => body(`body ${i}`, shape));
        let result: ReturnType<typeof meshDeviceWithNotes>;
        try {
          result = meshDeviceWithNotes(bodies, planFor(bodies, { rimRadius: 3, endRadius: 4 }));
        } catch (error) {
          expect(error).toBeInstanceOf(GeometryError);
          return;
        }
        // Angles may be as small as the angles between outlines: only turned triangles are wrong.
        const quality = measureMesh(result.mesh);
        expect(quality.faults).toEqual([]);
        expect(quality.eulerCharacteristic).toBe(1);
        expect(quality.smallestJacobianRatio).toBeGreaterThan(0);
        const total = quality.regions.reduce((sum, { area }) => sum + area, 0);
        expect(Math.abs(total / (16 * Math.PI) - 1)).toBeLessThan(1e-12);
        if (result.notes.length === 0) expect(wrongRegions(result.mesh, bodies)).toBe(0);
      }),
      { numRuns: 200, seed: 20 },
    );
  });
});
