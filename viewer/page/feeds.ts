// What must be sent in, what comes back, and where does the light go?

import type { DriveTerm, PowerCheck, RunField, RunRecord } from '../../src/results/format.ts';
import { html, rows, svg, wordButton } from './dom.ts';
import { crossingAnswer } from './facts.ts';
import { degrees, figure } from './numbers.ts';
import type { PageRun } from './run.ts';
import type { Store } from './state.ts';

/** Beside the picture: the drive of an absorbing field with its proof, or the far field of a radiating one. */
export function createFeeds(host: HTMLElement, run: PageRun, store: Store, all: () => void): void {
  let latest = 0;
  const show = async ({ field: id }: { readonly field: string | null }): Promise<void> => {
    const turn = ++latest;
    const field = run.record.fields.find((one) => one.id === id);
    const parts: Node[] = [];
    if (field) parts.push(...memberWords(run.record, field, store));
    if (field?.drive) parts.push(...driveStrip(run.record, field, field.drive, all));
    if (field?.farField) {
      const [power] = await run.arrays([field.farField]);
      parts.push(...rose(power as Float64Array));
    }
    if (turn === latest) host.replaceChildren(...parts);
  };
  store.on(['field'], (state) => void show(state));
}

/** Fields of one group of modes: `axis-1`, `axis-1-2`, … */
const groupId = (record: RunRecord, id: string): string => {
  const [, lead] = /^(.+)-\d+$/.exec(id) ?? [];
  return lead !== undefined && record.fields.some((one) => one.id === lead) ? lead : id;
};

const MEMBERS = ['first', 'second', 'third', 'fourth', 'fifth', 'sixth'];

/** One word for each mode of a degenerate group, which is as good as any mix of them. */
function memberWords(record: RunRecord, field: RunField, store: Store): Node[] {
  const lead = groupId(record, field.id);
  const members = record.fields.filter((one) => groupId(record, one.id) === lead);
  if (members.length < 2) return [];
  const words = members.map((one, j) =>
    wordButton(MEMBERS[j] ?? `${j + 1}`, () => store.set({ field: one.id }), {
      role: 'radio',
      'aria-checked': String(one.id === field.id),
    }),
  );
  const what = field.drive ? 'drives' : 'modes';
  return [
    html('p', { class: 'soft' }, `${members.length} independent ${what} at this k`),
    html('div', { class: 'views members', role: 'radiogroup', 'aria-label': `Which of the ${what}` }, ...words),
  ];
}

/** Amplitude and phase, for tables: degrees, of e^{−iωt}. */
export const polar = ([re, im]: readonly [number, number]): { size: number; angle: number } => ({
  size: Math.hypot(re, im),
  angle: Math.atan2(im, re),
});

function driveStrip(record: RunRecord, field: RunField, drive: readonly DriveTerm[], all: () => void): Node[] {
  const answer = crossingAnswer(record, field.k[0]);
  const parts: Node[] = [html('h2', {}, 'Send in')];
  const most = window.innerHeight < 640 ? 3 : window.innerHeight < 900 ? 6 : 12;
  const strongest = [...drive].sort((a, b) => polar(b.amplitude).size - polar(a.amplitude).size);
  const kept = strongest.slice(0, most).sort((a, b) => a.m - b.m);
  const largest = polar(strongest[0]?.amplitude ?? [1, 0]).size;
  parts.push(html('div', { class: 'feeds' }, ...kept.flatMap((term) => feedRow(term, largest))));
  const rest = strongest.slice(most).reduce((sum, { amplitude }) => sum + polar(amplitude).size ** 2, 0);
  if (strongest.length > most) {
    const more = html('button', { type: 'button', class: 'word soft' });
    more.textContent = `${strongest.length - most} more carry ${figure(100 * rest, 2)} % of the power`;
    more.addEventListener('click', all);
    parts.push(more);
  }
  if (answer?.forward) parts.push(...proof(answer.forward));
  return parts;
}

/** Bar, dial and figures of one multipole. */
function feedRow({ m, amplitude }: DriveTerm, largest: number): Node[] {
  const { size, angle } = polar(amplitude);
  const width = 64;
  const turn = ((-angle * 180) / Math.PI).toFixed(1);
  return [
    html('span', { class: 'order' }, `m ${m < 0 ? '−' : '+'}${Math.abs(m)}`),
    svg(
      'svg',
      { viewBox: `0 0 ${width} 18`, preserveAspectRatio: 'none', class: 'amounts', 'aria-hidden': 'true' },
      svg('line', { class: 'slot', x1: 0, x2: width, y1: 9, y2: 9 }),
      svg('rect', { class: 'amount', x: 0, y: 6.5, width: Math.max(1, (width * size) / largest), height: 5 }),
    ),
    html('span', { class: 'figures' }, size < 0.001 ? figure(size, 2) : size.toFixed(4)),
    svg(
      'svg',
      { width: 18, height: 18, viewBox: '-9 -9 18 18', class: 'small-dial', 'aria-hidden': 'true' },
      svg('circle', { r: 7.5 }),
      svg('line', { x2: 7.5, transform: `rotate(${turn})` }),
    ),
    html('span', { class: 'figures' }, degrees(angle, 1)),
  ];
}

/** The two numbers that matter large, their proof small. */
function proof(forward: PowerCheck & { readonly ownMesh?: PowerCheck }): Node[] {
  const two = html(
    'div',
    { class: 'two' },
    html(
      'div',
      {},
      html('span', { class: 'strong' }, share(forward.absorbed, forward.incoming)),
      html('span', { class: 'soft' }, 'absorbed'),
    ),
    html(
      'div',
      {},
      html('span', { class: 'strong' }, small(forward.outgoing / forward.incoming)),
      html('span', { class: 'soft' }, 'returned'),
    ),
  );
  const own = forward.ownMesh;
  return [
    html('h2', { class: 'spaced' }, 'Forward check'),
    two,
    rows([
      ['balance', small(Math.abs(forward.balance))],
      ['on its own mesh', own ? `${small(own.outgoing / own.incoming)} returned` : null],
    ]),
  ];
}

/** A share in percent; one that is all but whole says so without a row of nines. */
export function share(part: number, whole: number): string {
  const missing = 1 - part / whole;
  if (Math.abs(missing) < 1e-6) return missing > 0 ? '> 99.9999 %' : '100.0000 %';
  const decimals = Math.min(4, Math.max(1, Math.ceil(-Math.log10(Math.abs(missing))) - 1));
  return `${((100 * part) / whole).toFixed(decimals)} %`;
}

const small = (value: number): string => (value === 0 ? '0' : figure(value, 2));

/** Far-field power over the angle, mean 1. */
function rose(power: Float64Array): Node[] {
  let [peak, at] = [0, 0];
  power.forEach((value, angle) => {
    if (value > peak) [peak, at] = [value, angle];
  });
  const radius = 62;
  const point = (angle: number, r: number): string => {
    const a = (angle * Math.PI) / 180;
    return `${(r * Math.cos(a)).toFixed(2)} ${(-r * Math.sin(a)).toFixed(2)}`;
  };
  const curve = Array.from(power, (value, angle) => point(angle, (radius * value) / peak)).join('L');
  const size = radius + 24;
  return [
    html('h2', {}, 'Far field'),
    svg(
      'svg',
      {
        class: 'rose',
        viewBox: `${-size} ${-size} ${2 * size} ${2 * size}`,
        role: 'img',
        'aria-label': 'Far-field power over the angle',
      },
      svg('circle', { class: 'rim', r: radius / peak }),
      ...[0, 90, 180, 270].map((angle) =>
        svg('path', { class: 'tick', d: `M${point(angle, radius)}L${point(angle, radius + 5)}` }),
      ),
      svg('text', { x: radius + 8, y: 4 }, '0°'),
      svg('text', { x: 0, y: -radius - 8, 'text-anchor': 'middle' }, '90°'),
      svg('path', { class: 'petal', d: `M${curve}Z` }),
      svg('path', { class: 'peak', d: `M${point(at, radius + 1)}L${point(at, radius + 9)}` }),
    ),
    rows([
      ['strongest at', `${at}°`],
      ['directionality', `${figure(peak, 3)} (${figure(10 * Math.log10(peak), 3)} dB)`],
    ]),
    html('p', { class: 'soft' }, 'Dotted: the same power sent evenly.'),
  ];
}
