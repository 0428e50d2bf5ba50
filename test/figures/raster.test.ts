// Does the painted share of the pixels equal the area of the shape?

import { describe, expect, test } from 'vitest';
import { circleRing } from '../../src/figures/drawing.ts';
import { blankCanvas, paintLines, paintPixels, paintRings, type Canvas } from '../../src/figures/raster.ts';

/** Painted area in pixels, black on white. */
function inkOf({ rgb }: Canvas): number {
  let sum = 0;
  for (let i = 0; i < rgb.length; i += 3) sum += 255 - rgb[i];
  return sum / 255;
}

/** Of a closed polyline. */
function areaOf(ring: ArrayLike<number>): number {
  let sum = 0;
  for (let i = 0; i < ring.length; i += 2) {
    const j = (i + 2) % ring.length;
    sum += ring[i] * ring[j + 1] - ring[i + 1] * ring[j];
  }
  return Math.abs(sum) / 2;
}

function filled(rings: readonly ArrayLike<number>[], size = 64): Canvas {
  const canvas = blankCanvas(size, size, '#ffffff');
  paintRings(canvas, rings, '#000000', 1);
  return canvas;
}

describe('fills', () => {
  test.each([0.3, 1, 5, 20.25])('a circle of radius %f covers its area, wherever it lies', (r) => {
    for (const [x, y] of [
      [32, 32],
      [31.7, 32.4],
      [30.13, 33.91],
    ]) {
      const ring = circleRing(x, y, r);
      // Sixteen samples a pixel along the edge: errors of a sixteenth at random over 2πr pixels.
      expect(Math.abs(inkOf(filled([ring])) - areaOf(ring))).toBeLessThan(0.1 + 0.0625 * Math.sqrt(2 * Math.PI * r));
      // Chords stay within 0.05 of the circle; on the mean they lie two thirds of that inside.
      expect(Math.abs(areaOf(ring) - Math.PI * r * r)).toBeLessThan(0.05 * 2 * Math.PI * r);
    }
  });

  test('a ring within a ring is a hole', () => {
    const canvas = filled([circleRing(32, 32, 20), circleRing(32, 32, 10)]);
    expect(inkOf(canvas)).toBeCloseTo(Math.PI * 300, -1);
    expect(canvas.rgb[3 * (32 * 64 + 32)]).toBe(255);
  });

  test('edges on pixel borders are sharp; edges between them are shaded in proportion', () => {
    const sharp = filled([[10, 10, 20, 10, 20, 20, 10, 20]]);
    expect(new Set(sharp.rgb)).toEqual(new Set([0, 255]));
    expect(inkOf(sharp)).toBe(100);
    for (const share of [0.25, 0.5, 0.75]) {
      const soft = filled([[10 + share, 10, 20, 10, 20, 20, 10 + share, 20]]);
      expect(soft.rgb[3 * (15 * 64 + 10)]).toBe(Math.round(255 * share));
      const low = filled([[10, 10 + share, 20, 10 + share, 20, 20, 10, 20]]);
      expect(low.rgb[3 * (10 * 64 + 15)]).toBe(Math.round(255 * share));
    }
  });

  test('two halves make the whole: no seam shows along a shared edge', () => {
    const canvas = blankCanvas(64, 64, '#ffffff');
    paintRings(
      canvas,
      [
        [3.3, 2.1, 60.2, 7.7, 20.9, 58.4],
        [60.2, 7.7, 55.5, 61.3, 20.9, 58.4],
      ],
      '#000000',
      1,
    );
    for (let t = 0.05; t < 1; t += 0.05) {
      const [x, y] = [60.2 + t * (20.9 - 60.2), 7.7 + t * (58.4 - 7.7)];
      expect(canvas.rgb[3 * (Math.floor(y) * 64 + Math.floor(x))]).toBe(0);
    }
  });

  test('what lies outside the picture does no harm, and nothing fills nothing', () => {
    expect(inkOf(filled([[-500, -500, 500, -500, 500, 500, -500, 500]]))).toBe(64 * 64);
    expect(inkOf(filled([[70, 70, 90, 70, 90, 90]]))).toBe(0);
    expect(inkOf(filled([[1, 1, 5, 5]]))).toBe(0);
    expect(inkOf(filled([[1, 1]]))).toBe(0);
    expect(inkOf(filled([[]]))).toBe(0);
    expect(inkOf(filled([]))).toBe(0);
    expect(inkOf(filled([[NaN, NaN, NaN, 4, 9, NaN]]))).toBe(0);
  });
});

describe('strokes', () => {
  const drawn = (lines: readonly number[][], width: number, closed = false): Canvas => {
    const canvas = blankCanvas(64, 64, '#ffffff');
    paintLines(canvas, lines, closed, width, '#000000', 1);
    return canvas;
  };

  test.each([0.4, 1, 2.5, 6])('a line of width %f covers length × width and a round end each side', (w) => {
    // A thin pen is painted as one pixel, paler: so are its ends.
    const pen = Math.max(1, w);
    const expected = (Math.hypot(40, 23) * pen + (Math.PI * pen * pen) / 4) * Math.min(1, w);
    expect(inkOf(drawn([[10, 20, 50, 43]], w)) / expected).toBeCloseTo(1, 1);
  });

  test('lines that cross or repeat in one stroke are not darker there', () => {
    const canvas = blankCanvas(64, 64, '#ffffff');
    paintLines(
      canvas,
      [
        [10, 32, 54, 32],
        [32, 10, 32, 54],
        [10, 32, 54, 32],
      ],
      false,
      4,
      '#000000',
      0.5,
    );
    expect(new Set([...canvas.rgb].filter((v) => v < 128)).size).toBe(0);
  });

  test('a closed line joins its ends; a single point is a dot', () => {
    const box = [10, 10, 50, 10, 50, 50, 10, 50];
    expect(inkOf(drawn([box], 2, true)) - inkOf(drawn([box], 2, false))).toBeCloseTo(2 * 40, -1);
    expect(inkOf(drawn([[32, 32]], 8))).toBeCloseTo(Math.PI * 16, -1);
  });
});

test('pixels are blended by alpha and clipped at the border', () => {
  const canvas = blankCanvas(4, 4, '#ffffff');
  paintPixels(
    canvas,
    Uint8Array.from({ length: 4 * 9 }, (_, i) => [0, 0, 0, 128][i % 4]),
    -1,
    -1,
    3,
    3,
  );
  expect(canvas.rgb[0]).toBe(127);
  expect(canvas.rgb[3 * 2]).toBe(255);
});
