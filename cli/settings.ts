// Which settings does a computing command ask with, defaults filled in?

import { DEFAULT_DIGITS, listNames, nearestName } from '../src/index.ts';
import type { DeviceFile } from './device-file.ts';
import { InputError } from './faults.ts';
import type { AlongOption, SolveOptions } from './options.ts';
import type { Along, Settings } from './tasks.ts';

export function commonSettings(options: SolveOptions): Settings {
  const knobs = Object.entries(options.knob ?? {}).sort(([a], [b]) => (a < b ? -1 : 1));
  return {
    digits: options.digits ?? DEFAULT_DIGITS,
    band: options.band ?? null,
    knobs: Object.fromEntries(knobs),
    ...(options.mostMemory === undefined ? {} : { mostMemory: options.mostMemory }),
    ...(options.mostTime === undefined ? {} : { mostTime: options.mostTime }),
  };
}

/** The knob that is the parameter, with its range from the option or else from the file. */
export function alongSettings(option: AlongOption | undefined, { path, device }: DeviceFile): Along | null {
  if (!option) return null;
  const { knobs } = device;
  const known = knobs.find((k) => k.name === option.knob);
  const near = nearestName(option.knob, knobs.map((k) => k.name)); // prettier-ignore
  if (!known)
    throw new InputError(
      'option --along',
      `the unknown knob ${option.knob}`,
      knobs.length === 0 ? 'a knob: the file has none' : listNames(knobs.map((k) => k.name)),
      near === undefined ? `define it in ${path}` : `write ${near}`,
    );
  const range = option.range ?? known.range;
  if (!range)
    throw new InputError(
      'option --along',
      `${option.knob}, which has no range in ${path}`,
      'values to search between',
      `write --along ${option.knob}=A,B`,
    );
  return { knob: option.knob, range };
}
