// Where do poles and zeros stand, how do they move, and which one is looked at?

import type { Pair, RunMark, RunRecord } from '../../src/results/format.ts';
import { bandScale } from './band.ts';
import { onDrag, svg } from './dom.ts';
import { decadeText, figure, perUnit, roundSteps, withError } from './numbers.ts';
import type { Store } from './state.ts';
import { positionAt } from './tracks.ts';
import type { Track } from './tracks.ts';

export interface WaterLine {
  /** Adapts to the size of its host. */
  layout(): void;
  /** Window position of a mark, or null when it is out of sight. */
  markPoint(id: string): [x: number, y: number] | null;
}

/**
 * The complex plane of k. The real axis is the surface of the water: poles (crosses) sink below it by their radiation and
 * loss, zeros (circles) stand above. Depth is linear, or arsinh where the marks span decades.
 *
 *      o      o             Im k > 0
 *   ───────────────────────  Im k = 0
 *    x    x      x          Im k < 0
 *
 * Drag moves along the axis, the wheel magnifies it, a double click shows all of it again.
 */
export function createWaterLine(
  host: HTMLElement,
  record: RunRecord,
  tracks: readonly Track[],
  store: Store,
  choose: (id: string) => void,
): WaterLine {
  const picture = svg('svg', { class: 'plane', role: 'group', 'aria-label': 'Poles and zeros in the complex plane' });
  const layers = {
    depth: svg('g'),
    paths: svg('g'),
    crossings: svg('g'),
    marks: svg('g', { role: 'listbox', 'aria-label': 'Marks: arrow keys move, Enter shows the field' }),
    note: svg('g', { class: 'note' }),
  };
  picture.append(...Object.values(layers));
  host.append(picture);

  const whole = rangeOf(record, tracks);
  const view = { low: whole.low, high: whole.high };
  const depth = depthScale(tracks);
  const scale = bandScale(record.device);
  const place = { width: 1, height: 1, surface: 0.5, stretch: 1, left: 56 };
  const nodes = new Map<string, SVGGElement>();
  const byRe = [...tracks].sort((a, b) => a.mark.k[0] - b.mark.k[0]);
  let hovered: string | null = null;

  const xOf = (re: number): number =>
    place.left + ((re - view.low) / (view.high - view.low)) * (place.width - place.left - 12);
  const yOf = (im: number): number => place.surface - depth.of(im) * place.stretch;

  const layout = (): void => {
    place.width = host.clientWidth;
    place.height = host.clientHeight;
    // Small windows need the room for the plane itself.
    const edge = { top: depth.up > 0 ? 16 : 30, bottom: depth.down > 0 ? 16 : 34 };
    const room = place.height - edge.top - edge.bottom - (depth.up > 0 && depth.down > 0 ? 18 : 0);
    place.stretch = room / (depth.up + depth.down || 1);
    place.surface = edge.top + (depth.up || 0) * place.stretch + (depth.up + depth.down === 0 ? room / 2 : 0);
    picture.setAttribute('viewBox', `0 0 ${place.width} ${place.height}`);
    drawDepth();
    drawPaths();
    drawMarks();
    placeMarks();
  };

  const drawDepth = (): void => {
    const { width, surface, height } = place;
    const ticks = spaced(depth.ticks, yOf);
    layers.depth.replaceChildren(
      svg('rect', { class: 'sea', x: 0, y: surface, width, height: Math.max(0, height - surface) }),
      ...ticks.map(({ im, text }) => depthTick(yOf(im), text)),
      svg('line', { class: 'surface', x1: 0, x2: width, y1: surface, y2: surface }),
    );
    const above = depth.up === 0;
    const { kMin, kMax } = record.device.band;
    for (const k of [kMin, kMax]) {
      const x = xOf(k);
      // Not into the texts beside the surface.
      const [y1, y2] = [surface - (above ? 0 : 9), surface + (depth.down === 0 ? 0 : 9)];
      layers.depth.append(svg('line', { class: 'limit', x1: x, x2: x, y1, y2 }));
    }
    const labelY = above ? surface - 9 : depth.down === 0 ? surface + 18 : height - 6;
    const title = svg('text', { class: 'tick-text halo', x: 12, y: labelY }, scale.title);
    layers.depth.append(title);
    const free = 12 + title.getComputedTextLength() + 26;
    const wanted = Math.max(2, Math.round(width / 150));
    for (const { at, text } of roundSteps(scale.of(view.low), scale.of(view.high), wanted)) {
      const x = xOf(scale.back(at));
      if (x < place.left || x > width - 24) continue;
      layers.depth.append(svg('line', { class: 'tick', x1: x, x2: x, y1: surface, y2: surface + (above ? -5 : 5) }));
      if (x > free)
        layers.depth.append(svg('text', { class: 'tick-text', x, y: labelY, 'text-anchor': 'middle' }, text));
    }
    const per = perUnit(record.device.lengthUnit);
    if (ticks.length > 0) {
      const y = depth.down > 0 ? surface + 15 : surface - 7;
      layers.depth.append(svg('text', { class: 'tick-text', x: 12, y }, `Im k${per && ` (${per})`}`));
    }
  };

  const depthTick = (y: number, text: string): SVGGElement =>
    svg(
      'g',
      {},
      svg('line', { class: 'depth', x1: place.left - 4, x2: place.width, y1: y, y2: y }),
      svg('text', { class: 'tick-text', x: 12, y: y + 4 }, text),
    );

  const drawPaths = (): void => {
    layers.paths.replaceChildren();
    layers.crossings.replaceChildren();
    for (const { mark, ks } of tracks) {
      if (ks && ks.length > 2) {
        const points = finely(ks).map(([re, im]) => `${xOf(re).toFixed(2)},${yOf(im).toFixed(2)}`);
        layers.paths.append(svg('polyline', { class: 'path', points: points.join(' '), 'data-mark': mark.id }));
      }
      if (!mark.crossing) continue;
      const [x, half] = [xOf(mark.crossing.k), xOf(mark.crossing.k + mark.crossing.kError) - xOf(mark.crossing.k)];
      const node = svg(
        'g',
        { class: 'crossing', 'data-mark': mark.id },
        svg('line', { x1: x - half, x2: x + half, y1: place.surface, y2: place.surface, class: 'error' }),
        svg('path', { d: `M${x - 4} ${place.surface}l4 -4l4 4l-4 4z` }),
        svg('circle', { class: 'target', cx: x, cy: place.surface, r: 9 }),
      );
      node.addEventListener('click', () => {
        store.set({ level: mark.crossing!.level });
        choose(mark.id);
      });
      hoverable(node, mark.id);
      layers.crossings.append(node);
    }
  };

  const drawMarks = (): void => {
    const focused = document.activeElement?.getAttribute('data-mark');
    nodes.clear();
    layers.marks.replaceChildren();
    // Labels only where they have room; the note of the hovered mark tells the rest.
    const gaps = byRe.slice(1).map(({ mark }, i) => xOf(mark.k[0]) - xOf(byRe[i].mark.k[0]));
    const labels = Math.min(Infinity, ...gaps) > 74;
    for (const { mark } of byRe) {
      const ex = Math.abs(xOf(mark.k[0] + mark.kError) - xOf(mark.k[0]));
      const node = svg(
        'g',
        { class: `mark ${mark.kind}`, role: 'option', tabindex: -1, 'data-mark': mark.id },
        svg('line', { class: 'error', x1: -ex, x2: ex, y1: 0, y2: 0 }),
        svg('line', { class: 'error upright', x1: 0, x2: 0, y1: 0, y2: 0 }),
        mark.kind === 'pole'
          ? svg('path', { class: 'glyph', d: 'M-5 -5L5 5M-5 5L5 -5' })
          : svg('circle', { class: 'glyph', r: 5 }),
        svg('circle', { class: 'target', r: 12 }),
      );
      const text = markText(mark, labels);
      if (text) node.append(svg('text', { class: 'count', x: 10, y: 4 }, text));
      node.addEventListener('click', () => {
        choose(mark.id);
      });
      hoverable(node, mark.id);
      nodes.set(mark.id, node);
      layers.marks.append(node);
    }
    if (focused) nodes.get(focused)?.focus();
  };

  /** Marks to the present level; the rest stands. */
  const placeMarks = (): void => {
    const { level, mark: chosen } = store.get();
    for (const track of byRe) {
      const { mark } = track;
      const { k, known } = positionAt(track, level);
      const node = nodes.get(mark.id)!;
      node.setAttribute('transform', `translate(${xOf(k[0]).toFixed(2)} ${yOf(k[1]).toFixed(2)})`);
      const upright = node.querySelector('.upright')!;
      upright.setAttribute('y1', String(yOf(k[1] + mark.kError) - yOf(k[1])));
      upright.setAttribute('y2', String(yOf(k[1] - mark.kError) - yOf(k[1])));
      // A label beside a mark on the surface would be struck through.
      const onSurface = Math.abs(yOf(k[1]) - place.surface) < 9;
      node.querySelector('.count')?.setAttribute('y', String(onSurface ? (depth.up > 0 && k[1] > 0 ? -9 : 17) : 4));
      node.classList.toggle('unknown', !known);
      node.classList.toggle('chosen', mark.id === chosen);
      node.setAttribute('aria-selected', String(mark.id === chosen));
      node.setAttribute('aria-label', describe(track, k, record).join(', '));
      node.setAttribute('tabindex', mark.id === (chosen ?? byRe[0].mark.id) ? '0' : '-1');
    }
    // The chosen one on top of its neighbours.
    if (chosen && nodes.has(chosen) && layers.marks.lastElementChild !== nodes.get(chosen)) {
      const had = document.activeElement === nodes.get(chosen);
      layers.marks.append(nodes.get(chosen)!);
      if (had) nodes.get(chosen)!.focus();
    }
    for (const node of [...layers.paths.children, ...layers.crossings.children])
      node.classList.toggle('chosen', node.getAttribute('data-mark') === chosen);
    drawNote();
  };

  const drawNote = (): void => {
    layers.note.replaceChildren();
    const track = tracks.find(({ mark }) => mark.id === hovered);
    if (!track) return;
    const { k } = positionAt(track, store.get().level);
    const [x, y] = [xOf(k[0]), yOf(k[1])];
    const lines = describe(track, k, record);
    const right = x > place.width - 300;
    const top = Math.min(Math.max(14, y - 8 * (lines.length - 1)), place.height - 15 * (lines.length - 1) - 8);
    lines.forEach((line, i) => {
      const attributes = { class: 'halo', x: x + (right ? -16 : 16), y: top + 15 * i };
      layers.note.append(svg('text', { ...attributes, 'text-anchor': right ? 'end' : 'start' }, line));
    });
  };

  const hoverable = (node: SVGGElement, id: string): void => {
    const show = (next: string | null) => (): void => {
      hovered = next;
      drawNote();
    };
    node.addEventListener('pointerenter', show(id));
    node.addEventListener('pointerleave', show(null));
    node.addEventListener('focus', show(id));
    node.addEventListener('blur', show(null));
  };

  layers.marks.addEventListener('keydown', (event) => {
    const id = (event.target as Element).getAttribute('data-mark');
    const index = byRe.findIndex(({ mark }) => mark.id === id);
    if (index < 0) return;
    const step = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
    const next = event.key === 'Home' ? 0 : event.key === 'End' ? byRe.length - 1 : step ? index + step : null;
    if (next !== null) nodes.get(byRe[Math.min(byRe.length - 1, Math.max(0, next))].mark.id)!.focus();
    else if (event.key === 'Enter' || event.key === ' ') choose(id!);
    else return;
    event.preventDefault();
    event.stopPropagation();
  });

  const magnify = (px: number, factor: number, shift: number): void => {
    const at = view.low + ((px - place.left) / (place.width - place.left - 12)) * (view.high - view.low);
    const span = Math.min(whole.high - whole.low, Math.max(1e-9 * at, (view.high - view.low) / factor));
    const kept = (at - view.low) / (view.high - view.low);
    const low = at - kept * span - (shift / (place.width - place.left)) * span;
    view.low = Math.min(Math.max(low, whole.low), whole.high - span);
    view.high = view.low + span;
    layout();
  };
  picture.addEventListener(
    'wheel',
    (event) => {
      event.preventDefault();
      magnify(event.offsetX, Math.exp(-event.deltaY * 0.002), event.deltaX);
      moved();
    },
    { passive: false },
  );
  onDrag(layers.depth, { move: (event, dx) => (magnify(event.offsetX, 1, dx), moved()) });
  picture.addEventListener('dblclick', () => {
    Object.assign(view, whole);
    layout();
    moved();
  });
  const moved = (): void => {
    host.dispatchEvent(new CustomEvent('moved'));
  };

  store.on(['level', 'mark'], () => {
    if (nodes.size > 0) placeMarks();
  });

  return {
    layout,
    markPoint(id) {
      const track = tracks.find(({ mark }) => mark.id === id);
      if (!track) return null;
      const { k } = positionAt(track, store.get().level);
      const box = host.getBoundingClientRect();
      const x = xOf(k[0]);
      return x < 0 || x > place.width ? null : [box.left + x, box.top + yOf(k[1])];
    },
  };
}

/** A path with points between the stored ones: straight in k it is bent where depth is not linear. */
function finely(ks: Float64Array): Pair[] {
  const between = 12;
  const out: Pair[] = [];
  for (let i = 0; i + 3 < ks.length; i += 2)
    for (let j = 0; j < between; j++) {
      const f = j / between;
      out.push([ks[i] + f * (ks[i + 2] - ks[i]), ks[i + 1] + f * (ks[i + 3] - ks[i + 1])]);
    }
  out.push([ks[ks.length - 2], ks[ks.length - 1]]);
  return out;
}

/** What stands beside a mark: its label and how many modes it stands for. */
function markText({ label, multiplicity }: RunMark, labels: boolean): string {
  const shown = labels ? label : '';
  return multiplicity > 1 ? `${shown} ×${multiplicity}`.trim() : shown;
}

/** The numbers of a mark, a line each. */
function describe({ mark }: Track, k: Pair, record: RunRecord): string[] {
  const per = perUnit(record.device.lengthUnit);
  const name = `${mark.kind}${mark.label ? `, ${mark.label}` : ''}${mark.multiplicity > 1 ? `, ${mark.multiplicity}-fold` : ''}`;
  const at = k[0] === mark.k[0] && k[1] === mark.k[1];
  const imaginary = k[1] === 0 ? '' : ` ${k[1] < 0 ? '−' : '+'} ${figure(Math.abs(k[1]), 4)} i`;
  const error = at ? ` ± ${figure(mark.kError, 2)}` : '';
  const digits = Math.min(12, Math.max(6, Math.ceil(Math.log10(k[0] / (mark.kError || 1))) + 1));
  const lines = [name, `k = ${figure(k[0], digits)}${imaginary}${error} ${per}`.trim()];
  if (at && Number.isFinite(mark.q)) lines.push(`Q = ${figure(mark.q, 5)}`);
  if (mark.crossing) lines.push(`on the axis at ${withError(mark.crossing.k, mark.crossing.kError)} ${per}`.trim());
  return lines;
}

function rangeOf(record: RunRecord, tracks: readonly Track[]): { low: number; high: number } {
  const { kMin, kMax } = record.device.band;
  let [low, high] = [kMin, kMax];
  for (const { mark, ks } of tracks) {
    for (const k of [mark.k[0], mark.crossing?.k ?? mark.k[0]]) [low, high] = [Math.min(low, k), Math.max(high, k)];
    if (ks) for (let i = 0; i < ks.length; i += 2) [low, high] = [Math.min(low, ks[i]), Math.max(high, ks[i])];
  }
  const edge = 0.03 * (high - low || Math.abs(high) || 1);
  return { low: low - edge, high: high + edge };
}

interface DepthScale {
  /** Linear, or arsinh(im/s): the unit is arbitrary. */
  of(im: number): number;
  /** Extent above and below, in that unit. */
  readonly up: number;
  readonly down: number;
  readonly ticks: readonly { readonly im: number; readonly text: string }[];
}

/** Marks whose |Im k| differ by more than this many times are shown on an arsinh scale. */
const LINEAR_SPAN = 12;

function depthScale(tracks: readonly Track[]): DepthScale {
  let [top, bottom, least] = [0, 0, Infinity];
  for (const { mark, ks } of tracks) {
    const all = ks ? [mark.k[1], ...ks.filter((_, i) => i % 2 === 1)] : [mark.k[1]];
    for (const im of all) [top, bottom] = [Math.max(top, im), Math.min(bottom, im)];
    // Nearer to the axis than its uncertainty a mark tells nothing about the scale.
    if (mark.k[1] !== 0) least = Math.min(least, Math.max(Math.abs(mark.k[1]), mark.kError));
  }
  const most = Math.max(top, -bottom);
  if (most === 0) return { of: () => 0, up: 0, down: 0, ticks: [] };
  const linear = !Number.isFinite(least) || most / least < LINEAR_SPAN;
  const of = linear ? (im: number): number => im / most : (im: number): number => Math.asinh(im / least);
  // A side that holds only the overshoot of paths gets a strip of its own all the same.
  const [up, down] = [of(top), of(-bottom)];
  const sides = [top > 0 ? 1 : 0, bottom < 0 ? -1 : 0].filter((side) => side !== 0);
  const steps = linear ? roundSteps(0, most, 3).map(({ at }) => at) : decades(least, most);
  const ticks = sides.flatMap((side) =>
    steps
      .filter((at) => at > 0 && at <= (side > 0 ? top : -bottom) * 1.0001 && of(at) > 0.12 * (up + down))
      .map((at) => ({ im: side * at, text: linear ? figure(side * at, 1) : decadeText(side * at) })),
  );
  return { of, up, down, ticks };
}

/** Ticks that stand far enough from one another, and from the title beside the surface, for their texts. */
function spaced(ticks: DepthScale['ticks'], yOf: (im: number) => number): DepthScale['ticks'] {
  const kept: { im: number; text: string }[] = [];
  for (const tick of [...ticks].sort((a, b) => Math.abs(b.im) - Math.abs(a.im)))
    if (kept.every(({ im }) => Math.abs(yOf(im) - yOf(tick.im)) > 17) && Math.abs(yOf(tick.im) - yOf(0)) > 27)
      kept.push(tick);
  return kept;
}

function decades(least: number, most: number): number[] {
  const out = [];
  for (let e = Math.ceil(Math.log10(least)); 10 ** e <= most; e++) out.push(10 ** e);
  return out;
}
