// From a checked device to matrices: what every question starts with.

import type { Resolution } from '../accuracy/resolution.ts';
import { type LayerPlan, layerCoefficients } from '../boundary/stretched-layer.ts';
import { metals } from '../device/metals.ts';
import type { Device } from '../device/model.ts';
import { buildSpace, type Space } from '../elements/space.ts';
import type { Mesh } from '../mesh/mesh.ts';
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
  /** The assembled operator of an order (outgoing), made once. */
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
 * Meshes the device. `refine` < 1 asks for smaller triangles than the rule: an independent mesh for a forward check. The
 * layer serves the multipoles |m| ≤ `highestOrder` of x = n_b k × body radius; by default those that radiate freely.
 */
export function prepare(
  device: Device,
  scope: Scope,
  resolution: Resolution,
  refine = 1,
  highestOrder?: (x: number) => number,
  ends: 'layers' | 'openings' = 'layers',
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
  });
  const metalCount = metals(device).length;
  const operators = new Map<number, OpenOperator>();
  const operator = (order: number): OpenOperator => {
    let made = operators.get(order);
    if (!made) {
      const space = buildSpace(mesh, order);
      const surfaces = metalCount > 0 ? surfaceTerms(space, FIRST_METAL, metalCount) : undefined;
      made = assembleOpen(space, layerCoefficients(layer, center), 'outgoing', surfaces);
      operators.set(order, made);
    }
    return made;
  };
  return { device, scope, mesh, layer, bodyRadius: radius, notes, operator };
}

/** The family A(k, level) of a prepared device at an order. */
export const familyOf = (prepared: Prepared, order: number, direction: Direction, sense: LevelSense): DeviceFamily =>
  deviceFamily(prepared.device, facing(prepared.operator(order), direction), sense);

export const spaceOf = (prepared: Prepared, order: number): Space => prepared.operator(order).space;
