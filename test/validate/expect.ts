// Does a case keep all its bounds? For tests: a failing row shows itself whole.

import { expect } from 'vitest';
import { allCases } from './cases.ts';
import { keeps, ratioOf, type Row } from './rows.ts';

/** Seconds on an idle core; a loaded one takes several times that. */
export const CASE_TIMEOUT = 300_000;

/** Solves the case of that name and expects every row to keep its bound, and every estimate to hold. */
export function expectKept(id: string): void {
  const found = allCases().find((c) => c.id === id);
  if (!found) throw new RangeError(`no case is called '${id}'`);
  const rows = found.rows();
  expect(rows.length).toBeGreaterThan(0);
  expect(rows.filter((row) => !keeps(row)).map(line)).toEqual([]);
}

const line = (row: Row): string =>
  `${row.what}: exact ${row.exact}, computed ${row.computed}, error ${row.error.toExponential(2)}, bound ` +
  `${row.bound.toExponential(1)}, error / estimate ${ratioOf(row).toPrecision(3)}`;
