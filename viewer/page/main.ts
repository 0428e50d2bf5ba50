// How do the parts of the page come together?

import { PALETTES } from '../../src/results/colours.ts';
import type { Theme } from '../../src/results/colours.ts';
import { TURN_SECONDS, changeSpeed, createDial, wrap } from './dial.ts';
import { byId, onDrag, svg, wordButton } from './dom.ts';
import { createFacts } from './facts.ts';
import { createFeeds } from './feeds.ts';
import { changeLimit, createLegend } from './legend.ts';
import { createLevel } from './level.ts';
import { typeset } from './numbers.ts';
import { createPicture } from './picture.ts';
import type { Picture } from './picture.ts';
import { createReadout } from './readout.ts';
import type { Readout } from './readout.ts';
import type { CompleteAnswer, RunMark } from '../../src/results/format.ts';
import { loadRun } from './run.ts';
import type { PageRun } from './run.ts';
import { createSheet } from './sheet.ts';
import { createStore } from './state.ts';
import type { State, Store } from './state.ts';
import { fieldAtLevel, firstMark, loadTracks } from './tracks.ts';
import type {} from './watched.ts';
import { createWaterLine } from './water-line.ts';

start().catch((error: unknown) => {
  document.body.classList.add('failed');
  byId('sentence').textContent = `This run cannot be shown: ${error instanceof Error ? error.message : String(error)}`;
});

async function start(): Promise<void> {
  const run = await loadRun();
  const { record } = run;
  document.title = `${record.device.title}, ${record.command} · Wavewell`;
  byId('sentence').textContent = typeset(record.sentence);
  const complete = record.answer['complete'] as CompleteAnswer | undefined;
  const count = complete?.proven ? ` · complete: ${complete.found} of ${complete.counted}` : '';
  byId('subject').textContent = `${record.device.title} · ${record.command} · ${record.device.polarization}${count}`;
  const tracks = await loadTracks(run);
  const store = createStore(firstState(run));
  showTheme(store);

  const canvas = byId<HTMLCanvasElement>('picture');
  canvas.setAttribute('aria-label', 'The field: drag to move, plus and minus to zoom, 0 for all of it');
  const { display, device } = record;
  const outlineNames = device.bodies.flatMap(({ outlines }) => outlines);
  const [walls = new Float64Array()] = display.walls === undefined ? [] : await run.arrays([display.walls]);
  const [points, triangles, regions, ...outlines] = await run.arrays([
    display.points,
    display.triangles,
    display.regions,
    ...outlineNames,
  ]);
  const picture = createPicture(canvas, {
    record,
    points: points as Float64Array,
    triangles: triangles as Uint32Array,
    regions: regions as Int32Array,
    outlines: outlines as Float64Array[],
    walls: walls as Float64Array,
  });

  const markOf = (id: string | null): RunMark | undefined => record.marks.find((one) => one.id === id);
  const choose = (id: string): void => {
    const mark = markOf(id)!;
    const { level: now, mark: before } = store.get();
    // Who looks at a mark on the axis goes on to the next one there.
    const onAxis = now === markOf(before)?.crossing?.level;
    const level = onAxis && mark.crossing ? mark.crossing.level : now;
    store.set({ mark: id, level, field: fieldAtLevel(mark, level) });
  };
  const sheet = createSheet(byId<HTMLDialogElement>('sheet'), record, store, choose);
  const readout = createReadout(byId('readout'), record, store, () => draw());
  createWays(byId('ways'), record.cautions.length > 0, store, sheet);
  createFacts(byId('facts'), record, store);
  createDial(byId('time'), record, store);
  createFeeds(byId('aside'), run, store, () => sheet.open('numbers'));
  const showLength = createLegend(byId('legend'), record, store);
  const water = createWaterLine(byId('plane'), record, tracks, store, choose);
  const layoutLevel = createLevel(byId('level'), record, tracks, store);
  document.body.classList.toggle('no-level', layoutLevel === null);

  // One frame is asked for at a time, and none when nothing moves.
  let asked = 0;
  let before = 0;
  const draw = (): void => {
    asked ||= requestAnimationFrame(frame);
  };
  const frame = (now: number): void => {
    asked = 0;
    const { playing, speed, phase } = store.get();
    if (playing) {
      const passed = Math.min(0.1, (now - before) / 1000);
      store.set({ phase: wrap(phase + (2 * Math.PI * speed * passed) / TURN_SECONDS) });
      draw();
    }
    before = now;
    picture.setPhase(store.get().phase);
    picture.draw();
    drawOverlay(picture, run, readout.pinned(), water.markPoint(store.get().mark ?? ''));
    showLength(picture.scale());
  };
  const layout = (): void => {
    const header = byId('says').getBoundingClientRect();
    const footer = byId('water').getBoundingClientRect();
    document.documentElement.style.setProperty('--head', `${header.bottom}px`);
    const side = byId('left').getBoundingClientRect();
    const left = side.right + 8;
    picture.resize({ left, right: left, top: header.bottom + 4, bottom: window.innerHeight - footer.top + 14 });
    water.layout();
    layoutLevel?.();
    draw();
  };

  let ready = false;
  let wanted = '';
  store.on(['field'], ({ field }) => {
    wanted = field ?? '';
    ready = false;
    if (!field) return;
    run.display(field).then(
      (values) => {
        if (wanted !== field) return;
        picture.setField(values);
        ready = true;
        draw();
      },
      (error: unknown) => {
        byId('subject').textContent = error instanceof Error ? error.message : String(error);
      },
    );
  });
  store.on(['view', 'limit', 'theme'], (state) => {
    picture.setLook(state);
    draw();
  });
  store.on(['phase', 'playing', 'mark'], draw);
  store.on(['level'], ({ mark, level }) => {
    const chosen = markOf(mark);
    if (chosen) store.set({ field: fieldAtLevel(chosen, level) });
    draw();
  });
  byId('plane').addEventListener('moved', draw);
  new ResizeObserver(layout).observe(document.body);
  window.addEventListener('resize', layout);
  canvas.addEventListener('webglcontextrestored', draw);
  layout();
  handlePointer(canvas, picture, readout, draw);
  handleKeys(picture, store, readout, sheet, draw);
  window.wavewell = {
    ready: () => ready,
    state: store.get,
    set: store.set,
    sample: (pixels) => {
      picture.setPhase(store.get().phase);
      return picture.sample(pixels);
    },
    toPixel: picture.toPixel,
    toDevice: picture.toDevice,
    readout: readout.shown,
  };
}

function firstState({ record }: PageRun): State {
  const mark = firstMark(record.marks);
  const level = mark?.crossing?.level ?? 0;
  const still = window.matchMedia('(prefers-reduced-motion: reduce)').matches;
  return {
    mark: mark?.id ?? null,
    field: (mark ? fieldAtLevel(mark, level) : null) ?? record.fields[0]?.id ?? null,
    level,
    view: 'wave',
    limit: 1,
    phase: 0,
    playing: !still,
    speed: 1,
    theme: storedTheme() ?? systemTheme(),
  };
}

const THEME_KEY = 'wavewell-theme';
const systemTheme = (): Theme => (window.matchMedia('(prefers-color-scheme: dark)').matches ? 'dark' : 'light');

function storedTheme(): Theme | null {
  try {
    const kept = localStorage.getItem(THEME_KEY);
    return kept === 'light' || kept === 'dark' ? kept : null;
  } catch {
    // A browser may be told to keep nothing.
    return null;
  }
}

/** The palette becomes the style sheet's variables; the system's choice is followed until the user makes one. */
function showTheme(store: Store): void {
  store.on(['theme'], ({ theme }) => {
    const { style, dataset } = document.documentElement;
    dataset['theme'] = theme;
    style.setProperty('color-scheme', theme);
    for (const [name, colour] of Object.entries<string>({ ...PALETTES[theme] })) style.setProperty(`--${name}`, colour);
  });
  window.matchMedia('(prefers-color-scheme: dark)').addEventListener('change', () => {
    if (!storedTheme()) store.set({ theme: systemTheme() });
  });
}

function createWays(host: HTMLElement, cautioned: boolean, store: Store, sheet: ReturnType<typeof createSheet>): void {
  if (cautioned) host.append(wordButton('read first', () => sheet.open('cautions'), { class: 'word accent' }));
  const theme = wordButton('', () => {
    const next = store.get().theme === 'dark' ? 'light' : 'dark';
    store.set({ theme: next });
    try {
      localStorage.setItem(THEME_KEY, next);
    } catch {
      return;
    }
  });
  store.on(['theme'], (state) => (theme.textContent = state.theme === 'dark' ? 'light' : 'dark'));
  host.append(
    wordButton('numbers', () => sheet.open('numbers')),
    wordButton('keys', () => sheet.open('keys')),
    theme,
  );
}

/** The rim, the pinned point, and the thread from the chosen mark to the picture. */
function drawOverlay(
  picture: Picture,
  { record }: PageRun,
  pinned: readonly [number, number] | null,
  mark: readonly [number, number] | null,
): void {
  const overlay = byId<SVGSVGElement>('overlay');
  const { center, rimRadius } = record.mesh;
  const [cx, cy] = picture.toPixel(...center);
  const r = rimRadius * picture.scale();
  const parts: SVGElement[] = record.display.enclosed ? [] : [svg('circle', { class: 'rim', cx, cy, r })];
  const top = byId('water').getBoundingClientRect().top;
  if (mark) parts.push(...thread(mark, [cx, cy], r, top));
  if (pinned) {
    const [x, y] = picture.toPixel(...pinned);
    parts.push(svg('path', { class: 'pin', d: `M${x - 11} ${y}h7M${x + 4} ${y}h7M${x} ${y - 11}v7M${x} ${y + 4}v7` }));
  }
  overlay.replaceChildren(...parts);
}

/** Farther from straight below than this the thread does not meet the rim: it would cross the dial. */
const WIDEST = (50 * Math.PI) / 180;

/** From a mark to the rim above it; to the edge of the picture when the rim there lies below the water. */
function thread(
  [mx, my]: readonly [number, number],
  [cx, cy]: readonly [number, number],
  r: number,
  waterTop: number,
): SVGElement[] {
  const angle = Math.max(-WIDEST, Math.min(WIDEST, Math.atan2(mx - cx, Math.max(1, my - cy))));
  const [s, c] = [Math.sin(angle), Math.cos(angle)];
  let [x, y] = [cx + r * s, cy + r * c];
  let [bendX, bendY] = [x + 0.3 * r * s, y + 0.3 * r * c];
  if (y > waterTop - 6) {
    x = mx + (window.innerWidth / 2 - mx) * 0.06;
    y = waterTop - 12;
    [bendX, bendY] = [x, (y + my) / 2];
  }
  const lift = my - (my - y) * 0.5;
  return [
    svg('path', { class: 'thread', d: `M${mx} ${my - 8}C${mx} ${lift} ${bendX} ${Math.min(bendY, my)} ${x} ${y}` }),
    svg('circle', { class: 'knot', cx: x, cy: y, r: 2.5 }),
  ];
}

/** Drag moves, wheel and pinch zoom, resting reads, a click pins. */
function handlePointer(canvas: HTMLCanvasElement, picture: Picture, readout: Readout, draw: () => void): void {
  const down = new Map<number, PointerEvent>();
  let travelled = 0;
  let spread = 0;
  onDrag(canvas, {
    start(event) {
      down.set(event.pointerId, event);
      travelled = 0;
      spread = 0;
      canvas.focus({ preventScroll: true });
    },
    move(event, dx, dy) {
      down.set(event.pointerId, event);
      travelled += Math.hypot(dx, dy);
      if (down.size === 1) picture.panBy(travelled > 3 ? dx : 0, travelled > 3 ? dy : 0);
      else if (down.size === 2) {
        const [a, b] = [...down.values()];
        const now = Math.hypot(a.clientX - b.clientX, a.clientY - b.clientY);
        picture.panBy(dx / 2, dy / 2);
        if (spread > 0) picture.zoomAt((a.clientX + b.clientX) / 2, (a.clientY + b.clientY) / 2, now / spread);
        spread = now;
      }
      draw();
    },
    end(event) {
      down.delete(event.pointerId);
      if (travelled > 3 || event.type === 'pointercancel') return;
      const held = readout.pinned();
      const [hx, hy] = held ? picture.toPixel(...held) : [Infinity, Infinity];
      const again = Math.hypot(hx - event.clientX, hy - event.clientY) < 8;
      readout.pin(again ? null : roundedPoint(picture, event.clientX, event.clientY));
    },
  });
  canvas.addEventListener('pointermove', (event) => {
    if (down.size === 0) readout.point(roundedPoint(picture, event.clientX, event.clientY));
  });
  canvas.addEventListener('pointerleave', () => readout.point(null));
  canvas.addEventListener(
    'wheel',
    (event) => {
      event.preventDefault();
      const pixels = event.deltaMode === 1 ? event.deltaY * 16 : event.deltaY;
      picture.zoomAt(event.clientX, event.clientY, Math.exp(-pixels * (event.ctrlKey ? 0.01 : 0.0016)));
      draw();
    },
    { passive: false },
  );
}

/** The point under a pixel, to no more decimals than the pixel can tell: what is shown is exactly what was asked. */
function roundedPoint(picture: Picture, px: number, py: number): [number, number] {
  const decimals = Math.min(100, Math.max(0, Math.ceil(Math.log10(picture.scale())) + 1));
  const [x, y] = picture.toDevice(px, py);
  return [Number(x.toFixed(decimals)), Number(y.toFixed(decimals))];
}

function handleKeys(
  picture: Picture,
  store: Store,
  readout: Readout,
  sheet: ReturnType<typeof createSheet>,
  draw: () => void,
): void {
  const [middleX, middleY] = [(): number => window.innerWidth / 2, (): number => window.innerHeight / 2.6];
  const turn = (way: number, fine: boolean): void =>
    store.set({ phase: wrap(store.get().phase + (way * Math.PI) / (fine ? 180 : 36)), playing: false });
  const acts: Readonly<Record<string, (event: KeyboardEvent) => void>> = {
    ' ': () => store.set({ playing: !store.get().playing }),
    ArrowRight: (event) => turn(1, event.shiftKey),
    ArrowLeft: (event) => turn(-1, event.shiftKey),
    ArrowUp: () => changeSpeed(store, 1),
    ArrowDown: () => changeSpeed(store, -1),
    '+': () => picture.zoomAt(middleX(), middleY(), 1.25),
    '=': () => picture.zoomAt(middleX(), middleY(), 1.25),
    '-': () => picture.zoomAt(middleX(), middleY(), 0.8),
    '0': () => picture.reset(),
    w: () => picture.panBy(0, 40),
    s: () => picture.panBy(0, -40),
    a: () => picture.panBy(40, 0),
    d: () => picture.panBy(-40, 0),
    '1': () => store.set({ view: 'wave' }),
    '2': () => store.set({ view: 'intensity' }),
    '3': () => store.set({ view: 'phase' }),
    '[': () => changeLimit(store, 1.25),
    ']': () => changeLimit(store, 0.8),
    n: () => sheet.open('numbers'),
    '?': () => sheet.open('keys'),
    Escape: () => readout.pin(null),
  };
  window.addEventListener('keydown', (event) => {
    if (event.ctrlKey || event.metaKey || event.altKey || event.defaultPrevented) return;
    const target = event.target as Element;
    if (target.closest('dialog')) return;
    // Space presses the button that has the focus.
    if (event.key === ' ' && target.closest('button')) return;
    const act = acts[event.key];
    if (!act) return;
    act(event);
    draw();
    event.preventDefault();
  });
}
