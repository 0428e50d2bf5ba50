// Do the compiled kernels and their twin do the same to a front?

import { describe, expect, it } from 'vitest';
import { workNumbers, type FrontKernels } from '../../src/sparse/kernels/kernels.ts';
import { makeTwinKernels } from '../../src/sparse/kernels/twin.ts';
import { loadWasmKernels } from '../../src/sparse/kernels/wasm-kernels.ts';
import { randomNumbers } from './matrices.ts';

const wasm = loadWasmKernels();

/** Assembles one element and one contribution into a front, factors it and packs what is left. */
function run(kernels: FrontKernels, nf: number, np: number, weak: readonly number[]) {
  const nb = nf - np;
  const map = 2 * kernels.base;
  const perm = map + nf;
  const d = kernels.base + nf + 8;
  const element = d + 4 * np + 8;
  const work = element + 2 * nf * nf;
  const packed = work + workNumbers(nf);
  const to = packed + nf * nf;
  const p = to + nf * (nf + 1);
  const s = p + 2 * nf * np;
  kernels.reserve(s + 2 * nb * nb + 64);
  const { numbers: m, integers } = kernels;
  const values = randomNumbers(2 * nf * nf, 5);
  for (let j = 0; j < nf; j++) {
    for (let i = 0; i < nf; i++) {
      const t = 2 * (Math.min(i, j) * nf + Math.max(i, j));
      const off = weak.includes(i) || weak.includes(j) ? 1e-9 : 1;
      m[element + 2 * (i + j * nf)] = off * (values[t] + (i === j ? 2 * Math.sqrt(nf) : 0));
      m[element + 2 * (i + j * nf) + 1] = off * values[t + 1];
    }
  }
  // A row whose diagonal is far too small for its column.
  for (const i of weak) m[element + 2 * (nf - 1 + i * nf)] = m[element + 2 * (i + (nf - 1) * nf)] = 1;
  for (let i = 0; i < nf; i++) integers[map + i] = i;
  kernels.clear(p, s, nf, np);
  kernels.addElement(p, s, nf, np, element, nf, map);
  // Every other row takes a contribution.
  const n = nf >> 1;
  for (let i = 0; i < n; i++) integers[map + i] = 2 * i + (i > n / 2 ? 1 : 0);
  m.set(
    randomNumbers(n * (n + 1), 6).map((v) => 1e-12 * v),
    packed,
  );
  kernels.addContribution(p, s, nf, np, packed, n, map);
  const done = kernels.factorFront(p, s, nf, np, d, perm, work, 1e-300, false);
  const lower: number[] = [];
  for (let j = 0; j < done; j++) {
    for (let i = j + 1; i < nf; i++) lower.push(m[p + j * nf + i], m[p + nf * np + j * nf + i]);
  }
  kernels.packContribution(p, s, nf, np, done, to, work);
  return {
    done,
    lower,
    inverse: [...m.slice(d, d + 4 * done)],
    perm: [...integers.slice(perm, perm + np)],
    rest: [...m.slice(to, to + (nf - done) * (nf - done + 1))],
  };
}

describe.skipIf(wasm === undefined)('kernels and twin', () => {
  const shapes: [number, number, number[]][] = [
    [1, 1, []], [7, 3, []], [12, 12, []], [50, 49, []], [61, 50, []], [130, 97, []], [200, 30, []],
    [40, 20, [3, 11]], [130, 100, [0, 60, 99]],
  ]; // prettier-ignore
  for (const [nf, np, weak] of shapes) {
    it(`agree to 1e-14: ${np} pivots of ${nf} rows, ${weak.length} refused`, () => {
      const a = run(wasm as FrontKernels, nf, np, weak);
      const b = run(makeTwinKernels(), nf, np, weak);
      expect(a.done).toBe(np - weak.length);
      expect(b.done).toBe(a.done);
      expect(b.perm).toEqual(a.perm);
      for (const part of ['lower', 'inverse', 'rest'] as const) {
        expect(b[part]).toHaveLength(a[part].length);
        const top = a[part].reduce((t, v) => Math.max(t, Math.abs(v)), 1e-300);
        let worst = 0;
        for (let i = 0; i < a[part].length; i++) worst = Math.max(worst, Math.abs(a[part][i] - b[part][i]));
        expect(worst / top).toBeLessThan(1e-14);
      }
    });
  }
});
