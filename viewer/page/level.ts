// How is the level of pump or loss set?

import type { RunRecord } from '../../src/results/format.ts';
import { onDrag, svg } from './dom.ts';
import { figure } from './numbers.ts';
import type { Store } from './state.ts';
import { levelReach } from './tracks.ts';
import type { Track } from './tracks.ts';

/**
 * An upright slider beside the water: pump is drawn up, as it lifts the marks; loss is drawn down, as it sinks them. Levels
 * at which a mark crosses the axis are notches that the handle falls into.
 * @returns a function that adapts it to the size of its host; null when no mark has a path.
 */
export function createLevel(
  host: HTMLElement,
  record: RunRecord,
  tracks: readonly Track[],
  store: Store,
): (() => void) | null {
  const reach = levelReach(tracks);
  const parameter = record.marks.find(({ path }) => path)?.path?.parameter;
  if (!parameter || !(reach > 0)) return null;
  const sinks = parameter === 'loss';
  const notches = [...new Set(tracks.flatMap(({ mark }) => (mark.crossing ? [mark.crossing.level] : [])))];

  const picture = svg('svg', { class: 'level' });
  const slider = svg('g', {
    role: 'slider',
    tabindex: 0,
    'aria-label': `${parameter} D`,
    'aria-orientation': 'vertical',
    'aria-valuemin': 0,
    'aria-valuemax': reach,
  });
  picture.append(slider);
  host.append(picture);
  const place = { x: 26, first: 0, last: 1 };
  const yOf = (level: number): number => place.first + (level / reach) * (place.last - place.first);
  const levelAt = (y: number): number =>
    Math.min(reach, Math.max(0, ((y - place.first) / (place.last - place.first)) * reach));

  const draw = (): void => {
    const [width, height] = [host.clientWidth, host.clientHeight];
    picture.setAttribute('viewBox', `0 0 ${width} ${height}`);
    const [top, bottom] = [24, height - 24];
    [place.first, place.last] = sinks ? [top, bottom] : [bottom, top];
    const { level } = store.get();
    const y = yOf(level);
    const x = place.x;
    const text = level === 0 ? '0' : figure(level, 4);
    slider.replaceChildren(
      svg('rect', { class: 'target', x: 0, y: 0, width, height }),
      svg('line', { class: 'track', x1: x, x2: x, y1: top, y2: bottom }),
      svg('line', { class: 'filled', x1: x, x2: x, y1: place.first, y2: y }),
      ...notches.map((notch) => svg('line', { class: 'notch', x1: x - 9, x2: x - 3, y1: yOf(notch), y2: yOf(notch) })),
      svg('circle', { class: 'handle', cx: x, cy: y, r: 6.5 }),
      svg('text', { class: 'halo', x: x + 14, y: Math.min(height - 8, Math.max(14, y - 3)) }, parameter),
      svg('text', { class: 'halo strong', x: x + 14, y: Math.min(height - 8, Math.max(14, y - 3)) + 15 }, `D ${text}`),
    );
    slider.setAttribute('aria-valuenow', String(level));
    slider.setAttribute('aria-valuetext', `${parameter} D = ${text}`);
  };

  /** Within five pixels of a notch the level is that of the notch. */
  const set = (level: number): void => {
    const near = 5 * Math.abs(reach / (place.last - place.first));
    const notch = notches.find((at) => Math.abs(at - level) < near);
    store.set({ level: notch ?? (level < near ? 0 : level) });
  };
  let grip = 0;
  onDrag(slider, {
    start(event) {
      grip = event.offsetY;
      set(levelAt(grip));
      slider.focus();
    },
    move(event, _dx, dy) {
      // With Shift ten times finer.
      grip += event.shiftKey ? dy / 10 : dy;
      set(levelAt(grip));
    },
  });
  slider.addEventListener('keydown', (event) => {
    const { level } = store.get();
    const towards = sinks ? -1 : 1;
    const step = reach / (event.shiftKey ? 1000 : 100);
    const upward = event.key === 'ArrowUp' ? towards : event.key === 'ArrowDown' ? -towards : 0;
    const along = event.key === 'ArrowRight' ? 1 : event.key === 'ArrowLeft' ? -1 : upward;
    const page = event.key === 'PageUp' ? towards : event.key === 'PageDown' ? -towards : 0;
    let next: number;
    if (along !== 0) next = level + along * step;
    else if (page !== 0) next = nextNotch(notches, level, page) ?? (page > 0 ? reach : 0);
    else if (event.key === 'Home') next = 0;
    else if (event.key === 'End') next = reach;
    else return;
    store.set({ level: Math.min(reach, Math.max(0, next)) });
    event.preventDefault();
    event.stopPropagation();
  });
  store.on(['level'], draw);
  return draw;
}

function nextNotch(notches: readonly number[], level: number, towards: number): number | undefined {
  const ahead = notches.filter((at) => (at - level) * towards > 0);
  return ahead.sort((a, b) => towards * (a - b))[0];
}
