// Which colours do figures and pages draw with?

export type Theme = 'light' | 'dark';

/** Plain drawing colours of one theme, '#rrggbb'. */
export interface Palette {
  /** The page itself; also the zero of the diverging map and of the sequential one. */
  readonly ground: string;
  /** A little off the ground: bodies in an outline drawing. */
  readonly shade: string;
  /** Hairlines: ticks, mesh edges. */
  readonly faint: string;
  /** Secondary text. */
  readonly muted: string;
  /** Text, outlines, marks. */
  readonly ink: string;
  /** The one accent: what is chosen, active, crossing. */
  readonly accent: string;
}

export const PALETTES: Readonly<Record<Theme, Palette>> = {
  light: { ground: '#f7f2e8', shade: '#ece4d4', faint: '#d3c8b4', muted: '#766b5b', ink: '#29241d', accent: '#a8285e' },
  dark: { ground: '#1c1a17', shade: '#292520', faint: '#453f37', muted: '#a0947f', ink: '#ece4d6', accent: '#ee7aa6' },
};

/** Entries of a colour map: odd, so that the middle one (number 128) stands for zero exactly. */
export const MAP_ENTRIES = 257;

/** sRGB bytes [r0, g0, b0, r1, …], 3 × MAP_ENTRIES, from the low end to the high one. */
export type ColourMap = Uint8Array;

// Hue angles (degrees in OKLab) that brown and teal keep from pale to dark. They lie on opposite sides of the
// blue–yellow axis, the one that red–green colour blindness leaves alone.
const BROWN = 62;
const TEAL = 202;

/** Signed fields: brown below zero, the page's ground at zero, teal above; even steps in OKLab, both arms alike. */
export function divergingMap(theme: Theme): ColourMap {
  const ground = oklabOf(PALETTES[theme].ground);
  const end = theme === 'light' ? 0.36 : 0.84;
  return sampleMap((t) => {
    const s = Math.abs(2 * t - 1);
    const hue = ((t < 0.5 ? BROWN : TEAL) * Math.PI) / 180;
    return fade(ground, [end, 0.066 * Math.cos(hue), 0.066 * Math.sin(hue)], s, 0.04, hue);
  });
}

/** Intensities: from the ground through amber and rose to a deep (light theme) or pale (dark theme) plum. */
export function sequentialMap(theme: Theme): ColourMap {
  const ground = oklabOf(PALETTES[theme].ground);
  const end = theme === 'light' ? 0.27 : 0.9;
  return sampleMap((t) => {
    const hue = ((theme === 'light' ? 75 - 115 * t : -40 + 115 * t) * Math.PI) / 180;
    const chroma = 0.125 * Math.sin(Math.PI * Math.min(1, 0.08 + 0.8 * t)) * Math.min(1, 6 * t);
    const stay = Math.max(0, 1 - 6 * t);
    return [
      ground[0] + t * (end - ground[0]),
      stay * ground[1] + chroma * Math.cos(hue),
      stay * ground[2] + chroma * Math.sin(hue),
    ];
  });
}

/**
 * Phases: a closed loop, first and last entry alike. Pale at 0, teal at 90°, dark at 180°, brown at 270°; an ellipse in
 * the plane of lightness and the brown–teal axis, walked at an even pace.
 */
export function cyclicMap(theme: Theme): ColourMap {
  const [middle, reach] = theme === 'light' ? [0.63, 0.27] : [0.57, 0.3];
  const axis = (((TEAL + BROWN + 180) / 2) * Math.PI) / 180;
  const width = 0.1;
  const pace = evenPace((w) => Math.hypot(reach * Math.sin(w), width * Math.cos(w)));
  return sampleMap((t) => {
    const w = pace(t);
    const c = width * Math.sin(w);
    return [middle + reach * Math.cos(w), c * Math.cos(axis), c * Math.sin(axis)];
  });
}

/** Colour of the map at t ∈ [0, 1] (clamped), linear between entries, as bytes. */
export function colourAt(map: ColourMap, t: number): [red: number, green: number, blue: number] {
  const s = Math.min(1, Math.max(0, t)) * (MAP_ENTRIES - 1);
  const i = Math.min(MAP_ENTRIES - 2, Math.floor(s));
  const f = s - i;
  const at = (c: number): number => Math.round(map[3 * i + c] * (1 - f) + map[3 * i + 3 + c] * f);
  return [at(0), at(1), at(2)];
}

/** '#rrggbb' to bytes. */
export function bytesOf(colour: string): [red: number, green: number, blue: number] {
  const n = Number.parseInt(colour.slice(1), 16);
  return [n >> 16, (n >> 8) & 255, n & 255];
}

/** Bytes to '#rrggbb'. */
export const hexOf = (rgb: readonly number[]): string => '#' + rgb.map((b) => b.toString(16).padStart(2, '0')).join('');

type Lab = readonly [lightness: number, a: number, b: number];

/** Straight from `from` to `to`, bowed outward along `hue` by `bow`: the middle of an arm is the most colourful. */
function fade(from: Lab, to: Lab, s: number, bow: number, hue: number): Lab {
  const more = bow * 4 * s * (1 - s);
  return [
    from[0] + s * (to[0] - from[0]),
    from[1] + s * (to[1] - from[1]) + more * Math.cos(hue),
    from[2] + s * (to[2] - from[2]) + more * Math.sin(hue),
  ];
}

function sampleMap(colour: (t: number) => Lab): ColourMap {
  const map = new Uint8Array(3 * MAP_ENTRIES);
  for (let i = 0; i < MAP_ENTRIES; i++) map.set(srgbOf(colour(i / (MAP_ENTRIES - 1))), 3 * i);
  return map;
}

/** t ∈ [0, 1] to the angle where the share t of the loop's length has been walked (midpoint rule, 2048 steps). */
function evenPace(speed: (angle: number) => number): (t: number) => number {
  const n = 2048;
  const walked = new Float64Array(n + 1);
  for (let i = 0; i < n; i++) walked[i + 1] = walked[i] + speed((2 * Math.PI * (i + 0.5)) / n);
  return (t) => {
    const goal = t * walked[n];
    let i = 0;
    while (i < n - 1 && walked[i + 1] < goal) i++;
    return (2 * Math.PI * (i + (goal - walked[i]) / (walked[i + 1] - walked[i]))) / n;
  };
}

// OKLab, B. Ottosson, "A perceptual color space for image processing" (2020); matrices from memory, the round trip and
// the white point are tested.

/** '#rrggbb' to OKLab. */
export function oklabOf(colour: string): Lab {
  const [r, g, b] = bytesOf(colour).map((v) => {
    const c = v / 255;
    return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4;
  }) as [number, number, number];
  const l = Math.cbrt(0.4122214708 * r + 0.5363325363 * g + 0.0514459929 * b);
  const m = Math.cbrt(0.2119034982 * r + 0.6806995451 * g + 0.1073969566 * b);
  const s = Math.cbrt(0.0883024619 * r + 0.2817188376 * g + 0.6299787005 * b);
  return [
    0.2104542553 * l + 0.793617785 * m - 0.0040720468 * s,
    1.9779984951 * l - 2.428592205 * m + 0.4505937099 * s,
    0.0259040371 * l + 0.7827717662 * m - 0.808675766 * s,
  ];
}

/** OKLab to sRGB bytes; what lies outside the gamut loses chroma until it fits. */
function srgbOf([lightness, a, b]: Lab): [number, number, number] {
  for (let keep = 1; ; keep -= 0.02) {
    const rgb = linearOf([lightness, a * keep, b * keep]);
    if (keep <= 0 || rgb.every((c) => c >= -1e-6 && c <= 1 + 1e-6)) {
      return rgb.map((c) => Math.round(255 * companded(Math.min(1, Math.max(0, c))))) as [number, number, number];
    }
  }
}

function linearOf([lightness, a, b]: Lab): [number, number, number] {
  const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
  const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
  const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
  return [
    4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
    -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
    -0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s,
  ];
}

/** Linear light to the sRGB curve (IEC 61966-2-1). */
const companded = (c: number): number => (c <= 0.0031308 ? 12.92 * c : 1.055 * c ** (1 / 2.4) - 0.055);
