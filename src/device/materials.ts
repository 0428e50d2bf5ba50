// Which permittivity and permeability has each named material?

import { constantPermittivity } from '../materials/constant.ts';
import { complex, modulus } from '../numerics/complex.ts';
import type { Complex } from '../numerics/complex.ts';
import { showNumber } from './findings.ts';
import type { Path } from './findings.ts';
import { zeroOrMore } from './numbers.ts';
import type { Log, NumberReader } from './numbers.ts';
import type { Wall } from './model.ts';
import type { MaterialInput } from './schema.ts';

export interface Material {
  readonly permittivity: Complex;
  readonly permeability: Complex;
  /** Of metals and perfect walls. */
  readonly wall?: Wall;
}

/** The one material that needs no entry. */
export const VACUUM = 'vacuum';

/** Perfect walls need no entry either. */
export const ELECTRIC_WALL = 'electric wall';
export const MAGNETIC_WALL = 'magnetic wall';
const BUILT_IN = [VACUUM, ELECTRIC_WALL, MAGNETIC_WALL];

/** |ε| and |μ| outside these limits are slips of unit or sign, or need another model (a metal wall, a surface). */
const SMALLEST = 1e-6;
const LARGEST = 1e6;

/** Materials by name; null for one whose finding is made. */
export function readMaterials(
  input: Readonly<Record<string, MaterialInput>>,
  numbers: NumberReader,
  log: Log,
): ReadonlyMap<string, Material | null> {
  const materials = new Map<string, Material | null>([
    [VACUUM, { permittivity: complex(1), permeability: complex(1) }],
    [ELECTRIC_WALL, { permittivity: complex(1), permeability: complex(1), wall: { kind: 'electric' } }],
    [MAGNETIC_WALL, { permittivity: complex(1), permeability: complex(1), wall: { kind: 'magnetic' } }],
  ]);
  for (const [name, entry] of Object.entries(input)) {
    if (BUILT_IN.includes(name))
      log.report(
        ['materials', name],
        `a material called ${name}`,
        name === VACUUM ? 'another name: vacuum is built in (ε = μ = 1)' : `another name: ${name} is built in`,
        'rename it',
        'key',
      );
    else materials.set(name, readMaterial(entry, ['materials', name], numbers, log));
  }
  return materials;
}

function readMaterial(entry: MaterialInput, path: Path, numbers: NumberReader, log: Log): Material | null {
  const before = log.findings.length;
  if (entry.conductivity !== undefined) return readMetal(entry, path, numbers, log);
  const both = entry.index !== undefined && entry.permittivity !== undefined;
  if (both || (entry.index === undefined && entry.permittivity === undefined)) {
    log.report(
      both ? [...path, 'permittivity'] : path,
      both ? 'index and permittivity together' : 'neither index nor permittivity',
      'exactly one of "index" or "permittivity"',
      both ? 'keep one of the two' : 'add one, such as index: 1.5',
      'key',
    );
    return null;
  }
  for (const key of ['loss_tangent', 'permeability'] as const) {
    if (entry.index !== undefined && entry[key] !== undefined)
      log.report(
        [...path, key],
        `${key} beside index`,
        `${key} beside permittivity only`,
        'give permittivity instead of index',
        'key',
      );
  }
  const written = readComplex(entry.index ?? entry.permittivity!, [
    ...path,
    entry.index !== undefined ? 'index' : 'permittivity',
  ]);
  const tangent =
    entry.loss_tangent === undefined
      ? 0
      : numbers.read(entry.loss_tangent, [...path, 'loss_tangent'], zeroOrMore('a loss tangent'));
  const permeability =
    entry.permeability === undefined ? complex(1) : readComplex(entry.permeability, [...path, 'permeability']);
  if (entry.index !== undefined && written.re < 0)
    log.report(
      [...path, 'index'],
      show(written),
      'an index whose real part is 0 or more',
      'change the sign, or give permittivity',
    );
  if (entry.loss_tangent !== undefined && written.im !== 0 && !Number.isNaN(written.im))
    log.report(
      [...path, 'loss_tangent'],
      'loss_tangent beside a complex permittivity',
      'loss given once',
      'remove one of the two',
      'key',
    );
  if (tangent > 0 && written.re < 0)
    log.report(
      [...path, 'loss_tangent'],
      'a loss tangent of a negative permittivity',
      'a complex permittivity [re, im]',
      'give the loss as the imaginary part',
    );
  const permittivity =
    entry.index !== undefined
      ? constantPermittivity({ index: written })
      : constantPermittivity({ permittivity: written, lossTangent: tangent });
  if (log.findings.length > before) return null;
  const valueKey = entry.index !== undefined ? 'index' : 'permittivity';
  checkValue(permittivity, 'permittivity', [...path, valueKey]);
  if (entry.permeability !== undefined) checkValue(permeability, 'permeability', [...path, 'permeability']);
  return log.findings.length > before ? null : { permittivity, permeability };

  function readComplex(value: number | string | readonly [number | string, number | string], at: Path): Complex {
    if (typeof value !== 'object') return complex(numbers.read(value, at));
    const [re, im] = numbers.readPoint(value, at);
    return complex(re, im);
  }

  function checkValue(value: Complex, what: string, at: Path): void {
    if (Number.isNaN(value.re + value.im)) return;
    const size = modulus(value);
    if (!(size >= SMALLEST && size <= LARGEST))
      log.report(
        at,
        `${what} ${show(value)}`,
        `a ${what} of size ${SMALLEST} to ${LARGEST}`,
        'check sign and unit; a relative value has no unit',
      );
    else if (value.im < 0 && entry.gain !== true)
      log.report(
        at,
        `${what} ${show(value)}, whose imaginary part is negative: that is gain`,
        'an imaginary part of 0 or more: with the time dependence exp(-iωt) of this program, loss is positive',
        'change the sign of the imaginary part, or add "gain: true" if the material really amplifies',
      );
  }
}

/** A metal is known by its conductivity alone. */
function readMetal(entry: MaterialInput, path: Path, numbers: NumberReader, log: Log): Material | null {
  const before = log.findings.length;
  const other = (['index', 'permittivity', 'loss_tangent', 'permeability', 'gain'] as const).find(
    (key) => entry[key] !== undefined,
  );
  if (other !== undefined)
    log.report(
      [...path, other],
      `${other} beside conductivity`,
      'conductivity alone: the waves do not enter the metal',
      'keep one of the two',
      'key',
    );
  const conductivity = numbers.read(entry.conductivity!, [...path, 'conductivity'], {
    expected: `a conductivity of ${LEAST_CONDUCTIVITY} to 1e10 S/m`,
    holds: (v) => v >= LEAST_CONDUCTIVITY && v <= 1e10,
    mend: 'give S/m (copper: 5.8e7); poorer conductors are materials with a complex permittivity',
  });
  if (log.findings.length > before) return null;
  return { permittivity: complex(1), permeability: complex(1), wall: { kind: 'conductor', conductivity } };
}

/** Below this a conductor is no good conductor at microwave frequencies, S/m. */
const LEAST_CONDUCTIVITY = 1e3;

/** `2.25 + 0.01i`. */
export const show = (value: Complex): string =>
  value.im === 0
    ? showNumber(value.re)
    : `${showNumber(value.re)} ${value.im < 0 ? '-' : '+'} ${showNumber(Math.abs(value.im))}i`;
