// How does an S-matrix answer become a stored run?

import type { Device } from '../device/model.ts';
import { fromWavenumber } from '../materials/spectral-units.ts';
import { SPEED_OF_LIGHT } from '../numerics/conventions.ts';
import { cautionsFor } from '../results/cautions.ts';
import { significant } from '../results/number-text.ts';
import type { Pair, ScatterAnswerPoint } from '../results/format.ts';
import { storeModel } from '../results/model-store.ts';
import { SCATTERING_ARRAY } from '../results/spectrum-view.ts';
import { qOf } from '../projected/sharp-poles.ts';
import type { DeviceChannel } from './prepare-openings.ts';
import { openBook, type RunContext, type RunParts } from './record.ts';
import type { ScatterAnswer } from './scatter.ts';
import type { SpectrumAnswer } from './spectrum.ts';

/** Fields kept: one a channel, up to this many. */
const MOST_FIELDS = 8;

/** The run of `spectrum`: S at every point, and the field of each input at the middle of the list. */
export function spectrumRecord(device: Device, answer: ScatterAnswer, context: RunContext): RunParts {
  const { channels, points, order, openings } = answer;
  const n = channels.length;
  const book = openBook(device, openings.prepared, order, context);
  const middle = points[points.length >> 1];
  const driven = openings.closed(order, 'loss').scatter(middle.k, 0).fields;
  const N = driven.length / (2 * n);
  channels.slice(0, MOST_FIELDS).forEach((channel, j) => {
    if (!middle.propagates[j]) return;
    book.addField({
      id: `input-${j + 1}`,
      label: `wave into ${channel.name}`,
      kind: 'driven',
      k: [middle.k.re, middle.k.im],
      level: null,
      order,
      vector: driven.subarray(2 * N * j, 2 * N * (j + 1)),
      drive: null,
      pattern: null,
    });
  });
  const rows = points.map((p): ScatterAnswerPoint => ({
    k: [p.k.re, p.k.im],
    ...spectral(device, p.k.re),
    S: rowsOf(p.matrix, n),
    error: p.error,
    propagates: p.propagates,
    absorbed: Array.from(p.absorbed),
    balance: p.balance,
    unitarity: p.unitarity,
    reciprocity: p.reciprocity,
  }));
  const cautions = cautionsFor('modes', device);
  return book.close('spectrum', spectrumSentence(device, answer), cautions, {
    channels: channels.map((c) => c.name),
    points: rows,
    order,
    reached: answer.reached,
    unknowns: openings.prepared.operator(order).space.unknowns,
    notes: openings.prepared.notes,
    cautions,
  });
}

/** Up to so many numbers S stands in the answer itself, beyond in an array. */
const MOST_NUMBERS = 40_000;

/** The run of `spectrum` from a projected model: S, what follows from it, the model, and the fields at the first resonance. */
export function modelledRecord(device: Device, answer: SpectrumAnswer, context: RunContext): RunParts {
  const { channels, points, order, openings, model, poles } = answer;
  const n = channels.length;
  const book = openBook(device, openings.prepared, order, context);
  const sharpest = [...poles].sort((a, b) => qOf(b.k) - qOf(a.k))[0];
  const k = sharpest ? sharpest.k.re : points[points.length >> 1].k;
  const driven = openings.closed(order, 'loss').scatter({ re: k, im: 0 }, 0).fields;
  const N = driven.length / (2 * n);
  channels.slice(0, MOST_FIELDS).forEach((channel, j) => {
    if (!openings.openings[channel.opening].propagates(channel.index, k)) return;
    book.addField({
      id: `input-${j + 1}`,
      label: `wave into ${channel.name}`,
      kind: 'driven',
      k: [k, 0],
      level: null,
      order,
      vector: driven.subarray(2 * N * j, 2 * N * (j + 1)),
      drive: null,
      pattern: null,
    });
  });
  const inside = 2 * n * n * points.length <= MOST_NUMBERS;
  const rows = points.map((p): ScatterAnswerPoint => ({
    k: [p.k, 0],
    ...spectral(device, p.k),
    ...(inside ? { S: rowsOf(p.matrix, n) } : {}),
    error: p.error,
    propagates: p.propagates,
    absorbed: Array.from(p.absorbed),
    balance: null,
    unitarity: p.unitarity,
    reciprocity: p.reciprocity,
    modelError: p.modelError,
    best: p.best,
    worst: p.worst,
    delay: p.delay,
    ...(p.smallest === null ? {} : { smallest: p.smallest }),
    ...(p.added ? { added: true } : {}),
  }));
  if (!inside) {
    const all = new Float64Array(2 * n * n * points.length);
    points.forEach((p, i) => {
      all.set(p.matrix, 2 * n * n * i);
    });
    book.arrays[SCATTERING_ARRAY] = all;
  }
  const { stored, arrays } = storeModel(model);
  Object.assign(book.arrays, arrays);
  const cautions = cautionsFor('modes', device);
  return book.close('spectrum', modelledSentence(device, answer), cautions, {
    channels: channels.map((c) => c.name),
    points: rows,
    order,
    reached: answer.reached,
    unknowns: openings.prepared.operator(order).space.unknowns,
    factorizations: answer.factorizations,
    basis: model.size,
    resonances: poles.map((p) => ({ k: [p.k.re, p.k.im], q: qOf(p.k), modelError: p.error, orderShift: p.orderShift })),
    model: stored,
    notes: openings.prepared.notes,
    cautions,
  });
}

/** "S-matrix of 41 channels at 2001 points from 8 full solves …; least reflection 0.0318 into open.cos0 at …" */
function modelledSentence(device: Device, { channels, points, model, factorizations, poles }: SpectrumAnswer): string {
  const { order, witnesses, snapshots } = factorizations;
  const added = points.filter((p) => p.added).length;
  const resolved = added === 0 ? '' : `, ${added} of them about ${poles.length} sharp ${poles.length === 1 ? 'resonance' : 'resonances'}`; // prettier-ignore
  return (
    `S-matrix of ${channels.length} ${channels.length === 1 ? 'channel' : 'channels'} at ${points.length} points${resolved}, from ` +
    `${order + witnesses + snapshots} factorizations (${order} of them to settle the order) and ${model.size} basis fields; each entry ± ` +
    `${Math.max(...points.map((p) => p.error)).toExponential(0)}, of it the model ` +
    `${Math.max(...points.map((p) => p.modelError)).toExponential(0)}; ${leastReflection(device, channels, points)}.`
  );
}

const spectral = (device: Device, k: number): { wavelength: number; frequency: number | null } => ({
  wavelength: (2 * Math.PI) / k,
  frequency: device.metres === null ? null : (k * SPEED_OF_LIGHT) / (2 * Math.PI * device.metres) / 1e12,
});

/** Row by row: from every channel into the first, and so on. */
const rowsOf = (matrix: Float64Array, n: number): Pair[][] =>
  Array.from({ length: n }, (_, i) =>
    Array.from({ length: n }, (__, j): Pair => [matrix[2 * (i + j * n)], matrix[2 * (i + j * n) + 1]]),
  );

function leastReflection(
  device: Device,
  channels: readonly DeviceChannel[],
  points: readonly { readonly k: number; readonly matrix: Float64Array; readonly propagates: readonly boolean[] }[],
): string {
  const n = channels.length;
  let best = { size: Infinity, channel: 0, k: points[0].k };
  for (const p of points)
    for (let j = 0; j < n; j++) {
      const size = Math.hypot(p.matrix[2 * (j + j * n)], p.matrix[2 * (j + j * n) + 1]);
      if (p.propagates[j] && size < best.size) best = { size, channel: j, k: p.k };
    }
  const { quantity, unit } = device.band;
  const place = significant(fromWavenumber(quantity, best.k, unit, device.metres), 6);
  return (
    `least reflection ${significant(best.size, 4)}, into ${channels[best.channel].name} at ` +
    `${quantity === 'wavenumber' ? 'k = ' : ''}${place} ${unit}`.trim()
  );
}

/** "S-matrix of 2 channels at 5 points …, ± 2e-7; least reflection 0.0318 from in.0 at 12.4 GHz." */
function spectrumSentence(device: Device, { channels, points }: ScatterAnswer): string {
  const n = channels.length;
  const error = Math.max(...points.map((p) => p.error));
  const real = points.map((p) => ({ ...p, k: p.k.re }));
  return (
    `S-matrix of ${n} ${n === 1 ? 'channel' : 'channels'} at ${points.length} ${points.length === 1 ? 'point' : 'points'}, ` +
    `each entry ± ${error.toExponential(0)}; ${leastReflection(device, channels, real)}.`
  );
}
