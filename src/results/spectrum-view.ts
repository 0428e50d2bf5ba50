// Which S-matrices does a run of `spectrum` hold?

import type { ComplexArray } from '../numerics/complex.ts';
import type { ScatterAnswerPoint } from './format.ts';
import type { RunView } from './run-view.ts';

export interface SpectrumView {
  /** Names of the channels. */
  readonly channels: readonly string[];
  readonly points: readonly ScatterAnswerPoint[];
  /** S of point i, n × n column-major interleaved: out of a for unit amplitude into b at a + b n. */
  readonly matrix: (i: number) => ComplexArray;
}

/** Name of the array that holds S of all points, one after the other, where the answer does not hold them itself. */
export const SCATTERING_ARRAY = 'scattering';

/** @throws Error when the run holds no S-matrix. */
export function spectrumView(run: RunView): SpectrumView {
  const points = run.record.answer['points'] as readonly ScatterAnswerPoint[] | undefined;
  const channels = run.record.answer['channels'] as readonly string[] | undefined;
  if (!points || !channels) throw new Error(`a run of "${run.record.command}": expected one of "spectrum"`);
  const n = channels.length;
  const stored = points.some((p) => p.S === undefined) ? (run.array(SCATTERING_ARRAY) as Float64Array) : null;
  return {
    channels,
    points,
    matrix(i) {
      const { S } = points[i];
      if (!S) return stored!.subarray(2 * n * n * i, 2 * n * n * (i + 1));
      const out = new Float64Array(2 * n * n);
      S.forEach((row, a) => {
        row.forEach((s, b) => out.set(s, 2 * (a + b * n)));
      });
      return out;
    },
  };
}
