// How do S-parameters leave as CSV?

import { column, type Cell, csvText } from './csv.ts';
import type { ScatterAnswerPoint } from './format.ts';
import type { RunView } from './run-view.ts';

/**
 * One row a point: wavenumber, wavelength, frequency, real and imaginary part of every S(out, in) under exp(−iωt), the error
 * of the entries, the power that each input loses to the device, and the balance.
 *
 * @throws when the run holds no S-matrix.
 */
export function spectrumTableCsv(run: RunView): string {
  const points = run.record.answer['points'] as readonly ScatterAnswerPoint[] | undefined;
  const names = run.record.answer['channels'] as readonly string[] | undefined;
  if (!points || !names) throw new Error(`a run of "${run.record.command}": expected one of "spectrum"`);
  const unit = run.record.device.lengthUnit === 'none' ? '' : run.record.device.lengthUnit;
  const header = [
    column('k', unit === '' ? '' : `1/${unit}`),
    column('wavelength', unit),
    'frequency [GHz]',
    ...names.flatMap((out) => names.flatMap((into) => [`re_S(${out}, ${into})`, `im_S(${out}, ${into})`])),
    'error_S',
    ...names.map((into) => `absorbed(${into})`),
    'balance',
  ];
  const rows = points.map((p): Cell[] => [
    p.k[0],
    p.wavelength,
    p.frequency === null ? null : 1e3 * p.frequency,
    ...p.S.flatMap((row) => row.flatMap((s) => [s[0], s[1]])),
    p.error,
    ...p.absorbed,
    p.balance,
  ]);
  return csvText(header, rows);
}
