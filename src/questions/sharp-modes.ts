// On which side of the axis does a mode lie that is sharper than the digits asked for?

import { HIGHEST_ORDER } from '../accuracy/resolution.ts';
import { embed } from '../elements/space.ts';
import { inverseStep } from '../eigen/improve.ts';
import { type EigenGroup, rayleighGroups } from '../eigen/rayleigh.ts';
import { modulus, subtract } from '../numerics/complex.ts';
import type { LevelSense } from '../operator/device-family.ts';
import { familyOf, type Prepared, spaceOf } from './prepare.ts';

/** A group whose distance from the axis is known, as far as the highest order tells it. */
export interface ResolvedGroup {
  readonly group: EigenGroup;
  readonly order: number;
  /** What k still moved by in the last order; as large as |Im k| where the highest order could not tell the side. */
  readonly step: number;
}

/** A group that the digits alone cannot tell from the real axis. */
export const isSharp = (group: EigenGroup, digits: number): boolean =>
  Math.abs(group.k.im) <= 10 ** -digits * group.k.re;

/** |Im k| counts as known when it is so many times the last step. */
const CLEAR_OF_THE_AXIS = 10;

/** Steps of inverse iteration an order; the shift lies as close to the group as the order below knows it. */
const STEPS_PER_ORDER = 3;

/**
 * Raises the order, for this group alone, until its distance from the axis is ten times what the last order moved it by.
 * Members that stand apart by more than that are given apart.
 */
export function resolveSharp(
  prepared: Prepared,
  direction: 'outgoing' | 'incoming',
  sense: LevelSense,
  from: EigenGroup,
  startOrder: number,
): ResolvedGroup[] {
  const columns = from.multiplicity;
  let { vectors, k } = from;
  for (let order = startOrder + 1; ; order++) {
    const family = familyOf(prepared, order, direction, sense);
    const shift = { re: k.re, im: 0 };
    const inverse = family.factorize(shift, 0);
    vectors = embed(spaceOf(prepared, order), spaceOf(prepared, order - 1), vectors, columns);
    for (let i = 0; i < STEPS_PER_ORDER; i++) vectors = inverseStep(family, inverse, shift, 0, vectors, columns);
    inverse.release();
    const [whole] = rayleighGroups(family, shift, 0, vectors, columns, Infinity, false);
    const step = modulus(subtract(whole.k, k));
    k = whole.k;
    const groups = rayleighGroups(family, shift, 0, vectors, columns, CLEAR_OF_THE_AXIS * step);
    const clear = groups.every((g) => Math.abs(g.k.im) >= CLEAR_OF_THE_AXIS * Math.max(step, g.spread));
    if (clear || order >= HIGHEST_ORDER) return groups.map((group) => ({ group, order, step }));
  }
}
