// How is a figure laid out: heading, picture, scale bar?

import { PALETTES, type Palette, type Theme } from '../results/colours.ts';
import type { Box } from './bodies.ts';
import { stroke, text, type Item } from './drawing.ts';
import { letterWidth } from './lettering.ts';
import { numberText, roundLength, unitText } from './scales.ts';

export interface FigureOptions {
  readonly theme?: Theme;
  /** Of the whole figure, drawing units (CSS pixels); 900 if absent. */
  readonly width?: number;
  /** The heading; each figure has its own if absent, '' leaves it out. */
  readonly title?: string;
}

export const MARGIN = 36;
export const TITLE_SIZE = 21;
export const LABEL_SIZE = 13;

export interface Settled {
  readonly palette: Palette;
  readonly theme: Theme;
  readonly width: number;
}

/** @throws when the width leaves no room for a figure */
export function settle(options: FigureOptions): Settled {
  const theme = options.theme ?? 'light';
  const width = options.width ?? 900;
  if (!(width >= 320 && width <= 8000)) {
    throw new Error(`figure width ${String(width)}: expected 320 to 8000 drawing units`);
  }
  return { palette: PALETTES[theme], theme, width };
}

/** Heading in ink, a quieter line below it; `bottom` is where the picture may begin. */
export function heading(title: string, below: string, { palette, width }: Settled): { items: Item[]; bottom: number } {
  const items: Item[] = [];
  // The widest of the system faces an SVG may be shown in runs 7 % wider than our own letters.
  const room = 0.93 * (width - 2 * MARGIN);
  let y = MARGIN - 10;
  if (title !== '') {
    for (const line of wrapped(title, TITLE_SIZE, room)) {
      y += TITLE_SIZE * 1.32;
      items.push(text(line, MARGIN, y - 4, TITLE_SIZE, palette.ink));
    }
  }
  if (below !== '') {
    y += 4;
    for (const line of wrapped(below, LABEL_SIZE + 1, room)) {
      y += (LABEL_SIZE + 1) * 1.4;
      items.push(text(line, MARGIN, y - 4, LABEL_SIZE + 1, palette.muted));
    }
  }
  return { items, bottom: y + 14 };
}

/** Lines of at most `width`, broken at blanks; a longer word stands alone. */
export function wrapped(sentence: string, size: number, width: number): string[] {
  const lines: string[] = [];
  for (const word of sentence.split(/\s+/).filter((w) => w !== '')) {
    const last = lines.at(-1);
    if (last !== undefined && letterWidth(`${last} ${word}`, size) <= width)
      lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  // A dot that separates needs no line's end after it.
  return lines.map((line) => line.replace(/ ·$/, '').replace(/^· /, ''));
}

/** From length units (y up) to drawing units (y down). */
export interface View {
  readonly scale: number;
  toX(x: number): number;
  toY(y: number): number;
  /** A polyline of the device in drawing units. */
  line(points: ArrayLike<number>): Float64Array;
}

/** Fits the box into the given place, centred, keeping its shape. */
export function viewOf(box: Box, left: number, top: number, width: number, height: number): View {
  const scale = Math.min(width / (box[2] - box[0]), height / (box[3] - box[1]));
  const [cx, cy] = [(box[0] + box[2]) / 2, (box[1] + box[3]) / 2];
  const toX = (x: number): number => left + width / 2 + (x - cx) * scale;
  const toY = (y: number): number => top + height / 2 - (y - cy) * scale;
  return {
    scale,
    toX,
    toY,
    line: (points) => Float64Array.from(points, (v, i) => (i % 2 === 0 ? toX(v) : toY(v))),
  };
}

/** A bar of round length with its number, its left end at (x, y); at most `most` long. */
export function scaleBar(view: View, unit: string, x: number, y: number, most: number, palette: Palette): Item[] {
  const length = roundLength(most / view.scale);
  const long = length * view.scale;
  const label = [numberText(length, 3), unitText(unit)].filter((s) => s !== '').join(' ');
  return [
    stroke([[x, y - 4, x, y, x + long, y, x + long, y - 4]], palette.ink, 1.4),
    text(label, x + long / 2, y - 9, LABEL_SIZE, palette.ink, { anchor: 'middle' }),
  ];
}
