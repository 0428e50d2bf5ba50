// How do drawings become files?

import { join } from 'node:path';
import { type Drawing, pngBytes, svgText } from '../src/index.ts';

/** name.svg and name.png, ready to be written. */
export function pictureFiles(folder: string, name: string, drawing: Drawing): Record<string, string | Uint8Array> {
  return { [join(folder, `${name}.svg`)]: svgText(drawing), [join(folder, `${name}.png`)]: pngBytes(drawing) };
}
