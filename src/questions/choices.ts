// Which choice of input channels can be freed of reflection most easily?

import { DEFAULT_DIGITS, resolutionFor } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { type Complex, modulus, subtract } from '../numerics/complex.ts';
import { drivenModel, searchModel } from './driven-model.ts';
import { expectedModes } from './mode-count.ts';
import type { Progress } from './progress.ts';
import { type PreparedOpenings, prepareOpenings } from './prepare-openings.ts';

export interface ChoicesRequest {
  readonly digits?: number;
  /** Lowest Q = Re k / 2|Im k| looked at; 10 if absent. */
  readonly qMin?: number;
  readonly progress?: Progress;
}

/** One set of inputs with its reflectionless modes, nearest to the real axis first. */
export interface Choice {
  readonly inputs: readonly boolean[];
  readonly modes: readonly { readonly k: Complex; readonly kError: number }[];
}

export interface ChoicesAnswer {
  readonly channels: readonly string[];
  /** All sets but none and all, by |Im k|/Re k of their nearest mode; sets without a mode in the window last. */
  readonly choices: readonly Choice[];
  readonly covered: boolean;
  readonly order: number;
  readonly digits: number;
  readonly openings: PreparedOpenings;
}

/** More channels than this have too many choices for a table. */
export const MOST_CHOICE_CHANNELS = 8;

/**
 * The reflectionless modes of all 2^N − 2 choices of inputs among the N channels that carry power in the band. One model
 * of driven fields serves them all; a second, one order lower, tells their errors. Resonances that no channel sees are not
 * among them.
 *
 * @throws RangeError for fewer than 2 or more than 8 channels, or a device without openings.
 */
export function findChoices(device: Device, request: ChoicesRequest = {}): ChoicesAnswer {
  const digits = request.digits ?? DEFAULT_DIGITS;
  const { progress } = request;
  const resolution = resolutionFor(digits);
  const order = resolution.order + 1;
  const { kMin, kMax } = device.band;
  const scope = { kMin, kMax, slope: 1 / (2 * (request.qMin ?? 10)) };
  progress?.('meshing', 0);
  const openings = prepareOpenings(device, scope, resolution);
  const carrying = openings.channels.map((c) => openings.openings[c.opening].propagates(c.index, kMin));
  const n = carrying.filter(Boolean).length;
  if (n < 2 || n > MOST_CHOICE_CHANNELS)
    throw new RangeError(`the device has ${n} channels over the whole band; expected 2 to ${MOST_CHOICE_CHANNELS}`);
  const places = carrying.flatMap((does, c) => (does ? [c] : []));
  const sets = Array.from({ length: 2 ** n - 2 }, (_, s) =>
    carrying.map((does, c) => does && (((s + 1) >> places.indexOf(c)) & 1) === 1),
  );
  const [low, high] = [order - 1, order].map((p, i) => {
    progress?.(`order ${p}`, i / 2);
    const closed = openings.closed(p, 'loss');
    return searchModel(drivenModel(closed, 0, kMin, kMax), closed, sets, scope, expectedModes(device));
  });
  const choices = sets.map((inputs, s): Choice => {
    const modes = (high.families[s] ?? [])
      .filter((k) => k.re >= kMin && k.re <= kMax && Math.abs(k.im) <= scope.slope * k.re)
      .map((k) => ({ k, kError: nearestDistance(low.families[s] ?? [], k) + MODEL_ERROR * modulus(k) }));
    return { inputs, modes: modes.sort((a, b) => axisDistance(a.k) - axisDistance(b.k)) };
  });
  const far = ({ modes }: Choice): number => (modes.length > 0 ? axisDistance(modes[0].k) : Infinity);
  return {
    channels: openings.channels.map((c) => c.name),
    choices: choices.sort((a, b) => far(a) - far(b) || 0),
    covered: low.covered && high.covered,
    order,
    digits,
    openings,
  };
}

/** The model against full solves on the same mesh, six-guide junctions: 2e-9 of k at most. */
const MODEL_ERROR = 3e-9;

const axisDistance = (k: Complex): number => Math.abs(k.im) / k.re;

const nearestDistance = (list: readonly Complex[], k: Complex): number =>
  list.reduce((least, other) => Math.min(least, modulus(subtract(other, k))), Infinity);
