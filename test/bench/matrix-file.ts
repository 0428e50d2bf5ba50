// How does a matrix reach the native solvers of the benchmark?

import { openSync, writeSync, closeSync } from 'node:fs';
import type { BenchMatrix } from './layered-square.ts';

/** Sums the elements and writes the lower triangle; format in peers/peers.c. Returns the number of entries. */
export function writeMatrixFile(path: string, { pattern, values, nodesPerElement: nd }: BenchMatrix): number {
  const { unknowns: n, starts, list } = pattern;
  const elements = starts.length - 1;
  // Entries by column first, equal rows of a column then added up.
  const columnStarts = new Int32Array(n + 1);
  eachEntry((_, v) => columnStarts[v + 1]++);
  for (let v = 0; v < n; v++) columnStarts[v + 1] += columnStarts[v];
  const rowOf = new Int32Array(columnStarts[n]);
  const valueOf = new Float64Array(2 * columnStarts[n]);
  const next = columnStarts.slice();
  eachEntry((u, v, t) => {
    const at = next[v]++;
    rowOf[at] = u;
    valueOf[2 * at] = values[t];
    valueOf[2 * at + 1] = values[t + 1];
  });
  const columnOf = new Int32Array(rowOf.length);
  const place = new Int32Array(n).fill(-1);
  let count = 0;
  for (let v = 0; v < n; v++) {
    const first = count;
    for (let at = columnStarts[v]; at < columnStarts[v + 1]; at++) {
      const re = valueOf[2 * at];
      const im = valueOf[2 * at + 1];
      const u = rowOf[at];
      if (place[u] < first) {
        place[u] = count;
        rowOf[count] = u;
        columnOf[count] = v;
        valueOf[2 * count] = re;
        valueOf[2 * count + 1] = im;
        count++;
      } else {
        valueOf[2 * place[u]] += re;
        valueOf[2 * place[u] + 1] += im;
      }
    }
  }
  const head = new DataView(new ArrayBuffer(16));
  head.setInt32(0, n, true);
  head.setBigInt64(8, BigInt(count), true);
  const file = openSync(path, 'w');
  for (const part of [head, rowOf.subarray(0, count), columnOf.subarray(0, count), valueOf.subarray(0, 2 * count)]) {
    const bytes = new Uint8Array(part.buffer, part.byteOffset, part.byteLength);
    for (let at = 0; at < bytes.length;) at += writeSync(file, bytes, at, Math.min(1 << 28, bytes.length - at));
  }
  closeSync(file);
  return count;

  function eachEntry(visit: (u: number, v: number, t: number) => void): void {
    for (let e = 0; e < elements; e++) {
      for (let j = 0; j < nd; j++) {
        for (let i = 0; i < nd; i++) {
          const u = list[starts[e] + i];
          const v = list[starts[e] + j];
          if (v >= 0 && u >= v) visit(u, v, 2 * (e * nd * nd + i + j * nd));
        }
      }
    }
  }
}
