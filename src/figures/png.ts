// How does a picture become a PNG file?

import { deflateSync } from 'node:zlib';
import type { Drawing } from './drawing.ts';
import { letterLines } from './lettering.ts';
import { blankCanvas, paintLines, paintPixels, paintRings, type Canvas } from './raster.ts';

/** The drawing as a PNG, `density` pixels a drawing unit. */
export function pngBytes(drawing: Drawing, density = 2): Uint8Array {
  const canvas = blankCanvas(Math.round(drawing.width * density), Math.round(drawing.height * density), drawing.ground);
  for (const item of drawing.items) {
    if (item.kind === 'fill') paintRings(canvas, scaled(item.rings, density), item.colour, item.opacity);
    else if (item.kind === 'stroke') {
      paintLines(canvas, scaled(item.lines, density), item.closed, item.width * density, item.colour, item.opacity);
    } else if (item.kind === 'picture') {
      const [across, down] = [Math.round(item.width * density), Math.round(item.height * density)];
      const [left, top] = [Math.round(item.x * density), Math.round(item.y * density)];
      paintPixels(canvas, item.paint(across, down), left, top, across, down);
    } else paintText(canvas, item, density);
  }
  return encodePng(canvas.width, canvas.height, 3, canvas.rgb, Math.round(density * 96));
}

function paintText(canvas: Canvas, item: Drawing['items'][number] & { kind: 'text' }, density: number): void {
  const { lines, width } = letterLines(item.text, item.size);
  const left = item.x - { start: 0, middle: width / 2, end: width }[item.anchor];
  const placed = lines.map((line) => line.map((v, i) => (i % 2 === 0 ? left + v : item.y + v) * density));
  const pen = item.size * (item.bold ? 0.1 : 0.074) * density;
  if (item.halo) paintLines(canvas, placed, false, pen + 3.2 * density, item.halo, 0.85);
  paintLines(canvas, placed, false, pen, item.colour, 1);
}

const scaled = (lines: readonly ArrayLike<number>[], density: number): Float64Array[] =>
  lines.map((line) => Float64Array.from(line, (v) => v * density));

/**
 * PNG (ISO/IEC 15948) of 8-bit RGB (3 channels) or RGBA (4), rows from the top, in sRGB. Each row takes the filter whose
 * output has the smallest sum of moduli, the heuristic the standard proposes.
 *
 * @throws when the bytes do not match the size
 */
export function encodePng(
  width: number,
  height: number,
  channels: 3 | 4,
  pixels: Uint8Array,
  dotsPerInch = 96,
): Uint8Array {
  if (pixels.length !== width * height * channels || width < 1 || height < 1) {
    throw new Error(
      `${String(pixels.length)} bytes: expected ${String(width)} × ${String(height)} × ${String(channels)}, at least one pixel`,
    );
  }
  const header = new Uint8Array(13);
  const view = new DataView(header.buffer);
  view.setUint32(0, width);
  view.setUint32(4, height);
  // 8 bits; colour type 2 (RGB) or 6 (RGBA); deflate, adaptive filters, not interlaced.
  header.set([8, channels === 3 ? 2 : 6, 0, 0, 0], 8);
  const physical = new Uint8Array(9);
  const perMetre = Math.round(dotsPerInch / 0.0254);
  new DataView(physical.buffer).setUint32(0, perMetre);
  new DataView(physical.buffer).setUint32(4, perMetre);
  physical[8] = 1;
  const data = deflateSync(filteredRows(width, height, channels, pixels), { level: 6 });
  const parts = [
    Uint8Array.of(0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a),
    chunk('IHDR', header),
    chunk('sRGB', Uint8Array.of(0)),
    chunk('pHYs', physical),
    chunk('IDAT', data),
    chunk('IEND', new Uint8Array(0)),
  ];
  const file = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    file.set(part, at);
    at += part.length;
  }
  return file;
}

function filteredRows(width: number, height: number, channels: number, pixels: Uint8Array): Uint8Array {
  const bytes = width * channels;
  const out = new Uint8Array((bytes + 1) * height);
  // Of the five filters of the standard these three win on flat ground and smooth colour; "none" and "average" do not.
  const tries = [1, 2, 4].map((filter) => ({ filter, row: new Uint8Array(bytes) }));
  for (let y = 0; y < height; y++) {
    let best = tries[0];
    let least = Infinity;
    for (const one of tries) {
      const sum = filterRow(one.row, one.filter, pixels, y * bytes, bytes, channels, y === 0);
      if (sum < least) [least, best] = [sum, one];
    }
    out[y * (bytes + 1)] = best.filter;
    out.set(best.row, y * (bytes + 1) + 1);
  }
  return out;
}

/** Fills `row` with the filtered bytes; returns the sum of their moduli as signed bytes. */
function filterRow(
  row: Uint8Array,
  filter: number,
  pixels: Uint8Array,
  start: number,
  bytes: number,
  channels: number,
  top: boolean,
): number {
  let sum = 0;
  for (let i = 0; i < bytes; i++) {
    const a = i >= channels ? pixels[start + i - channels] : 0;
    const b = top ? 0 : pixels[start + i - bytes];
    let guess = filter === 1 ? a : b;
    if (filter === 4) {
      // Paeth: whichever of left, above and corner is nearest to left + above − corner.
      const c = top || i < channels ? 0 : pixels[start + i - bytes - channels];
      const pa = b > c ? b - c : c - b;
      const pb = a > c ? a - c : c - a;
      const both = a + b - 2 * c;
      const pc = both < 0 ? -both : both;
      guess = pa <= pb && pa <= pc ? a : pb <= pc ? b : c;
    }
    const value = (pixels[start + i] - guess) & 255;
    row[i] = value;
    sum += value < 128 ? value : 256 - value;
  }
  return sum;
}

function chunk(type: string, data: Uint8Array): Uint8Array {
  const bytes = new Uint8Array(12 + data.length);
  const view = new DataView(bytes.buffer);
  view.setUint32(0, data.length);
  for (let i = 0; i < 4; i++) bytes[4 + i] = type.charCodeAt(i);
  bytes.set(data, 8);
  view.setUint32(8 + data.length, crc32(bytes.subarray(4, 8 + data.length)));
  return bytes;
}

/** Cyclic redundancy check of PNG (annex D of the standard), polynomial edb88320 reflected. */
const CRC = Uint32Array.from({ length: 256 }, (_, n) => {
  let c = n;
  for (let k = 0; k < 8; k++) c = c & 1 ? 0xedb88320 ^ (c >>> 1) : c >>> 1;
  return c;
});

function crc32(bytes: Uint8Array): number {
  let c = 0xffffffff;
  for (const byte of bytes) c = CRC[(c ^ byte) & 255] ^ (c >>> 8);
  return (c ^ 0xffffffff) >>> 0;
}
