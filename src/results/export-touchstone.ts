// How do the S-parameters of a run leave as a Touchstone file?

import type { RunView } from './run-view.ts';
import { spectrumView } from './spectrum-view.ts';
import { TOUCHSTONE_UNITS, type TouchstoneFormat, type TouchstoneNetwork, type TouchstoneUnit } from './touchstone.ts';
import { touchstoneText } from './touchstone-write.ts';

export interface TouchstoneRequest {
  readonly version: 1 | 2;
  readonly format?: TouchstoneFormat;
  /** Names of the channels that become ports; absent: all that carry power at every point. */
  readonly channels?: readonly string[];
}

/** Ohm, in name only: waves are scaled to power, whatever carries them. */
const NOMINAL_RESISTANCE = 50;

/** @throws Error for a run without S-matrices or without a length unit, or when no channel is left. */
export function touchstoneNetwork(
  run: RunView,
  request: TouchstoneRequest,
): TouchstoneNetwork & { readonly names: readonly string[] } {
  const { channels, points, matrix } = spectrumView(run);
  if (run.record.device.metres === null)
    throw new Error('the device has no length unit, so that its frequencies are not known in Hz');
  const own = channels.flatMap((name, i) =>
    request.channels ? (request.channels.includes(name) ? [i] : []) : points.every((p) => p.propagates[i]) ? [i] : [],
  );
  if (own.length === 0) throw new Error('no channel carries power at every point');
  const hertz = points.map((p) => (p.frequency ?? 0) * 1e12);
  const unit = unitFor(hertz);
  // points may fall together in the unit's decimals
  const order = hertz
    .map((_, i) => i)
    .filter((i) => points[i].k[1] === 0)
    .sort((a, b) => hertz[a] - hertz[b])
    .filter(
      (i, at, list) => at === 0 || hertz[i] / TOUCHSTONE_UNITS[unit] > hertz[list[at - 1]] / TOUCHSTONE_UNITS[unit],
    );
  const n = own.length;
  const matrices = new Float64Array(2 * n * n * order.length);
  order.forEach((i, f) => {
    const S = matrix(i);
    own.forEach((from, b) => {
      own.forEach((to, a) => {
        const e = 2 * (to + from * channels.length);
        matrices[2 * (a + b * n + n * n * f)] = S[e];
        // exp(+jωt)
        matrices[2 * (a + b * n + n * n * f) + 1] = -S[e + 1] + 0;
      });
    });
  });
  return {
    version: request.version,
    unit,
    parameter: 'S',
    format: request.format ?? 'RI',
    ports: n,
    reference: own.map(() => NOMINAL_RESISTANCE),
    frequencies: Float64Array.from(order, (i) => hertz[i] / TOUCHSTONE_UNITS[unit]),
    matrices,
    noise: [],
    names: own.map((i) => channels[i]),
  };
}

/** The file with what its ports are in front. */
export function runTouchstone(
  run: RunView,
  request: TouchstoneRequest,
): { readonly text: string; readonly ports: number } {
  const network = touchstoneNetwork(run, request);
  const { device, sentence } = run.record;
  const text = touchstoneText(network, [
    device.title === '' ? 'S-parameters' : device.title,
    sentence,
    'Time runs as exp(+j w t). Waves are scaled to power: the resistance is nominal.',
    ...network.names.map((name, i) => `Port ${i + 1}: ${name}`),
    ...run.record.cautions,
  ]);
  return { text, ports: network.ports };
}

function unitFor(hertz: readonly number[]): TouchstoneUnit {
  const top = Math.max(...hertz);
  return top >= 1e9 ? 'GHz' : top >= 1e6 ? 'MHz' : top >= 1e3 ? 'kHz' : 'Hz';
}
