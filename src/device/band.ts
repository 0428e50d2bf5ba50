// Which band does the file ask for, as real wavenumbers?

import { ENERGY_UNITS, FREQUENCY_UNITS, METRES, toWavenumber } from '../materials/spectral-units.ts';
import { listNames, nearestName, showNumber } from './findings.ts';
import type { Path } from './findings.ts';
import type { Band, BandQuantity, LengthUnit } from './model.ts';
import type { Log, NumberReader } from './numbers.ts';
import { BAND_KEYS } from './schema.ts';
import type { BandInput } from './schema.ts';

/** The band, or null with findings made. `chosen` replaces the limits, in the file's own quantity and unit. */
export function readBand(
  input: BandInput,
  length: LengthUnit,
  chosen: readonly [number, number] | undefined,
  numbers: NumberReader,
  log: Log,
): Band | null {
  const given = BAND_KEYS.filter((key) => input[key] !== undefined);
  const quantity = given[0];
  if (quantity === undefined || given.length > 1) {
    log.report(
      given.length > 1 ? ['band', given[1]] : ['band'],
      given.length === 0 ? 'a band without a quantity' : `a band in ${given.length} quantities: ${given.join(', ')}`,
      `exactly one of ${listNames(BAND_KEYS)}`,
      given.length === 0 ? 'add one, such as wavelength: [1.5, 1.6]' : 'keep one of them',
      'key',
    );
    return null;
  }
  const unit = unitOf(input, quantity, length, log);
  const path: Path = ['band', quantity];
  const written = numbers.readPoint(input[quantity]!, path);
  const limits = chosen ?? written;
  if (unit === null || written.some(Number.isNaN)) return null;
  const report = (came: string, expected: string, mend: string): null => {
    if (chosen === undefined) log.report(path, came, expected, mend);
    else log.findings.push({ file: 'option band', line: 0, column: 0, path: quantity, came, expected, mend });
    return null;
  };
  const [a, b] = limits;
  const shown = `[${showNumber(a)}, ${showNumber(b)}]`;
  if (!(a > 0 && Number.isFinite(a) && Number.isFinite(b)))
    return report(shown, `finite limits above 0${unit === '' ? '' : ` in ${unit}`}`, 'give two positive numbers');
  if (!(a < b)) return report(`the empty band ${shown}`, 'the smaller limit first', 'write [smaller, larger]');
  const k = limits.map((value) => toWavenumber(quantity, value, unit, METRES[length]));
  const kMin = Math.min(...k);
  const kMax = Math.max(...k);
  if (!(kMin > 0 && kMin < kMax && Number.isFinite(kMax)))
    return report(shown, 'limits that can be told apart as wavenumbers', 'give limits of usual size');
  return { quantity, limits: [a, b], unit, kMin, kMax };
}

/** Unit of the limits, or null with a finding made. */
function unitOf(input: BandInput, quantity: BandQuantity, length: LengthUnit, log: Log): string | null {
  if (quantity === 'wavelength' || quantity === 'wavenumber') {
    if (input.unit !== undefined) {
      const own = length === 'none' ? 'no unit' : quantity === 'wavelength' ? length : `1/${length}`;
      log.report(
        ['band', 'unit'],
        input.unit,
        `no unit key: ${quantity} is in the length unit (here ${own})`,
        'remove the key "unit"',
        'key',
      );
      return null;
    }
    return length === 'none' ? '' : quantity === 'wavelength' ? length : `1/${length}`;
  }
  const units = Object.keys(quantity === 'frequency' ? FREQUENCY_UNITS : ENERGY_UNITS);
  if (length === 'none') {
    log.report(
      ['band', quantity],
      quantity,
      'wavelength or wavenumber, for lengths have no unit here',
      'add a length unit such as "length: mm"',
      'key',
    );
    return null;
  }
  if (input.unit === undefined) {
    log.report(
      ['band', quantity],
      `${quantity} without a unit`,
      `a key "unit": ${listNames(units)}`,
      `add "unit: ${units.at(-2)}"`,
      'key',
    );
    return null;
  }
  if (units.includes(input.unit)) return input.unit;
  const near = nearestName(input.unit, units);
  log.report(
    ['band', 'unit'],
    input.unit,
    `a unit of ${quantity}: ${listNames(units)}`,
    near === undefined ? 'change the unit' : `write ${near}`,
  );
  return null;
}
