// What does a field of a run look like?

import { meshOfRun } from './mesh.ts';
import { wallsOfMesh } from './walls.ts';
import { colourAt, cyclicMap, divergingMap, hexOf, sequentialMap, type Theme } from '../results/colours.ts';
import { fieldOf, type RunView } from '../results/run-view.ts';
import { bodiesOfRun, hatchLines, visibleOutlines } from './bodies.ts';
import { boxRing, circleRing, fill, stroke, text, type Drawing, type Item } from './drawing.ts';
import { paintField, type FieldView } from './field-picture.ts';
import { heading, LABEL_SIZE, MARGIN, scaleBar, settle, viewOf, type FigureOptions, type Settled } from './frame.ts';
import { labelText, numberText, unitText, withErrorText } from './scales.ts';

export interface FieldFigureOptions extends FigureOptions {
  /** 'wave' if absent. */
  readonly view?: FieldView;
  /** ωt in radians, for the wave; if absent, the instant at which it is strongest. */
  readonly phase?: number;
}

/**
 * The field inside the rim with the outlines of the bodies, a scale bar and a colour bar. Colours reach their ends at the
 * largest modulus inside the bodies (anywhere, if there are none), which the bar calls 1.
 */
export function fieldFigure(run: RunView, fieldId: string, options: FieldFigureOptions = {}): Drawing {
  const settled = settle(options);
  const { palette, theme, width } = settled;
  const { record } = run;
  const field = fieldOf(record, fieldId);
  const show = options.view ?? 'wave';
  const values = run.array(field.display);
  const phase = options.phase ?? strongestPhase(values);
  const head = heading(options.title ?? record.sentence, belowText(run, fieldId), settled);

  const { center, rimRadius } = record.mesh;
  const side = width - 2 * MARGIN - BAR_ROOM;
  const top = head.bottom;
  const reach = rimRadius * 1.01;
  const box = [center[0] - reach, center[1] - reach, center[0] + reach, center[1] + reach] as const;
  const view = viewOf(box, MARGIN, top, side, side);
  const bodies = bodiesOfRun(run);
  const limit = largestModulus(run, values);
  const points = run.array(record.display.points);
  const triangles = run.array(record.display.triangles);

  const items: Item[] = [
    ...head.items,
    {
      kind: 'picture',
      x: MARGIN,
      y: top,
      width: side,
      height: side,
      paint(across, down) {
        const grow = across / side;
        const inPixels = Float64Array.from(points, (v, i) =>
          i % 2 === 0 ? (view.toX(v) - MARGIN) * grow : (view.toY(v) - top) * grow,
        );
        const rim = {
          x: (view.toX(center[0]) - MARGIN) * grow,
          y: (view.toY(center[1]) - top) * grow,
          radius: rimRadius * view.scale * grow,
        };
        return paintField({ points: inPixels, triangles, values, limit, rim }, show, phase, theme, across, down);
      },
    },
    ...(record.display.enclosed
      ? []
      : [
          stroke([circleRing(view.toX(center[0]), view.toY(center[1]), rimRadius * view.scale)], palette.faint, 1, {
            closed: true,
          }),
        ]),
    ...(record.mesh.arrays.edgeFree === undefined
      ? []
      : [
          stroke(
            wallsOfMesh(meshOfRun(run), view.scale).map((l) => view.line(l)),
            palette.ink,
            1.6,
          ),
        ]),
    stroke(
      hatchLines(bodies, 7 / view.scale).map((l) => view.line(l)),
      palette.ink,
      0.6,
      { opacity: 0.28 },
    ),
    stroke(
      visibleOutlines(bodies).flatMap((lines) => lines.map((l) => view.line(l))),
      palette.ink,
      1.3,
    ),
    ...scaleBar(view, record.device.lengthUnit, MARGIN, top + side - 2, side / 5, palette),
    ...colourBar(
      show,
      record.device.polarization,
      width - MARGIN - BAR_ROOM + 34,
      top + side * 0.18,
      side * 0.64,
      settled,
    ),
  ];
  const description = `${record.sentence} ${field.label}: ${VIEW_NAMES[show]}.`;
  return { width, height: Math.ceil(top + side + MARGIN * 0.7), ground: palette.ground, description, items };
}

const VIEW_NAMES: Readonly<Record<FieldView, string>> = {
  wave: 'the wave at one instant',
  intensity: 'the intensity',
  phase: 'the phase',
};

/** Room to the right of the picture for the bar and its numbers. */
const BAR_ROOM = 100;

function belowText(run: RunView, fieldId: string): string {
  const { record } = run;
  const field = fieldOf(record, fieldId);
  const unit = unitText(record.device.lengthUnit);
  const mark = record.marks.find((m) => m.field === fieldId);
  const crossing = record.marks.find((m) => m.crossing?.field === fieldId)?.crossing;
  const error = crossing?.kError ?? mark?.kError ?? 0;
  const k = `k = ${withErrorText(field.k, error)}${unit === '' ? '' : ` /${unit}`}`;
  const level = field.level === null ? [] : [`D = ${numberText(field.level, 5)}`];
  const q = mark && field.k[1] !== 0 ? [`Q = ${numberText(mark.q, 4)}`] : [];
  return [record.device.title, field.label, k, ...q, ...level].filter((s) => s !== '').join('  ·  ');
}

/**
 * ωt at which ∫ (Re u e^{−iωt})² is largest: half the argument of Σ u². Points are not weighted by area; the picture needs
 * no more.
 */
function strongestPhase(values: ArrayLike<number>): number {
  let [re, im] = [0, 0];
  for (let i = 0; i < values.length; i += 2) {
    re += values[i] * values[i] - values[i + 1] * values[i + 1];
    im += 2 * values[i] * values[i + 1];
  }
  return Math.atan2(im, re) / 2;
}

function largestModulus(run: RunView, values: ArrayLike<number>): number {
  const triangles = run.array(run.record.display.triangles);
  const regions = run.array(run.record.display.regions);
  let [inBodies, anywhere] = [0, 0];
  for (let t = 0; t < regions.length; t++) {
    for (let c = 0; c < 3; c++) {
      const p = triangles[3 * t + c];
      const size = Math.hypot(values[2 * p], values[2 * p + 1]);
      if (size > anywhere) anywhere = size;
      if (regions[t] >= 0 && size > inBodies) inBodies = size;
    }
  }
  return inBodies || anywhere || 1;
}

function colourBar(show: FieldView, u: string, x: number, y: number, height: number, settled: Settled): Item[] {
  const { palette, theme } = settled;
  const wide = 12;
  const map = mapOf(show, theme);
  const slices = 128;
  const items: Item[] = [];
  for (let i = 0; i < slices; i++) {
    const colour = hexOf(colourAt(map, 1 - (i + 0.5) / slices));
    // Each slice reaches a little under the next one, so that no gap shows between them.
    const tall = height / slices + (i + 1 < slices ? 0.6 : 0);
    items.push(fill([boxRing(x, y + (i * height) / slices, wide, tall)], colour));
  }
  items.push(stroke([boxRing(x, y, wide, height)], palette.muted, 0.8, { closed: true }));
  for (const [share, label] of BAR_LABELS[show]) {
    const at = y + height * (1 - share);
    items.push(stroke([[x + wide, at, x + wide + 4, at]], palette.muted, 0.8));
    items.push(text(label, x + wide + 8, at + LABEL_SIZE * 0.35, LABEL_SIZE, palette.ink));
  }
  const name = show === 'wave' ? `Re ${u}` : show === 'intensity' ? `|${u}|²` : labelText(`arg ${u}`, '°');
  items.push(text(name, x, y - 12, LABEL_SIZE, palette.ink));
  return items;
}

const mapOf = (show: FieldView, theme: Theme): Uint8Array =>
  show === 'wave' ? divergingMap(theme) : show === 'intensity' ? sequentialMap(theme) : cyclicMap(theme);

const BAR_LABELS: Readonly<Record<FieldView, readonly (readonly [number, string])[]>> = {
  wave: [
    [1, '1'],
    [0.75, '0.5'],
    [0.5, '0'],
    [0.25, '−0.5'],
    [0, '−1'],
  ],
  intensity: [
    [1, '1'],
    [0.5, '0.5'],
    [0, '0'],
  ],
  phase: [
    [1, '360'],
    [0.75, '270'],
    [0.5, '180'],
    [0.25, '90'],
    [0, '0'],
  ],
};
