// How does an S-matrix answer become a stored run?

import type { Device } from '../device/model.ts';
import { fromWavenumber } from '../materials/spectral-units.ts';
import { SPEED_OF_LIGHT } from '../numerics/conventions.ts';
import { cautionsFor } from '../results/cautions.ts';
import { significant } from '../results/number-text.ts';
import type { Pair, ScatterAnswerPoint } from '../results/format.ts';
import { openBook, type RunContext, type RunParts } from './record.ts';
import type { ScatterAnswer } from './scatter.ts';

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
    wavelength: (2 * Math.PI) / p.k.re,
    frequency: device.metres === null ? null : (p.k.re * SPEED_OF_LIGHT) / (2 * Math.PI * device.metres) / 1e12,
    // row by row: from every channel into the first, and so on
    S: Array.from({ length: n }, (_, i) =>
      Array.from({ length: n }, (__, j): Pair => [p.matrix[2 * (i + j * n)], p.matrix[2 * (i + j * n) + 1]]),
    ),
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

/** "S-matrix of 2 channels at 5 points …, ± 2e-7; least reflection 0.0318 from in.0 at 12.4 GHz." */
function spectrumSentence(device: Device, { channels, points }: ScatterAnswer): string {
  const n = channels.length;
  const error = Math.max(...points.map((p) => p.error));
  let best = { size: Infinity, channel: 0, k: points[0].k.re };
  for (const p of points)
    for (let j = 0; j < n; j++) {
      const size = Math.hypot(p.matrix[2 * (j + j * n)], p.matrix[2 * (j + j * n) + 1]);
      if (p.propagates[j] && size < best.size) best = { size, channel: j, k: p.k.re };
    }
  const { quantity, unit } = device.band;
  const place = significant(fromWavenumber(quantity, best.k, unit, device.metres), 6);
  return (
    `S-matrix of ${n} ${n === 1 ? 'channel' : 'channels'} at ${points.length} ${points.length === 1 ? 'point' : 'points'}, ` +
    `each entry ± ${error.toExponential(0)}; least reflection ${significant(best.size, 4)}, into ${channels[best.channel].name} at ` +
    `${quantity === 'wavenumber' ? 'k = ' : ''}${place} ${unit}`.trim() +
    '.'
  );
}
