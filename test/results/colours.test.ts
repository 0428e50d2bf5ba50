// Are the colour maps even, safe for colour-blind eyes, and do they start from the page's ground?

import { describe, expect, test } from 'vitest';
import {
  bytesOf,
  colourAt,
  cyclicMap,
  divergingMap,
  hexOf,
  MAP_ENTRIES,
  oklabOf,
  PALETTES,
  sequentialMap,
  type ColourMap,
  type Theme,
} from '../../src/results/colours.ts';

const themes: Theme[] = ['light', 'dark'];
const entry = (map: ColourMap, i: number): number[] => [...map.subarray(3 * i, 3 * i + 3)];
const labs = (map: ColourMap): (readonly number[])[] =>
  Array.from({ length: MAP_ENTRIES }, (_, i) => oklabOf(hexOf(entry(map, i))));
const distance = (p: readonly number[], q: readonly number[]): number =>
  Math.hypot(p[0] - q[0], p[1] - q[1], p[2] - q[2]);

/** Largest over mean OKLab length of 32 equal pieces of the map. */
function unevenness(map: ColourMap): number {
  const lab = labs(map);
  const steps = Array.from({ length: 32 }, (_, i) => distance(lab[8 * i], lab[8 * i + 8]));
  return Math.max(...steps) / (steps.reduce((a, b) => a + b) / steps.length);
}

/** Contrast ratio of WCAG 2 (W3C recommendation). */
function contrast(a: string, b: string): number {
  const light = (colour: string): number => {
    const [r, g, bl] = bytesOf(colour).map((v) =>
      v / 255 <= 0.04045 ? v / 255 / 12.92 : ((v / 255 + 0.055) / 1.055) ** 2.4,
    );
    return 0.2126 * r + 0.7152 * g + 0.0722 * bl + 0.05;
  };
  const [high, low] = [light(a), light(b)].sort((x, y) => y - x);
  return high / low;
}

test('OKLab: white is (1, 0, 0), black is 0, bytes survive the round trip', () => {
  const white = oklabOf('#ffffff');
  expect(distance(white, [1, 0, 0])).toBeLessThan(1e-4);
  expect(distance(oklabOf('#000000'), [0, 0, 0])).toBe(0);
  expect(hexOf(bytesOf('#a8285e'))).toBe('#a8285e');
});

describe.each(themes)('%s theme', (theme) => {
  const ground = bytesOf(PALETTES[theme].ground);

  test('zero is the ground of the page', () => {
    expect(entry(divergingMap(theme), 128)).toEqual(ground);
    expect(entry(sequentialMap(theme), 0)).toEqual(ground);
    expect(colourAt(divergingMap(theme), 0.5)).toEqual(ground);
  });

  test('steps are even', () => {
    expect(unevenness(divergingMap(theme))).toBeLessThan(1.35);
    expect(unevenness(sequentialMap(theme))).toBeLessThan(1.5);
    expect(unevenness(cyclicMap(theme))).toBeLessThan(1.2);
  });

  test('lightness falls (or rises) steadily from the ground, alike on both arms', () => {
    const sign = theme === 'light' ? 1 : -1;
    const lab = labs(divergingMap(theme));
    for (let i = 0; i < 128; i++) {
      expect(sign * (lab[i + 1][0] - lab[i][0])).toBeGreaterThan(-0.004);
      expect(Math.abs(lab[i][0] - lab[256 - i][0])).toBeLessThan(0.01);
    }
    const seq = labs(sequentialMap(theme));
    for (let i = 0; i < 256; i++) expect(sign * (seq[i][0] - seq[i + 1][0])).toBeGreaterThan(-0.004);
  });

  test('the phase map closes, and opposite phases differ', () => {
    const map = cyclicMap(theme);
    const lab = labs(map);
    expect(entry(map, 256)).toEqual(entry(map, 0));
    for (let i = 0; i < 128; i += 8) expect(distance(lab[i], lab[i + 128])).toBeGreaterThan(0.15);
  });

  test('signs stay apart for red–green blindness: the arms differ in b, which it leaves alone', () => {
    const lab = labs(divergingMap(theme));
    for (let i = 0; i <= 64; i += 8) expect(lab[i][2] - lab[256 - i][2]).toBeGreaterThan(0.06);
  });

  test('text can be read on the ground', () => {
    const p = PALETTES[theme];
    expect(contrast(p.ink, p.ground)).toBeGreaterThan(10);
    expect(contrast(p.muted, p.ground)).toBeGreaterThan(4.5);
    expect(contrast(p.accent, p.ground)).toBeGreaterThan(4.5);
  });
});
