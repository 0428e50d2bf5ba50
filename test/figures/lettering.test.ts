// Can every letter be drawn, and do figures align?

import { expect, test } from 'vitest';
import { letterLines, letterWidth } from '../../src/figures/lettering.ts';

const ascii = Array.from({ length: 95 }, (_, i) => String.fromCharCode(32 + i));
const more = [...'µμλεπωφΔ∞→…°±×·−–—≈≤≥²³⁻₀‘’“”○'];

test('every letter is finite, stands in its own width and between ascender and descender', () => {
  for (const letter of [...ascii, ...more]) {
    const { lines, width } = letterLines(letter, 20);
    if (letter !== ' ') expect(lines.length, letter).toBeGreaterThan(0);
    expect(width).toBe(letterWidth(letter, 20));
    for (const line of lines) {
      for (let i = 0; i < line.length; i += 2) {
        expect(line[i], letter).toBeGreaterThan(-1.2);
        expect(line[i], letter).toBeLessThan(width + 1.2);
        expect(line[i + 1], letter).toBeGreaterThan(-16.5);
        expect(line[i + 1], letter).toBeLessThan(5);
      }
    }
  }
});

test('no two letters look alike by mistake', () => {
  const drawn = new Map<string, string>();
  for (const letter of [...ascii, ...more].filter((l) => l !== 'μ')) {
    const key = JSON.stringify(letterLines(letter, 20).lines.map((l) => [...l]));
    expect(drawn.get(key), letter).toBeUndefined();
    drawn.set(key, letter);
  }
});

test('figures are tabular', () => {
  expect(new Set([...'0123456789'].map((d) => letterWidth(d, 20))).size).toBe(1);
  expect(letterWidth('1.111', 13)).toBe(letterWidth('4.086', 13));
});

test('size scales, accents take no room, unknown letters show as a box', () => {
  expect(letterWidth('wave', 40)).toBeCloseTo(2 * letterWidth('wave', 20), 12);
  expect(letterWidth('Röhre', 20)).toBe(letterWidth('Rohre', 20));
  expect(letterLines('ö', 20).lines.length).toBe(letterLines('o', 20).lines.length + 2);
  expect(letterLines('漢', 20).lines).toHaveLength(1);
  expect(letterLines('', 20)).toEqual({ lines: [], width: 0 });
});
