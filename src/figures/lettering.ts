// How are letters drawn where there is no font?

/**
 * A stroke alphabet of our own: each letter is a few lines and arcs of one pen. Grid: baseline 0, x-height 10, capitals
 * and figures 14, ascenders 15, descenders −4; an em is 20. All figures are 9 wide, so that columns of them align.
 *
 * `M x y` lifts the pen and moves, `L x y` draws, `C` draws a cubic (two handles, end), `A cx cy rx ry from to` draws an
 * arc by angles in degrees (joined to the pen if it is down), `O cx cy rx ry` an ellipse, `D x y` a dot.
 */
const LETTERS: Readonly<Record<string, readonly [width: number, strokes: string]>> = {
  ' ': [3, ''],
  A: [12, 'M0 0L6 14L12 0M2 4.6L10 4.6'],
  B: [10, 'M5.5 7.3L0 7.3M0 0L0 14L5.5 14A5.5 10.65 3.5 3.35 90 -90M5.5 7.3A6 3.65 4 3.65 90 -90L0 0'],
  C: [10.6, 'A6.6 7 6.6 7 52 308'],
  D: [11, 'M0 0L0 14L4.5 14A4.5 7 6.5 7 90 -90L0 0'],
  E: [8.6, 'M8.6 14L0 14L0 0L8.6 0M0 7.4L7.4 7.4'],
  F: [8.4, 'M8.4 14L0 14L0 0M0 7.2L7.2 7.2'],
  G: [12, 'A6.6 7 6.6 7 52 327L12.1 7L7.6 7'],
  H: [11, 'M0 0L0 14M11 0L11 14M0 7.3L11 7.3'],
  I: [0, 'M0 0L0 14'],
  J: [7, 'M7 14L7 4A3.5 4 3.5 4 0 -165'],
  K: [10, 'M0 0L0 14M9.6 14L0 4.8M3.6 8.2L10 0'],
  L: [8, 'M0 14L0 0L8 0'],
  M: [13, 'M0 0L0 14L6.5 4L13 14L13 0'],
  N: [11, 'M0 0L0 14L11 0L11 14'],
  O: [13.6, 'O6.8 7 6.8 7'],
  P: [9.6, 'M0 0L0 14L5.8 14A5.8 10.2 3.8 3.8 90 -90L0 6.4'],
  Q: [13.6, 'O6.8 7 6.8 7M8.4 3.4L12.8 -1'],
  R: [10, 'M0 0L0 14L5.8 14A5.8 10.2 3.8 3.8 90 -90L0 6.4M5.2 6.4L10 0'],
  S: [
    9.4,
    'M8.9 11.6C8.2 13.2 6.8 14 4.8 14C2.2 14 .5 12.6 .5 10.6C.5 8.4 2.3 7.7 4.7 7.1C7.3 6.5 9.3 5.7 9.3 3.5C9.3 1.4 7.5 0 4.8 0C2.4 0 .8 .9 0 2.6',
  ],
  T: [11, 'M5.5 0L5.5 14M0 14L11 14'],
  U: [10.6, 'M0 14L0 5.2A5.3 5.2 5.3 5.2 180 360L10.6 14'],
  V: [12, 'M0 14L6 0L12 14'],
  W: [17, 'M0 14L4.2 0L8.5 13L12.8 0L17 14'],
  X: [11, 'M0 14L11 0M11 14L0 0'],
  Y: [11, 'M0 14L5.5 7L11 14M5.5 7L5.5 0'],
  Z: [10, 'M0 14L10 14L0 0L10 0'],
  a: [8, 'O4 5 4 5M8 10L8 0'],
  b: [8, 'O4 5 4 5M0 15L0 0'],
  c: [7.4, 'A4.3 5 4.3 5 50 310'],
  d: [8, 'O4 5 4 5M8 15L8 0'],
  e: [8.4, 'M0 5.3L8.4 5.3A4.2 5.1 4.2 5.1 2 312'],
  f: [5.4, 'M2 0L2 11.8A5 11.8 3 3.2 180 80M0 10L5 10'],
  g: [8, 'O4 5 4 5M8 10L8 -.6A4 -.6 4 3.6 0 -148'],
  h: [8, 'M0 15L0 0M0 6A4 6 4 4 180 0L8 0'],
  i: [0, 'M0 10L0 0D0 13.8'],
  j: [2.4, 'M2.4 10L2.4 -1.6A-.2 -1.6 2.6 2.4 0 -95D2.4 13.8'],
  k: [7.6, 'M0 15L0 0M7.2 10L0 3.4M2.8 6L7.6 0'],
  l: [2, 'M0 15L0 2.2A2.2 2.2 2.2 2.2 180 265'],
  m: [13.2, 'M0 10L0 0M0 6.5A3.3 6.5 3.3 3.5 180 0L6.6 0M6.6 6.5A9.9 6.5 3.3 3.5 180 0L13.2 0'],
  n: [8, 'M0 10L0 0M0 6A4 6 4 4 180 0L8 0'],
  o: [8.6, 'O4.3 5 4.3 5'],
  p: [8, 'O4 5 4 5M0 10L0 -4'],
  q: [8, 'O4 5 4 5M8 10L8 -4'],
  r: [5, 'M0 10L0 0M0 5.8A4.2 5.8 4.2 4.2 180 78'],
  s: [
    6.8,
    'M6.5 8.2C6 9.4 5 10 3.5 10C1.6 10 .4 9 .4 7.5C.4 6 1.7 5.5 3.4 5.1C5.3 4.7 6.8 4.1 6.8 2.5C6.8 1 5.5 0 3.5 0C1.7 0 .5 .7 0 2',
  ],
  t: [5.2, 'M2 13.4L2 3A5 3 3 3 180 270M0 10L5 10'],
  u: [8, 'M0 10L0 4A4 4 4 4 180 360M8 10L8 0'],
  v: [8, 'M0 10L4 0L8 10'],
  w: [12.8, 'M0 10L3.2 0L6.4 9.4L9.6 0L12.8 10'],
  x: [7.6, 'M0 10L7.6 0M7.6 10L0 0'],
  y: [8.2, 'M0 10L4.1 0M8.2 10L3.3 -2.4C2.8 -3.6 2 -4 .6 -3.9'],
  z: [7, 'M0 10L7 10L0 0L7 0'],
  '0': [9, 'O4.5 7 4.5 7'],
  '1': [9, 'M1.6 11.3L5.2 14L5.2 0'],
  '2': [9, 'M.7 10.7C.9 12.8 2.4 14 4.6 14C6.9 14 8.4 12.7 8.4 10.6C8.4 8.9 7.4 7.5 5.8 5.9L.2 0L9 0'],
  '3': [
    9,
    'M.9 11.7C1.4 13.2 2.7 14 4.5 14C6.7 14 8.2 12.7 8.2 10.7C8.2 8.6 6.6 7.4 4.4 7.4L3.2 7.4M4.4 7.4C7 7.4 8.8 6 8.8 3.8C8.8 1.5 7 0 4.5 0C2.4 0 .9 1 .3 2.8',
  ],
  '4': [9, 'M6.6 0L6.6 14L0 4.2L9 4.2'],
  '5': [9, 'M8.1 14L1.8 14L1 7.7C1.9 8.5 3.1 8.9 4.4 8.9C7 8.9 8.8 7.1 8.8 4.5C8.8 1.8 6.9 0 4.3 0C2.3 0 .9 .9 .2 2.5'],
  '6': [9, 'O4.5 4.4 4.3 4.4M7.9 12.2C7.2 13.4 6.2 14 5 14C2 14 .2 11 .2 4.6'],
  '7': [9, 'M0 14L9 14L3.4 0'],
  '8': [9, 'O4.5 10.65 3.6 3.35O4.5 3.65 4.3 3.65'],
  '9': [9, 'O4.5 9.6 4.3 4.4M1.1 1.8C1.8 .6 2.8 0 4 0C7 0 8.8 3 8.8 9.4'],
  '.': [0, 'D0 .6'],
  ',': [0.8, 'M.8 .8L-.2 -2.6'],
  ':': [0, 'D0 1D0 8.6'],
  ';': [0.8, 'D.8 8.6M.8 .8L-.2 -2.6'],
  '!': [0, 'M0 14L0 4.2D0 .6'],
  '?': [7.4, 'M.3 11.2C.6 13 2 14 3.9 14C6 14 7.4 12.7 7.4 10.8C7.4 8 3.7 7.8 3.7 4.4D3.7 .6'],
  '-': [5, 'M0 5.2L5 5.2'],
  '−': [9, 'M0 6L9 6'],
  '–': [9, 'M0 5.2L9 5.2'],
  '—': [15, 'M0 5.2L15 5.2'],
  '+': [9, 'M0 6L9 6M4.5 1.5L4.5 10.5'],
  '±': [9, 'M0 7.6L9 7.6M4.5 3.4L4.5 11.8M0 .4L9 .4'],
  '×': [8, 'M.6 2.4L7.4 9.2M7.4 2.4L.6 9.2'],
  '·': [0, 'D0 5.6'],
  '=': [9, 'M0 8L9 8M0 4L9 4'],
  '≈': [9, 'M0 8C2.2 10.4 3.6 9 4.5 8.2C5.6 7.2 7 6.4 9 8.6M0 3.6C2.2 6 3.6 4.6 4.5 3.8C5.6 2.8 7 2 9 4.2'],
  '<': [8, 'M8 11L0 6L8 1'],
  '>': [8, 'M0 11L8 6L0 1'],
  '≤': [8, 'M8 12L0 7.4L8 2.8M0 0L8 0'],
  '≥': [8, 'M0 12L8 7.4L0 2.8M0 0L8 0'],
  '/': [6.4, 'M0 -1.6L6.4 15'],
  '\\': [6.4, 'M6.4 -1.6L0 15'],
  '|': [0, 'M0 -3L0 16'],
  '(': [3.2, 'A9.6 6.2 9.6 12 140 220'],
  ')': [3.2, 'A-6.4 6.2 9.6 12 40 -40'],
  '[': [3.4, 'M3.4 16L0 16L0 -3.4L3.4 -3.4'],
  ']': [3.4, 'M0 16L3.4 16L3.4 -3.4L0 -3.4'],
  '{': [4.6, 'M4.6 16C1 16 2.6 11 2.2 8.4C2 7 1.2 6.4 0 6.3C1.2 6.2 2 5.6 2.2 4.2C2.6 1.6 1 -3.4 4.6 -3.4'],
  '}': [4.6, 'M0 16C3.6 16 2 11 2.4 8.4C2.6 7 3.4 6.4 4.6 6.3C3.4 6.2 2.6 5.6 2.4 4.2C2 1.6 3.6 -3.4 0 -3.4'],
  _: [9, 'M0 -2.4L9 -2.4'],
  '%': [13, 'O2.9 10.8 2.9 3.2O10.1 3.2 2.9 3.2M11 14L2 0'],
  '&': [
    11.4,
    'M11.4 0L3.3 9.2C2 10.6 2 12 2.6 12.9C3.6 14.4 6.6 14.4 7.3 12.3C8 9.6 .2 8.4 .2 4C.2 1.4 2.2 0 4.6 0C7.6 0 10 2.4 10.6 6.6',
  ],
  '#': [11, 'M3 0L5 14M7 0L9 14M.6 9.4L11 9.4M0 4.6L10.4 4.6'],
  '@': [
    15,
    'O7.4 5.4 2.9 3.4M10.3 8.8L10.3 3.8C10.6 1.4 14.6 1.6 14.6 6C14.6 10.6 11.6 13.4 7.6 13.4C3.2 13.4 0 10 0 5.4C0 .6 3.4 -2.4 7.8 -2.4C9.6 -2.4 11 -2 12.2 -1.4',
  ],
  $: [
    9.4,
    'M8.9 11.2C8.2 12.6 6.8 13.3 4.8 13.3C2.2 13.3 .5 12 .5 10.2C.5 8.2 2.3 7.6 4.7 7C7.3 6.4 9.3 5.7 9.3 3.7C9.3 1.8 7.5 .6 4.8 .6C2.4 .6 .8 1.4 0 3M4.7 15.4L4.7 -1.4',
  ],
  '*': [7, 'M3.5 15L3.5 8M.5 13.2L6.5 9.8M6.5 13.2L.5 9.8'],
  "'": [0, 'M0 15L0 11'],
  '’': [0.8, 'M.8 14.8L0 11.4'],
  '‘': [0.8, 'M0 14.8L.8 11.4'],
  '"': [3.4, 'M0 15L0 11M3.4 15L3.4 11'],
  '“': [4.2, 'M0 14.8L.8 11.4M3.4 14.8L4.2 11.4'],
  '”': [4.2, 'M.8 14.8L0 11.4M4.2 14.8L3.4 11.4'],
  '^': [8, 'M0 9.6L4 14L8 9.6'],
  '~': [9, 'M0 5.2C2.2 7.8 3.6 6.6 4.5 5.6C5.6 4.4 7 3.6 9 6'],
  '`': [2, 'M0 15L2 12.2'],
  '°': [4.8, 'O2.4 12.2 2.4 2.4'],
  µ: [8, 'M0 10L0 -4M0 4A4 4 4 4 180 360M8 10L8 0'],
  λ: [8, 'M0 15C3.6 15 2.8 11.6 8 0M3.9 8.4L0 0'],
  ε: [
    6.4,
    'M6.2 8.6C5.6 9.6 4.8 10 3.6 10C1.8 10 .6 9 .6 7.6C.6 6.2 1.6 5.4 3.4 5.3C1.4 5.2 0 4.3 0 2.7C0 1.1 1.5 0 3.6 0C4.9 0 5.8 .4 6.4 1.4',
  ],
  π: [9, 'M0 10L9 10M2.4 10L2.4 0M6.8 10L6.8 2A8.4 2 1.6 2 180 265'],
  ω: [11, 'M2 10C-.4 7 -.6 0 2.8 0C4.6 0 5.5 1.6 5.5 4.4L5.5 6.4M9 10C11.4 7 11.6 0 8.2 0C6.4 0 5.5 1.6 5.5 4.4'],
  φ: [10, 'M3.4 9.8C1.2 9 0 7 0 4.8C0 1.6 2.2 0 5 0C7.8 0 10 1.6 10 5C10 8 8.8 10 7.2 10C5.6 10 5 8.6 5 6.4L5 -4'],
  Δ: [12, 'M0 0L6 14L12 0L0 0'],
  '∞': [
    13,
    'M6.5 6C5 3.6 4 3 2.8 3C1.2 3 0 4.2 0 6C0 7.8 1.2 9 2.8 9C4 9 5 8.4 6.5 6C8 3.6 9 3 10.2 3C11.8 3 13 4.2 13 6C13 7.8 11.8 9 10.2 9C9 9 8 8.4 6.5 6',
  ],
  '→': [13, 'M0 6L13 6M8.6 10L13 6L8.6 2'],
  '…': [8, 'D0 .6D4 .6D8 .6'],
  '○': [8, 'O4 5 4 4'],
};

/** Letters drawn as others, and figures raised or lowered at 0.62 of their size. */
const ALIKE: Readonly<Record<string, string>> = { μ: 'µ', '\u00a0': ' ', '‐': '-', '‑': '-' };
const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹⁺⁻';
const LOWERED = '₀₁₂₃₄₅₆₇₈₉₊₋';
const SMALL = '0123456789+−';

/** Marks over the letter before: centred there, no width of their own. */
const ACCENTS: Readonly<Record<string, string>> = {
  '\u0300': 'M-1 15L1 12.4',
  '\u0301': 'M-1 12.4L1 15',
  '\u0302': 'M-2.4 12.4L0 14.6L2.4 12.4',
  '\u0303': 'M-2.6 12.8C-1.4 14.6 0 13.8 0 13.6C.6 12.8 1.6 12.4 2.6 14.2',
  '\u0308': 'D-2.2 13.8D2.2 13.8',
  '\u030a': 'O0 14 1.5 1.5',
};

/** What cannot be drawn shows as an empty box. */
const UNKNOWN: readonly [number, string] = [8, 'M0 0L8 0L8 14L0 14L0 0'];

const EM = 20;
/** Space between letters, grid units. */
const GAP = 3.4;

export interface Lettering {
  /** Open polylines [x0,y0,…], y down, baseline at 0, starting at x = 0; to be stroked with a round pen. */
  readonly lines: readonly Float64Array[];
  /** Width of the whole, in the unit of `size`. */
  readonly width: number;
}

/** The text as pen strokes at the given em. */
export function letterLines(text: string, size: number): Lettering {
  const unit = size / EM;
  const lines: Float64Array[] = [];
  let x = 0;
  let before = 0;
  for (const letter of text.normalize('NFD')) {
    const accent = ACCENTS[letter];
    if (accent !== undefined) {
      place(lines, accent, x - GAP - before / 2, 0, unit);
      continue;
    }
    if (/\p{M}/u.test(letter)) continue;
    const { width, strokes, scale, rise } = glyphOf(letter);
    place(lines, strokes, x, rise, unit, scale);
    x += width * scale + GAP;
    before = width * scale;
  }
  return { lines, width: letterWidth(text, size) };
}

/** Width of the text at the given em, without drawing it. */
export function letterWidth(text: string, size: number): number {
  let x = 0;
  for (const letter of text.normalize('NFD')) {
    if (/\p{M}/u.test(letter)) continue;
    const { width, scale } = glyphOf(letter);
    x += width * scale + GAP;
  }
  return (Math.max(0, x - GAP) * size) / EM;
}

function glyphOf(letter: string): { width: number; strokes: string; scale: number; rise: number } {
  for (const [row, rise] of [
    [RAISED, 6.6],
    [LOWERED, -3],
  ] as const) {
    const at = row.indexOf(letter);
    if (at < 0) continue;
    const [width, strokes] = LETTERS[SMALL[at]];
    return { width, strokes, scale: 0.62, rise };
  }
  const [width, strokes] = LETTERS[ALIKE[letter] ?? letter] ?? UNKNOWN;
  return { width, strokes, scale: 1, rise: 0 };
}

/** Adds the strokes of one glyph with its origin at (x, rise) of the grid. */
function place(lines: Float64Array[], strokes: string, x: number, rise: number, unit: number, scale = 1): void {
  for (const line of penLines(strokes)) {
    const placed = new Float64Array(line.length);
    for (let i = 0; i < line.length; i += 2) {
      placed[i] = (x + line[i] * scale) * unit;
      placed[i + 1] = -(rise + line[i + 1] * scale) * unit;
    }
    lines.push(placed);
  }
}

const drawn = new Map<string, readonly (readonly number[])[]>();

/** Strokes to polylines on the grid, y up; remembered. */
function penLines(strokes: string): readonly (readonly number[])[] {
  const known = drawn.get(strokes);
  if (known) return known;
  const lines: number[][] = [];
  let pen: number[] = [];
  for (const [, order, list] of strokes.matchAll(/([MLCAOD])([^MLCAOD]*)/g)) {
    const n = list.trim().split(/[\s]+/).map(Number);
    if (order === 'M') lines.push((pen = [n[0], n[1]]));
    else if (order === 'L') pen.push(n[0], n[1]);
    else if (order === 'C') addCubic(pen, n);
    else if (order === 'D') lines.push((pen = [n[0] - 0.25, n[1], n[0] + 0.25, n[1]]));
    else {
      const [from, to] = order === 'O' ? [0, 360] : [n[4], n[5]];
      if (order === 'O' || pen.length === 0) lines.push((pen = []));
      addArc(pen, n, from, to);
      if (order === 'O') pen = [];
    }
  }
  drawn.set(strokes, lines);
  return lines;
}

function addCubic(pen: number[], [x1, y1, x2, y2, x3, y3]: number[]): void {
  const [x0, y0] = pen.slice(-2);
  const steps = 12;
  for (let i = 1; i <= steps; i++) {
    const t = i / steps;
    const s = 1 - t;
    pen.push(
      s * s * s * x0 + 3 * s * s * t * x1 + 3 * s * t * t * x2 + t * t * t * x3,
      s * s * s * y0 + 3 * s * s * t * y1 + 3 * s * t * t * y2 + t * t * t * y3,
    );
  }
}

function addArc(pen: number[], [cx, cy, rx, ry]: number[], from: number, to: number): void {
  const steps = Math.max(2, Math.ceil(Math.abs(to - from) / 11));
  for (let i = 0; i <= steps; i++) {
    const angle = ((from + ((to - from) * i) / steps) * Math.PI) / 180;
    pen.push(cx + rx * Math.cos(angle), cy + ry * Math.sin(angle));
  }
}
