// Does a table survive the way through CSV, and do spreadsheets take it as data?

import fc from 'fast-check';
import { expect, test } from 'vitest';
import { column, csvText } from '../../src/results/csv.ts';

/** An independent reader after the grammar of RFC 4180, section 2. */
export function readCsv(text: string): string[][] {
  const rows: string[][] = [];
  let row: string[] = [];
  let at = 0;
  while (at < text.length) {
    let cell = '';
    if (text[at] === '"') {
      for (at++; text[at] !== '"' || text[at + 1] === '"'; at++) {
        if (at >= text.length) throw new Error('open quote');
        if (text[at] === '"') at++;
        cell += text[at];
      }
      at++;
    } else {
      while (at < text.length && text[at] !== ',' && text[at] !== '\r') {
        if (text[at] === '"' || text[at] === '\n') throw new Error(`stray ${JSON.stringify(text[at])}`);
        cell += text[at++];
      }
    }
    row.push(cell);
    if (text[at] === ',') {
      at++;
      continue;
    }
    if (text.slice(at, at + 2) !== '\r\n') throw new Error(`no line end at ${String(at)}`);
    at += 2;
    rows.push(row);
    row = [];
  }
  return rows;
}

test('every finite double reads back as itself', () => {
  fc.assert(
    fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (x) => {
      const [, [cell]] = readCsv(csvText(['x'], [[x]]));
      return Object.is(Number(cell), x);
    }),
  );
});

test('text reads back as itself, but for the apostrophe before what looks like a formula', () => {
  fc.assert(
    fc.property(fc.array(fc.array(fc.string({ unit: 'grapheme' }), { minLength: 2, maxLength: 2 })), (rows) => {
      const back = readCsv(csvText(['a', 'b'], rows)).slice(1);
      expect(back.map((r) => r.map((c) => c.replace(/^'/, '')))).toEqual(
        rows.map((r) => r.map((c) => c.replace(/^'/, ''))),
      );
      for (const cell of back.flat()) expect(cell).not.toMatch(/^[\s\0]*[=+\-@]/);
    }),
  );
});

// The list of starting characters: OWASP, "CSV Injection" (from memory).
test.each(['=1+1', '+1', '-1', '@SUM(A1)', '\t=1', '\r=1', '  =1', '＝1', '|cmd', '%0', '\n=1'])(
  '%j is no formula any more',
  (text) => {
    const [, [cell]] = readCsv(csvText(['label'], [[text]]));
    expect(cell).toBe(`'${text}`);
  },
);

test('cells are quoted where they must be, and only there', () => {
  const text = csvText(
    ['x [um]', 'label'],
    [
      [0.1, 'plain'],
      [-0, 'a,b'],
      [1e-300, 'say "hi"'],
      [null, 'two\r\nlines'],
      [Number.NaN, 'semi;colon'],
      [Infinity, ''],
    ],
  );
  expect(text).toBe(
    'x [um],label\r\n0.1,plain\r\n-0,"a,b"\r\n1e-300,"say ""hi"""\r\n,"two\r\nlines"\r\n,"semi;colon"\r\n,\r\n',
  );
});

test('no rows: the header alone', () => {
  expect(csvText([column('x', 'um'), column('y', '')], [])).toBe('x [um],y\r\n');
});

test('a header that is not ASCII, and a ragged row, are refused', () => {
  expect(() => csvText(['λ'], [])).toThrow(/plain ASCII/);
  expect(() => csvText(['a', 'b'], [[1]])).toThrow(/row of 1 cells: expected 2/);
});
