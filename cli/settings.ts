// Which settings does a computing command ask with, defaults filled in?

import { DEFAULT_DIGITS } from '../src/index.ts';
import type { SolveOptions } from './options.ts';
import type { Settings } from './tasks.ts';

export function commonSettings(options: SolveOptions): Settings {
  const knobs = Object.entries(options.knob ?? {}).sort(([a], [b]) => (a < b ? -1 : 1));
  return { digits: options.digits ?? DEFAULT_DIGITS, band: options.band ?? null, knobs: Object.fromEntries(knobs) };
}
