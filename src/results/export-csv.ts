// How do modes, crossings, drives and paths leave as CSV?

import { lengthText } from './export-field-csv.ts';
import { fieldOf, type RunView } from './run-view.ts';
import { column, csvText, type Cell } from './csv.ts';
import type { CrossingAnswer, DriveTerm, ModeAnswer, PowerCheck, RunRecord } from './format.ts';

/** The modes of the answer, one row each. Throws when the run's command lists none. */
export function modeTableCsv(run: RunView): string {
  const modes = listOf<ModeAnswer>(run.record, 'modes');
  const { length, perLength } = units(run.record);
  const header = [
    'mode',
    'assignment',
    column('re_k', perLength),
    column('im_k', perLength),
    column('k_error', perLength),
    'Q',
    'Q_error',
    column('wavelength', length),
    'frequency [THz]',
    'lifetime [ps]',
    'multiplicity',
    'label',
    'layer_share',
  ];
  const rows = modes.map((m, i): Cell[] => [
    i + 1,
    m.assignment,
    m.k[0],
    m.k[1],
    m.kError,
    m.q,
    m.qError,
    m.wavelength,
    m.frequency,
    m.lifetime,
    m.multiplicity,
    m.label,
    m.layerShare,
  ]);
  return csvText(header, rows);
}

/**
 * The thresholds or absorption points of the answer, one row for each active body of each (a scatter of posts has many);
 * what belongs to the crossing as a whole is repeated.
 */
export function crossingTableCsv(run: RunView): string {
  const crossings = listOf<AxisAnswer>(run.record, 'crossings');
  const byKnob = crossings.some((c) => c.knob !== undefined);
  const { length, perLength } = units(run.record);
  const header = [
    'crossing',
    'kind',
    column('k', perLength),
    column('k_error', perLength),
    column('wavelength', length),
    'frequency [THz]',
    'D',
    'D_error',
    ...(byKnob ? ['knob', 'knob_value', 'knob_error'] : []),
    'multiplicity',
    'label',
    column('re_k_at_zero', perLength),
    column('im_k_at_zero', perLength),
    'body',
    're_permittivity',
    'im_permittivity',
    'im_index',
    'power_coefficient [1/cm]',
    'power_coefficient [dB/cm]',
    ...['', 'own_mesh_'].flatMap((mesh) => POWERS.map((p) => `${mesh}${p}`)),
    'directionality',
    'peak_angle [deg]',
  ];
  const rows = crossings.flatMap((c, i) => {
    const whole: Cell[] = [
      i + 1,
      run.record.command === 'absorb' || c.loss !== undefined ? 'absorption' : 'threshold',
      c.k,
      c.kError,
      c.wavelength,
      c.frequency,
      c.pump ?? c.loss ?? null,
      c.pumpError ?? c.lossError ?? null,
      ...(byKnob ? [c.knob?.name ?? null, c.knob?.value ?? null, c.knob?.error ?? null] : []),
      c.multiplicity,
      c.label,
      c.from?.[0] ?? null,
      c.from?.[1] ?? null,
    ];
    const proof = [...powerCells(c.forward), ...powerCells(c.forward?.ownMesh)];
    const beam = [c.farField?.directionality ?? null, c.farField?.peakAngle ?? null];
    if (!c.bodies?.length) return [[...whole, null, null, null, null, null, null, ...proof, ...beam]];
    return c.bodies.map(({ name, permittivity, units: u }): Cell[] => [
      ...whole,
      name,
      permittivity[0],
      permittivity[1],
      u.imIndex,
      u.perCentimetre,
      u.decibelPerCentimetre,
      ...proof,
      ...beam,
    ]);
  });
  return csvText(header, rows);
}

/** The drive of one of the run's fields. Throws when the field is not driven. */
export function driveTableCsv(run: RunView, fieldId: string): string {
  const { drive } = fieldOf(run.record, fieldId);
  if (drive) return driveCsv(drive);
  const driven = run.record.fields.filter((f) => f.drive).map((f) => f.id);
  throw new Error(`field "${fieldId}" has no drive; fields with one: ${driven.join(', ') || 'none'}`);
}

/**
 * A drive, one row a multipole: the amplitude a of H⁽²⁾ₘ(n_b k r) e^{imφ} as modulus, as decibels (20 log₁₀|a|, so that
 * 0 dB is the whole of a unit total power), and its phase from 0 to 360 degrees in both signs of time: exp(−iωt), as
 * everywhere here, and the engineers' exp(+jωt), where the amplitude is the conjugate and stands at the angular factor
 * exp(−jmφ), so that its own index is −m.
 */
export function driveCsv(drive: readonly DriveTerm[]): string {
  const header = [
    'm',
    're_amplitude',
    'im_amplitude',
    'amplitude',
    'amplitude [dB]',
    'power_share',
    'phase [deg]',
    'm_engineers',
    'phase_engineers [deg]',
  ];
  const total = drive.reduce((sum, { amplitude: [re, im] }) => sum + re * re + im * im, 0);
  const rows = drive.map(({ m, amplitude: [re, im] }): Cell[] => {
    const modulus = Math.hypot(re, im);
    const silent = modulus === 0;
    return [
      m,
      re,
      im,
      modulus,
      silent ? null : 20 * Math.log10(modulus),
      total > 0 ? (modulus * modulus) / total : null,
      silent ? null : turn(Math.atan2(im, re)),
      m === 0 ? 0 : -m,
      silent ? null : turn(Math.atan2(-im, re)),
    ];
  });
  return csvText(header, rows);
}

/**
 * The way of a pole or zero through the complex plane as the level rises, one row a point; all stored paths, or that of
 * one mark.
 */
export function polePathCsv(run: RunView, markId?: string): string {
  const { perLength } = units(run.record);
  const marks = run.record.marks.filter((m) => markId === undefined || m.id === markId);
  const walked = marks.filter((m) => m.path !== null);
  if (walked.length === 0) {
    const known = run.record.marks.filter((m) => m.path !== null).map((m) => m.id);
    const what = markId === undefined ? 'no stored path' : `no stored path for mark "${markId}"`;
    throw new Error(`${what} in this run; marks with one: ${known.join(', ') || 'none'}`);
  }
  const header = ['mark', 'kind', 'label', 'parameter', 'level', column('re_k', perLength), column('im_k', perLength)];
  return csvText(
    header,
    (function* () {
      for (const { id, kind, label, path } of walked) {
        const levels = run.array(path!.levels);
        const ks = run.array(path!.ks);
        for (let i = 0; i < levels.length; i++) {
          yield [id, kind, label, path!.parameter, levels[i], ks[2 * i], ks[2 * i + 1]] as Cell[];
        }
      }
    })(),
  );
}

/** A crossing by pump or loss; or by a knob, which leaves the bodies as the file has them. */
type AxisAnswer = Omit<CrossingAnswer, 'bodies' | 'from'> &
  Partial<Pick<CrossingAnswer, 'bodies' | 'from'>> & {
    readonly knob?: { readonly name: string; readonly value: number; readonly error: number };
  };

const POWERS = ['incoming', 'outgoing', 'absorbed', 'balance'] as const;

const powerCells = (check: PowerCheck | undefined): Cell[] => POWERS.map((p) => check?.[p] ?? null);

/** Radians to degrees in [0, 360). */
function turn(angle: number): number {
  const degrees = (angle * 180) / Math.PI;
  const positive = degrees < 0 ? degrees + 360 : degrees;
  return positive >= 360 || Object.is(positive, -0) ? 0 : positive;
}

function units(record: RunRecord): { readonly length: string; readonly perLength: string } {
  const length = lengthText(record);
  return { length, perLength: length === '' ? '' : `1/${length}` };
}

/** A list of the answer; the store has checked its form. */
function listOf<T>(record: RunRecord, key: 'modes' | 'crossings'): readonly T[] {
  const list = record.answer[key];
  if (Array.isArray(list)) return list as readonly T[];
  const known = Object.keys(record.answer).join(', ') || 'nothing';
  throw new Error(`the answer of "${record.command}" holds no ${key}; it holds: ${known}`);
}
