// Which network does the text of a Touchstone file hold, and if it breaks a rule, in which line?

import {
  fromPair,
  pairOrder,
  TOUCHSTONE_UNITS,
  TouchstoneError,
  type TouchstoneFormat,
  type TouchstoneNetwork,
  type TouchstoneParameter,
  type TouchstoneUnit,
} from './touchstone.ts';

/**
 * Versions 1.0, 1.1 and 2.0 (2.1 where it adds nothing else). Keywords in any case, "!" comments, tabs and blanks, lines
 * ended by CR, LF or both. A line with an odd count of numbers begins a frequency, an even one goes on: pairs are never
 * split. In version 1 the number of ports is that of the pairs.
 *
 * @param ports what the name of the file says (.s2p: 2); the data must agree.
 * @throws TouchstoneError with the line.
 */
export function readTouchstone(text: string, ports?: number): TouchstoneNetwork {
  const lines = linesOf(text);
  const first = lines[0];
  if (!first) throw new TouchstoneError(1, 'nothing', 'an option line and data', 'check the file');
  const network = /^\[version\]/i.test(first.text) ? readVersion2(lines) : readVersion1(lines, ports);
  if (ports !== undefined && network.ports !== ports)
    throw new TouchstoneError(
      first.number,
      `data of ${network.ports} ports`,
      `${ports}, as the name of the file says`,
      `end the name with .s${network.ports}p`,
    );
  return network;
}

interface Line {
  readonly number: number;
  /** Without comment, trimmed, never empty. */
  readonly text: string;
}

function linesOf(text: string): Line[] {
  const out: Line[] = [];
  text.split(/\r\n|\r|\n/).forEach((whole, i) => {
    const [kept] = whole.split('!', 1);
    const odd = /[^\t\x20-\x7e]/.exec(i === 0 ? kept.replace(/^\uFEFF/, '') : kept);
    if (odd)
      throw new TouchstoneError(
        i + 1,
        `the character U+${odd[0].codePointAt(0)!.toString(16).toUpperCase().padStart(4, '0')}`,
        'plain ASCII',
        'remove it, or put it behind "!"',
      );
    const trimmed = kept.replace(/^\uFEFF/, '').trim();
    if (trimmed !== '') out.push({ number: i + 1, text: trimmed });
  });
  return out;
}

interface Options {
  readonly unit: TouchstoneUnit;
  readonly parameter: TouchstoneParameter;
  readonly format: TouchstoneFormat;
  readonly resistances: readonly number[];
}

/** "# GHz S MA R 50": any order, any part may be missing. */
function readOptions({ number, text }: Line): Options {
  const words = text.slice(1).trim().split(/\s+/).filter((w) => w !== ''); // prettier-ignore
  const found: Partial<Record<'unit' | 'parameter' | 'format' | 'resistances', true>> = {};
  let unit: TouchstoneUnit = 'GHz';
  let parameter: TouchstoneParameter = 'S';
  let format: TouchstoneFormat = 'MA';
  let resistances: number[] = [50];
  const once = (what: keyof typeof found, word: string): void => {
    if (found[what])
      throw new TouchstoneError(number, `a second ${what}: ${word}`, 'each part once', 'leave one of them out');
    found[what] = true;
  };
  for (let i = 0; i < words.length; i++) {
    const word = words[i].toUpperCase();
    const named = (Object.keys(TOUCHSTONE_UNITS) as TouchstoneUnit[]).find((u) => u.toUpperCase() === word);
    if (named) {
      once('unit', words[i]);
      unit = named;
    } else if (/^[SYZGH]$/.test(word)) {
      once('parameter', words[i]);
      parameter = word as TouchstoneParameter;
    } else if (/^(RI|MA|DB)$/.test(word)) {
      once('format', words[i]);
      format = word as TouchstoneFormat;
    } else if (word === 'R') {
      once('resistances', words[i]);
      resistances = [];
      while (i + 1 < words.length && NUMBER.test(words[i + 1])) resistances.push(positive(number, words[++i]));
      if (resistances.length === 0)
        throw new TouchstoneError(number, `R ${words[i + 1] ?? ''}`.trim(), 'R and a resistance in ohm', 'write R 50');
    } else {
      throw new TouchstoneError(
        number,
        words[i],
        'Hz, kHz, MHz, GHz, S, Y, Z, G, H, RI, MA, DB or R with a number',
        'correct the option line',
      );
    }
  }
  return { unit, parameter, format, resistances };
}

function positive(line: number, word: string): number {
  const value = Number(word);
  if (value > 0 && Number.isFinite(value)) return value;
  throw new TouchstoneError(line, `the resistance ${word}`, 'a real number above 0', 'write R 50');
}

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?$/;

function numbersOf({ number, text }: Line): number[] {
  return text.split(/\s+/).map((word) => {
    const value = NUMBER.test(word) ? Number(word.replace(/d/i, 'e')) : NaN;
    if (Number.isFinite(value)) return value;
    throw new TouchstoneError(number, word, 'a number', 'correct the data');
  });
}

/** One frequency: its numbers, and the line where it began. */
interface Set {
  readonly line: number;
  readonly values: number[];
}

/** Odd counts begin, even ones go on. */
function setsOf(lines: readonly Line[], mostPairs: number): Set[] {
  const out: Set[] = [];
  for (const line of lines) {
    const values = numbersOf(line);
    if (values.length > 2 * mostPairs + 1)
      throw new TouchstoneError(
        line.number,
        `${values.length} numbers`,
        'a frequency and at most four pairs on a line',
        'break the line after the fourth pair',
      );
    if (values.length % 2 === 1) out.push({ line: line.number, values });
    else {
      const last = out[out.length - 1] as Set | undefined;
      if (!last)
        throw new TouchstoneError(line.number, 'pairs before any frequency', 'a frequency first', 'add the frequency');
      last.values.push(...values);
    }
  }
  return out;
}

function readVersion1(lines: readonly Line[], named: number | undefined): TouchstoneNetwork {
  const at = lines.findIndex(({ text }) => text.startsWith('#'));
  const early = lines[0];
  if (at !== 0)
    throw new TouchstoneError(
      early.number,
      early.text.slice(0, 40),
      'the option line, which begins with #',
      'put "# GHz S MA R 50" or what is true before the data',
    );
  const options = readOptions(lines[0]);
  // further option lines are ignored
  const rest = lines.slice(1).filter(({ text }) => !text.startsWith('#'));
  const keyword = rest.find(({ text }) => text.startsWith('['));
  if (keyword)
    throw new TouchstoneError(
      keyword.number,
      keyword.text.split(']')[0] + ']',
      'data: the file does not begin with [Version] 2.0',
      'begin it so, or take the keyword out',
    );
  const sets = setsOf(rest, 4);
  if (sets.length === 0)
    throw new TouchstoneError(lines[lines.length - 1].number, 'no data', 'one frequency or more', 'check the file');
  const ports = named ?? Math.round(Math.sqrt((sets[0].values.length - 1) / 2));
  // a two-port's noise begins where the frequency falls back
  const noiseAt = ports === 2 ? sets.findIndex((s, i) => i > 0 && s.values[0] < sets[i - 1].values[0]) : -1;
  const network = noiseAt < 0 ? sets : sets.slice(0, noiseAt);
  const noise = noiseAt < 0 ? [] : sets.slice(noiseAt);
  return assemble({ version: 1, options, ports, sets: network, noise, order: pairOrder(ports, true), mirror: false });
}

interface Parts {
  readonly version: 1 | 2;
  readonly options: Options;
  readonly ports: number;
  readonly sets: readonly Set[];
  readonly noise: readonly Set[];
  readonly order: readonly (readonly [number, number])[];
  /** Only a triangle stands in the file. */
  readonly mirror: boolean;
}

function assemble({ version, options, ports, sets, noise, order, mirror }: Parts): TouchstoneNetwork {
  const { unit, parameter, format, resistances } = options;
  const line = sets[0].line;
  if ((parameter === 'G' || parameter === 'H') && ports !== 2)
    throw new TouchstoneError(line, `${parameter}-parameters of ${ports} ports`, 'two ports', 'use S, Y or Z');
  if (resistances.length !== 1 && resistances.length !== ports)
    throw new TouchstoneError(
      line,
      `${resistances.length} resistances for ${ports} ports`,
      'one, or one a port',
      'correct the resistances',
    );
  const reference = resistances.length === ports ? resistances : Array.from({ length: ports }, () => resistances[0]);
  const n = ports;
  const frequencies = new Float64Array(sets.length);
  const matrices = new Float64Array(2 * n * n * sets.length);
  sets.forEach(({ line: at, values }, f) => {
    if (values.length !== 1 + 2 * order.length)
      throw new TouchstoneError(
        at,
        `${(values.length - 1) / 2} pairs for this frequency`,
        `${order.length} of ${n} ${n === 1 ? 'port' : 'ports'}`,
        'add or remove what is wrong',
      );
    frequencies[f] = values[0];
    if (values[0] < 0 || (f > 0 && !(values[0] > frequencies[f - 1])))
      throw new TouchstoneError(
        at,
        `the frequency ${values[0]}${f > 0 ? ` after ${frequencies[f - 1]}` : ''}`,
        'increasing frequencies from 0 up',
        'sort the data',
      );
    order.forEach(([i, j], q) => {
      const { re, im } = fromPair(format, values[1 + 2 * q], values[2 + 2 * q]);
      for (const to of mirror ? [i + j * n, j + i * n] : [i + j * n]) {
        matrices[2 * (to + n * n * f)] = re;
        matrices[2 * (to + n * n * f) + 1] = im;
      }
    });
  });
  noise.forEach(({ line: at, values }, i) => {
    if (values.length !== 5)
      throw new TouchstoneError(at, `${values.length} numbers`, 'five numbers of noise', 'sort the data by frequency');
    if (i > 0 && !(values[0] > noise[i - 1].values[0]))
      throw new TouchstoneError(at, `the noise frequency ${values[0]}`, 'increasing ones', 'sort the data');
  });
  return {
    version,
    unit,
    parameter,
    format,
    ports,
    reference,
    frequencies,
    matrices,
    noise: noise.map(({ values }) => values),
  };
}

/** Keywords of version 2 that are understood, in lower case. */
const KEYWORDS = [
  'version',
  'number of ports',
  'two-port data order',
  'number of frequencies',
  'number of noise frequencies',
  'reference',
  'matrix format',
  'begin information',
  'end information',
  'network data',
  'noise data',
  'end',
] as const;
type Keyword = (typeof KEYWORDS)[number];

interface Entry {
  readonly line: number;
  readonly value: string;
  /** Lines of data below it. */
  readonly data: Line[];
}

function readVersion2(lines: readonly Line[]): TouchstoneNetwork {
  const { entries, options } = keywordsOf(lines);
  const need = (keyword: Keyword, mend: string): Entry => {
    const entry = entries.get(keyword);
    if (entry) return entry;
    throw new TouchstoneError(lines[lines.length - 1].number, 'the end', `[${title(keyword)}]`, mend);
  };
  const version = need('version', 'begin with it');
  if (!/^2\.[01]$/.test(version.value))
    throw new TouchstoneError(version.line, `version ${version.value}`, '2.0 or 2.1', 'save the file as 2.0');
  if (!options) throw new TouchstoneError(version.line, 'no option line', 'a line that begins with #', 'add it below [Version]'); // prettier-ignore
  const ports = whole(need('number of ports', 'add it below the option line'), 1);
  const order = entries.get('two-port data order');
  if (ports === 2 && !order)
    need('two-port data order', 'two-ports need it: 12_21 (11 12 21 22) or 21_12 (11 21 12 22)');
  if (order && ports !== 2)
    throw new TouchstoneError(order.line, `it for ${ports} ports`, 'two ports', 'take the keyword out');
  if (order && !/^(12_21|21_12)$/.test(order.value))
    throw new TouchstoneError(order.line, order.value, '12_21 or 21_12', 'correct it');
  const count = need('number of frequencies', 'add it above [Network Data]');
  const format = entries.get('matrix format');
  const part = format ? /^(full|lower|upper)$/i.exec(format.value)?.[1].toLowerCase() : 'full';
  if (format && !part) throw new TouchstoneError(format.line, format.value, 'Full, Lower or Upper', 'correct it');
  const data = need('network data', 'put the data below it');
  need('end', 'end the file with it');
  const sets = setsOf(data.data, Infinity);
  if (sets.length !== whole(count, 1))
    throw new TouchstoneError(count.line, `${count.value} announced, ${sets.length} found`, 'as many as there are', 'correct the number'); // prettier-ignore
  const noise = setsOf(entries.get('noise data')?.data ?? [], Infinity);
  const noises = entries.get('number of noise frequencies');
  if (noises && noise.length !== whole(noises, 1))
    throw new TouchstoneError(noises.line, `${noises.value} announced, ${noise.length} found`, 'as many as there are', 'correct the number'); // prettier-ignore
  const reference = entries.get('reference');
  const resistances = reference
    ? [reference.value, ...reference.data.map((l) => l.text)]
        .join(' ')
        .split(/\s+/)
        .filter((w) => w !== '')
        .map((w) => positive(reference.line, w))
    : options.resistances;
  if (reference && resistances.length !== ports)
    throw new TouchstoneError(reference.line, `${resistances.length} resistances`, `${ports}, one a port`, 'correct it'); // prettier-ignore
  return assemble({
    version: 2,
    options: { ...options, resistances },
    ports,
    sets,
    noise,
    order: pairOrder(ports, order?.value === '21_12', part === 'lower' ? 'Lower' : part === 'upper' ? 'Upper' : 'Full'),
    mirror: part !== 'full',
  });
}

function keywordsOf(lines: readonly Line[]): { entries: Map<Keyword, Entry>; options: Options | null } {
  const entries = new Map<Keyword, Entry>();
  let options: Options | null = null;
  let open: Entry | null = null;
  let informing = false;
  for (const line of lines) {
    const match = /^\[([^\]]*)\]\s*(.*)$/.exec(line.text);
    const name = match?.[1].trim().replaceAll(/\s+/g, ' ').toLowerCase() ?? '';
    if (informing) {
      informing = name !== 'end information';
      continue;
    }
    if (entries.has('end'))
      throw new TouchstoneError(line.number, line.text.slice(0, 40), 'nothing after [End]', 'remove it');
    if (match) {
      const keyword = KEYWORDS.find((k) => k === name);
      if (!keyword)
        throw new TouchstoneError(
          line.number,
          `[${match[1]}]`,
          name === 'mixed-mode order'
            ? 'single-ended ports'
            : `one of ${KEYWORDS.map((k) => `[${title(k)}]`).join(' ')}`,
          name === 'mixed-mode order' ? 'save the file with single-ended ports' : 'correct the keyword',
        );
      if (entries.has(keyword))
        throw new TouchstoneError(line.number, `a second [${match[1]}]`, 'it once', 'remove one');
      if (keyword !== 'version' && keyword !== 'begin information' && !options)
        throw new TouchstoneError(line.number, `[${match[1]}]`, 'the option line (#) first', 'put it below [Version]');
      open = { line: line.number, value: match[2].trim(), data: [] };
      if (keyword === 'begin information') informing = true;
      else entries.set(keyword, open);
    } else if (line.text.startsWith('#')) options ??= readOptions(line);
    else if (open) open.data.push(line);
  }
  for (const [keyword, { data }] of entries)
    if (data.length > 0 && keyword !== 'network data' && keyword !== 'noise data' && keyword !== 'reference')
      throw new TouchstoneError(
        data[0].number,
        data[0].text.slice(0, 40),
        'a keyword',
        'put data below [Network Data]',
      );
  return { entries, options };
}

const title = (keyword: string): string => keyword.replaceAll(/(^|[ -])[a-z]/g, (c) => c.toUpperCase());

function whole({ line, value }: Entry, least: number): number {
  const n = /^\d+$/.test(value) ? Number(value) : NaN;
  if (n >= least) return n;
  throw new TouchstoneError(line, value === '' ? 'nothing' : value, `a whole number from ${least} up`, 'correct it');
}
