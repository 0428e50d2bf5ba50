// What values does the text hold, and where does each one stand?

import { isAlias, isMap, isPair, isScalar, isSeq, parseDocument } from 'yaml';
import type { Alias, Document, ParsedNode, YAMLError } from 'yaml';
import { DeviceError, formatPath, showValue } from './findings.ts';
import type { Finding, Path } from './findings.ts';

export interface Place {
  readonly line: number;
  readonly column: number;
}

/** A read file: plain values, and the place of each, worked out only when asked for. */
export interface Source {
  readonly file: string;
  readonly value: Record<string, unknown>;
  /** Place of a value or of its key; of the nearest thing that holds it when it is missing. */
  placeOf(path: Path, part?: 'key' | 'value'): Place;
  /** Place of the character at `offset` of a text value; its start when the text was written with escapes. */
  placeWithin(path: Path, offset: number): Place;
}

const MOST_CHARACTERS = 16e6;
/** Values in the file once aliases are written out: more is an accident or an attack. */
const MOST_VALUES = 2e6;
const DEEPEST = 40;
const DEEPEST_BRACKETS = 200;
const DEEPEST_COLUMN = 200;

/**
 * Reads YAML 1.2 (of which JSON is a part): one document, text keys without duplicates, aliases written out.
 *
 * @throws DeviceError with the place when the text is not such a document.
 */
export function readSource(text: string, file: string): Source {
  if (typeof text !== 'string') throw new TypeError(`expected the text of a device file, got ${typeof text}`);
  const place = (offset: number): Place => placeAt(text, offset);
  const fail: Fail = (offset, path, came, expected, mend) => {
    throw new DeviceError([{ file, ...place(offset), path: formatPath(path), came, expected, mend }]);
  };
  if (text.length > MOST_CHARACTERS)
    fail(0, [], `${text.length} characters`, `at most ${MOST_CHARACTERS}`, 'keep the device file small');
  const document = parseText(text, fail);
  // One fault often makes nonsense of all that follows it: only the first is told.
  const fault = [...document.errors, ...document.warnings].sort((a, b) => a.pos[0] - b.pos[0])[0];
  if (fault !== undefined) throw new DeviceError([syntaxFinding(text, file, fault)]);
  const root = document.contents;
  if (root === null || (isScalar(root) && root.value === null))
    fail(0, [], 'an empty file', 'a device: keys such as wavewell, polarization, band, bodies', EXAMPLE_START);
  if (!isMap(root))
    return fail(start(root), [], excerpt(text, start(root)), 'keys with values at the top of the file', EXAMPLE_START);
  const targets: Targets = new WeakMap();
  return {
    file,
    value: plainValue(root, targets, fail) as Record<string, unknown>,
    placeOf: (path, part = 'value') => place(locate(root, targets, path, part).offset),
    placeWithin(path, offset) {
      const { node, offset: begin } = locate(root, targets, path, 'value');
      if (!isScalar(node) || typeof node.value !== 'string' || !node.range) return place(begin);
      const quote = node.type === 'QUOTE_DOUBLE' || node.type === 'QUOTE_SINGLE' ? 1 : 0;
      const raw = text.slice(begin + quote, node.range[1] - quote);
      return place(raw === node.value ? begin + quote + offset : begin);
    },
  };
}

const EXAMPLE_START = 'begin with the line "wavewell: 1", then polarization, band and bodies';

type Fail = (offset: number, path: Path, came: string, expected: string, mend: string) => never;
type Targets = WeakMap<Alias, ParsedNode>;

function parseText(text: string, fail: Fail): Document.Parsed {
  const deep = tooDeep(text);
  if (deep >= 0)
    fail(
      deep,
      [],
      'brackets or indentation nested deeper than 200',
      'at most 8 levels in a device file',
      'close the brackets, or indent less',
    );
  try {
    // Duplicate keys are found by plainValue in linear time; the library compares each key with all others.
    return parseDocument(text, { prettyErrors: false, uniqueKeys: false, resolveKnownTags: false });
  } catch (error) {
    const reason = error instanceof Error ? error.message : String(error);
    return fail(0, [], `text that cannot be parsed (${reason})`, 'YAML or JSON', 'simplify the file');
  }
}

/**
 * Offset where the text nests deeper than any device file, or -1 (quotes and comments disregarded). The parser recurses: without
 * this bound a hostile text exhausts the stack, which Node does not always survive. Levels of brackets are counted; levels of
 * indentation are at most twice the column where the line's content begins, past leading "- ", "? " and ": ".
 */
function tooDeep(text: string): number {
  let depth = 0;
  let column = 0;
  let atStart = true;
  for (let i = 0; i < text.length; i++) {
    const c = text[i];
    if (c === '\n') {
      column = 0;
      atStart = true;
      continue;
    }
    if (atStart) {
      const next = text[i + 1] ?? '\n';
      const indicator = '-?:'.includes(c) && ' \t\n\r'.includes(next);
      if (c !== ' ' && c !== '\t' && !indicator) atStart = false;
      else if (indicator && column > DEEPEST_COLUMN) return i;
      else if (c !== '\t') column++;
      if (!atStart && column > DEEPEST_COLUMN && c !== '#') return i;
    }
    if (c === '[' || c === '{') {
      if (++depth > DEEPEST_BRACKETS) return i;
    } else if ((c === ']' || c === '}') && depth > 0) depth--;
  }
  return -1;
}

/** Plain objects, lists and scalars of a node; `targets` learns what each alias stands for. */
function plainValue(root: ParsedNode, targets: Targets, fail: Fail): unknown {
  const anchors = new Map<string, ParsedNode>();
  const open = new Set<ParsedNode>();
  let count = 0;
  const convert = (node: ParsedNode | null, path: Path): unknown => {
    if (node === null) return null;
    if (++count > MOST_VALUES)
      fail(
        start(node),
        path,
        `more than ${MOST_VALUES} values once aliases are written out`,
        'a file without alias chains',
        'write the values out',
      );
    if (path.length > DEEPEST)
      fail(
        start(node),
        path,
        `values nested deeper than ${DEEPEST}`,
        'at most 8 levels in a device file',
        'flatten the file',
      );
    if (isAlias(node)) {
      const target = anchors.get(node.source);
      if (target === undefined || open.has(target))
        fail(
          start(node),
          path,
          `*${node.source}`,
          'the name of an anchor (&name) finished above it',
          'an expression that begins with * needs a left factor',
        );
      targets.set(node, target);
      return convert(target, path);
    }
    if (node.anchor !== undefined) anchors.set(node.anchor, node);
    if (isScalar(node)) return typeof node.value === 'bigint' ? Number(node.value) : node.value;
    open.add(node);
    const value = isMap(node)
      ? convertMap(node, path)
      : isSeq(node)
        ? node.items.map((item, i) => convert(item, [...path, i]))
        : null;
    open.delete(node);
    return value;
  };
  const convertMap = (node: Extract<ParsedNode, { items: unknown }>, path: Path): unknown => {
    const value: Record<string, unknown> = {};
    for (const pair of node.items) {
      if (!isPair(pair)) continue;
      const key = pair.key as ParsedNode | null;
      const at = key === null ? start(node) : start(key);
      if (!isScalar(key) || key.value === null || key.value === '__proto__')
        fail(
          at,
          path,
          isScalar(key) ? showValue(key.value) : 'a key that is no plain word',
          'a key that is a plain word',
          'write "key: value"',
        );
      const name = String((key as { value: unknown }).value);
      if (Object.hasOwn(value, name))
        fail(
          at,
          [...path, name],
          `the key ${JSON.stringify(name)} a second time`,
          'each key once',
          'remove one of the two, or rename it',
        );
      value[name] = convert(pair.value, [...path, name]);
    }
    return value;
  };
  return convert(root, []);
}

/** Node and offset of a path, or of the nearest thing that holds it. */
function locate(root: ParsedNode, targets: Targets, path: Path, part: 'key' | 'value') {
  let node: ParsedNode | null = root;
  let offset = start(root);
  for (let i = 0; i < path.length; i++) {
    if (isMap(node)) {
      const pair: { key: unknown; value: unknown } | undefined = node.items.find(
        (item) => isScalar(item.key) && String(item.key.value) === String(path[i]),
      );
      if (pair === undefined) return { node: null, offset };
      const key = pair.key as ParsedNode;
      node = pair.value as ParsedNode | null;
      const atKey = node === null || (part === 'key' && i === path.length - 1);
      offset = start(atKey ? key : (node as ParsedNode));
    } else if (isSeq(node)) {
      const item = node.items[path[i] as number] as ParsedNode | undefined;
      if (item === undefined) return { node: null, offset };
      node = item;
      offset = start(item);
    } else return { node: null, offset };
    while (isAlias(node)) node = targets.get(node) ?? null;
  }
  return { node, offset };
}

const start = (node: ParsedNode): number => node.range?.[0] ?? 0;

function placeAt(text: string, offset: number): Place {
  const end = Math.min(Math.max(offset, 0), text.length);
  let line = 1;
  let begin = 0;
  for (let i = text.indexOf('\n'); i >= 0 && i < end; i = text.indexOf('\n', i + 1)) {
    line++;
    begin = i + 1;
  }
  return { line, column: end - begin + 1 };
}

/** The rest of the line at an offset, shortened. */
function excerpt(text: string, offset: number): string {
  const rest = text
    .slice(offset, offset + 80)
    .split(/\r?\n/, 1)[0]
    .trim();
  return rest === '' ? 'the end of a line' : showValue(rest);
}

function syntaxFinding(text: string, file: string, fault: YAMLError): Finding {
  const offset = fault.code === 'MULTIPLE_DOCS' ? fault.pos[0] : Math.min(fault.pos[0], text.length);
  return {
    file,
    ...placeAt(text, offset),
    path: '',
    came: excerpt(text, offset),
    expected: `YAML or JSON (${fault.message.replace(/\s+/g, ' ').slice(0, 160)})`,
    mend: MENDS[fault.code] ?? 'correct the line; the fault may begin on the line above',
  };
}

const MENDS: Partial<Record<YAMLError['code'], string>> = {
  ALIAS_PROPS: 'remove the tag or anchor',
  BAD_ALIAS: 'an expression cannot begin with *: put its left factor first, or quote it',
  BAD_DQ_ESCAPE: 'double the backslash, or use single quotes',
  BAD_INDENT: 'indent the lines of one block alike, and close each bracket',
  BAD_SCALAR_START: 'put the text in quotes',
  BLOCK_AS_IMPLICIT_KEY: 'put nested keys on lines of their own, or in { }',
  BLOCK_IN_FLOW: 'inside { } and [ ] separate values with commas',
  MISSING_CHAR: 'add the missing bracket, quote, comma or space',
  MULTIPLE_DOCS: 'keep one device a file: remove the line "---" and what follows it',
  MULTILINE_IMPLICIT_KEY: 'write the key on one line, and ": " after it',
  TAB_AS_INDENT: 'indent with spaces',
  TAG_RESOLVE_FAILED: 'remove the tag that begins with !',
  UNEXPECTED_TOKEN: 'check brackets, quotes and commas just before this place',
};
