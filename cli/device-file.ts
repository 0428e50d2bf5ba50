// Which device does the command speak of, and is there room for it?

import { readFileSync, statSync } from 'node:fs';
import { totalmem } from 'node:os';
import { DeviceError, deviceSize, type Device, isWalled, readDevice, showBytes } from '../src/index.ts';
import { InputError } from './faults.ts';
import type { DeviceOptions } from './options.ts';

/** Larger files are no device files. */
const MOST_BYTES = 64e6;

export interface DeviceFile {
  readonly path: string;
  readonly text: string;
  readonly device: Device;
}

/** Reads and checks the file; refuses, with the figure, what this machine cannot hold. */
export function openDevice(path: string, options: DeviceOptions): DeviceFile {
  const text = readText(path);
  const device = readDevice(text, path, {
    ...(options.knob ? { knobs: options.knob } : {}),
    ...(options.band ? { band: options.band } : {}),
  });
  refuseTooLarge(path, device);
  return { path, text, device };
}

/**
 * The openings of a device with guides or symmetry lines, whose thresholds and absorption points are those of `match`; null
 * for open space all around. A closed device has neither.
 */
export function waysOut({ path, device }: DeviceFile): readonly string[] | null {
  if (device.guides) return device.guides.map((guide) => guide.name);
  if (isWalled(device))
    throw new InputError(
      path,
      'a device with walls all around it',
      'guides, or open space around it',
      'add a guide, or ask "wavewell modes"',
    );
  return device.symmetry ? ['open'] : null;
}

/** A threshold and an absorption point need a body that gains or absorbs. */
export function refusePassive({ path, device }: DeviceFile): void {
  if (device.bodies.some((body) => body.pumpWeight > 0)) return;
  throw new DeviceError([
    {
      file: path,
      line: 1,
      column: 1,
      path: 'pump',
      came: 'a device without an active body',
      expected: 'a pump section that names at least one body with its weight',
      mend: `add "pump: { bodies: { ${device.bodies[0].group}: 1 } }"`,
    },
  ]);
}

function readText(path: string): string {
  const refuse = (came: string): never => {
    throw new InputError(path, came, 'a device file in YAML or JSON', 'check the name of the file');
  };
  try {
    const { size } = statSync(path);
    if (size > MOST_BYTES) return refuse(`a file of ${showBytes(size)}`);
    return readFileSync(path, 'utf8');
  } catch (error) {
    if (error instanceof InputError) throw error;
    const { code } = error as NodeJS.ErrnoException;
    const reasons: Record<string, string> = {
      ENOENT: 'no such file',
      ENOTDIR: 'no such file',
      EISDIR: 'a folder',
      EACCES: 'a file that may not be read',
    };
    return refuse(reasons[code ?? ''] ?? `a file that cannot be read (${code ?? String(error)})`);
  }
}

function refuseTooLarge(path: string, device: Device): void {
  const { bytes, wavelengthsAcross } = deviceSize(device);
  const memory = totalmem();
  if (bytes <= memory) return;
  throw new DeviceError([
    {
      file: path,
      line: 0,
      column: 0,
      path: 'bodies',
      came: `a device ${wavelengthsAcross.toPrecision(3)} wavelengths across that needs about ${showBytes(bytes)} of memory`,
      expected: `at most the ${showBytes(memory)} of this machine`,
      mend: 'narrow the band to longer waves, or make the device smaller',
    },
  ]);
}
