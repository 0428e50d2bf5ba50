// How is time turned?

import { html, onDrag, svg, wordButton } from './dom.ts';
import { degrees, seconds } from './numbers.ts';
import { SPEED_OF_LIGHT } from '../../src/numerics/conventions.ts';
import type { RunRecord } from '../../src/results/format.ts';
import type { Store } from './state.ts';

/** Seconds in which the dial turns once at speed 1. */
export const TURN_SECONDS = 3;

const SPEEDS = [0.1, 0.25, 0.5, 1, 2, 4];
const RADIUS = 40;

/** A dial that shows ωt and is turned by hand, both ways; in its middle the button that plays and pauses. */
export function createDial(host: HTMLElement, record: RunRecord, store: Store): void {
  const hand = svg(
    'g',
    { class: 'hand' },
    svg('line', { x1: 19, x2: RADIUS, y1: 0, y2: 0 }),
    svg('circle', { cx: RADIUS, r: 4.5 }),
  );
  const swept = svg('path', { class: 'swept' });
  const ring = svg(
    'g',
    { role: 'slider', tabindex: 0, 'aria-label': 'Phase of time, ωt', 'aria-valuemin': 0, 'aria-valuemax': 360 },
    svg('circle', { class: 'target', r: RADIUS + 8 }),
    svg('circle', { class: 'ring', r: RADIUS }),
    ...[0, 90, 180, 270].map((turn) =>
      svg('line', { class: 'tick', x1: RADIUS - 4, x2: RADIUS + 4, transform: `rotate(${-turn})` }),
    ),
    swept,
    hand,
  );
  const glyph = svg('path', { class: 'glyph' });
  const play = svg('g', { class: 'play', role: 'button', tabindex: 0 }, svg('circle', { class: 'disc', r: 17 }), glyph);
  const reach = RADIUS + 10;
  const face = svg('svg', { class: 'dial', viewBox: `${-reach} ${-reach} ${2 * reach} ${2 * reach}` }, ring, play);
  const angle = html('span', { class: 'strong' });
  const turn = html('span', { class: 'soft' });
  const speed = html('span', { class: 'speed' });
  const slower = wordButton('slower', () => changeSpeed(store, -1));
  const faster = wordButton('faster', () => changeSpeed(store, 1));
  const pace = html('span', { class: 'soft' });
  speed.append(slower, ' · ', faster);
  host.append(face, html('div', { class: 'beside' }, angle, turn, pace, speed));

  const toggle = (): void => store.set({ playing: !store.get().playing });
  play.addEventListener('click', toggle);
  play.addEventListener('keydown', (event) => {
    if (event.key !== 'Enter' && event.key !== ' ') return;
    toggle();
    event.preventDefault();
    event.stopPropagation();
  });

  const angleAt = (event: PointerEvent): number => {
    const box = face.getBoundingClientRect();
    return Math.atan2(box.top + box.height / 2 - event.clientY, event.clientX - box.left - box.width / 2);
  };
  let resume = false;
  let last = 0;
  onDrag(ring, {
    start(event) {
      resume = store.get().playing;
      last = angleAt(event);
      store.set({ playing: false, phase: wrap(last) });
    },
    move(event) {
      const now = angleAt(event);
      store.set({ phase: wrap(store.get().phase + now - last) });
      last = now;
    },
    end: () => store.set({ playing: resume }),
  });
  ring.addEventListener('keydown', (event) => {
    const way = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
    if (!way) return;
    store.set({ phase: wrap(store.get().phase + (way * Math.PI) / (event.shiftKey ? 180 : 36)), playing: false });
    event.preventDefault();
    event.stopPropagation();
  });
  face.addEventListener(
    'wheel',
    (event) => {
      event.preventDefault();
      store.set({ phase: wrap(store.get().phase + event.deltaY * 0.004), playing: false });
    },
    { passive: false },
  );

  store.on(['phase'], ({ phase }) => {
    hand.setAttribute('transform', `rotate(${((-phase * 180) / Math.PI).toFixed(2)})`);
    swept.setAttribute('d', arc(phase));
    angle.textContent = `ωt ${degrees(phase).padStart(4, '\u2007')}`;
    ring.setAttribute('aria-valuenow', ((phase * 180) / Math.PI).toFixed(0));
  });
  store.on(['playing'], ({ playing }) => {
    glyph.setAttribute('d', playing ? 'M-5 -6.5V6.5M5 -6.5V6.5' : 'M-4.5 -7.5L8 0L-4.5 7.5Z');
    glyph.classList.toggle('bars', playing);
    play.setAttribute('aria-label', playing ? 'Pause' : 'Play');
  });
  store.on(['speed'], ({ speed: now }) => {
    pace.textContent = now === 1 ? '' : `pace × ${now}`;
    slower.disabled = now === SPEEDS[0];
    faster.disabled = now === SPEEDS.at(-1);
  });
  store.on(['field'], ({ field }) => {
    const shown = record.fields.find(({ id }) => id === field);
    turn.textContent = shown ? turnText(record, shown.k[0]) : '';
  });
}

/** To the next slower (−1) or faster (1) pace. */
export function changeSpeed(store: Store, by: -1 | 1): void {
  const index = SPEEDS.indexOf(store.get().speed);
  store.set({ speed: SPEEDS[Math.min(SPEEDS.length - 1, Math.max(0, index + by))] });
}

export const wrap = (phase: number): number => ((phase % (2 * Math.PI)) + 2 * Math.PI) % (2 * Math.PI);

function turnText({ device: { metres } }: RunRecord, k: number): string {
  if (metres === null) return 'one turn, one period';
  return `one turn ${seconds((2 * Math.PI * metres) / (k * SPEED_OF_LIGHT))}`;
}

/** From 0 to the phase, counterclockwise. */
function arc(phase: number): string {
  const end = `${(RADIUS * Math.cos(phase)).toFixed(2)} ${(-RADIUS * Math.sin(phase)).toFixed(2)}`;
  return `M${RADIUS} 0A${RADIUS} ${RADIUS} 0 ${phase > Math.PI ? 1 : 0} 0 ${end}`;
}
