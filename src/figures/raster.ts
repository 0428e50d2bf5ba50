// Which share of each pixel does a shape cover?

import { bytesOf } from '../results/colours.ts';

/** A picture being painted: opaque RGB bytes, rows from the top. */
export interface Canvas {
  readonly width: number;
  readonly height: number;
  readonly rgb: Uint8Array;
  /** Sample bits of the shape at hand, one word a pixel; all zero between shapes. */
  readonly mask: Uint16Array;
}

export function blankCanvas(width: number, height: number, ground: string): Canvas {
  const rgb = new Uint8Array(3 * width * height);
  const [r, g, b] = bytesOf(ground);
  for (let i = 0; i < rgb.length; i += 3) {
    rgb[i] = r;
    rgb[i + 1] = g;
    rgb[i + 2] = b;
  }
  return { width, height, rgb, mask: new Uint16Array(width * height) };
}

/**
 * Sixteen samples a pixel, one in each sixteenth of its height and of its width (rooks that do not take each other), so
 * that nearly level and nearly upright edges get sixteen shades. Offsets are (i + ½)/16 down and (ROOKS[i] + ½)/16 across.
 */
const ROOKS = [5, 12, 1, 9, 15, 6, 2, 11, 7, 14, 3, 10, 0, 13, 8, 4];
const SAMPLES = ROOKS.length;
const ACROSS = ROOKS.map((rook) => (rook + 0.5) / SAMPLES);

const BITS = Uint8Array.from({ length: 1 << SAMPLES }, (_, n) => {
  let count = 0;
  for (let m = n; m; m &= m - 1) count++;
  return count;
});

/** Rows and columns that a shape has touched: [left, top, right, bottom), pixels. */
type Extent = [number, number, number, number];

/** Fills rings (closed polylines in pixels, even-odd) with a colour. */
export function paintRings(canvas: Canvas, rings: readonly ArrayLike<number>[], colour: string, opacity: number): void {
  const extent: Extent = [canvas.width, canvas.height, 0, 0];
  coverRings(canvas, rings, extent);
  blendMask(canvas, extent, colour, opacity);
}

/** Strokes polylines (pixels) with a round pen: overlaps of one call are painted once. */
export function paintLines(
  canvas: Canvas,
  lines: readonly ArrayLike<number>[],
  closed: boolean,
  width: number,
  colour: string,
  opacity: number,
): void {
  const extent: Extent = [canvas.width, canvas.height, 0, 0];
  // A pen thinner than a pixel covers as one pixel, paler: otherwise lines break up between the samples.
  const pen = Math.max(width, 1) / 2;
  const pale = Math.min(1, width);
  for (const line of lines) coverLine(canvas, line, closed, pen, extent);
  blendMask(canvas, extent, colour, opacity * pale);
}

/** Turns smaller than this leave a notch of less than a tenth of the pen, which no one sees: they need no round join. */
const SMALL_TURN = Math.cos((11 * Math.PI) / 180);

function coverLine(canvas: Canvas, line: ArrayLike<number>, closed: boolean, pen: number, extent: Extent): void {
  const n = line.length / 2;
  let [ux, uy] = [0, 0];
  for (let i = 0; i < n; i++) {
    const [x0, y0] = [line[2 * i], line[2 * i + 1]];
    const j = i + 1 < n ? i + 1 : closed ? 0 : i;
    const [dx, dy] = [line[2 * j] - x0, line[2 * j + 1] - y0];
    const length = Math.hypot(dx, dy);
    const [vx, vy] = length > 0 ? [dx / length, dy / length] : [0, 0];
    if (ux * vx + uy * vy < SMALL_TURN) coverRings(canvas, [penDisk(x0, y0, pen)], extent);
    if (length === 0) continue;
    [ux, uy] = [vx, vy];
    const [px, py] = [-uy * pen, ux * pen];
    coverRings(
      canvas,
      [[x0 + px, y0 + py, x0 + dx + px, y0 + dy + py, x0 + dx - px, y0 + dy - py, x0 - px, y0 - py]],
      extent,
    );
  }
}

function penDisk(x: number, y: number, radius: number): number[] {
  const n = Math.min(32, Math.max(8, Math.ceil(4 * Math.sqrt(radius)) * 2));
  const ring: number[] = [];
  for (let i = 0; i < n; i++) {
    ring.push(x + radius * Math.cos((2 * Math.PI * i) / n), y + radius * Math.sin((2 * Math.PI * i) / n));
  }
  return ring;
}

/** Sets the sample bits inside the rings (even-odd among these rings; joined with what the mask holds already). */
function coverRings(canvas: Canvas, rings: readonly ArrayLike<number>[], extent: Extent): void {
  const { width, height, mask } = canvas;
  let [low, high] = [Infinity, -Infinity];
  for (const ring of rings) {
    for (let i = 1; i < ring.length; i += 2) {
      if (ring[i] < low) low = ring[i];
      if (ring[i] > high) high = ring[i];
    }
  }
  const first = Math.max(0, Math.floor(low));
  const last = Math.min(height - 1, Math.floor(high));
  if (!(first <= last)) return;

  // Edges sorted into the pixel rows where they begin; `live` holds those that may still cross the row at hand.
  const starts: number[][] = Array.from({ length: last - first + 1 }, () => []);
  const edges: number[] = [];
  for (const ring of rings) {
    const n = ring.length;
    for (let i = 0; i < n; i += 2) {
      const j = i + 2 < n ? i + 2 : 0;
      let [x0, y0, x1, y1] = [ring[i], ring[i + 1], ring[j], ring[j + 1]];
      if (y0 === y1) continue;
      if (y0 > y1) [x0, y0, x1, y1] = [x1, y1, x0, y0];
      // Written so that what is not a number is passed over too.
      if (!(y1 >= first && y0 < last + 1)) continue;
      starts[Math.max(0, Math.floor(y0) - first)].push(edges.length);
      edges.push(x0, y0, y1, (x1 - x0) / (y1 - y0));
    }
  }
  let live: number[] = [];
  const cuts: number[] = [];
  for (let row = first; row <= last; row++) {
    live = live.filter((e) => edges[e + 2] > row);
    live.push(...starts[row - first]);
    if (live.length === 0) continue;
    for (let s = 0; s < SAMPLES; s++) {
      const y = row + (s + 0.5) / SAMPLES;
      cuts.length = 0;
      for (const e of live) {
        if (edges[e + 1] <= y && y < edges[e + 2]) cuts.push(edges[e] + (y - edges[e + 1]) * edges[e + 3]);
      }
      if (cuts.length > 2) cuts.sort((a, b) => a - b);
      else if (cuts[0] > cuts[1]) cuts.reverse();
      for (let c = 0; c + 1 < cuts.length; c += 2) {
        // Pixels whose sample s lies in [cuts[c], cuts[c+1]).
        const from = Math.max(0, Math.ceil(cuts[c] - ACROSS[s]));
        const to = Math.min(width, Math.ceil(cuts[c + 1] - ACROSS[s]));
        if (from >= to) continue;
        if (from < extent[0]) extent[0] = from;
        if (to > extent[2]) extent[2] = to;
        for (let p = row * width + from, end = row * width + to; p < end; p++) mask[p] |= 1 << s;
      }
    }
  }
  if (first < extent[1]) extent[1] = first;
  if (last + 1 > extent[3]) extent[3] = last + 1;
}

/** Blends the colour into the picture by covered share and clears the mask. */
function blendMask(canvas: Canvas, [left, top, right, bottom]: Extent, colour: string, opacity: number): void {
  const { width, rgb, mask } = canvas;
  const [r, g, b] = bytesOf(colour);
  for (let y = top; y < bottom; y++) {
    for (let p = y * width + left, end = y * width + right; p < end; p++) {
      if (mask[p] === 0) continue;
      const a = (opacity * BITS[mask[p]]) / SAMPLES;
      rgb[3 * p] = Math.round(rgb[3 * p] + a * (r - rgb[3 * p]));
      rgb[3 * p + 1] = Math.round(rgb[3 * p + 1] + a * (g - rgb[3 * p + 1]));
      rgb[3 * p + 2] = Math.round(rgb[3 * p + 2] + a * (b - rgb[3 * p + 2]));
      mask[p] = 0;
    }
  }
}

/** Lays RGBA bytes (size across × down) onto the picture with its corner at pixel (left, top). */
export function paintPixels(
  canvas: Canvas,
  rgba: Uint8Array,
  left: number,
  top: number,
  across: number,
  down: number,
): void {
  for (let j = Math.max(0, -top); j < down && top + j < canvas.height; j++) {
    for (let i = Math.max(0, -left); i < across && left + i < canvas.width; i++) {
      const from = 4 * (j * across + i);
      const to = 3 * ((top + j) * canvas.width + left + i);
      const a = rgba[from + 3] / 255;
      for (let c = 0; c < 3; c++) canvas.rgb[to + c] = Math.round(canvas.rgb[to + c] * (1 - a) + rgba[from + c] * a);
    }
  }
}
