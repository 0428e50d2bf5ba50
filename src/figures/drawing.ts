// What is a drawing made of, before it becomes SVG or PNG?

/** Closed polylines [x0,y0,x1,y1,…] in drawing units; the last point joins the first. */
export type Rings = readonly ArrayLike<number>[];

/** Filled by the even-odd rule of all rings together. */
export interface Fill {
  readonly kind: 'fill';
  readonly rings: Rings;
  readonly colour: string;
  readonly opacity: number;
}

/** Lines with round joins and ends. */
export interface Stroke {
  readonly kind: 'stroke';
  readonly lines: readonly ArrayLike<number>[];
  readonly closed: boolean;
  readonly colour: string;
  readonly width: number;
  readonly opacity: number;
}

export interface Text {
  readonly kind: 'text';
  readonly text: string;
  readonly x: number;
  /** Of the baseline. */
  readonly y: number;
  /** Em, drawing units. */
  readonly size: number;
  readonly anchor: 'start' | 'middle' | 'end';
  readonly colour: string;
  readonly bold: boolean;
  /** A halo of this colour keeps text readable on a picture; null for none. */
  readonly halo: string | null;
}

/** A picture made of points of colour, painted at the resolution it is shown in. */
export interface Picture {
  readonly kind: 'picture';
  readonly x: number;
  readonly y: number;
  readonly width: number;
  readonly height: number;
  /** RGBA bytes, rows from the top, 4 × across × down; alpha not premultiplied. */
  readonly paint: (across: number, down: number) => Uint8Array;
}

export type Item = Fill | Stroke | Text | Picture;

/** Items in painting order on a ground. One unit is a CSS pixel, y points down. */
export interface Drawing {
  readonly width: number;
  readonly height: number;
  readonly ground: string;
  /** One sentence for readers who cannot see the figure. */
  readonly description: string;
  readonly items: readonly Item[];
}

export const fill = (rings: Rings, colour: string, opacity = 1): Fill => ({ kind: 'fill', rings, colour, opacity });

export const stroke = (
  lines: readonly ArrayLike<number>[],
  colour: string,
  width = 1,
  more: { readonly closed?: boolean; readonly opacity?: number } = {},
): Stroke => ({ kind: 'stroke', lines, colour, width, closed: more.closed ?? false, opacity: more.opacity ?? 1 });

export const text = (
  content: string,
  x: number,
  y: number,
  size: number,
  colour: string,
  more: { readonly anchor?: Text['anchor']; readonly bold?: boolean; readonly halo?: string } = {},
): Text => ({
  kind: 'text',
  text: content,
  x,
  y,
  size,
  colour,
  anchor: more.anchor ?? 'start',
  bold: more.bold ?? false,
  halo: more.halo ?? null,
});

/** Closed polyline of a circle; the chords stay within 0.05 drawing units of it. */
export function circleRing(x: number, y: number, radius: number): Float64Array {
  const n = Math.max(12, Math.ceil(Math.PI / Math.acos(1 - Math.min(0.5, 0.05 / Math.max(radius, 1e-6)))));
  const ring = new Float64Array(2 * n);
  for (let i = 0; i < n; i++) {
    ring[2 * i] = x + radius * Math.cos((2 * Math.PI * i) / n);
    ring[2 * i + 1] = y + radius * Math.sin((2 * Math.PI * i) / n);
  }
  return ring;
}

/** Closed polyline of a box. */
export const boxRing = (x: number, y: number, width: number, height: number): number[] => [
  x,
  y,
  x + width,
  y,
  x + width,
  y + height,
  x,
  y + height,
];
