// What is wrong with a device file, where does it stand, and how is it mended?

/** Keys and list positions from the root of the file to a value. */
export type Path = readonly (string | number)[];

export interface Finding {
  /** File as the caller named it; an option ('option band') when the value did not come from the file. */
  readonly file: string;
  /** 1-based; 0 when the value did not come from the file. */
  readonly line: number;
  readonly column: number;
  /** As in `bodies[0].disk.radius`; empty for the file as a whole. */
  readonly path: string;
  readonly came: string;
  readonly expected: string;
  readonly mend: string;
}

/** More findings than this are not looked for: the first ones usually cause the rest. */
export const MOST_FINDINGS = 20;

/** A device file that cannot be used. The message gives four lines a finding: where, what came, what was expected, what to do. */
export class DeviceError extends Error {
  readonly findings: readonly Finding[];

  constructor(findings: readonly Finding[]) {
    super(findings.map(formatFinding).join('\n'));
    this.name = 'DeviceError';
    this.findings = findings;
  }
}

/** Four lines: where, what came, what was expected, what to do. */
export function formatFinding(finding: Finding): string {
  const place = finding.line > 0 ? `${finding.file}:${finding.line}:${finding.column}` : finding.file;
  const lines = [
    finding.path === '' ? place : `${place}  ${finding.path}`,
    `  came: ${finding.came}`,
    `  expected: ${finding.expected}`,
    `  mend: ${finding.mend}`,
  ];
  return lines.map((line) => line.replace(/[\r\n]+/g, ' ')).join('\n');
}

/** `bodies[0].disk.radius` from its parts. */
export function formatPath(path: Path): string {
  let text = '';
  for (const part of path) text += typeof part === 'number' ? `[${part}]` : text === '' ? part : `.${part}`;
  return text;
}

/** A value in at most 60 characters, as it could stand in a file. */
export function showValue(value: unknown): string {
  if (value === undefined) return 'nothing';
  const text =
    typeof value === 'number' || typeof value === 'bigint'
      ? String(value)
      : (JSON.stringify(value, (_, inner: unknown) =>
          typeof inner === 'number' && !Number.isFinite(inner) ? String(inner) : inner,
        ) ?? typeof value);
  return text.length > 60 ? `${text.slice(0, 57)}...` : text;
}

/** A number for a message: six significant digits at most. */
export const showNumber = (value: number): string => String(Number(value.toPrecision(6)));

/** The known name nearest to a misspelt one, or undefined when none is near: edit distance ≤ 2, or a third of its length. */
export function nearestName(name: string, known: Iterable<string>): string | undefined {
  let best: string | undefined;
  let bestDistance = Math.max(2, Math.floor(name.length / 3)) + 1;
  for (const candidate of known) {
    if (Math.abs(candidate.length - name.length) >= bestDistance) continue;
    const distance = editDistance(name.toLowerCase(), candidate.toLowerCase());
    if (distance < bestDistance && distance < Math.max(name.length, candidate.length)) {
      best = candidate;
      bestDistance = distance;
    }
  }
  return best;
}

/** `"a", "b" or "c"`, at most a dozen of them. */
export function listNames(names: Iterable<string>): string {
  const all = [...names];
  const shown = all.slice(0, 12).map((name) => JSON.stringify(name));
  if (all.length > shown.length) return `${shown.join(', ')} … (${all.length} in all)`;
  return shown.length < 2 ? shown.join('') : `${shown.slice(0, -1).join(', ')} or ${shown.at(-1)}`;
}

/** Fewest insertions, deletions, replacements and swaps of neighbours that turn a into b (optimal string alignment). */
function editDistance(a: string, b: string): number {
  let before: number[] = [];
  let last = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const change = last[j - 1] + (a[i - 1] === b[j - 1] ? 0 : 1);
      let d = Math.min(change, last[j] + 1, row[j - 1] + 1);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1]) d = Math.min(d, before[j - 2] + 1);
      row.push(d);
    }
    before = last;
    last = row;
  }
  return last[b.length];
}
