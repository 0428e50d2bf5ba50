// How do reflectionless modes become a stored run?

import type { Device } from '../device/model.ts';
import { fromWavenumber } from '../materials/spectral-units.ts';
import { cautionsFor } from '../results/cautions.ts';
import type { ChoiceAnswerRow, MatchAnswerRow, Pair } from '../results/format.ts';
import type { ChoicesAnswer } from './choices.ts';
import { significant } from '../results/number-text.ts';
import { drivenField } from './driven.ts';
import type { MatchAnswer, RealMatch } from './match.ts';
import { openBook, type RunContext, type RunParts } from './record.ts';

/** The run of `match` by level: the complex spectrum as marks, each real match with its driven field and its proof. */
export function matchRecord(
  device: Device,
  answer: MatchAnswer,
  sense: 'gain' | 'loss',
  context: RunContext,
): RunParts {
  const order = answer.matches[0]?.order ?? answer.order;
  const book = openBook(device, answer.openings.prepared, order, context);
  answer.modes.forEach((mode, i) => {
    book.marks.push({
      id: `mark-${i + 1}`,
      kind: answer.inputs.includes(true) ? 'zero' : 'pole',
      k: [mode.k.re, mode.k.im],
      kError: mode.kError,
      q: mode.k.re / (2 * Math.max(Math.abs(mode.k.im), 1e-13 * mode.k.re)),
      multiplicity: 1,
      label: mode.trapped ? 'trapped' : '',
      field: null,
      path: null,
      crossing: null,
    });
  });
  addFields(book, answer.matches, sense);
  addMarks(book, answer.matches, answer.inputs.includes(true), answer.matches.length);
  const cautions = cautionsFor(answer.inputs.includes(true) ? 'drive' : 'threshold', device);
  return book.close('match', matchSentence(device, answer.matches, answer.channels, answer.inputs, sense), cautions, {
    ...common(answer.channels, answer.inputs, answer.matches),
    modes: [],
    spectrum: answer.modes.map((m) => ({ k: [m.k.re, m.k.im], kError: m.kError, trapped: m.trapped })),
    covered: answer.covered,
    notes: answer.openings.prepared.notes,
    cautions,
  });
}

/** The run of `match` along a knob; fields are those of the first match. */
export function knobMatchRecord(
  device: Device,
  knob: string,
  matches: readonly RealMatch[],
  inputs: readonly boolean[],
  context: RunContext,
): RunParts {
  const first = matches[0];
  if (!first) throw new RangeError('a run needs at least one match');
  const channels = first.openings.channels.map((c) => c.name);
  const book = openBook(first.openings.prepared.device, first.openings.prepared, first.order, context);
  addFields(book, [first], 'loss');
  addMarks(book, matches, inputs.includes(true), 1);
  const cautions = cautionsFor(inputs.includes(true) ? 'drive' : 'threshold', device);
  const place = placeText(device, first.k);
  const sentence = !inputs.includes(true)
    ? `With ${knob} = ${significant(first.level, 7)} a pole lies on the real axis at ${place}.`
    : `With ${knob} = ${significant(first.level, 7)} nothing comes back from ${inputNames(channels, inputs)} at ${place}: ` +
      `${first.forward.ownMesh.reflected.toExponential(1)} of the power in the forward check.`;
  return book.close('match', sentence, cautions, {
    ...common(channels, inputs, matches),
    knob,
    modes: [],
    notes: first.openings.prepared.notes,
    cautions,
  });
}

/** The run of `match` with every choice of inputs: a table and the complex plane, no fields. */
export function choicesRecord(device: Device, answer: ChoicesAnswer, context: RunContext): RunParts {
  const { channels } = answer;
  const book = openBook(device, answer.openings.prepared, answer.order, context);
  const cautions = cautionsFor('modes', device);
  const rows = answer.choices.map(({ inputs, modes }): ChoiceAnswerRow => {
    const [first, ...others] = modes.map((m) => [m.k.re, m.k.im] as const);
    return {
      inputs: channels.filter((_, i) => inputs[i]),
      k: first ?? null,
      kError: modes[0]?.kError ?? null,
      q: first ? first[0] / (2 * Math.max(Math.abs(first[1]), modes[0].kError)) : null,
      others,
    };
  });
  rows.forEach((row, i) => {
    if (!row.k) return;
    book.marks.push({
      id: `mark-${i + 1}`,
      kind: 'zero',
      k: [row.k[0], row.k[1]],
      kError: row.kError!,
      q: row.q!,
      multiplicity: 1,
      label: `in: ${row.inputs.join(', ')}`,
      field: null,
      path: null,
      crossing: null,
    });
  });
  const [first] = rows;
  const sentence = first?.k
    ? `Of ${rows.length} choices of inputs ${first.inputs.join(', ')} is nearest to no reflection at real k: ` +
      `Im k = ${significant(first.k[1], 4)} at ${placeText(device, first.k[0])}.`
    : `None of the ${rows.length} choices of inputs has a reflectionless mode in the band.`;
  return book.close('match', sentence, cautions, {
    channels,
    choices: rows,
    modes: [],
    covered: answer.covered,
    order: answer.order,
    notes: answer.openings.prepared.notes,
    cautions,
  });
}

type Book = ReturnType<typeof openBook>;

/** Where the modes lie once they are brought to the axis; the first so many have fields. */
function addMarks(book: Book, matches: readonly RealMatch[], isZero: boolean, fields: number): void {
  matches.forEach(({ k, kError }, i) =>
    book.marks.push({
      id: `match-mark-${i + 1}`,
      kind: isZero ? 'zero' : 'pole',
      k: [k, 0],
      kError,
      q: k / (2 * kError),
      multiplicity: 1,
      label: '',
      field: i < fields ? `match-${i + 1}` : null,
      path: null,
      crossing: null,
    }),
  );
}

function addFields(book: Book, matches: readonly RealMatch[], sense: 'gain' | 'loss'): void {
  matches.forEach((match, i) => {
    const silent = match.drive.every((v) => v === 0);
    const closed = match.openings.closed(match.order, sense);
    const level = match.openings.prepared.device.bodies.some((b) => b.pumpWeight > 0) ? match.level : 0;
    book.addField({
      id: `match-${i + 1}`,
      label: `driven without reflection at k = ${match.k.toPrecision(6)}`,
      kind: 'driven',
      k: [match.k, 0],
      level: match.level,
      order: match.order,
      vector: silent ? match.vector : drivenField(closed, match.k, level, match.drive),
      drive: null,
      pattern: null,
    });
  });
}

const common = (channels: readonly string[], inputs: readonly boolean[], matches: readonly RealMatch[]) => ({
  channels,
  inputs: channels.filter((_, i) => inputs[i]),
  matches: matches.map((m): MatchAnswerRow => ({
    k: m.k,
    kError: m.kError,
    level: m.level,
    levelError: m.levelError,
    drive: channels.flatMap((name, i): { channel: string; amplitude: Pair }[] =>
      inputs[i] ? [{ channel: name, amplitude: [m.drive[2 * i], m.drive[2 * i + 1]] }] : [],
    ),
    out: Array.from(m.forward.ownMesh.out),
    reflected: m.forward.ownMesh.reflected,
    absorbed: m.forward.ownMesh.absorbed,
    balance: m.forward.ownMesh.balance,
    sameMesh: {
      reflected: m.forward.sameMesh.reflected,
      absorbed: m.forward.sameMesh.absorbed,
      balance: m.forward.sameMesh.balance,
    },
  })),
});

const inputNames = (channels: readonly string[], inputs: readonly boolean[]): string =>
  channels.filter((_, i) => inputs[i]).join(', ') || 'no channel';

function placeText(device: Device, k: number): string {
  const { quantity, unit } = device.band;
  const value = significant(fromWavenumber(quantity, k, unit, device.metres), 8);
  return `${quantity === 'wavenumber' ? 'k = ' : ''}${value} ${unit}`.trim();
}

function matchSentence(
  device: Device,
  matches: readonly RealMatch[],
  channels: readonly string[],
  inputs: readonly boolean[],
  sense: 'gain' | 'loss',
): string {
  const [first] = matches;
  const names = inputNames(channels, inputs);
  const lasing = !inputs.includes(true);
  if (!first) return `No reflectionless mode of ${names} on the real axis in the band.`;
  const level = first.level === 0 ? 'the device as it is' : `${sense} D = ${significant(first.level, 7)}`;
  if (lasing) return `Lases first at ${placeText(device, first.k)} with ${level}.`;
  const { absorbed, reflected } = first.forward.ownMesh;
  return (
    `Nothing comes back from ${names} at ${placeText(device, first.k)} with ${level}: ` +
    `${reflected.toExponential(1)} of the power in the forward check, ${significant(absorbed, 6)} absorbed.`
  );
}
