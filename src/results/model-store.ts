// How is a projected model kept in a run, and taken out again?

import type { OpeningSpec } from '../boundary/openings.ts';
import type { Complex } from '../numerics/complex.ts';
import type { ModelChannel, ScatteringModel } from '../projected/scattering-model.ts';
import type { RunArray } from './format.ts';
import type { RunView } from './run-view.ts';

/** What stands in the answer; the matrices are arrays of the run. */
export interface StoredModel {
  readonly kMin: number;
  readonly kMax: number;
  readonly p: number;
  readonly size: number;
  readonly openings: readonly { readonly spec: OpeningSpec; readonly count: number }[];
  readonly channels: readonly ModelChannel[];
  readonly terms: readonly { readonly coefficient: Complex; readonly exponent: number }[];
  readonly witnesses: number;
  readonly snapshots: readonly number[];
  readonly ratio: number;
  readonly rounding: number;
  readonly poles: ScatteringModel['poles'];
}

const PREFIX = 'model-';

/** The record of a model and its arrays by name. */
export function storeModel(model: ScatteringModel): {
  readonly stored: StoredModel;
  readonly arrays: Readonly<Record<string, RunArray>>;
} {
  const arrays: Record<string, RunArray> = {
    [`${PREFIX}coupling`]: model.coupling,
    [`${PREFIX}reach`]: model.reach,
    [`${PREFIX}witness-coupling`]: model.witnessCoupling,
  };
  model.terms.forEach((term, t) => {
    arrays[`${PREFIX}matrix-${t}`] = term.matrix;
    arrays[`${PREFIX}witness-${t}`] = term.witness;
  });
  return {
    stored: {
      kMin: model.kMin,
      kMax: model.kMax,
      p: model.p,
      size: model.size,
      openings: model.openings.map(({ spec, count }) => ({ spec, count })),
      channels: model.channels.map(({ name, opening, index }) => ({ name, opening, index })),
      terms: model.terms.map(({ coefficient, exponent }) => ({ coefficient, exponent })),
      witnesses: model.witnesses,
      snapshots: Array.from(model.snapshots),
      ratio: model.ratio,
      rounding: model.rounding,
      poles: model.poles,
    },
    arrays,
  };
}

/** The model of a run of `spectrum`; null where every point was solved in full. */
export function loadModel(run: RunView): ScatteringModel | null {
  const stored = run.record.answer['model'] as StoredModel | undefined;
  if (!stored) return null;
  const numbers = (name: string): Float64Array => run.array(`${PREFIX}${name}`) as Float64Array;
  return {
    ...stored,
    terms: stored.terms.map((term, t) => ({
      ...term,
      matrix: numbers(`matrix-${t}`),
      witness: numbers(`witness-${t}`),
    })),
    coupling: numbers('coupling'),
    reach: numbers('reach'),
    witnessCoupling: numbers('witness-coupling'),
    snapshots: Float64Array.from(stored.snapshots),
  };
}
