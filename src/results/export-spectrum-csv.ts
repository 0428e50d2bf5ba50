// How do S-parameters leave as CSV?

import { column, type Cell, csvText } from './csv.ts';
import type { RunView } from './run-view.ts';
import { spectrumView } from './spectrum-view.ts';

/**
 * One row a point: wavenumber, wavelength, frequency, real and imaginary part of every S(out, in) under exp(−iωt) between
 * the channels chosen (all if absent), the error of the entries, the power that each input loses to the device, and the
 * balance; of a projected model also its certified error, the extremes of absorption, the delay, what was asked for
 * beside, and whether the point was added to resolve a resonance.
 *
 * @throws when the run holds no S-matrix, or not such a channel.
 */
export function spectrumTableCsv(run: RunView, chosen?: readonly string[]): string {
  const { channels, points, matrix } = spectrumView(run);
  const own = (chosen ?? channels).map((name) => {
    const i = channels.indexOf(name);
    if (i < 0) throw new Error(`channel ${name}: expected one of ${channels.join(', ')}`);
    return i;
  });
  const n = channels.length;
  const unit = run.record.device.lengthUnit === 'none' ? '' : run.record.device.lengthUnit;
  const names = own.map((i) => channels[i]);
  const modelled = points.some((p) => p.modelError !== undefined);
  const inputs = points.some((p) => p.smallest !== undefined && p.smallest !== null);
  const header = [
    column('k', unit === '' ? '' : `1/${unit}`),
    column('wavelength', unit),
    'frequency [GHz]',
    ...names.flatMap((out) => names.flatMap((into) => [`re_S(${out}, ${into})`, `im_S(${out}, ${into})`])),
    'error_S',
    ...names.map((into) => `absorbed(${into})`),
    'balance',
    ...(modelled ? ['error_model', 'best_absorbed', 'worst_absorbed', column('delay', unit), 'added'] : []),
    ...(inputs ? ['smallest_singular'] : []),
  ];
  const rows = points.map((p, at): Cell[] => {
    const S = matrix(at);
    return [
      p.k[0],
      p.wavelength,
      p.frequency === null ? null : 1e3 * p.frequency,
      ...own.flatMap((i) => own.flatMap((j) => [S[2 * (i + j * n)], S[2 * (i + j * n) + 1]])),
      p.error,
      ...own.map((j) => p.absorbed[j]),
      p.balance,
      ...(modelled
        ? [p.modelError ?? null, p.best ?? null, p.worst ?? null, p.delay ?? null, p.added === true ? 1 : 0]
        : []),
      ...(inputs ? [p.smallest ?? null] : []),
    ];
  });
  return csvText(header, rows);
}
