// How is a number written for a reader?

import type { RunRecord } from '../../src/results/format.ts';

type LengthUnit = RunRecord['device']['lengthUnit'];

const MINUS = '−';

/** `digits` significant digits, trailing zeros kept; powers of ten where plain figures would be long. */
export function figure(value: number, digits = 5): string {
  if (!Number.isFinite(value)) return '–';
  if (value === 0) return '0';
  const exponent = Number(value.toExponential(digits - 1).split('e')[1]);
  if (exponent < -3 || exponent >= Math.max(6, digits)) return powerOfTen(value, digits, exponent);
  return signed(value.toFixed(Math.max(0, digits - 1 - exponent)));
}

/** Value and uncertainty to the decimals that the uncertainty leaves standing: "4.12530 ± 0.00021". */
export function withError(value: number, error: number): string {
  if (!Number.isFinite(value)) return '–';
  if (!(error > 0) || !Number.isFinite(error)) return figure(value, 10);
  const largest = Math.max(Math.abs(value), error);
  const exponent = Math.floor(Math.log10(largest));
  const shift = exponent < -3 || exponent > 5 ? exponent : 0;
  const unit = 10 ** shift;
  // Two digits of the uncertainty; no more decimals than a double can hold.
  const decimals = Math.min(Math.max(0, 1 - Math.floor(Math.log10(error / unit))), 15);
  const tiny = error / unit < 10 ** -decimals;
  const bounds = `${signed((value / unit).toFixed(decimals))} ± ${tiny ? figure(error / unit, 2) : (error / unit).toFixed(decimals)}`;
  return shift === 0 ? bounds : `(${bounds}) × 10${superscript(shift)}`;
}

/** All digits of a double: the shortest text that reads back as the same number. */
export function fullFigure(value: number): string {
  const [mantissa, exponent] = String(value).split('e');
  return signed(mantissa) + (exponent ? ` × 10${superscript(Number(exponent))}` : '');
}

export const degrees = (radians: number, decimals = 0): string =>
  signed(((radians * 180) / Math.PI).toFixed(decimals)) + '°';

export const unitName = (unit: LengthUnit): string =>
  ({ none: '', um: 'µm', nm: 'nm', mm: 'mm', cm: 'cm', m: 'm' })[unit];

/** "/µm", or nothing when dimensionless. */
export const perUnit = (unit: LengthUnit): string => (unit === 'none' ? '' : `/${unitName(unit)}`);

/** The units that files write in plain letters, in proper ones. */
export const properUnit = (unit: string): string => unit.replace('um', 'µm').replace(/^1\//, '/');

/** Seconds with a prefix: "5.08 fs". */
export function seconds(value: number, digits = 3): string {
  const steps = ['s', 'ms', 'µs', 'ns', 'ps', 'fs', 'as'];
  const step = Math.min(steps.length - 1, Math.max(0, Math.ceil(-Math.log10(value) / 3 - 1e-9)));
  return `${figure(value * 1000 ** step, digits)} ${steps[step]}`;
}

/** Hertz with a prefix, and the uncertainty in the same unit. */
export function hertz(value: number, error: number): string {
  const steps = ['Hz', 'kHz', 'MHz', 'GHz', 'THz', 'PHz'];
  const step = Math.min(steps.length - 1, Math.max(0, Math.floor(Math.log10(value) / 3 + 1e-9)));
  return `${withError(value / 1000 ** step, error / 1000 ** step)} ${steps[step]}`;
}

/** About `wanted` round numbers (1, 2, 5 × 10ⁿ apart) between two bounds, with the decimals they need. */
export function roundSteps(
  low: number,
  high: number,
  wanted: number,
): { readonly at: number; readonly text: string }[] {
  const rough = Math.abs(high - low) / wanted;
  if (!(rough > 0) || !Number.isFinite(rough)) return [];
  const power = 10 ** Math.floor(Math.log10(rough));
  const step = power * (rough / power < 1.5 ? 1 : rough / power < 3.5 ? 2 : rough / power < 7.5 ? 5 : 10);
  const decimals = Math.min(15, Math.max(0, -Math.floor(Math.log10(step) + 1e-9)));
  const [from, to] = [Math.min(low, high), Math.max(low, high)];
  const steps = [];
  for (let i = Math.ceil(from / step - 1e-9); i * step <= to * (1 + 1e-12); i++)
    steps.push({ at: i * step, text: signed((i * step).toFixed(decimals)) });
  return steps;
}

/** The largest of 1, 2, 5 × 10ⁿ that is not above the bound. */
export function roundBelow(bound: number): number {
  const power = 10 ** Math.floor(Math.log10(bound));
  const lead = bound / power;
  return power * (lead >= 5 ? 5 : lead >= 2 ? 2 : 1);
}

/**
 * A plain-text sentence as it is printed on paper: powers of ten raised, µm, true minus signs before numbers, and no line
 * break between a number and its sign or unit.
 */
export function typeset(sentence: string): string {
  return sentence
    .replace(
      /(\d)e([+-]?\d+)/g,
      (_, digit: string, exponent: string) => `${digit} × 10${superscript(Number(exponent))}`,
    )
    .replace(/(?<=[\d /])um\b/g, 'µm')
    .replace(/(?<=^|[\s(])-(?=\d)/g, MINUS)
    .replace(/ (?=[=±×%∠])|(?<=[=±×∠]) |(?<=\d) (?=\/|(?:[µnmck]?m|[kMGTP]?Hz|[mk]?eV)(?![a-z]))/g, '\u00a0');
}

/** "−10⁻⁶" for a whole power of ten. */
export function decadeText(value: number): string {
  const exponent = Math.round(Math.log10(Math.abs(value)));
  return `${value < 0 ? MINUS : ''}10${superscript(exponent)}`;
}

function powerOfTen(value: number, digits: number, exponent: number): string {
  return `${signed((value / 10 ** exponent).toFixed(digits - 1))} × 10${superscript(exponent)}`;
}

function superscript(exponent: number): string {
  return [...String(exponent)].map((c) => (c === '-' ? '⁻' : '⁰¹²³⁴⁵⁶⁷⁸⁹'[Number(c)])).join('');
}

/** A true minus, and none before a zero. */
function signed(text: string): string {
  return /^-0(\.0*)?$/.test(text) ? text.slice(1) : text.replace('-', MINUS);
}
