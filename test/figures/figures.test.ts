// Do the figures show what the run holds, as SVG and as PNG?

import { createHash } from 'node:crypto';
import { mkdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { deviceFigure } from '../../src/figures/device.ts';
import type { Drawing } from '../../src/figures/drawing.ts';
import { fieldFigure } from '../../src/figures/field.ts';
import { paintField } from '../../src/figures/field-picture.ts';
import { wrapped } from '../../src/figures/frame.ts';
import { meshFigure } from '../../src/figures/mesh.ts';
import { planeFigure } from '../../src/figures/plane.ts';
import { pngBytes } from '../../src/figures/png.ts';
import { svgText } from '../../src/figures/svg.ts';
import type { Device } from '../../src/device/model.ts';
import { disk, polygon } from '../../src/geometry/shapes.ts';
import { LAYER, type Mesh } from '../../src/mesh/mesh.ts';
import { bytesOf, colourAt, divergingMap, PALETTES } from '../../src/results/colours.ts';
import { exampleRun } from '../results/example-run.ts';

const run = exampleRun();

const device: Device = {
  title: 'Disk & <corner>',
  lengthUnit: 'um',
  metres: 1e-6,
  polarization: 'Hz',
  band: { quantity: 'wavelength', limits: [0.9, 1.1], unit: 'um', kMin: 5.7, kMax: 7 },
  knobs: [],
  background: { material: 'glass', permittivity: 2.1, permeability: 1 },
  bodies: [
    {
      name: 'disk',
      group: 'disk',
      material: 'core',
      permittivity: { re: 4, im: 0 },
      permeability: { re: 1, im: 0 },
      shape: disk([0, 0], 1),
      pumpWeight: 1,
    },
    {
      name: 'wedge',
      group: 'wedge',
      material: 'glass',
      permittivity: { re: 2, im: 0 },
      permeability: { re: 1, im: 0 },
      shape: polygon([
        [1.2, 0],
        [2, -0.5],
        [2, 0.5],
      ]),
      pumpWeight: 0,
    },
  ],
};

/** Two triangles, one side bent into a quarter circle (degree 4 at Gauss–Lobatto points), one of the layer. */
function bentMesh(): Mesh {
  const lobatto = [-1, -Math.sqrt(3 / 7), 0, Math.sqrt(3 / 7), 1];
  const curve = lobatto.flatMap((s) => [Math.cos(((s + 1) * Math.PI) / 4), Math.sin(((s + 1) * Math.PI) / 4)]);
  return {
    vertices: Float64Array.of(0, 0, 1, 0, 0, 1, 1, 1),
    triangles: Int32Array.of(0, 1, 2, 1, 3, 2),
    regions: Int32Array.of(0, LAYER),
    edges: Int32Array.of(0, 1, 1, 2, 0, 2, 1, 3, 2, 3),
    triangleEdges: Int32Array.of(0, 1, 2, 3, 4, 1),
    edgeTriangles: Int32Array.of(0, -1, 0, 1, 0, -1, 1, -1, 1, -1),
    edgeCurve: Int32Array.of(-1, 0, -1, -1, -1),
    curveOrder: 4,
    curves: Float64Array.from(curve),
    center: [0.5, 0.5],
    rimRadius: 0.8,
    endRadius: 1,
  };
}

const figures: [string, Drawing][] = [
  ['field-wave', fieldFigure(run, 'twin', { width: 420 })],
  ['field-intensity-dark', fieldFigure(run, 'mode', { width: 420, view: 'intensity', theme: 'dark' })],
  ['field-phase', fieldFigure(run, 'mode', { width: 420, view: 'phase' })],
  ['plane', planeFigure(run, { width: 480, chosen: 'pole-1' })],
  ['device', deviceFigure(device, { width: 420 })],
  ['mesh', meshFigure(bentMesh(), { width: 360, active: [true], order: 4 })],
];

/** Tags open and close in order, attributes are quoted, no bare ampersand or bracket is left in the text. */
function expectWellFormed(xml: string): void {
  const open: string[] = [];
  const rest = xml.replace(
    /<(\/?)([a-z?]+)((?:\s+[\w:-]+="[^"<]*")*)\s*([/?]?)>/g,
    (_, close: string, tag: string, _a, end: string) => {
      if (close) expect(open.pop()).toBe(tag);
      else if (!end) open.push(tag);
      return '';
    },
  );
  expect(open).toEqual([]);
  expect(rest).not.toMatch(/[<>]|&(?!amp;|lt;|gt;|quot;)/);
}

describe.each(figures)('%s', (name, drawing) => {
  test('as SVG it is well formed, has a description and only finite numbers', () => {
    const svg = svgText(drawing);
    expectWellFormed(svg);
    expect(svg).toContain('<title>');
    expect(svg.replace(/base64,[^"]*/g, '')).not.toMatch(/NaN|Infinity|undefined/);
  });

  test('as PNG it is not blank, and the same each time', () => {
    const bytes = pngBytes(drawing, 1);
    expect(bytes.length).toBeGreaterThan(3000);
    const digest = (b: Uint8Array): string => createHash('sha256').update(b).digest('hex');
    expect(digest(pngBytes(drawing, 1))).toBe(digest(bytes));
    // Kept for viewing.
    if (process.env.KEEP_PICTURES) {
      mkdirSync(process.env.KEEP_PICTURES, { recursive: true });
      writeFileSync(join(process.env.KEEP_PICTURES, `${name}.png`), pngBytes(drawing, 2));
    }
  });
});

const textsOf = (drawing: Drawing): string[] => drawing.items.flatMap((i) => (i.kind === 'text' ? [i.text] : []));

test('a field figure carries the sentence, k with its error, a scale bar and a colour bar', () => {
  const texts = textsOf(fieldFigure(run, 'twin'));
  expect(texts.join(' ')).toContain(run.record.sentence);
  expect(texts.join(' ')).toMatch(/k = 4\.2100000 ± 10⁻⁶ \/µm/);
  expect(texts).toContain('0.5 µm');
  expect(texts).toEqual(expect.arrayContaining(['1', '−1', 'Re Ez']));
});

test('the complex plane marks poles, zeros, paths and the crossing', () => {
  const drawing = planeFigure(run);
  expect(textsOf(drawing)).toEqual(expect.arrayContaining(['m = 4', 'D = 0.04', 'Re k (1/µm)', 'Im k (1/µm)', '0']));
  expect(drawing.description).toContain('2 poles (×), 1 zero (○)');
  const bare = planeFigure({ ...run, record: { ...run.record, marks: [] } });
  expect(bare.description).toContain('no poles or zeros');
  expectWellFormed(svgText(bare));
});

test('marks at very different depths get an axis of powers of ten', () => {
  const [pole] = run.record.marks;
  const marks = [0.1, 1e-3, 1e-7].map((d, i) => ({
    ...pole,
    id: `p${String(i)}`,
    k: [4 + 0.1 * i, -d] as const,
    path: null,
  }));
  const texts = textsOf(planeFigure({ ...run, record: { ...run.record, marks } }));
  expect(texts).toEqual(expect.arrayContaining(['−0.1', '−10⁻⁵']));
});

test('a device without bodies, and a figure too narrow, are refused', () => {
  expect(() => deviceFigure({ ...device, bodies: [] })).toThrow(/at least one body/);
  expect(() => deviceFigure(device, { width: 10 })).toThrow(/320 to 8000/);
});

describe('field pixels', () => {
  // u = x/10 + i y/10 in pixels around the middle, on four triangles: linear, so that interpolation is exact.
  const points = [0, 0, 40, 0, 40, 40, 0, 40, 20, 20];
  const field = {
    points,
    triangles: [0, 1, 4, 1, 2, 4, 2, 3, 4, 3, 0, 4],
    values: points.map((v) => (v - 20) / 10),
    limit: 2,
    rim: { x: 20, y: 20, radius: 18 },
  };
  const at = (rgba: Uint8Array, x: number, y: number): number[] => [
    ...rgba.subarray(4 * (40 * y + x), 4 * (40 * y + x) + 4),
  ];

  test('the wave is interpolated exactly and moves with time', () => {
    const map = divergingMap('light');
    for (const [phase, which] of [
      [0, 0],
      [Math.PI / 2, 1],
    ]) {
      const rgba = paintField(field, 'wave', phase, 'light', 40, 40);
      for (const [x, y] of [
        [20, 12],
        [5, 22],
        [31, 28],
      ]) {
        const value = ([x, y][which] + 0.5 - 20) / 10;
        const [r, g, b] = colourAt(map, 0.5 + value / 4);
        const [pr, pg, pb, pa] = at(rgba, x, y);
        expect(Math.max(Math.abs(pr - r), Math.abs(pg - g), Math.abs(pb - b))).toBeLessThanOrEqual(1);
        expect(pa).toBe(255);
      }
    }
  });

  test('outside the rim is transparent, the rim itself is covered in proportion', () => {
    const rgba = paintField(field, 'intensity', 0, 'light', 40, 40);
    expect(at(rgba, 1, 1)[3]).toBe(0);
    const alphas = new Set(Array.from({ length: 1600 }, (_, i) => rgba[4 * i + 3]));
    expect(alphas.size).toBeGreaterThan(10);
    const covered = rgba.reduce((sum, v, i) => (i % 4 === 3 ? sum + v / 255 : sum), 0);
    expect(Math.abs(covered - Math.PI * 18 * 18)).toBeLessThan(3);
  });

  test('a field of zero is the ground of the page', () => {
    const still = { ...field, values: field.values.map(() => 0) };
    for (const view of ['wave', 'intensity', 'phase'] as const) {
      expect(at(paintField(still, view, 0, 'dark', 40, 40), 20, 20).slice(0, 3)).toEqual(bytesOf(PALETTES.dark.ground));
    }
  });

  test('triangles without area are passed over', () => {
    const flat = { ...field, triangles: [0, 0, 1, ...field.triangles] };
    expect(paintField(flat, 'wave', 0, 'light', 40, 40)).toEqual(paintField(field, 'wave', 0, 'light', 40, 40));
  });
});

test('sentences wrap at blanks and keep every word', () => {
  const sentence = 'Lases first at 1.5231 um with 38.2 /cm  ·  a-very-long-word-that-fits-nowhere end';
  const lines = wrapped(sentence, 20, 200);
  expect(lines.length).toBeGreaterThan(3);
  expect(lines.join(' ').replaceAll(' ·', '').replaceAll('· ', '')).toBe(sentence.replaceAll('  · ', ''));
});
