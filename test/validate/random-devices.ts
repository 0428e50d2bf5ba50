// Which device is number i of a seed?

import { readDevice } from '../../src/device/read.ts';
import type { Device } from '../../src/device/model.ts';
import type { Complex } from '../../src/numerics/complex.ts';
import type { Polarization } from '../../src/numerics/conventions.ts';
import { randomStream } from '../../src/numerics/random.ts';
import type { Assignment } from '../../src/questions/modes.ts';
import type { ExactCylinder, ExactLayers } from './exact-count.ts';

export interface RandomCase {
  readonly name: string;
  readonly device: Device;
  readonly polarization: Polarization;
  readonly digits: number;
  readonly qMin: number;
  readonly assignment: Assignment;
  /** Where an exact equation is known. */
  readonly layers?: ExactLayers;
  readonly cylinders?: readonly ExactCylinder[];
}

type Kind = 'disk' | 'ring' | 'cluster' | 'polygon';
const KINDS: readonly Kind[] = ['disk', 'ring', 'cluster', 'polygon'];

/** Disks, rings, clusters and polygons a few wavelengths across, with and without loss or gain, both polarizations. */
export function randomCase(seed: number, i: number): RandomCase {
  const random = randomStream(1_000_003 * seed + i);
  const between = (a: number, b: number): number => a + (b - a) * random.uniform();
  const pick = <T>(list: readonly T[]): T =>
    list[Math.min(list.length - 1, Math.floor(list.length * random.uniform()))];
  const kind = KINDS[i % KINDS.length];
  const polarization = pick(['Ez', 'Hz'] as const);
  const state = pick(['lossless', 'lossless', 'lossy', 'gain'] as const);
  const assignment = random.uniform() < 0.3 ? 'zeros' : 'poles';
  const permittivity = (): Complex => {
    const re = between(1.5, 3.2) ** 2;
    if (state === 'lossless') return { re, im: 0 };
    return { re, im: (state === 'lossy' ? 1 : -1) * re * 10 ** between(-3, -1.2) };
  };
  const eps = [permittivity(), permittivity(), permittivity(), permittivity()];
  const bodies: { material: number; shape: object; radius: number }[] = [];
  let layers: ExactLayers | undefined;
  let cylinders: ExactCylinder[] | undefined;
  if (kind === 'disk') {
    bodies.push({ material: 0, radius: 1, shape: { disk: { center: [0, 0], radius: 1 } } });
    layers = { radii: [1], eps: [eps[0]] };
  } else if (kind === 'ring') {
    const inner = Math.round(100 * between(0.3, 0.85)) / 100;
    bodies.push({ material: 0, radius: 1, shape: { ring: { center: [0, 0], outer: 1, inner } } });
    layers = { radii: [inner, 1], eps: [{ re: 1, im: 0 }, eps[0]] };
    if (random.uniform() < 0.5) {
      bodies.push({ material: 1, radius: inner, shape: { disk: { center: [0, 0], radius: inner } } });
      layers = { radii: [inner, 1], eps: [eps[1], eps[0]] };
    }
  } else if (kind === 'cluster') {
    cylinders = [];
    const count = 2 + Math.floor(3 * random.uniform());
    const alike = random.uniform() < 0.4;
    for (let tries = 0; cylinders.length < count && tries < 200; tries++) {
      const radius = alike ? 0.5 : Math.round(100 * between(0.3, 0.7)) / 100;
      const x = Math.round(1000 * between(-1.3, 1.3)) / 1000;
      const y = Math.round(1000 * between(-1.3, 1.3)) / 1000;
      if (cylinders.some((c) => Math.hypot(c.x - x, c.y - y) < c.radius + radius + 0.08)) continue;
      cylinders.push({ x, y, radius, eps: eps[alike ? 0 : cylinders.length] });
    }
    cylinders.forEach(({ x, y, radius }, j) =>
      bodies.push({ material: alike ? 0 : j, radius, shape: { disk: { center: [x, y], radius } } }),
    );
  } else {
    const corners = 3 + Math.floor(4 * random.uniform());
    const regular = random.uniform() < 0.5;
    const turn = between(0, 6);
    const points = Array.from({ length: corners }, (_, j) => {
      const r = regular ? 1 : between(0.6, 1);
      const angle = turn + (2 * Math.PI * (j + (regular ? 0 : between(-0.2, 0.2)))) / corners;
      return [Math.round(1e4 * r * Math.cos(angle)) / 1e4, Math.round(1e4 * r * Math.sin(angle)) / 1e4];
    });
    bodies.push({ material: 0, radius: 0.8, shape: { polygon: { points } } });
  }
  const used = new Set(bodies.map((b) => b.material));
  // optical size of all bodies together: 3 to 10 radians of n k r
  const optical = Math.sqrt(bodies.reduce((sum, b) => sum + eps[b.material].re * b.radius ** 2, 0));
  const middle = between(3, kind === 'polygon' ? 8 : 10) / optical;
  const half = middle * between(0.06, 0.28);
  const band = [middle - half, middle + half];
  const file = {
    wavewell: 1,
    polarization,
    band: { wavenumber: band },
    materials: Object.fromEntries(
      [...used].map((j) => {
        const { re, im } = eps[j];
        return [`m${j}`, { permittivity: im === 0 ? re : [re, im], ...(im < 0 ? { gain: true } : {}) }];
      }),
    ),
    bodies: bodies.map((b, j) => ({ name: `b${j}`, material: `m${b.material}`, ...b.shape })),
  };
  return {
    name: `${i} ${kind} ${polarization} ${state} ${assignment} k ${band.map((k) => k.toFixed(3)).join('–')}`,
    device: readDevice(JSON.stringify(file), `random-${seed}-${i}.json`),
    polarization,
    digits: pick([3, 4]),
    qMin: pick([3, 6, 12, 25]),
    assignment,
    ...(layers ? { layers } : {}),
    ...(cylinders ? { cylinders } : {}),
  };
}
