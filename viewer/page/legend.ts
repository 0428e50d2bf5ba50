// What do the colours and lengths of the picture mean?

import { MAP_ENTRIES, cyclicMap, divergingMap, sequentialMap } from '../../src/results/colours.ts';
import type { RunRecord } from '../../src/results/format.ts';
import { html, onDrag, svg, wordButton } from './dom.ts';
import { figure, roundBelow, unitName } from './numbers.ts';
import type { Store, View } from './state.ts';

const VIEWS: readonly View[] = ['wave', 'intensity', 'phase'];
const LEAST_LIMIT = 1e-4;

/**
 * The three ways to look at the field, the colour bar of the present one, and a length. The bar is drawn sideways to bring
 * out faint parts: its end then stands for less than the largest value.
 * @returns a function that adapts the length to the scale of the picture, in pixels per length unit.
 */
export function createLegend(host: HTMLElement, record: RunRecord, store: Store): (scale: number) => void {
  const choices = VIEWS.map((view) => wordButton(view, () => store.set({ view }), { role: 'radio' }));
  const views = html('div', { class: 'views', role: 'radiogroup', 'aria-label': 'What the colours show' }, ...choices);
  const bar = html('canvas', {
    class: 'bar',
    width: MAP_ENTRIES,
    height: 1,
    role: 'slider',
    tabindex: 0,
    'aria-label': 'Largest value of the colours: drag, or arrow keys',
    'aria-valuemin': 0,
    'aria-valuemax': 1,
  });
  const ends = html('div', { class: 'ends' });
  const meaning = html('p', { class: 'soft' });
  const length = html('div', { class: 'length' });
  host.append(length, views, bar, ends, meaning);

  store.on(['view', 'theme', 'limit'], ({ view, theme, limit }) => {
    choices.forEach((choice, i) => {
      choice.setAttribute('aria-checked', String(VIEWS[i] === view));
      choice.setAttribute('tabindex', VIEWS[i] === view ? '0' : '-1');
    });
    const make = { wave: divergingMap, intensity: sequentialMap, phase: cyclicMap }[view];
    paint(bar, make(theme));
    ends.replaceChildren(...endTexts(view, limit).map((text) => html('span', {}, text)));
    meaning.textContent = meaningOf(view, limit, record);
    bar.setAttribute('aria-valuenow', String(limit));
    bar.classList.toggle('fixed', view === 'phase');
  });
  views.addEventListener('keydown', (event) => {
    const way = { ArrowRight: 1, ArrowDown: 1, ArrowLeft: -1, ArrowUp: -1 }[event.key];
    if (!way) return;
    const next = (VIEWS.indexOf(store.get().view) + way + VIEWS.length) % VIEWS.length;
    store.set({ view: VIEWS[next] });
    choices[next].focus();
    event.preventDefault();
    event.stopPropagation();
  });
  onDrag(bar, { move: (_event, dx) => changeLimit(store, Math.exp(dx * -0.02)) });
  bar.addEventListener('dblclick', () => store.set({ limit: 1 }));
  bar.addEventListener('keydown', (event) => {
    const way = { ArrowRight: -1, ArrowUp: -1, ArrowLeft: 1, ArrowDown: 1 }[event.key];
    if (!way) return;
    changeLimit(store, 1.1 ** way);
    event.preventDefault();
    event.stopPropagation();
  });

  return (scale) => {
    const shown = roundBelow(120 / scale);
    const unit = unitName(record.device.lengthUnit) || (shown === 1 ? 'length unit' : 'length units');
    const px = shown * scale;
    length.replaceChildren(
      svg('svg', { width: px + 2, height: 9 }, svg('path', { d: `M1 0V8M1 4H${px + 1}M${px + 1} 0V8` })),
      html('span', {}, `${figure(shown, 1)} ${unit}`),
    );
  };
}

/** Larger than 1 means: less of the faint parts. */
export function changeLimit(store: Store, factor: number): void {
  store.set({ limit: Math.min(1, Math.max(LEAST_LIMIT, store.get().limit * factor)) });
}

function paint(bar: HTMLCanvasElement, map: Uint8Array): void {
  const context = bar.getContext('2d')!;
  const image = context.createImageData(MAP_ENTRIES, 1);
  for (let i = 0; i < MAP_ENTRIES; i++) image.data.set([map[3 * i], map[3 * i + 1], map[3 * i + 2], 255], 4 * i);
  context.putImageData(image, 0, 0);
}

function endTexts(view: View, limit: number): string[] {
  const end = limit === 1 ? '1' : figure(limit, 2);
  if (view === 'wave') return [`−${end}`, '0', end];
  if (view === 'intensity') return ['0', limit === 1 ? '1' : figure(limit * limit, 2)];
  return ['0°', '90°', '180°', '270°', '360°'];
}

function meaningOf(view: View, limit: number, { device: { polarization } }: RunRecord): string {
  const part = polarization === 'Ez' ? 'E' : 'H';
  if (view === 'phase') return `phase of ${part}z, turning with time`;
  const what = view === 'wave' ? `field ${part}z now` : `intensity |${part}z|²`;
  return `${what}, largest = 1${limit === 1 ? '' : ', clipped'}`;
}
