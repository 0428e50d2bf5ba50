// Are the PNG bytes what the standard says, and do they hold the pixels?

import { inflateSync, crc32 } from 'node:zlib';
import fc from 'fast-check';
import { expect, test } from 'vitest';
import { boxRing, fill, stroke, text, type Drawing } from '../../src/figures/drawing.ts';
import { encodePng, pngBytes } from '../../src/figures/png.ts';

export interface Decoded {
  readonly width: number;
  readonly height: number;
  readonly channels: number;
  readonly pixels: Uint8Array;
}

/** An independent reader: chunks, check sums (zlib's own where this Node has them), filters. */
export function decodePng(file: Uint8Array): Decoded {
  expect([...file.subarray(0, 8)]).toEqual([137, 80, 78, 71, 13, 10, 26, 10]);
  const view = new DataView(file.buffer, file.byteOffset, file.byteLength);
  const data: Uint8Array[] = [];
  const names: string[] = [];
  let header = new DataView(new ArrayBuffer(13));
  for (let at = 8; at < file.length;) {
    const length = view.getUint32(at);
    const name = String.fromCharCode(...file.subarray(at + 4, at + 8));
    const body = file.subarray(at + 8, at + 8 + length);
    if (typeof crc32 === 'function') {
      expect(view.getUint32(at + 8 + length)).toBe(crc32(file.subarray(at + 4, at + 8 + length)));
    }
    if (name === 'IHDR') header = new DataView(body.slice().buffer);
    if (name === 'IDAT') data.push(body);
    names.push(name);
    at += 12 + length;
  }
  expect(names[0]).toBe('IHDR');
  expect(names.at(-1)).toBe('IEND');
  const [width, height] = [header.getUint32(0), header.getUint32(4)];
  const channels = header.getUint8(9) === 2 ? 3 : 4;
  const raw = inflateSync(Buffer.concat(data));
  const bytes = width * channels;
  const pixels = new Uint8Array(bytes * height);
  for (let y = 0; y < height; y++) {
    const filter = raw[y * (bytes + 1)];
    for (let i = 0; i < bytes; i++) {
      const a = i < channels ? 0 : pixels[y * bytes + i - channels];
      const b = y === 0 ? 0 : pixels[(y - 1) * bytes + i];
      const c = i < channels || y === 0 ? 0 : pixels[(y - 1) * bytes + i - channels];
      const p = a + b - c;
      const nearest = [a, b, c].reduce((best, v) => (Math.abs(p - v) < Math.abs(p - best) ? v : best));
      const guess = [0, a, b, (a + b) >> 1, nearest][filter];
      pixels[y * bytes + i] = raw[y * (bytes + 1) + 1 + i] + guess;
    }
  }
  return { width, height, channels, pixels };
}

test('pixels come back, whatever they are', () => {
  const picture = fc
    .record({
      width: fc.integer({ min: 1, max: 9 }),
      height: fc.integer({ min: 1, max: 9 }),
      channels: fc.constantFrom(3 as const, 4 as const),
    })
    .chain((size) => {
      const n = size.width * size.height * size.channels;
      return fc.record({ size: fc.constant(size), pixels: fc.uint8Array({ minLength: n, maxLength: n }) });
    });
  fc.assert(
    fc.property(picture, ({ size, pixels }) => {
      const back = decodePng(encodePng(size.width, size.height, size.channels, pixels));
      expect(back).toEqual({ ...size, pixels });
    }),
  );
});

test('the wrong number of bytes, or no pixel at all, is refused', () => {
  expect(() => encodePng(2, 2, 3, new Uint8Array(11))).toThrow(/11 bytes: expected 2 × 2 × 3/);
  expect(() => encodePng(0, 2, 3, new Uint8Array(0))).toThrow(/at least one pixel/);
});

test('a drawing is painted in order, at the density asked for, the same each time', () => {
  const drawing: Drawing = {
    width: 20,
    height: 10,
    ground: '#ffffff',
    description: '',
    items: [
      fill([boxRing(0, 0, 10, 10)], '#ff0000'),
      fill([boxRing(5, 0, 10, 10)], '#0000ff', 0.5),
      stroke([[0, 9.5, 20, 9.5]], '#000000', 1),
      text('i', 18, 8, 10, '#00ff00'),
      {
        kind: 'picture',
        x: 13,
        y: 0,
        width: 2,
        height: 2,
        paint: (across, down) =>
          Uint8Array.from({ length: 4 * across * down }, (_, i) => [0, 255, 255, i < 8 ? 255 : 0][i % 4]),
      },
    ],
  };
  const file = pngBytes(drawing, 1);
  const { width, height, pixels } = decodePng(file);
  const at = (x: number, y: number): number[] => [...pixels.subarray(3 * (y * width + x), 3 * (y * width + x) + 3)];
  expect([width, height]).toEqual([20, 10]);
  expect(at(2, 2)).toEqual([255, 0, 0]);
  expect(at(7, 2)).toEqual([128, 0, 128]);
  expect(at(12, 2)).toEqual([128, 128, 255]);
  expect(at(2, 9)).toEqual([0, 0, 0]);
  expect(at(13, 0)).toEqual([0, 255, 255]);
  expect(at(13, 1)).toEqual([128, 128, 255]);
  expect(at(18, 5)[1]).toBeGreaterThan(at(18, 5)[0]);
  expect(pngBytes(drawing, 1)).toEqual(file);
  expect(decodePng(pngBytes(drawing, 2))).toMatchObject({ width: 40, height: 20 });
});
