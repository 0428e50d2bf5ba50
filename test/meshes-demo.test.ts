// Does every demo device read, open with a sentence, and draw?

import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { readDevice } from '../src/device/read.ts';
import { deviceSize } from '../src/device/size.ts';
import { deviceFigure } from '../src/figures/device.ts';
import { pngBytes } from '../src/figures/png.ts';

const folder = new URL('../meshes-demo/', import.meta.url);
const files = readdirSync(folder).filter((name) => /\.(ya?ml|json)$/.test(name));

test('there are at least four', () => {
  expect(files.length).toBeGreaterThanOrEqual(4);
});

describe.each(files)('%s', (name) => {
  const content = readFileSync(new URL(name, folder), 'utf8');
  const device = readDevice(content, name);

  test('opens with a comment that is a sentence', () => {
    expect(content).toMatch(/^# [A-Z].*[.?]\n/);
  });

  test('has a title, an active body or guides, and is small enough to be solved at once', () => {
    expect(device.title).not.toBe('');
    expect(device.bodies.some((b) => b.pumpWeight > 0) || device.guides !== undefined).toBe(true);
    expect(deviceSize(device).wavelengthsAcross).toBeLessThan(4);
  });

  test('can be drawn', () => {
    expect(pngBytes(deviceFigure(device, { width: 360 }), 1).length).toBeGreaterThan(3000);
  });
});
