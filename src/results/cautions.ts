// Which cautions go with an answer?

import { SPEED_OF_LIGHT } from '../numerics/conventions.ts';

export type CautionKind = 'modes' | 'threshold' | 'absorb' | 'drive';

/** What the choice depends on; a checked device and the `device` of a run both fit. */
export interface CautionedDevice {
  /** Metres per length unit; null when dimensionless. */
  readonly metres: number | null;
  readonly band: { readonly kMin: number; readonly kMax: number };
}

/**
 * Short sentences to print or store beside an answer. Threshold, absorb and drive say how to put power into a resonator;
 * their cautions follow the frequency: laser radiation from 300 GHz up, radio-frequency exposure up to there, both for a
 * dimensionless device. A list of modes is a prediction only.
 */
export function cautionsFor(kind: CautionKind, device: CautionedDevice): readonly string[] {
  const model = 'These are predictions of a two-dimensional model: measure before you rely on them.';
  if (kind === 'modes') return [model];
  const { optical, radio } = rangeOf(device);
  const officer = 'Local rules, and a licensed or appointed safety officer, decide what may be switched on.';
  const emits = kind === 'threshold' ? 'At threshold the device itself becomes a source. ' : '';
  return [
    ...(optical
      ? [`${emits}Laser radiation, seen or unseen: work by its class under IEC 60825-1 or the local equivalent.`]
      : []),
    ...(radio
      ? [
          `${optical ? '' : emits}Radio-frequency exposure: stay below the ICNIRP guidelines, IEEE C95.1 or the local limit, leaks and side lobes included.`,
        ]
      : []),
    ...(kind === 'threshold'
      ? ['At and above threshold a linear model gives no amplitude: the numbers mark the onset, not the power.']
      : ['What does not come back stays as heat in the absorber: raise the level slowly and watch its temperature.']),
    model,
    officer,
  ];
}

/** Where optics begins in the safety standards: IEC 60825-1 up to 1 mm, ICNIRP and IEEE C95.1 to 300 GHz (from memory). */
const OPTICS_FROM = 300e9;

function rangeOf({ metres, band }: CautionedDevice): { readonly optical: boolean; readonly radio: boolean } {
  if (metres === null) return { optical: true, radio: true };
  const hertz = (k: number): number => (k * SPEED_OF_LIGHT) / (2 * Math.PI * metres);
  return { optical: hertz(band.kMax) >= OPTICS_FROM, radio: hertz(band.kMin) <= OPTICS_FROM };
}
