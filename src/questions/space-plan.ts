// Where does the field of a device end, and how?

import type { Resolution } from '../accuracy/resolution.ts';
import { guideEnds } from '../boundary/guide-modes.ts';
import { straightLength, type StraightLayer } from '../boundary/straight-layer.ts';
import { LAYER_ANGLE, type LayerPlan, planLayer, returnedAt } from '../boundary/stretched-layer.ts';
import { guideDirection, guideStretch, walledSpaces } from '../device/guides.ts';
import { metals } from '../device/metals.ts';
import { type Device, type Guide, isWalled, type Wall } from '../device/model.ts';
import { deviceCircle, sheetPieces } from '../device/reach.ts';
import { boundingCircle } from '../geometry/bounding-circle.ts';
import type { Point, Shape } from '../geometry/curves.ts';
import { polygon } from '../geometry/shapes.ts';
import { type EdgeCause, FIRST_OPENING, type WallPlan } from '../mesh/mesh.ts';
import type { Polarization } from '../numerics/conventions.ts';

/** Tags of outer edges: left free as they are; from here on metals in the order of `metals`; from `FIRST_OPENING` openings. */
export const FREE = 0;
export const FIRST_METAL = 1;

export interface SpacePlan {
  readonly center: Point;
  /** Of the circle that holds everything that can hold a field, layers apart. */
  readonly radius: number;
  /** Radial for open space; straight ones (or none) for devices with walls. */
  readonly layer: LayerPlan;
  /** Null for an open device without walls, sheets or symmetry. */
  readonly walls: WallPlan | null;
}

/** Plan with stretched layers (`layers`), or with openings to be closed exactly (`openings`). */
export function planSpace(
  device: Device,
  scope: { readonly kMin: number; readonly kMax: number; readonly slope: number },
  resolution: Resolution,
  ends: 'layers' | 'openings' = 'layers',
  highestOrder?: (x: number) => number,
): SpacePlan {
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const circle = deviceCircle(device);
  const largestArgument = Math.atan(scope.slope);
  const open = isWalled(device)
    ? null
    : planLayer({
        bodyRadius: circle.radius,
        kMin: scope.kMin,
        kMax: scope.kMax,
        largestArgument,
        backgroundIndex: index,
        tolerance: resolution.layerTolerance,
        ...(highestOrder === undefined ? {} : { highestOrder }),
      });
  const guides = device.guides ?? [];
  const straight =
    open || ends === 'openings'
      ? []
      : guides.map((guide): StraightLayer => {
          const direction = guideDirection(guide);
          const side = { width: guide.width, ends: guideEnds(device.polarization, guide.wall) };
          const length = straightLength(
            side,
            index,
            { kMin: scope.kMin, kMax: scope.kMax, largestArgument },
            LAYER_ANGLE,
            resolution.layerTolerance,
          );
          const from = [
            guide.from[0] + guide.length * direction[0],
            guide.from[1] + guide.length * direction[1],
          ] as const;
          return { from, direction, length, ...side };
        });
  const layers = straight.map((s, i) => guideStretch(guides[i], guides[i].length, guides[i].length + s.length));
  const whole = open ? circle : boundingCircle([...walledSpaces(device), ...layers]);
  const layer: LayerPlan = open
    ? ends === 'openings'
      ? { ...open, endRadius: open.rimRadius }
      : open
    : {
        rimRadius: circle.radius,
        endRadius: whole.radius + Math.hypot(whole.center[0] - circle.center[0], whole.center[1] - circle.center[1]),
        angle: LAYER_ANGLE,
        backgroundIndex: index,
        returned: 0,
        straight,
      };
  const returned =
    straight.length > 0 ? returnedAt(layer, { re: scope.kMin, im: -scope.slope * scope.kMin }) : layer.returned;
  const plain =
    open && ends === 'layers' && !device.sheets && !device.symmetry && !device.bodies.some((body) => body.wall);
  return {
    center: circle.center,
    radius: circle.radius,
    layer: { ...layer, returned },
    walls: plain ? null : wallPlan(device, layer, layers, resolution, circle.center, ends),
  };
}

function wallPlan(
  device: Device,
  layer: LayerPlan,
  layers: readonly Shape[],
  resolution: Resolution,
  center: Point,
  ends: 'layers' | 'openings',
): WallPlan {
  const { polarization } = device;
  const conductors = metals(device);
  const guides = device.guides ?? [];
  const tag = (wall: Wall): number =>
    wall.kind === 'conductor'
      ? FIRST_METAL + conductors.indexOf(wall.conductivity)
      : endsAtZero(wall, polarization)
        ? -1
        : FREE;
  const symmetry = device.symmetry ?? [];
  const far = 3 * layer.endRadius;
  const open = !isWalled(device);
  return {
    spaces: walledSpaces(device),
    layers,
    metal: new Set(device.bodies.flatMap((body, i) => (body.wall ? [i] : []))),
    beyond: symmetry.map(({ across, at }): Shape => {
      const box = (x0: number, y0: number, x1: number, y1: number): Shape =>
        polygon([
          [x0, y0],
          [x1, y0],
          [x1, y1],
          [x0, y1],
        ]);
      return across === 'x'
        ? box(center[0] - far, center[1] - far, at, center[1] + far)
        : box(center[0] - far, center[1] - far, center[0] + far, at);
    }),
    sheets: (device.sheets ?? []).map((sheet) => ({ name: sheet.name, pieces: sheetPieces(sheet) })),
    tagOf: ({ by, index, middle }: EdgeCause): number => {
      if (by === 'body') return tag(device.bodies[index].wall!);
      if (by === 'beyond') return symmetry[index].parity === 'odd' ? -1 : FREE;
      if (by === 'sheet') return tag(device.sheets![index].wall);
      // the end of open space, or its rim
      if (open) return ends === 'openings' ? FIRST_OPENING : -1;
      const opening = ends === 'openings' ? guides.findIndex((g) => onPort(g, middle)) : -1;
      if (opening >= 0) return FIRST_OPENING + opening;
      const guide = guides.find((g) => onSide(g, middle));
      if (guide) return tag({ kind: guide.wall });
      return device.enclosure ? tag(device.enclosure.wall) : tag({ kind: guides[0].wall });
    },
    endOf: (t) => {
      if (t >= FIRST_OPENING) return 'open';
      return t < 0 || (t >= FIRST_METAL && polarization === 'Ez') ? 'zero' : 'free';
    },
    mediumOf: (body) => {
      const { permittivity: e, permeability: m } = device.bodies[body] ?? {
        permittivity: { re: device.background.permittivity, im: 0 },
        permeability: { re: device.background.permeability, im: 0 },
      };
      return [e.re, e.im, m.re, m.im, device.bodies[body]?.pumpWeight ?? 0].join(' ');
    },
    cornerShare: (exponent) => cornerShare(exponent, resolution),
  };
}

/** Whether the field out of the plane vanishes on the wall. */
const endsAtZero = (wall: Wall, polarization: Polarization): boolean =>
  (wall.kind === 'electric') === (polarization === 'Ez');

/**
 * Frequencies and S-parameters are quadratic in the error of the field, which the smallest triangles of side h at a corner
 * r^ν limit to about (h/H)^{2ν} p^{−4ν}: h for a tenth of the digits' tolerance.
 */
function cornerShare(exponent: number, { layerTolerance, order }: Resolution): number {
  return Math.min(1, Math.max(1e-7, (30 * layerTolerance) ** (1 / (2 * exponent)) * order ** 2));
}

/** Whether a point lies on the line where the meshed stretch of the guide ends. */
function onPort(guide: Guide, point: Point): boolean {
  const [s, t] = alongAcross(guide, point);
  return Math.abs(s - guide.length) < 1e-9 * guide.width && Math.abs(t) < guide.width / 2;
}

/** Whether a point lies on one of the guide's walls, its layer's included. */
function onSide(guide: Guide, point: Point): boolean {
  const [s, t] = alongAcross(guide, point);
  return s > -1e-9 * guide.width && Math.abs(Math.abs(t) - guide.width / 2) < 1e-9 * guide.width;
}

/** Coordinates of a point along the guide, from its beginning, and across it, from its middle. */
export function alongAcross(guide: Pick<Guide, 'from' | 'angle'>, [x, y]: Point): [number, number] {
  const [dx, dy] = guideDirection(guide);
  const px = x - guide.from[0];
  const py = y - guide.from[1];
  return [px * dx + py * dy, py * dx - px * dy];
}
