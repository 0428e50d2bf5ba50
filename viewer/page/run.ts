// How do a run's arrays come from the server, no more of them than are looked at?

import { checkRunRecord, entryBytes, viewArray } from '../../src/results/bytes.ts';
import type { RunArray, RunRecord } from '../../src/results/format.ts';

export interface PageRun {
  readonly record: RunRecord;
  /** Arrays by name, in the order asked for. */
  arrays(names: readonly string[]): Promise<RunArray[]>;
  /** Display values of a field, interleaved; the latest few are kept. */
  display(fieldId: string): Promise<Float32Array>;
}

/** Arrays nearer to each other than this many bytes come in one request. */
const NEAR = 65536;

/** Fields whose display values stay in memory. */
const KEPT_FIELDS = 12;

export async function loadRun(): Promise<PageRun> {
  const response = await fetch('./run.json');
  if (!response.ok) throw new Error(`the run could not be read: ${await response.text()}`);
  const record = checkRunRecord(await response.json());
  const kept = new Map<string, Promise<Float32Array>>();
  const arrays = (names: readonly string[]): Promise<RunArray[]> => fetchArrays(record, names);
  return {
    record,
    arrays,
    display(fieldId) {
      const known = kept.get(fieldId);
      if (known) return known;
      const field = record.fields.find(({ id }) => id === fieldId);
      if (!field) return Promise.reject(new Error(`the run holds no field '${fieldId}'`));
      const coming = arrays([field.display]).then(([values]) => values as Float32Array);
      coming.catch(() => kept.delete(fieldId));
      kept.set(fieldId, coming);
      if (kept.size > KEPT_FIELDS) kept.delete(kept.keys().next().value!);
      return coming;
    },
  };
}

async function fetchArrays(record: RunRecord, names: readonly string[]): Promise<RunArray[]> {
  const wanted = [...new Set(names)].sort((a, b) => record.arrays[a].offset - record.arrays[b].offset);
  const spans: { first: number; last: number; names: string[] }[] = [];
  for (const name of wanted) {
    const entry = record.arrays[name];
    const end = entry.offset + entryBytes(entry);
    const span = spans.at(-1);
    if (span && entry.offset - span.last < NEAR) {
      span.last = Math.max(span.last, end);
      span.names.push(name);
    } else spans.push({ first: entry.offset, last: end, names: [name] });
  }
  const found = new Map<string, RunArray>();
  await Promise.all(
    spans.map(async (span) => {
      const bytes = span.last > span.first ? await fetchRange(span.first, span.last) : new ArrayBuffer(0);
      for (const name of span.names) found.set(name, viewArray(bytes, record.arrays[name], name, span.first));
    }),
  );
  return names.map((name) => found.get(name)!);
}

async function fetchRange(first: number, last: number): Promise<ArrayBuffer> {
  const response = await fetch('./arrays.bin', { headers: { Range: `bytes=${first}-${last - 1}` } });
  if (!response.ok) throw new Error(`the run's arrays could not be read: ${await response.text()}`);
  const bytes = await response.arrayBuffer();
  // A server that ignores ranges sends everything.
  return response.status === 206 ? bytes : bytes.slice(first, last);
}
