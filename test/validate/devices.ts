// Which device files do the reference values belong to?

import { readDevice } from '../../src/device/read.ts';
import type { Device } from '../../src/device/model.ts';
import type { Polarization } from '../../src/numerics/conventions.ts';

/** A real number or [Re, Im]. */
export type Value = number | readonly [number, number];

export interface Layers {
  /** Outer radii, from the centre outwards. */
  readonly radii: readonly number[];
  readonly eps: readonly Value[];
}

export interface Cylinder {
  readonly x: number;
  readonly y: number;
  readonly radius: number;
  readonly eps: Value;
}

export interface Setting {
  readonly polarization: Polarization;
  readonly band: readonly [number, number];
  /** Indices of the bodies that gain or absorb: layers from the centre, cylinders in their order. All if absent. */
  readonly pumped?: readonly number[];
  /** Index of the background; 1 if absent. */
  readonly outside?: number;
}

/** Concentric layers; those of permittivity 1 are left open, so that a shell about them is a ring. */
export function layeredDevice({ radii, eps }: Layers, setting: Setting): Device {
  const bodies: Part[] = [];
  for (let i = radii.length - 1; i >= 0; i--) {
    if (eps[i] === 1) continue;
    const open = i === 1 && eps[0] === 1;
    const shape = open
      ? { ring: { center: [0, 0], outer: radii[1], inner: radii[0] } }
      : { disk: { center: [0, 0], radius: radii[i] } };
    bodies.push({ index: i, eps: eps[i], shape });
  }
  return device(bodies, setting);
}

/** A disk of radius 1 (or another) and real index. */
export const diskDevice = (index: number, setting: Setting, radius = 1): Device =>
  device([{ index: 0, eps: index * index, shape: { disk: { center: [0, 0], radius } } }], setting);

export const clusterDevice = (cylinders: readonly Cylinder[], setting: Setting): Device =>
  device(
    cylinders.map(({ x, y, radius, eps }, index) => ({ index, eps, shape: { disk: { center: [x, y], radius } } })),
    setting,
  );

/** A square or an equilateral triangle of a real index. */
export const polygonDevice = (shape: 'square' | 'triangle', side: number, index: number, setting: Setting): Device => {
  const height = (side * Math.sqrt(3)) / 2;
  const points = shape === 'square' ? [[0, 0], [side, 0], [side, side], [0, side]] : [[0, 0], [side, 0], [side / 2, height]]; // prettier-ignore
  return device([{ index: 0, eps: index * index, shape: { polygon: { points } } }], setting);
};

interface Part {
  readonly index: number;
  readonly eps: Value;
  readonly shape: object;
}

/** Written as a file and read back, so that the way in is tested too. */
function device(parts: readonly Part[], { polarization, band, pumped, outside }: Setting): Device {
  const active = parts.filter((p) => !pumped || pumped.includes(p.index));
  const file = {
    wavewell: 1,
    polarization,
    band: { wavenumber: band },
    materials: {
      ...Object.fromEntries(parts.map((p) => [`m${p.index}`, { permittivity: p.eps }])),
      ...(outside === undefined ? {} : { outside: { index: outside } }),
    },
    ...(outside === undefined ? {} : { background: 'outside' }),
    bodies: parts.map((p) => ({ name: `b${p.index}`, material: `m${p.index}`, ...p.shape })),
    pump: { bodies: Object.fromEntries(active.map((p) => [`b${p.index}`, 1])) },
  };
  return readDevice(JSON.stringify(file), 'reference.json');
}
