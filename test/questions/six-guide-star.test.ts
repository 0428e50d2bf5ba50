// Is a junction of six guides freed of reflection by trimming one of them, and does an independent solve prove it?

import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { readDevice } from '../../src/device/read.ts';
import { findKnobMatches } from '../../src/questions/knob-match.ts';

test('three in, three out: less than 1e-10 comes back on a mesh of its own', () => {
  const text = readFileSync(new URL('../../meshes-demo/six-guide-star.yaml', import.meta.url), 'utf8');
  const at = (trim: number) => readDevice(text, 'six-guide-star.yaml', { knobs: { trim } });
  const [match, ...others] = findKnobMatches(at, { inputs: ['a', 'd', 'f'], range: [21, 24], digits: 4 });
  expect(others).toHaveLength(0);
  // the same at 6 digits: k = 0.2153944992 ± 2e-9, trim = 22.3277325 ± 3e-7
  expect(Math.abs(match.k - 0.2153944992)).toBeLessThan(3 * match.kError);
  expect(Math.abs(match.level - 22.3277325)).toBeLessThan(3 * match.levelError);
  expect(match.kError).toBeLessThan(1e-4 * match.k);
  const { sameMesh, ownMesh } = match.forward;
  expect(sameMesh.reflected).toBeLessThan(1e-10);
  expect(ownMesh.reflected).toBeLessThan(1e-10);
  expect(Math.abs(ownMesh.balance)).toBeLessThan(1e-12);
  // all of it leaves through the other three
  expect(ownMesh.out[1] + ownMesh.out[2] + ownMesh.out[4]).toBeCloseTo(1, 9);
}, 240_000);
