// Where do poles and zeros lie in the complex plane, and how do they move?

import type { RunMark } from '../results/format.ts';
import type { RunView } from '../results/run-view.ts';
import type { Palette } from '../results/colours.ts';
import { boxRing, circleRing, fill, stroke, text, type Drawing, type Item } from './drawing.ts';
import { heading, LABEL_SIZE, MARGIN, settle, type FigureOptions } from './frame.ts';
import { letterWidth } from './lettering.ts';
import { labelText, numberText, roundStep, tickText, ticksIn, unitText } from './scales.ts';

export interface PlaneFigureOptions extends FigureOptions {
  /** Id of a mark to set off in the accent. */
  readonly chosen?: string;
}

/** More names than this are left out. */
const MOST_NAMES = 24;

/** When the depths of the marks differ by more than this, the axis of Im k counts powers of ten. */
const LINEAR_RATIO = 40;

/**
 * The complex k plane of a run: the real axis as a water line, poles as crosses, zeros as circles, their stored paths,
 * and a dot where a path meets the line. Errors larger than a mark show as bars.
 */
export function planeFigure(run: RunView, options: PlaneFigureOptions = {}): Drawing {
  const settled = settle(options);
  const { palette, width } = settled;
  const { record } = run;
  const paths = record.marks.map((m) => (m.path ? run.array(m.path.ks) : null));
  const counted = countText(record.marks);
  const head = heading(options.title ?? record.sentence, [record.device.title, counted].join('  ·  '), settled);

  const left = MARGIN + 58;
  const top = head.bottom + 20;
  const inner = width - MARGIN - left;
  const tall = Math.round(inner * 0.52);
  const across = horizontalAxis(run, paths, left, inner);
  const down = verticalAxis(record.marks, paths, top, tall);
  const place: Place = { x: across.at, y: down.at };
  const water = down.at(0);
  const unit = unitText(record.device.lengthUnit);
  const perLength = unit === '' ? '' : `1/${unit}`;

  const items: Item[] = [
    ...head.items,
    fill([boxRing(left, water, inner, top + tall - water)], palette.shade, 0.75),
    ...axisItems(across, down, { left, top, inner, tall }, perLength, palette),
    stroke([[left, water, left + inner, water]], palette.ink, 1.6),
    ...paths.flatMap((ks, i) => (ks ? [pathItem(ks, place, palette, record.marks[i].id === options.chosen)] : [])),
    ...record.marks.flatMap((m) => markItems(m, place, palette, m.id === options.chosen)),
    ...crossingItems(record.marks, place, palette, options.chosen),
    ...nameItems(record.marks, place, { left, right: left + inner, top, bottom: top + tall }, palette),
  ];
  const description = `Complex plane of ${record.device.title}: ${counted}. ${record.sentence}`;
  return { width, height: Math.ceil(top + tall + 46 + MARGIN * 0.5), ground: palette.ground, description, items };
}

interface Place {
  readonly x: (re: number) => number;
  readonly y: (im: number) => number;
}

interface Axis {
  readonly at: (value: number) => number;
  readonly ticks: readonly { readonly value: number; readonly label: string }[];
}

function horizontalAxis(run: RunView, paths: readonly (ArrayLike<number> | null)[], left: number, inner: number): Axis {
  const { marks, device } = run.record;
  const all = [device.band.kMin, device.band.kMax, ...marks.map((m) => m.k[0]), ...parts(paths, 0)];
  let [low, high] = ends(all);
  const pad = 0.03 * (high - low) || 0.01 * Math.abs(low) || 1;
  [low, high] = [low - pad, high + pad];
  const step = roundStep(high - low, 8);
  return {
    at: (re) => left + ((re - low) / (high - low)) * inner,
    ticks: ticksIn(low, high, 8).map((value) => ({ value, label: tickText(value, step) })),
  };
}

/** Linear, or by powers of ten on both sides of zero when marks lie at very different depths. */
function verticalAxis(
  marks: readonly RunMark[],
  paths: readonly (ArrayLike<number> | null)[],
  top: number,
  tall: number,
): Axis {
  const depths = marks.map((m) => m.k[1]);
  const sizes = depths.map(Math.abs).filter((d) => d > 0);
  const most = Math.max(...sizes, 0) || 1;
  const least = Math.max(Math.min(...sizes, most), most * 1e-12);
  const byPowers = most / least > LINEAR_RATIO;
  const zero = 10 ** Math.floor(Math.log10(least) - 0.5);
  const bend = (v: number): number => (byPowers ? Math.sign(v) * Math.log10(1 + Math.abs(v) / zero) : v);
  let [low, high] = ends([0, ...depths, ...parts(paths, 1)].map(bend));
  const span = high - low || bend(most);
  // Some air above the water line and some water below it, whatever the marks do.
  high = Math.max(high + 0.12 * span, 0.16 * span);
  low = Math.min(low - 0.12 * span, -0.16 * span);
  const at = (im: number): number => top + ((high - bend(im)) / (high - low)) * tall;
  const inside = (v: number): boolean => bend(v) >= low && bend(v) <= high;
  if (!byPowers) {
    const step = roundStep(high - low, 6);
    return { at, ticks: ticksIn(low, high, 6).map((value) => ({ value, label: tickText(value, step) })) };
  }
  const powers: number[] = [];
  for (let p = Math.log10(zero) + 1; p <= Math.floor(Math.log10(most) + 1e-9); p++) powers.push(Math.round(p));
  const every = Math.ceil(powers.length / 5);
  const sided = powers.filter((_, i) => (powers.length - 1 - i) % every === 0).flatMap((p) => [10 ** p, -(10 ** p)]);
  const ticks = [0, ...sided].filter(inside).map((value) => ({ value, label: numberText(value, 1) }));
  return { at, ticks };
}

const parts = (paths: readonly (ArrayLike<number> | null)[], which: 0 | 1): number[] =>
  paths.flatMap((ks) => (ks ? Array.from({ length: ks.length / 2 }, (_, i) => ks[2 * i + which]) : []));

const ends = (values: readonly number[]): [number, number] => [
  values.reduce((a, b) => Math.min(a, b), Infinity),
  values.reduce((a, b) => Math.max(a, b), -Infinity),
];

interface Field {
  readonly left: number;
  readonly top: number;
  readonly inner: number;
  readonly tall: number;
}

function axisItems(
  across: Axis,
  down: Axis,
  { left, top, inner, tall }: Field,
  unit: string,
  palette: Palette,
): Item[] {
  const bottom = top + tall;
  const rules = down.ticks
    .filter((t) => t.value !== 0)
    .map((t) => [left, down.at(t.value), left + inner, down.at(t.value)]);
  return [
    stroke(rules, palette.faint, 0.6, { opacity: 0.7 }),
    stroke(
      across.ticks.map((t) => [across.at(t.value), bottom, across.at(t.value), bottom + 5]),
      palette.muted,
      0.9,
    ),
    stroke([[left, bottom, left + inner, bottom]], palette.muted, 0.9),
    ...across.ticks.map((t) =>
      text(t.label, across.at(t.value), bottom + 20, LABEL_SIZE, palette.muted, { anchor: 'middle' }),
    ),
    ...down.ticks.map((t) =>
      text(t.label, left - 8, down.at(t.value) + LABEL_SIZE * 0.35, LABEL_SIZE, palette.muted, { anchor: 'end' }),
    ),
    text(labelText('Re k', unit), left + inner, bottom + 38, LABEL_SIZE, palette.ink, { anchor: 'end' }),
    text(labelText('Im k', unit), MARGIN, top - 8, LABEL_SIZE, palette.ink),
  ];
}

const pathItem = (ks: ArrayLike<number>, place: Place, palette: Palette, chosen: boolean): Item =>
  stroke(
    [Float64Array.from(ks, (v, i) => (i % 2 === 0 ? place.x(v) : place.y(v)))],
    chosen ? palette.accent : palette.muted,
    chosen ? 1.6 : 1,
    { opacity: chosen ? 1 : 0.8 },
  );

/** Half the size of a mark. */
const ARM = 5;

function markItems(mark: RunMark, place: Place, palette: Palette, chosen: boolean): Item[] {
  const [x, y] = [place.x(mark.k[0]), place.y(mark.k[1])];
  const colour = chosen ? palette.accent : palette.ink;
  const pen = chosen ? 2.2 : 1.6;
  const items = errorBars(mark.k, mark.kError, place, colour);
  if (mark.kind === 'pole') {
    items.push(
      stroke(
        [
          [x - ARM, y - ARM, x + ARM, y + ARM],
          [x - ARM, y + ARM, x + ARM, y - ARM],
        ],
        colour,
        pen,
      ),
    );
  } else {
    items.push(
      fill([circleRing(x, y, ARM)], palette.ground),
      stroke([circleRing(x, y, ARM)], colour, pen, { closed: true }),
    );
  }
  return items;
}

/** A bar each way, where it reaches beyond the mark. */
function errorBars([re, im]: readonly [number, number], error: number, place: Place, colour: string): Item[] {
  const lines: number[][] = [];
  const [x, y] = [place.x(re), place.y(im)];
  if (place.x(re + error) - x > ARM) lines.push([place.x(re - error), y, place.x(re + error), y]);
  if (y - place.y(im + error) > ARM) lines.push([x, place.y(im - error), x, place.y(im + error)]);
  return lines.length > 0 ? [stroke(lines, colour, 0.9)] : [];
}

/** One dot for each place where a path meets the line; the twin paths of a pole and a zero share it. */
function crossingItems(marks: readonly RunMark[], place: Place, palette: Palette, chosen: string | undefined): Item[] {
  const items: Item[] = [];
  const seen: number[] = [];
  for (const { id, crossing } of marks) {
    if (!crossing) continue;
    const x = place.x(crossing.k);
    if (id !== chosen && seen.some((other) => Math.abs(other - x) < 1)) continue;
    seen.push(x);
    items.push(...errorBars([crossing.k, 0], crossing.kError, place, palette.accent));
    items.push(fill([circleRing(x, place.y(0), 4)], palette.accent));
  }
  return items;
}

interface Edges {
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
}

/** Names beside marks and levels beside crossings, wherever they collide with nothing; the lowest level goes first. */
function nameItems(marks: readonly RunMark[], place: Place, edges: Edges, palette: Palette): Item[] {
  if (marks.length > 4 * MOST_NAMES) return [];
  const taken: [number, number, number, number][] = marks.map(({ k }) => {
    const [x, y] = [place.x(k[0]), place.y(k[1])];
    return [x - ARM, y - ARM, x + ARM, y + ARM];
  });
  const crossings = marks
    .flatMap((m) => (m.crossing ? [m.crossing] : []))
    .sort((a, b) => a.level - b.level)
    .map((c) => ({ x: place.x(c.k), y: place.y(0), label: `D = ${numberText(c.level, 3)}`, colour: palette.accent }));
  for (const { x, y } of crossings) taken.push([x - ARM, y - ARM, x + ARM, y + ARM]);
  const wanted = [
    ...crossings.filter((c, i) => !crossings.slice(0, i).some((d) => Math.abs(d.x - c.x) < 1)),
    ...marks
      .filter((m) => m.label !== '')
      .map((m) => ({ x: place.x(m.k[0]), y: place.y(m.k[1]), label: m.label, colour: palette.muted })),
  ];
  const items: Item[] = [];
  for (const { x, y, label, colour } of wanted) {
    if (items.length >= MOST_NAMES) break;
    const w = letterWidth(label, LABEL_SIZE - 1);
    // A level stands clear of the water line, a name first of all beside its mark.
    const beside: [number, number][] = [
      [x + 9, y + 4],
      [x - 9 - w, y + 4],
      [x - w / 2, y + 19],
      [x - w / 2, y - 10],
    ];
    const aslant: [number, number][] = [
      [x + 7, y - 8],
      [x + 7, y + 17],
      [x - 7 - w, y - 8],
      [x - 7 - w, y + 17],
    ];
    const spots = colour === palette.accent ? aslant : [...beside, ...aslant];
    const spot = spots.find(([sx, sy]) => {
      const box = [sx - 2, sy - LABEL_SIZE, sx + w + 2, sy + 3] as const;
      if (box[0] < edges.left || box[2] > edges.right || box[1] < edges.top || box[3] > edges.bottom) return false;
      return !taken.some((t) => t[0] < box[2] && box[0] < t[2] && t[1] < box[3] && box[1] < t[3]);
    });
    if (!spot) continue;
    taken.push([spot[0], spot[1] - LABEL_SIZE, spot[0] + w, spot[1] + 3]);
    items.push(text(label, spot[0], spot[1], LABEL_SIZE - 1, colour, { halo: palette.ground }));
  }
  return items;
}

function countText(marks: readonly RunMark[]): string {
  const count = (kind: RunMark['kind'], one: string, many: string): string => {
    const n = marks.filter((m) => m.kind === kind).length;
    return n === 0 ? '' : `${String(n)} ${n === 1 ? one : many}`;
  };
  const list = [count('pole', 'pole (×)', 'poles (×)'), count('zero', 'zero (○)', 'zeros (○)')].filter((s) => s !== '');
  return list.length > 0 ? list.join(', ') : 'no poles or zeros';
}
