// Which metals with a surface impedance does a device have?

import type { Device } from './model.ts';

/** Conductivities of the metals that carry a surface impedance, S/m, in the order of their tags. */
export function metals(device: Device): readonly number[] {
  const all = [
    device.enclosure?.wall,
    ...device.bodies.map((body) => body.wall),
    ...(device.sheets ?? []).map((sheet) => sheet.wall),
  ];
  return [...new Set(all.flatMap((wall) => (wall?.kind === 'conductor' ? [wall.conductivity] : [])))];
}
