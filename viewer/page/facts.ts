// Which numbers belong to the field in the picture?

import { SPEED_OF_LIGHT } from '../../src/numerics/conventions.ts';
import type { CrossingAnswer, RunField, RunMark, RunRecord } from '../../src/results/format.ts';
import { html, rows } from './dom.ts';
import { figure, hertz, perUnit, unitName, withError } from './numbers.ts';
import type { State, Store } from './state.ts';

/** The heading and the few numbers of what is shown, beside the picture. */
export function createFacts(host: HTMLElement, record: RunRecord, store: Store): void {
  store.on(['field', 'mark', 'level'], (state) => {
    const field = record.fields.find(({ id }) => id === state.field) ?? null;
    const mark = record.marks.find(({ id }) => id === state.mark) ?? null;
    host.replaceChildren(html('h2', {}, headingOf(field, mark)), rows(factsOf(record, field, mark)));
    const away = awayText(field, mark, state);
    if (away) host.append(html('p', { class: 'soft' }, away));
  });
}

/** The crossing of the answer that a field or mark at k belongs to: the nearest one. */
export function crossingAnswer(record: RunRecord, k: number): CrossingAnswer | null {
  const { crossings } = record.answer as { crossings?: readonly CrossingAnswer[] };
  if (!Array.isArray(crossings) || crossings.length === 0) return null;
  return (crossings as readonly CrossingAnswer[]).reduce((a, b) => (Math.abs(b.k - k) < Math.abs(a.k - k) ? b : a));
}

function headingOf(field: RunField | null, mark: RunMark | null): string {
  if (field) return field.label[0].toUpperCase() + field.label.slice(1);
  return mark ? `${mark.kind === 'pole' ? 'Pole' : 'Zero'} without a stored field` : 'No field';
}

function factsOf(record: RunRecord, field: RunField | null, mark: RunMark | null): [string, string | null][] {
  const { lengthUnit, metres } = record.device;
  const onAxis = mark?.crossing && field && field.id === mark.crossing.field ? mark.crossing : null;
  const k = onAxis?.k ?? mark?.k[0] ?? field?.k[0] ?? null;
  if (k === null) return [];
  const error = onAxis?.kError ?? mark?.kError ?? 0;
  const im = onAxis ? 0 : (mark?.k[1] ?? field?.k[1] ?? 0);
  const wavelength = (2 * Math.PI) / k;
  const frequency = metres === null ? null : (k * SPEED_OF_LIGHT) / (2 * Math.PI * metres);
  const name = lengthUnit === 'none' ? 'k' : `k (${perUnit(lengthUnit)})`;
  const facts: [string, string | null][] = [
    [name, withError(k, error)],
    ['Im k', im === 0 ? null : withError(im, error)],
    [`λ${unitName(lengthUnit) && ` (${unitName(lengthUnit)})`}`, withError(wavelength, (error / k) * wavelength)],
    ['frequency', frequency === null ? null : hertz(frequency, (error / k) * frequency)],
    ['Q', !onAxis && mark && mark.k[1] !== 0 && Number.isFinite(mark.q) ? withError(mark.q, qError(mark)) : null],
    ['symmetry', mark?.label ? mark.label : null],
    ['multiplicity', mark && mark.multiplicity > 1 ? String(mark.multiplicity) : null],
  ];
  return onAxis ? [...facts, ...levelFacts(record, mark!, onAxis)] : facts;
}

function levelFacts(
  record: RunRecord,
  mark: RunMark,
  crossing: NonNullable<RunMark['crossing']>,
): [string, string | null][] {
  const answer = crossingAnswer(record, crossing.k);
  const units = answer?.bodies?.[0]?.units;
  return [
    [`${mark.path?.parameter ?? 'level'} D`, withError(crossing.level, crossing.levelError)],
    ['', units?.perCentimetre != null ? `${figure(Math.abs(units.perCentimetre), 4)} /cm` : null],
    ['', units?.decibelPerCentimetre != null ? `${figure(Math.abs(units.decibelPerCentimetre), 4)} dB/cm` : null],
  ];
}

/** δQ from δk: both parts of k share the error. */
function qError({ k, kError, q }: RunMark): number {
  return k[1] === 0 ? 0 : q * (kError / Math.abs(k[1]) + kError / k[0]);
}

/** The picture holds stored fields only: say so when the marks have been moved away from theirs. */
function awayText(field: RunField | null, mark: RunMark | null, { level }: State): string | null {
  if (!field || !mark?.path || field.level === null || field.level === level) return null;
  return `The picture is the stored field at D = ${field.level === 0 ? '0' : figure(field.level, 4)}.`;
}
