// Where are all the numbers, the cautions and the account of the run?

import type { CrossingAnswer, RunRecord } from '../../src/results/format.ts';
import { html, rows, wordButton } from './dom.ts';
import { polar, share } from './feeds.ts';
import { crossingAnswer } from './facts.ts';
import { degrees, figure, perUnit, unitName, withError } from './numbers.ts';
import type { Store } from './state.ts';

export interface Sheet {
  /** Opens at a part of it. */
  open(part: 'numbers' | 'cautions' | 'keys'): void;
}

export function createSheet(
  dialog: HTMLDialogElement,
  record: RunRecord,
  store: Store,
  choose: (id: string) => void,
): Sheet {
  const close = wordButton('close', () => dialog.close(), { class: 'word close' });
  dialog.setAttribute('aria-label', 'All numbers of this run');
  dialog.addEventListener('click', (event) => {
    if (event.target === dialog) dialog.close();
  });
  const fill = (): void => {
    dialog.replaceChildren(
      close,
      ...(record.cautions.length > 0
        ? [
            html('h2', { id: 'cautions' }, 'Read first'),
            ...record.cautions.map((text) => html('p', { class: 'caution' }, text)),
          ]
        : []),
      html('h2', { id: 'numbers' }, 'Poles and zeros'),
      markTable(record, store, (id) => {
        choose(id);
        dialog.close();
      }),
      ...driveParts(record, store),
      html('h2', { id: 'keys' }, 'Keys and gestures'),
      rows(KEYS),
      html('h2', {}, 'This run'),
      rows(account(record)),
    );
  };
  return {
    open(part) {
      fill();
      if (!dialog.open) dialog.showModal();
      dialog.querySelector(`#${part}`)?.scrollIntoView({ block: 'start' });
    },
  };
}

function markTable(record: RunRecord, store: Store, choose: (id: string) => void): HTMLElement {
  const { lengthUnit } = record.device;
  const per = perUnit(lengthUnit);
  const unit = (text: string): string => (text ? ` (${text})` : '');
  const crossing = record.marks.some((mark) => mark.crossing);
  const parameter = record.marks.find(({ path }) => path)?.path?.parameter ?? 'level';
  const heads = ['', `Re k${unit(per)}`, `Im k${unit(per)}`, `λ${unit(unitName(lengthUnit))}`, 'Q', 'label'];
  if (crossing) heads.push(`on the axis at k`, `${parameter} D`);
  const body = html('tbody');
  for (const mark of [...record.marks].sort((a, b) => a.k[0] - b.k[0])) {
    const glyph = mark.kind === 'pole' ? '×' : '○';
    const name = wordButton(`${glyph}`, () => choose(mark.id), {
      'aria-label': `Show ${mark.kind} at ${figure(mark.k[0], 6)}`,
    });
    const wavelength = (2 * Math.PI) / mark.k[0];
    const cells = [
      withError(mark.k[0], mark.kError),
      withError(mark.k[1], mark.kError),
      withError(wavelength, (mark.kError / mark.k[0]) * wavelength),
      figure(mark.q, 5),
      [mark.label, mark.multiplicity > 1 ? `${mark.multiplicity}-fold` : ''].filter(Boolean).join(', '),
    ];
    if (crossing)
      cells.push(
        mark.crossing ? withError(mark.crossing.k, mark.crossing.kError) : '–',
        mark.crossing ? withError(mark.crossing.level, mark.crossing.levelError) : '–',
      );
    const row = html('tr', {}, html('td', {}, name), ...cells.map((text) => html('td', {}, text)));
    row.classList.toggle('chosen', mark.id === store.get().mark);
    row.addEventListener('click', () => choose(mark.id));
    body.append(row);
  }
  body.addEventListener('keydown', (event) => {
    const way = { ArrowDown: 1, ArrowUp: -1 }[event.key];
    if (!way) return;
    const buttons = [...body.querySelectorAll('button')];
    const index = buttons.indexOf(document.activeElement as HTMLButtonElement);
    buttons[Math.min(buttons.length - 1, Math.max(0, index + way))]?.focus();
    event.preventDefault();
  });
  const head = html('thead', {}, html('tr', {}, ...heads.map((text) => html('th', { scope: 'col' }, text))));
  return html('div', { class: 'wide' }, html('table', {}, head, body));
}

/** Every term of the drive that is shown, and its forward check. */
function driveParts(record: RunRecord, store: Store): Node[] {
  const field = record.fields.find(({ id }) => id === store.get().field);
  if (!field?.drive) return [];
  const body = html('tbody');
  for (const { m, amplitude } of field.drive) {
    const { size, angle } = polar(amplitude);
    const cells = [
      String(m).replace('-', '−'),
      figure(amplitude[0], 8),
      figure(amplitude[1], 8),
      figure(size, 8),
      degrees(angle, 4),
    ];
    body.append(html('tr', {}, ...cells.map((text) => html('td', {}, text))));
  }
  const heads = ['m', 'Re a', 'Im a', '|a|', 'phase'];
  const head = html('thead', {}, html('tr', {}, ...heads.map((text) => html('th', { scope: 'col' }, text))));
  const answer: CrossingAnswer | null = crossingAnswer(record, field.k[0]);
  const parts: Node[] = [html('h2', {}, `Drive of the ${field.label}`), html('table', {}, head, body)];
  for (const [name, check] of [
    ['same mesh', answer?.forward],
    ['own mesh, one order higher', answer?.forward?.ownMesh],
  ] as const)
    if (check)
      parts.push(
        html('h3', {}, `Forward check, ${name}`),
        rows([
          ['incoming', figure(check.incoming, 6)],
          ['outgoing', figure(check.outgoing, 3)],
          ['absorbed', share(check.absorbed, check.incoming)],
          ['balance', figure(check.balance, 2)],
        ]),
      );
  return parts;
}

const KEYS: readonly (readonly [string, string])[] = [
  ['space', 'play or pause'],
  ['← →', 'turn time back or on by 5°, with Shift by 1°'],
  ['↑ ↓', 'faster, slower'],
  ['+ − 0', 'nearer, farther, all of it'],
  ['w a s d', 'move the picture'],
  ['1 2 3', 'wave, intensity, phase'],
  ['[ ]', 'bring out faint parts, or back'],
  ['n', 'all numbers'],
  ['Esc', 'let go of a pinned point'],
  ['picture', 'drag to move, wheel or pinch to zoom, click to pin the read-out'],
  ['water', 'click a mark to see its field; drag along the axis, wheel to magnify, double click for all'],
  ['colour bar', 'drag to the right to bring out faint parts, double click for the whole range'],
];

function account({
  program,
  device,
  command,
  options,
  when,
  mesh,
  display,
  arrays,
}: RunRecord): [string, string | null][] {
  const triangles = arrays[mesh.arrays.triangles].length / 3;
  return [
    ['device', `${device.title} (${device.file})`],
    ['command', `wavewell ${command}`],
    [
      'options',
      Object.keys(options).length > 0
        ? JSON.stringify(options).slice(1, -1).replaceAll('"', '').replaceAll(',', ', ')
        : null,
    ],
    ['polarization', device.polarization],
    ['mesh', `${triangles} triangles of order ${mesh.order}`],
    ['drawn to', figure(display.tolerance, 2)],
    ['written by', `wavewell ${program.version}, Node ${program.node}`],
    ['when', when],
  ];
}
