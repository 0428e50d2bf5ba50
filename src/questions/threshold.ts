// At which frequency, and with how much gain, does a device start to lase?

import type { Device } from '../device/model.ts';
import { farField } from '../scattering/amplitudes.ts';
import { type CrossingsAnswer, type CrossingsRequest, findCrossings } from './crossings.ts';
import type { AxisMode } from './polish-crossing.ts';

export interface LasingMode extends AxisMode {
  /** Far-field power density at 0 … 359°, mean 1, of the first member. */
  readonly farField: Float64Array;
  /** Largest over mean of the far field, and the angle of the largest in degrees. */
  readonly directionality: number;
  readonly peakAngle: number;
}

export interface ThresholdAnswer extends Omit<CrossingsAnswer, 'crossings'> {
  readonly crossings: readonly LasingMode[];
}

/**
 * All lasing thresholds in the device's band with pump D ≤ levelMax, lowest first: real k and real D ≥ 0 at which a pole
 * of ε − iD·weight reaches the axis.
 *
 * @throws RangeError when no body is active, or for digits out of range.
 */
export function findThresholds(device: Device, request: CrossingsRequest = {}): ThresholdAnswer {
  const answer = findCrossings(device, 'gain', request);
  return { ...answer, crossings: answer.crossings.map(describe) };
}

function describe(mode: AxisMode): LasingMode {
  const pattern = farField(mode.multipoles[0]);
  let peakAngle = 0;
  for (let i = 1; i < pattern.length; i++) if (pattern[i] > pattern[peakAngle]) peakAngle = i;
  return {
    ...mode,
    farField: pattern,
    directionality: pattern[peakAngle],
    peakAngle: (360 * peakAngle) / pattern.length,
  };
}
