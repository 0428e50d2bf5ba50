// At which value of a knob does a mode of the device, as its file describes it, lie on the real axis?

import type { Limits } from '../accuracy/memory.ts';
import { DEFAULT_DIGITS } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { modulus, subtract } from '../numerics/complex.ts';
import { type Assignment, findModes, type Mode, type ModesAnswer, type Progress } from './modes.ts';

export interface KnobCrossingsRequest {
  readonly digits?: number;
  readonly assignment: Assignment;
  /** Values of the knob to search between. */
  readonly range: readonly [number, number];
  /** Lowest Q at which modes are followed; default 3. */
  readonly qMin?: number;
  readonly limits?: Limits;
  readonly progress?: Progress;
}

/** A mode on the real axis at one value of the knob. */
export interface KnobCrossing {
  readonly value: number;
  readonly valueError: number;
  readonly k: number;
  readonly kError: number;
  readonly multiplicity: number;
  readonly label: string;
  /** The device at that value, and the search that found the mode there. */
  readonly device: Device;
  readonly answer: ModesAnswer;
  readonly mode: Mode;
  /** k at the sampled values, in order. */
  readonly path: { readonly levels: readonly number[]; readonly ks: readonly Mode['k'][] };
  readonly reached: boolean;
}

/** Values of the knob at which all modes are searched before any is polished. */
const SAMPLES = 9;
const SAMPLE_DIGITS = 3;
const MOST_STEPS = 14;

/**
 * Samples the range, joins modes of neighbouring samples (same multiplicity, nearest k), and brings every change of sign
 * of Im k to zero by regula falsi (Illinois), each step a full search in a narrow band on a mesh of its own. Loss and
 * gain are the file's; the knob may be a length, an index, a loss.
 *
 * @param deviceAt the device at a value of the knob; throws what the reader throws for an impossible value.
 */
export function findKnobCrossings(
  deviceAt: (value: number) => Device,
  request: KnobCrossingsRequest,
): readonly KnobCrossing[] {
  const { range, assignment, progress } = request;
  const qMin = request.qMin ?? 3;
  if (!(range[0] < range[1]))
    throw new RangeError(`the knob's range came as ${range.join(' … ')}; expected low < high`);
  const values = Array.from({ length: SAMPLES }, (_, i) => range[0] + ((range[1] - range[0]) * i) / (SAMPLES - 1));
  const samples = values.map((value, i) => {
    progress?.('sampling the knob', i / SAMPLES);
    return findModes(widened(deviceAt(value)), { digits: SAMPLE_DIGITS, assignment, qMin }).modes;
  });
  const strands = joinSamples(samples);
  const found: KnobCrossing[] = [];
  for (const strand of strands) {
    for (let i = 0; i + 1 < strand.length; i++) {
      const a = strand[i];
      const b = strand[i + 1];
      if (!a || !b || a.k.im * b.k.im > 0) continue;
      progress?.('polishing', found.length / (found.length + 1));
      const path = {
        levels: values.filter((_, j) => strand[j]),
        ks: strand.filter((m) => m !== null).map((m) => m.k),
      };
      const crossing = polish(deviceAt, request, [values[i], values[i + 1]], [a, b], path);
      const { kMin, kMax } = deviceAt(values[i]).band;
      if (crossing && crossing.k >= kMin && crossing.k <= kMax) found.push(crossing);
    }
  }
  return found.sort((a, b) => a.value - b.value);
}

/** The band with a tenth more on either side: a mode may enter it between samples. */
const widened = (device: Device): Device => narrowed(device, device.band.kMin * 0.9, device.band.kMax * 1.1);

const narrowed = (device: Device, kMin: number, kMax: number): Device => ({
  ...device,
  band: { ...device.band, kMin, kMax },
});

/** Strands of one mode a sample (null where it is not seen), each pair of neighbours the nearest free match. */
function joinSamples(samples: readonly (readonly Mode[])[]): (Mode | null)[][] {
  const strands: (Mode | null)[][] = samples[0].map((m) => [m]);
  for (let i = 1; i < samples.length; i++) {
    const pairs: { strand: number; mode: Mode; distance: number }[] = [];
    strands.forEach((strand, s) => {
      const last = strand[i - 1];
      if (!last) return;
      // carried on along the last step
      const before = i > 1 ? strand[i - 2] : null;
      const guess = before ? { re: 2 * last.k.re - before.k.re, im: 2 * last.k.im - before.k.im } : last.k;
      for (const mode of samples[i]) {
        if (mode.multiplicity !== last.multiplicity || mode.label !== last.label) continue;
        pairs.push({ strand: s, mode, distance: modulus(subtract(mode.k, guess)) });
      }
    });
    pairs.sort((a, b) => a.distance - b.distance);
    const taken = new Set<Mode>();
    const joined = new Set<number>();
    for (const { strand, mode } of pairs) {
      if (taken.has(mode) || joined.has(strand)) continue;
      taken.add(mode);
      joined.add(strand);
      strands[strand].push(mode);
    }
    for (const strand of strands) if (strand.length === i) strand.push(null);
    for (const mode of samples[i]) {
      if (!taken.has(mode)) strands.push([...Array.from({ length: i }, () => null), mode]);
    }
  }
  return strands;
}

function polish(
  deviceAt: (value: number) => Device,
  request: KnobCrossingsRequest,
  bracket: readonly [number, number],
  ends: readonly [Mode, Mode],
  path: KnobCrossing['path'],
): KnobCrossing | null {
  const digits = request.digits ?? DEFAULT_DIGITS;
  let [p0, p1] = bracket;
  let f0 = ends[0].k.im;
  let f1 = ends[1].k.im;
  const slopeRe = (ends[1].k.re - ends[0].k.re) / (p1 - p0);
  const slopeIm = (f1 - f0) / (p1 - p0);
  let k = ends[0].k.re;
  let at = p0;
  let side = 0;
  // |d Im k / d knob| from the last two searches; the chord of the samples until then
  let steepness = Math.abs(slopeIm);
  let before: { readonly value: number; readonly f: number } | null = null;
  for (let step = 0; step < MOST_STEPS; step++) {
    const value = (p0 * f1 - p1 * f0) / (f1 - f0);
    const guess = k + slopeRe * (value - at);
    const room = Math.max(0.02 * guess, Math.abs(slopeRe) * Math.abs(p1 - p0));
    const device = deviceAt(value);
    const answer = findModes(narrowed(device, guess - room, guess + room), {
      digits,
      assignment: request.assignment,
      qMin: request.qMin ?? 3,
      ...(request.limits ? { limits: request.limits } : {}),
    });
    const same = answer.modes.filter((m) => m.multiplicity === ends[0].multiplicity && m.label === ends[0].label);
    if (same.length === 0) return null;
    const mode = same.reduce((a, b) => (Math.abs(b.k.re - guess) < Math.abs(a.k.re - guess) ? b : a));
    k = mode.k.re;
    at = value;
    const f = mode.k.im;
    if (before && Math.abs(f - before.f) > 10 * mode.kError)
      steepness = Math.abs((f - before.f) / (value - before.value));
    before = { value, f };
    if (Math.abs(f) <= mode.kError || step === MOST_STEPS - 1) {
      return {
        value,
        valueError: (Math.abs(f) + mode.kError) / steepness,
        k,
        kError: mode.kError + Math.abs((slopeRe * f) / slopeIm),
        multiplicity: mode.multiplicity,
        label: mode.label,
        device,
        answer,
        mode,
        path,
        reached: answer.reached && Math.abs(f) <= mode.kError,
      };
    }
    if (Math.sign(f) === Math.sign(f0)) {
      p0 = value;
      f0 = f;
      if (side === -1) f1 /= 2;
      side = -1;
    } else {
      p1 = value;
      f1 = f;
      if (side === 1) f0 /= 2;
      side = 1;
    }
  }
  return null;
}
