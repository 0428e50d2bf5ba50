// From a checked device to matrices: what every question starts with.

import type { Ground } from '../accuracy/mode-ladder.ts';
import type { Resolution } from '../accuracy/resolution.ts';
import { type LayerPlan, layerCoefficients } from '../boundary/stretched-layer.ts';
import { metals } from '../device/metals.ts';
import type { Device } from '../device/model.ts';
import { buildSpace, ordersAt, type Space } from '../elements/space.ts';
import { meshLocator } from '../mesh/locate.ts';
import type { Mesh, SizeWish } from '../mesh/mesh.ts';
import { meshDeviceWithNotes } from '../mesh/mesh-device.ts';
import type { Direction } from '../numerics/conventions.ts';
import { type DeviceFamily, deviceFamily, type LevelSense } from '../operator/device-family.ts';
import { surfaceTerms } from '../operator/surfaces.ts';
import { FIRST_METAL, planSpace } from './space-plan.ts';
import { assembleOpen, facing, type OpenOperator } from '../operator/open-operator.ts';

/** The part of the complex plane that a discretisation must serve. */
export interface Scope {
  readonly kMin: number;
  readonly kMax: number;
  /** Largest |Im k| / Re k. */
  readonly slope: number;
}

/** A meshed device with its open boundary, ready to be assembled at any order. */
export interface Prepared {
  readonly device: Device;
  readonly scope: Scope;
  readonly mesh: Mesh;
  readonly layer: LayerPlan;
  readonly bodyRadius: number;
  /** What the mesher had to say, for the user. */
  readonly notes: readonly string[];
  readonly resolution: Resolution;
  /** Multipoles that the layer was asked to serve. */
  readonly highestOrder: ((x: number) => number) | undefined;
  /** Where smaller triangles were asked for than the resolution says. */
  readonly wishes: readonly SizeWish[];
  /** What each triangle's order is above (below) the order asked for; null where all are alike. */
  readonly shifts: Int32Array | null;
  /** The order that the shifts were made for. */
  readonly madeFor: number;
  /**
   * The assembled operator (outgoing) of an order, made once: triangle t at order + shifts[t]; below the order that the
   * shifts were made for, no triangle above the order.
   */
  operator(order: number): OpenOperator;
}

/** Largest angle an edge may span on its curve: there a degree-10 polynomial equals the arc to rounding. */
const LARGEST_ARC = 0.6;

/**
 * Triangles in the layer may grow to this many times the background's: a wave at depth x matters by exp(−2kx sin θ) only,
 * which pays for sides growing like exp(kx sin θ / p). The mesher lets them grow by 0.4 of the distance from the rim.
 */
const LAYER_COARSENING = 3;

/**
 * Meshes the device. `refine` < 1 asks for smaller triangles than the rule: an independent mesh for a forward check;
 * `wishes` ask for still smaller ones in places. The layer serves the multipoles |m| ≤ `highestOrder` of
 * x = n_b k × body radius; by default those that radiate freely.
 */
export function prepare(
  device: Device,
  scope: Scope,
  resolution: Resolution,
  refine = 1,
  highestOrder?: (x: number) => number,
  ends: 'layers' | 'openings' = 'layers',
  wishes: readonly SizeWish[] = [],
): Prepared {
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const { center, radius, layer, walls } = planSpace(device, scope, resolution, ends, highestOrder);
  const size = (n: number): number => (refine * resolution.sizeInWavelengths * 2 * Math.PI) / (scope.kMax * n);
  const { mesh, notes } = meshDeviceWithNotes(device.bodies, {
    center,
    rimRadius: layer.rimRadius,
    endRadius: layer.endRadius,
    ...(walls ? { walls } : {}),
    bodySizes: device.bodies.map((b) =>
      b.wall
        ? size(index)
        : size(
            Math.sqrt(
              Math.hypot(b.permittivity.re, b.permittivity.im) * Math.hypot(b.permeability.re, b.permeability.im),
            ),
          ),
    ),
    backgroundSize: size(index),
    layerSize: LAYER_COARSENING * size(index),
    cornerGrading: resolution.cornerGrading,
    largestArc: LARGEST_ARC * Math.min(1, refine),
    wishes: wishes.map(({ x, y, size: side }) => ({ x, y, size: refine * side })),
  });
  const parts = { device, scope, mesh, layer, bodyRadius: radius, notes, resolution, highestOrder, wishes };
  return withShifts(parts, null, 0);
}

/** The same mesh with another distribution of orders. */
export function withShifts(
  prepared: Omit<Prepared, 'operator' | 'shifts' | 'madeFor'>,
  shifts: Int32Array | null,
  madeFor: number,
): Prepared {
  const { device, mesh, layer } = prepared;
  const metalCount = metals(device).length;
  const operators = new Map<number, OpenOperator>();
  const operator = (order: number): OpenOperator => {
    let made = operators.get(order);
    if (!made) {
      const space = buildSpace(mesh, ordersAt(order, shifts, madeFor));
      const surfaces = metalCount > 0 ? surfaceTerms(space, FIRST_METAL, metalCount) : undefined;
      made = assembleOpen(space, layerCoefficients(layer, mesh.center), 'outgoing', surfaces);
      operators.set(order, made);
    }
    return made;
  };
  return { ...prepared, shifts, madeFor, operator };
}

/**
 * A mesh of its own for the same device and digits: triangles smaller by `refine` < 1, orders from the same places but with
 * a quarter of their differences: a driven field beside a sharp mode asks more of the outside than the mode itself does.
 */
export function ownMesh(
  prepared: Prepared,
  device: Device,
  refine: number,
  highestOrder?: (x: number) => number,
): Prepared {
  const { scope, resolution, wishes, mesh, shifts, madeFor } = prepared;
  const own = prepare(device, scope, resolution, refine, highestOrder, 'layers', wishes);
  return shifts
    ? withShifts(
        own,
        ordersInPlace(
          own.mesh,
          mesh,
          shifts.map((s) => Math.ceil(s / 4)),
          0,
        ),
        madeFor,
      )
    : own;
}

/** For each triangle of a mesh the number that belongs to the triangle of another mesh where its middle lies. */
export function ordersInPlace(mesh: Mesh, other: Mesh, numbers: Int32Array, outside: number): Int32Array {
  const locate = meshLocator(other);
  const { vertices, triangles, regions } = mesh;
  return Int32Array.from(regions, (_, t) => {
    let x = 0;
    let y = 0;
    for (let i = 3 * t; i < 3 * t + 3; i++) {
      x += vertices[2 * triangles[i]] / 3;
      y += vertices[2 * triangles[i] + 1] / 3;
    }
    const place = locate(x, y);
    return place ? numbers[place.triangle] : outside;
  });
}

/** A prepared device as the refinement of its mesh and orders sees it. */
export interface PreparedGround extends Ground<PreparedGround> {
  /** The device prepared with these orders; its highest order among them. */
  prepared(orders: Int32Array): { readonly prepared: Prepared; readonly order: number };
}

export function groundOf(start: Prepared, direction: Direction, sense: LevelSense): PreparedGround {
  const known = new WeakMap<Int32Array, { readonly prepared: Prepared; readonly order: number }>();
  const prepared = (orders: Int32Array): { readonly prepared: Prepared; readonly order: number } => {
    let made = known.get(orders);
    if (!made) {
      const order = orders.reduce((a, b) => Math.max(a, b), 1);
      made = { prepared: withShifts(start, orders.map((p) => p - order), order), order }; // prettier-ignore
      known.set(orders, made);
    }
    return made;
  };
  return {
    mesh: start.mesh,
    prepared,
    family: (orders, raise) => {
      const { prepared: made, order } = prepared(orders);
      return familyOf(made, order + raise, direction, sense);
    },
    remeshed: (wishes) =>
      groundOf(
        prepare(start.device, start.scope, start.resolution, 1, start.highestOrder, 'layers', [
          ...start.wishes,
          ...wishes,
        ]),
        direction,
        sense,
      ),
    ordersFrom: (other, orders) => ordersInPlace(start.mesh, other, orders, LOWEST_FREE_ORDER),
  };
}

/** For triangles whose middle lies beyond the other mesh. */
const LOWEST_FREE_ORDER = 5;

/** The family A(k, level) of a prepared device at an order. */
export const familyOf = (prepared: Prepared, order: number, direction: Direction, sense: LevelSense): DeviceFamily =>
  deviceFamily(prepared.device, facing(prepared.operator(order), direction), sense);

export const spaceOf = (prepared: Prepared, order: number): Space => prepared.operator(order).space;
