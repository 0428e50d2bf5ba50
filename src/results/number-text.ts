// How is a number written with its uncertainty?

/**
 * The value to the last digit that the error leaves standing, with the error to one or two figures:
 * "5.970516 ± 1e-6", "0.0092002 ± 3e-7". An error of 0 or beyond double precision gives 12 figures.
 */
export function withError(value: number, error: number): string {
  return `${toError(value, error)} ± ${errorText(error)}`;
}

/** The value alone, to the digits its error leaves. */
export function toError(value: number, error: number): string {
  if (!Number.isFinite(value)) return String(value);
  if (!(error > 0) || !Number.isFinite(error)) return significant(value, 12);
  const last = Math.floor(Math.log10(error));
  const first = value === 0 ? last : Math.floor(Math.log10(Math.abs(value)));
  const figures = Math.max(1, Math.min(15, first - last + 1));
  return significant(value, figures);
}

/** One figure, rounded up: an error is never made to look smaller. */
export function errorText(error: number): string {
  if (!(error > 0)) return '0';
  if (!Number.isFinite(error)) return '?';
  const power = Math.floor(Math.log10(error));
  const up = Math.ceil(error / 10 ** power - 1e-9);
  const exponent = up === 10 ? power + 1 : power;
  const digit = up === 10 ? 1 : up;
  if (exponent < -5 || exponent > 3) return `${digit}e${exponent}`;
  return exponent >= 0 ? String(digit * 10 ** exponent) : (digit * 10 ** exponent).toFixed(-exponent);
}

/** Fixed notation where it is short, else exponential, always with that many figures. */
export function significant(value: number, figures: number): string {
  if (value === 0 || !Number.isFinite(value)) return String(value);
  const power = Math.floor(Math.log10(Math.abs(value)));
  if (power < -5 || power > 7) return value.toExponential(figures - 1);
  return value.toFixed(Math.max(0, Math.min(20, figures - 1 - power)));
}
