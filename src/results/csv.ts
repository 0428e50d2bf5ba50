// How is a table written as CSV?

/** A cell: text, a number, or nothing (null and every number that is not finite give an empty cell). */
export type Cell = string | number | null;

/**
 * The table as RFC 4180 text: comma-separated, CRLF after every line, one header line, cells quoted where they must be.
 * Numbers are the shortest decimals that read back as the same double. Text that a spreadsheet would run as a formula
 * gets an apostrophe in front.
 *
 * @param header column names, ASCII, each with its unit: 'x [um]'
 * @throws when a header is not plain ASCII or a row is longer or shorter than the header
 * @example csvText(['x [um]', 'body'], [[0.5, 'core']]) // 'x [um],body\r\n0.5,core\r\n'
 */
export function csvText(header: readonly string[], rows: Iterable<readonly Cell[]>): string {
  const odd = header.find((name) => !/^[\x20-\x7e]+$/.test(name));
  if (odd !== undefined) throw new Error(`column name ${JSON.stringify(odd)}: expected plain ASCII`);
  const lines = [header.map(textCell).join(',')];
  for (const row of rows) {
    if (row.length !== header.length) {
      throw new Error(`a row of ${String(row.length)} cells: expected ${String(header.length)}`);
    }
    lines.push(row.map(cellText).join(','));
  }
  lines.push('');
  return lines.join('\r\n');
}

/** Header with its unit: column('x', 'um') is 'x [um]', column('x', '') is 'x'. */
export const column = (name: string, unit: string): string => (unit === '' ? name : `${name} [${unit}]`);

function cellText(cell: Cell): string {
  if (cell === null) return '';
  if (typeof cell === 'string') return textCell(cell);
  return Number.isFinite(cell) ? numberText(cell) : '';
}

/** String(x) is the shortest decimal that reads back as x (ECMA-262, Number::toString), but for the sign of zero. */
const numberText = (x: number): string => (Object.is(x, -0) ? '-0' : String(x));

/**
 * A spreadsheet runs a cell that begins with = + - @ (or their full-width twins), also behind blanks and tabs, and some
 * split at semicolons: the first gets an apostrophe, and all that holds a separator is quoted. Common practice.
 */
function textCell(text: string): string {
  const safe = /^[\s\0]*[=+\-@|%＝＋－＠]/.test(text) || /^[\t\r\n\0]/.test(text) ? `'${text}` : text;
  return /[",;\t\r\n]|^\s|\s$/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}
