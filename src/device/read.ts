// Which device does the text of a device file describe?

import { METRES } from '../materials/spectral-units.ts';
import { readBand } from './band.ts';
import { findMaterial, readBodies } from './bodies.ts';
import { checkKeys } from './check-keys.ts';
import { settleKnobs } from './knobs.ts';
import { VACUUM, readMaterials, show } from './materials.ts';
import type { Material } from './materials.ts';
import type { Device } from './model.ts';
import { numberReader, openLog } from './numbers.ts';
import type { Log } from './numbers.ts';
import { checkPorts, readGuides } from './guides.ts';
import { weighBodies } from './pump.ts';
import { checkSanity } from './sanity.ts';
import type { DeviceInput } from './schema.ts';
import { readSource } from './source.ts';
import { readWalls } from './walls.ts';

export interface ReadOptions {
  /** Replaces knob values by name; expressions follow. */
  readonly knobs?: Readonly<Record<string, number>>;
  /** Replaces the band limits, in the quantity and unit of the file. */
  readonly band?: readonly [number, number];
}

/**
 * Reads and checks a device file (YAML or JSON).
 *
 * @param fileName as messages shall call it.
 * @throws DeviceError with a finding (place, what came, what was expected, what to do) for everything that is wrong.
 * @example
 * readDevice('{"wavewell": 1, "polarization": "Ez", "band": {"wavenumber": [1, 2]}, "materials": {"glass": {"index": 1.5}},
 *   "bodies": [{"material": "glass", "disk": {"center": [0, 0], "radius": 1}}]}', 'disk.json')
 */
export function readDevice(text: string, fileName: string, options: ReadOptions = {}): Device {
  const source = readSource(text, fileName);
  const input = checkKeys(source);
  const log = openLog(source);
  const { knobs, values } = settleKnobs(input.knobs ?? {}, options.knobs ?? {}, log);
  const numbers = numberReader(log, values);
  const lengthUnit = input.length ?? 'none';
  const band = readBand(input.band, lengthUnit, options.band, numbers, log);
  const materials = readMaterials(input.materials ?? {}, numbers, log);
  const background = readBackground(input, materials, log);
  const placed = readBodies(input.bodies, materials, numbers, log);
  if (input.bodies.length === 0 && input.enclosure === undefined && input.guides === undefined)
    log.report(['bodies'], '[] (a list of 0)', '1 entries or more, or an enclosure or guides', 'add what is missing');
  const walls = readWalls(input, materials, numbers, log);
  const guides = readGuides(input, materials, numbers, log);
  // Names in the pump can be judged only when every body is there.
  log.throwIfAny();
  const bodies = weighBodies(
    placed.map(({ body }) => body),
    input.pump,
    numbers,
    log,
  );
  log.throwIfAny();
  const device: Device = {
    title: input.title ?? '',
    lengthUnit,
    metres: METRES[lengthUnit],
    polarization: input.polarization,
    band: band!,
    knobs,
    background: background!,
    bodies,
    ...walls,
    ...(guides.length > 0 ? { guides } : {}),
  };
  checkPorts(device, log);
  checkSanity(device, placed, log);
  log.throwIfAny();
  return device;
}

/** Null with findings made. */
function readBackground(
  input: DeviceInput,
  materials: ReadonlyMap<string, Material | null>,
  log: Log,
): Device['background'] | null {
  const name = input.background ?? VACUUM;
  const material = findMaterial(name, ['background'], materials, log);
  if (material === null) return null;
  const { permittivity, permeability } = material;
  if (material.wall) {
    log.report(['background'], name, 'a material that waves can enter', 'draw metal as bodies or as an enclosure');
    return null;
  }
  if (permittivity.im !== 0 || permeability.im !== 0 || permittivity.re <= 0 || permeability.re <= 0) {
    log.report(
      ['background'],
      `${name} with permittivity ${show(permittivity)} and permeability ${show(permeability)}`,
      'a lossless material with positive permittivity and permeability, for waves must run to infinity in it',
      'choose a lossless background, and draw the lossy part as a body',
    );
    return null;
  }
  return { material: name, permittivity: permittivity.re, permeability: permeability.re };
}
