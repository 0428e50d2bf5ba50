// What is the answer, in one sentence?

import type { Device } from '../device/model.ts';
import { gainReport } from '../materials/gain.ts';
import { fromWavenumber } from '../materials/spectral-units.ts';
import { errorText, significant, toError } from '../results/number-text.ts';
import type { AbsorbAnswer } from './absorb.ts';
import type { AxisMode } from './polish-crossing.ts';
import type { KnobCrossing } from './knob-crossing.ts';
import type { ModesAnswer } from './modes.ts';
import type { ThresholdAnswer } from './threshold.ts';

/** "3 resonances with Q ≥ 10 between 1.5 and 1.6 um; the sharpest at 1.5231 ± 0.0002 um (k = …), Q = 8100." */
export function modesSentence(device: Device, answer: ModesAnswer): string {
  const what = answer.assignment === 'poles' ? 'resonance' : 'zero';
  const count = answer.modes.reduce((sum, m) => sum + m.multiplicity, 0);
  const where = `with Q ≥ ${answer.qMin} between ${bandText(device)}`;
  const { counted, proven } = answer.complete ?? { counted: 0, proven: false };
  if (count === 0) {
    if (proven) return `No ${what} ${where}: the count is 0.`;
    return counted === 0 ? `No ${what} ${where}.` : `No ${what} found ${where}, but the count is ${counted}.`;
  }
  const sharpest = answer.modes.reduce((a, b) => (b.q > a.q ? b : a));
  const doubt = answer.covered || proven ? '' : ' The search did not cover the whole window.';
  return (
    `${count} ${what}${count > 1 ? 's' : ''} ${where}; the sharpest at ${placeText(device, sharpest.k.re, sharpest.kError)}, ` +
    `Q = ${toError(sharpest.q, sharpest.qError)}.${doubt}`
  );
}

/** "Lases first at 1.5231 um ± 0.0002 (k = 4.1253 /um) with 38.2 /cm (166 dB/cm) in resonator; the next needs 12 % more." */
export function thresholdSentence(device: Device, answer: ThresholdAnswer): string {
  const first = answer.crossings[0];
  const count = answer.beyond.length;
  const without =
    count === 0 ? '' : ` ${count} ${count > 1 ? 'modes lase' : 'mode lases'} without pump, by the gain in the file.`;
  if (!first) return `No lasing threshold between ${bandText(device)} up to D = ${answer.levelMax}.${without}`;
  return `Lases first at ${placeText(device, first.k, first.kError)} with ${levelText(device, first, 'gain')}${next(answer.crossings)}.${without}`;
}

/** "Absorbs everything first at … with … of loss in …; the next needs 12 % more." */
export function absorbSentence(device: Device, answer: AbsorbAnswer): string {
  const first = answer.crossings[0];
  if (!first) return `No coherent absorption between ${bandText(device)} up to D = ${answer.levelMax}.`;
  return `Absorbs everything at ${placeText(device, first.k, first.kError)} with ${levelText(device, first, 'loss')}${next(answer.crossings)}.`;
}

/** "With radius = 2.8123 ± 3e-6 it absorbs everything at …." */
export function knobSentence(
  device: Device,
  knob: string,
  crossings: readonly KnobCrossing[],
  sense: 'gain' | 'loss',
): string {
  const what = sense === 'gain' ? 'it lases' : 'it absorbs everything';
  const [first] = crossings;
  const more = crossings.length > 1 ? `; ${crossings.length - 1} more in the range` : '';
  return `With ${knob} = ${toError(first.value, first.valueError)} ± ${errorText(first.valueError)} ${what} at ${placeText(device, first.k, first.kError)}${more}.`;
}

function next(crossings: readonly AxisMode[]): string {
  const [first, second] = crossings;
  if (!first || !second) return '';
  return `; the next needs ${significant(100 * (second.level / first.level - 1), 2)} % more`;
}

const unitText = (device: Device): string => (device.band.unit === '' ? '' : ` ${device.band.unit}`);

function bandText(device: Device): string {
  const { quantity, limits } = device.band;
  const name =
    quantity === 'wavenumber' ? 'k = ' : quantity === 'wavelength' && device.band.unit === '' ? 'wavelength ' : '';
  return `${name}${limits[0]} and ${limits[1]}${unitText(device)}`;
}

/** The place in the file's own band unit with its error, and k behind it where that is not k itself. */
export function placeText(device: Device, k: number, kError: number): string {
  const { quantity, unit } = device.band;
  const kUnit = device.lengthUnit === 'none' ? '' : ` /${device.lengthUnit}`;
  const kText = `k = ${toError(k, kError)}${kUnit}`;
  if (quantity === 'wavenumber') return `${kText} ± ${errorText(kError)}`;
  const value = fromWavenumber(quantity, k, unit, device.metres);
  const error = (value * kError) / k;
  return `${toError(value, error)}${unitText(device)} ± ${errorText(error)} (${kText})`;
}

/** "D = 0.0092002 ± 3e-7, 38.2 /cm (166 dB/cm) in rim"; the coefficient is that of D alone, not of the body's own loss. */
function levelText(device: Device, mode: AxisMode, sense: 'gain' | 'loss'): string {
  const active = device.bodies.filter((b) => b.pumpWeight > 0);
  const nameOf = (b: (typeof active)[number]): string => (active.length > 1 ? b.group : b.name);
  const names = [...new Set(active.map(nameOf))];
  const lead = active[0];
  const alike = active.every(
    (b) =>
      b.pumpWeight === lead.pumpWeight &&
      b.permittivity.re === lead.permittivity.re &&
      b.permeability.re === lead.permeability.re &&
      b.permeability.im === lead.permeability.im,
  );
  const report = gainReport(
    (sense === 'gain' ? 1 : -1) * mode.level * lead.pumpWeight,
    { re: lead.permittivity.re, im: 0 },
    mode.k,
    device.metres,
    lead.permeability,
  );
  const engineer =
    report.perCentimetre === null
      ? ''
      : `, ${significant(Math.abs(report.perCentimetre), 3)} /cm (${significant(Math.abs(report.decibelPerCentimetre!), 3)} dB/cm)`;
  const verb = sense === 'gain' ? '' : 'added loss ';
  const level = `${verb}D = ${toError(mode.level, mode.levelError)} ± ${errorText(mode.levelError)}`;
  // weights or materials that differ: the coefficient is the first body's
  if (!alike && engineer !== '') return `${level} in ${names.join(', ')} (${engineer.slice(2)} in ${nameOf(lead)})`;
  return `${level}${engineer} in ${names.join(', ')}`;
}
