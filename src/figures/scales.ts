// Where do ticks stand, how long is a scale bar, and how are numbers written on a figure?

/** Round step (1, 2 or 5 times a power of ten) that cuts the span into about `count` pieces. */
export function roundStep(span: number, count: number): number {
  const rough = span / count;
  const power = 10 ** Math.floor(Math.log10(rough));
  const lead = rough / power;
  return (lead < 1.5 ? 1 : lead < 3.5 ? 2 : lead < 7.5 ? 5 : 10) * power;
}

/** Round numbers within [low, high], about `count` of them. */
export function ticksIn(low: number, high: number, count: number): number[] {
  if (!(high > low)) return [];
  const step = roundStep(high - low, count);
  const ticks: number[] = [];
  // Multiples of the step, made by multiplication so that 0.1 + 0.2 never shows.
  for (let i = Math.ceil(low / step - 1e-9); i <= high / step + 1e-9; i++) ticks.push(i * step);
  return ticks;
}

/** The longest round length that is not longer than `limit`. */
export function roundLength(limit: number): number {
  const power = 10 ** Math.floor(Math.log10(limit));
  return ([5, 2, 1].find((lead) => lead * power <= limit * (1 + 1e-9)) ?? 1) * power;
}

/** A tick's number to the digits its step needs; a true minus sign. */
export function tickText(value: number, step: number): string {
  if (Math.abs(value) < step * 1e-6) return '0';
  const digits = Math.max(0, -Math.floor(Math.log10(step) + 1e-9));
  if (digits > 6 || Math.abs(value) >= 1e6) return numberText(value, 3);
  return withMinus(value.toFixed(digits));
}

/** A number to `digits` significant digits, powers of ten written out: 3.2×10⁻⁷. */
export function numberText(value: number, digits: number): string {
  if (!Number.isFinite(value)) return Number.isNaN(value) ? '–' : value > 0 ? '∞' : '−∞';
  const size = Math.abs(value);
  if (value === 0 || (size >= 1e-3 && size < 1e6)) return withMinus(String(Number(value.toPrecision(digits))));
  const [lead, power] = value.toExponential(digits - 1).split('e');
  const trimmed = lead.includes('.') ? lead.replace(/\.?0+$/, '') : lead;
  const raised = raisedText(Number(power));
  return withMinus(trimmed === '1' ? `10${raised}` : trimmed === '-1' ? `-10${raised}` : `${trimmed}×10${raised}`);
}

/** A complex value with its error, to the error's first two digits: 4.12531 − 0.00210i ± 0.00012. */
export function withErrorText(value: readonly [re: number, im: number], error: number): string {
  const known = error > 0 && Number.isFinite(error);
  // Twelve digits are all a figure holds; a smaller error is written as a power of ten.
  const digits = known ? Math.min(12, Math.max(0, 1 - Math.floor(Math.log10(error)))) : 6;
  const write = (x: number): string => withMinus(x.toFixed(digits));
  const imaginary = value[1] === 0 ? '' : ` ${value[1] < 0 ? '−' : '+'} ${write(Math.abs(value[1]))}i`;
  const plain = digits <= 5 ? error.toFixed(digits) : numberText(error, 2);
  return write(value[0]) + imaginary + (known ? ` ± ${plain}` : '');
}

/** 'µm' for 'um', '' for 'none'. */
export const unitText = (unit: string): string => (unit === 'none' ? '' : unit.replace(/\bum\b/, 'µm'));

/** 'k (1/µm)', or 'k' without a unit. */
export const labelText = (name: string, unit: string): string => (unit === '' ? name : `${name} (${unit})`);

const RAISED = '⁰¹²³⁴⁵⁶⁷⁸⁹';

/** Exponent in raised figures. */
export const raisedText = (power: number): string =>
  (power < 0 ? '⁻' : '') + [...String(Math.abs(power))].map((d) => RAISED[Number(d)]).join('');

const withMinus = (text: string): string => text.replace(/^-/, '−');
