// How does a drawing become an SVG file?

import type { Drawing, Item } from './drawing.ts';
import { encodePng } from './png.ts';

/** System faces with tabular figures; the drawing needs no font of its own. */
const FACES = "'Avenir Next', 'Segoe UI', 'Noto Sans', 'DejaVu Sans', sans-serif";

/** Pixels a unit for embedded pictures. */
const PICTURE_DENSITY = 2;

/** The drawing as a standalone SVG 1.1 document: vectors, real text, pictures embedded as PNG. */
export function svgText(drawing: Drawing): string {
  const { width, height } = drawing;
  return [
    '<?xml version="1.0" encoding="UTF-8"?>',
    `<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" width="${short(width)}" ` +
      `height="${short(height)}" viewBox="0 0 ${short(width)} ${short(height)}" role="img" font-family="${FACES}" ` +
      'style="font-variant-numeric: tabular-nums">',
    `<title>${escaped(drawing.description)}</title>`,
    `<rect width="100%" height="100%" fill="${drawing.ground}"/>`,
    ...drawing.items.map(element),
    '</svg>',
    '',
  ].join('\n');
}

function element(item: Item): string {
  if (item.kind === 'fill') {
    const d = item.rings.map((ring) => `${path(ring)}Z`).join('');
    return `<path d="${d}" fill="${item.colour}" fill-rule="evenodd"${opacity(item.opacity)}/>`;
  }
  if (item.kind === 'stroke') {
    const d = item.lines.map((line) => path(line) + (item.closed ? 'Z' : '')).join('');
    return (
      `<path d="${d}" fill="none" stroke="${item.colour}" stroke-width="${short(item.width)}" ` +
      `stroke-linejoin="round" stroke-linecap="round"${opacity(item.opacity)}/>`
    );
  }
  if (item.kind === 'text') {
    const halo = item.halo
      ? ` stroke="${item.halo}" stroke-width="3.2" paint-order="stroke" stroke-linejoin="round"`
      : '';
    const weight = item.bold ? ' font-weight="600"' : '';
    const anchor = item.anchor === 'start' ? '' : ` text-anchor="${item.anchor}"`;
    return (
      `<text x="${short(item.x)}" y="${short(item.y)}" font-size="${short(item.size)}" fill="${item.colour}"` +
      `${anchor}${weight}${halo}>${escaped(item.text)}</text>`
    );
  }
  const [across, down] = [Math.round(item.width * PICTURE_DENSITY), Math.round(item.height * PICTURE_DENSITY)];
  const bytes = encodePng(across, down, 4, item.paint(across, down));
  return (
    `<image x="${short(item.x)}" y="${short(item.y)}" width="${short(item.width)}" height="${short(item.height)}" ` +
    `xlink:href="data:image/png;base64,${Buffer.from(bytes).toString('base64')}"/>`
  );
}

function path(line: ArrayLike<number>): string {
  let d = '';
  for (let i = 0; i < line.length; i += 2) d += `${i === 0 ? 'M' : 'L'}${short(line[i])} ${short(line[i + 1])}`;
  // A single point still leaves a dot under a round pen.
  return line.length === 2 ? `${d}h0` : d;
}

const opacity = (value: number): string => (value === 1 ? '' : ` opacity="${short(value)}"`);

/** Two digits after the point: finer than any screen shows. */
const short = (value: number): string => String(Math.round(value * 100) / 100);

/** Character data and attribute values; control characters that XML 1.0 forbids are dropped. */
const escaped = (text: string): string =>
  text
    // eslint-disable-next-line no-control-regex -- these are the ones to drop
    .replace(/[\x00-\x08\x0b\x0c\x0e-\x1f\ufffe\uffff]/g, '')
    .replace(/&/g, '&amp;')
    .replace(/</g, '&lt;')
    .replace(/>/g, '&gt;')
    .replace(/"/g, '&quot;');
