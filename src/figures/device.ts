// What does a device look like on paper?

import type { Device } from '../device/model.ts';
import { wallsOfDevice } from './walls.ts';
import { bodiesOfDevice, boxAround, hatchLines, holds, visibleOutlines, type DrawnBody } from './bodies.ts';
import { fill, stroke, text, type Drawing, type Item } from './drawing.ts';
import { heading, LABEL_SIZE, MARGIN, scaleBar, settle, viewOf, type FigureOptions, type View } from './frame.ts';
import { letterWidth } from './lettering.ts';
import { bytesOf, hexOf, type Palette } from '../results/colours.ts';
import { numberText, unitText } from './scales.ts';

/** Names of more groups than this would hide the picture. */
const MOST_NAMES = 12;

/**
 * The cross-section: bodies shaded by their index, the active ones hatched, each group named once; a scale bar and, to
 * compare, the band's middle wavelength in vacuum.
 *
 * @throws when the device has neither a body nor an enclosure
 */
export function deviceFigure(device: Device, options: FigureOptions = {}): Drawing {
  const settled = settle(options);
  const { palette, width } = settled;
  const bodies = bodiesOfDevice(device);
  const walls = wallsOfDevice(device);
  const box = boxAround(walls.spaces.length > 0 ? walls.spaces : bodies.flatMap((b) => b.outlines));
  if (!box) throw new Error('nothing to draw: expected at least one body or enclosure');
  const head = heading(options.title ?? device.title, belowText(device), settled);
  const [w, h] = [Math.max(box[2] - box[0], 1e-12), Math.max(box[3] - box[1], 1e-12)];
  const pad = 0.06 * Math.max(w, h);
  const inner = width - 2 * MARGIN;
  // Long flat devices get a low picture, tall ones a square.
  const tall = Math.min(inner, Math.max(inner * 0.3, (inner * (h + 2 * pad)) / (w + 2 * pad)));
  const top = head.bottom;
  const view = viewOf([box[0] - pad, box[1] - pad, box[2] + pad, box[3] + pad], MARGIN, top, inner, tall);
  const outlines = visibleOutlines(bodies);
  const items: Item[] = [
    ...head.items,
    ...bodies.map((b) =>
      fill(
        b.outlines.map((o) => view.line(o)),
        shadeOf(b, bodies, palette),
      ),
    ),
    stroke(
      hatchLines(bodies, 7 / view.scale).map((l) => view.line(l)),
      palette.accent,
      0.8,
      { opacity: 0.55 },
    ),
    stroke(
      outlines.flatMap((lines) => lines.map((l) => view.line(l))),
      palette.ink,
      1.3,
    ),
    ...[...walls.spaces, ...walls.sheets].map((l) => stroke([view.line(l)], palette.ink, 2)),
    ...names(bodies, view, palette),
  ];
  const foot = top + tall + 34;
  items.push(...scaleBar(view, device.lengthUnit, MARGIN, foot, inner / 4, palette));
  const wavelength = (4 * Math.PI) / (device.band.kMin + device.band.kMax);
  const long = wavelength * view.scale;
  if (long < inner * 0.6) {
    const x = width - MARGIN - long;
    items.push(stroke([waveLine(x, foot - 6, long)], palette.accent, 1.4));
    const label = `λ = ${numberText(wavelength, 4)} ${unitText(device.lengthUnit)}`.trim();
    const anchor = letterWidth(label, LABEL_SIZE) > long ? 'end' : 'middle';
    items.push(
      text(label, anchor === 'end' ? width - MARGIN : x + long / 2, foot - 18, LABEL_SIZE, palette.ink, { anchor }),
    );
  }
  const description = `Cross-section of ${device.title}: ${belowText(device)}.`;
  return { width, height: Math.ceil(foot + MARGIN * 0.6), ground: palette.ground, description, items };
}

function belowText(device: Device): string {
  const { bodies, band } = device;
  const active = new Set(bodies.filter((b) => b.pumpWeight !== 0).map((b) => b.group)).size;
  return [
    device.polarization,
    `${String(bodies.length)} ${bodies.length === 1 ? 'body' : 'bodies'} in ${device.background.material}`,
    active > 0 ? 'hatched: active' : '',
    `${band.quantity} ${numberText(band.limits[0], 6)} to ${numberText(band.limits[1], 6)} ${unitText(band.unit)}`.trim(),
  ]
    .filter((s) => s !== '')
    .join('  ·  ');
}

/** Ground for ε = 1, shading towards the hairline colour for the densest body; losses and negative ε darken alike. */
function shadeOf(body: DrawnBody, bodies: readonly DrawnBody[], palette: Palette): string {
  const weight = ([re, im]: readonly [number, number]): number => Math.abs(Math.sqrt(Math.hypot(re, im)) - 1);
  const most = Math.max(...bodies.map((b) => weight(b.permittivity)), 1e-9);
  const share = weight(body.permittivity) / most;
  const [from, to] = [bytesOf(palette.ground), bytesOf(palette.faint)];
  return hexOf(from.map((v, i) => Math.round(v + 0.75 * share * (to[i] - v))));
}

/** One name a group, at the body of it that has the most room; none when there are too many groups. */
function names(bodies: readonly DrawnBody[], view: View, palette: Palette): Item[] {
  const groups = new Map<string, DrawnBody>();
  const areaOf = (b: DrawnBody): number => {
    const box = boxAround(b.outlines);
    return box ? (box[2] - box[0]) * (box[3] - box[1]) : 0;
  };
  for (const body of bodies) {
    const rival = groups.get(body.group);
    if (!rival || areaOf(body) > areaOf(rival)) groups.set(body.group, body);
  }
  if (groups.size > MOST_NAMES) return [];
  return [...groups].flatMap(([group, body]) => {
    const label = `${group} (${body.material})`;
    const spot = roomFor(body, bodies.slice(bodies.indexOf(body) + 1), letterWidth(label, LABEL_SIZE), view);
    return spot
      ? [text(label, spot[0], spot[1], LABEL_SIZE, palette.ink, { anchor: 'middle', halo: palette.ground })]
      : [];
  });
}

/**
 * Middle of the baseline for a label of the given width: in the body, as low as it fits on what is visible of it; if it
 * fits nowhere, above the body.
 */
function roomFor(body: DrawnBody, over: readonly DrawnBody[], width: number, view: View): [number, number] | null {
  const box = boxAround(body.outlines);
  if (!box) return null;
  const [half, high] = [(width / 2 + 6) / view.scale, (LABEL_SIZE + 4) / view.scale];
  const x = (box[0] + box[2]) / 2;
  const free = (px: number, py: number): boolean =>
    holds(body.outlines, px, py) && !over.some((o) => holds(o.outlines, px, py));
  const rows = 40;
  for (let i = 1; i < rows; i++) {
    const y = box[1] + (i / rows) * (box[3] - box[1]);
    const grid = [-1, -0.5, 0, 0.5, 1].flatMap((u) => [-0.6, 0.5, 1.4].map((v) => [x + u * half, y + v * high]));
    if (grid.every(([px, py]) => free(px, py))) return [view.toX(x), view.toY(y)];
  }
  return [view.toX(x), view.toY(box[3]) - 6];
}

/** One period of a sine, starting at (x, y). */
function waveLine(x: number, y: number, length: number): Float64Array {
  const n = 48;
  const line = new Float64Array(2 * (n + 1));
  for (let i = 0; i <= n; i++) {
    line[2 * i] = x + (length * i) / n;
    line[2 * i + 1] = y - 6 * Math.sin((2 * Math.PI * i) / n);
  }
  return line;
}
