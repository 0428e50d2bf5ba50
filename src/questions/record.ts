// How does an answer become a stored run?

import { type Device, isWalled } from '../device/model.ts';
import { wallsOfMesh } from '../figures/walls.ts';
import { pointAt } from '../geometry/curves.ts';
import { gainReport } from '../materials/gain.ts';
import { type Complex, type ComplexArray, modulus } from '../numerics/complex.ts';
import { SPEED_OF_LIGHT } from '../numerics/conventions.ts';
import { regionMaterial } from '../operator/device-family.ts';
import { cautionsFor } from '../results/cautions.ts';
import { displayMesh, type DisplayMesh, sampleField } from '../results/display.ts';
import {
  type CrossingAnswer,
  type DriveTerm,
  type ModeAnswer,
  type Pair,
  RUN_FORMAT,
  RUN_VERSION,
  type RunArray,
  type RunField,
  type RunMark,
  type RunRecord,
} from '../results/format.ts';
import type { Multipoles } from '../scattering/contrast.ts';
import { farField } from '../scattering/amplitudes.ts';
import { type AbsorbAnswer, type AbsorbingMode, proveKnobCrossing } from './absorb.ts';
import type { CrossingsAnswer } from './crossings.ts';
import type { AxisMode } from './polish-crossing.ts';
import type { KnobCrossing } from './knob-crossing.ts';
import type { Mode, ModesAnswer } from './modes.ts';
import { type Prepared, spaceOf } from './prepare.ts';
import { absorbSentence, knobSentence, modesSentence, thresholdSentence } from './sentence.ts';
import type { LasingMode, ThresholdAnswer } from './threshold.ts';

/** What the command knows and the answer does not. */
export interface RunContext {
  /** Path of the device file, as given. */
  readonly deviceFile: string;
  readonly version: string;
  readonly node: string;
  /** ISO 8601, or null. */
  readonly when: string | null;
  readonly options: Readonly<Record<string, unknown>>;
}

/** A run that only lacks its place on the disk. */
export interface RunParts {
  readonly record: Omit<RunRecord, 'arrays' | 'files'>;
  readonly arrays: Readonly<Record<string, RunArray>>;
}

/** Drive terms below this amplitude are rounding and not listed. */
const SMALLEST_AMPLITUDE = 1e-12;

/** The run of `modes`: every mode with its fields, poles and zeros as marks. */
export function modesRecord(device: Device, answer: ModesAnswer, context: RunContext): RunParts {
  const book = openBook(device, answer.prepared, answer.order, context);
  const kind = answer.assignment === 'poles' ? 'pole' : 'zero';
  answer.modes.forEach((mode, i) => {
    const id = `mode-${i + 1}`;
    mode.vectors.forEach((vector, j) => {
      book.addField({
        id: j === 0 ? id : `${id}-${j + 1}`,
        label: `${mode.label || `mode ${i + 1}`}, Q = ${mode.q.toPrecision(3)}${part(j, mode.multiplicity)}`,
        kind: 'mode',
        k: [mode.k.re, mode.k.im],
        level: null,
        order: answer.order,
        vector,
        drive: null,
        pattern: j === 0 && kind === 'pole' && mode.farField.length > 0 ? mode.farField : null,
      });
    });
    book.marks.push({
      id: `mark-${i + 1}`,
      kind,
      k: [mode.k.re, mode.k.im],
      kError: mode.kError,
      q: mode.q,
      multiplicity: mode.multiplicity,
      label: mode.label,
      field: id,
      path: null,
      crossing: null,
    });
  });
  const cautions = cautionsFor('modes', device);
  return book.close('modes', modesSentence(device, answer), cautions, {
    modes: answer.modes.map((m) => modeAnswer(device, m, answer.assignment)),
    dropped: answer.dropped.map((d) => ({ k: [d.k.re, d.k.im], reason: d.reason })),
    covered: answer.covered,
    ...(answer.complete ? { complete: answer.complete } : {}),
    reached: answer.reached,
    ...(answer.stopped ? { stopped: answer.stopped } : {}),
    order: answer.order,
    unknowns: spaceOf(answer.prepared, answer.order).unknowns,
    notes: answer.prepared.notes,
    cautions,
  });
}

/** The run of `threshold`: crossings lowest first, each with its lasing field and its pole's path. */
export function thresholdRecord(device: Device, answer: ThresholdAnswer, context: RunContext): RunParts {
  const book = openBook(device, answer.prepared, baseOrder(answer.crossings), context);
  addCrossings(
    book,
    answer,
    'pole',
    'lasing',
    (mode) => (mode as LasingMode).farField,
    () => null,
  );
  const cautions = cautionsFor('threshold', device);
  return book.close('threshold', thresholdSentence(device, answer), cautions, {
    crossings: answer.crossings.map((c): CrossingAnswer => ({
      ...crossingAnswer(device, c, 'gain'),
      pump: c.level,
      pumpError: c.levelError,
      farField: { directionality: c.directionality, peakAngle: c.peakAngle },
    })),
    ...searched(answer),
    cautions,
  });
}

/** The run of `absorb`: crossings lowest first, each with its field, drives and forward checks. */
export function absorbRecord(device: Device, answer: AbsorbAnswer, context: RunContext): RunParts {
  const book = openBook(device, answer.prepared, baseOrder(answer.crossings), context);
  addCrossings(
    book,
    answer,
    'zero',
    'absorbing',
    () => null,
    (mode, member) => driveTerms((mode as AbsorbingMode).drives[member].amplitudes),
  );
  const cautions = cautionsFor('absorb', device);
  return book.close('absorb', absorbSentence(device, answer), cautions, {
    crossings: answer.crossings.map((c): CrossingAnswer => ({
      ...crossingAnswer(device, c, 'loss'),
      loss: c.level,
      lossError: c.levelError,
      ...provenPart(c),
      outgoingExpected: c.outgoingExpected,
      driveError: c.multipolesError,
    })),
    ...searched(answer),
    cautions,
  });
}

/**
 * The run of `threshold` or `absorb` with a knob as the parameter: every crossing has a mesh of its own, so that the
 * fields stored are those of the first.
 */
export function knobRecord(
  device: Device,
  knob: string,
  crossings: readonly KnobCrossing[],
  sense: 'gain' | 'loss',
  context: RunContext,
): RunParts {
  const command = sense === 'gain' ? 'threshold' : 'absorb';
  const cautions = cautionsFor(command, device);
  const first = crossings[0];
  if (!first) throw new RangeError('a run needs at least one crossing');
  const proofs = sense === 'loss' ? crossings.map(proveKnobCrossing) : [];
  const book = openBook(first.device, first.answer.prepared, first.answer.order, context);
  const driven = proofs[0]?.group.vectors;
  const n = first.mode.vectors[0].length / 2;
  first.mode.vectors.forEach((own, j) =>
    book.addField({
      id: j === 0 ? 'axis-1' : `axis-1-${j + 1}`,
      label: `${sense === 'gain' ? 'lasing' : 'absorbing'} mode, ${knob} = ${first.value.toPrecision(6)}${part(j, first.multiplicity)}`,
      kind: sense === 'gain' ? 'lasing' : 'absorbing',
      k: [first.k, 0],
      level: null,
      order: first.answer.order,
      vector: driven ? driven.subarray(2 * n * j, 2 * n * (j + 1)) : own,
      drive: proofs[0] ? driveTerms(proofs[0].drives[j].amplitudes) : null,
      pattern: sense === 'gain' && j === 0 ? first.mode.farField : null,
    }),
  );
  crossings.forEach((c, i) => {
    const start = c.path.ks[0];
    book.marks.push({
      id: `mark-${i + 1}`,
      kind: sense === 'gain' ? 'pole' : 'zero',
      k: [start.re, start.im],
      kError: c.kError,
      q: start.re / (2 * Math.abs(start.im)),
      multiplicity: c.multiplicity,
      label: c.label,
      field: i === 0 ? 'axis-1' : null,
      path: addPath(book, `path-${i + 1}`, knob, c.path),
      crossing: {
        k: c.k,
        kError: c.kError,
        level: c.value,
        levelError: c.valueError,
        field: i === 0 ? 'axis-1' : null,
      },
    });
  });
  return book.close(command, knobSentence(device, knob, crossings, sense), cautions, {
    crossings: crossings.map((c, i) => ({
      k: c.k,
      kError: c.kError,
      wavelength: (2 * Math.PI) / c.k,
      frequency: terahertz(device, c.k),
      knob: { name: knob, value: c.value, error: c.valueError },
      multiplicity: c.multiplicity,
      label: c.label,
      reached: c.reached,
      ...(proofs[i] ? provenPart(proofs[i]) : {}),
    })),
    covered: true,
    cautions,
  });
}

/** Drives and the weaker of the group's proofs. */
function provenPart(mode: AbsorbingMode): Pick<CrossingAnswer, 'drive' | 'drives' | 'forward'> {
  const worst = mode.drives.reduce((a, b) => (b.ownMesh.channels.outgoing > a.ownMesh.channels.outgoing ? b : a));
  const drives = mode.drives.map((d) => driveTerms(d.amplitudes));
  return {
    drive: drives[0],
    drives,
    forward: {
      ...worst.sameMesh.channels,
      scattered: worst.sameMesh.scattered,
      ownMesh: { ...worst.ownMesh.channels, scattered: worst.ownMesh.scattered },
    },
  };
}

const part = (j: number, of: number): string => (of > 1 ? ` (${j + 1} of ${of})` : '');

const baseOrder = (crossings: readonly AxisMode[]): number => Math.max(1, ...crossings.map((c) => c.order));

const searched = (answer: Omit<CrossingsAnswer, 'crossings'>): Record<string, unknown> => ({
  levelMax: answer.levelMax,
  covered: answer.covered,
  ...(answer.stopped ? { stopped: answer.stopped } : {}),
  ...(answer.complete ? { complete: answer.complete } : {}),
  beyond: answer.beyond.map((k) => [k.re, k.im]),
  others: answer.others.map((p) => ({
    from: [p.ks[0].re, p.ks[0].im],
    multiplicity: p.multiplicity,
    ended: p.ended,
    level: p.levels[p.levels.length - 1],
  })),
  notes: answer.prepared.notes,
});

/** Frequency in THz of a real k, or null without a length unit. */
const terahertz = (device: Device, k: number): number | null =>
  device.metres === null ? null : (k * SPEED_OF_LIGHT) / (2 * Math.PI * device.metres) / 1e12;

function modeAnswer(device: Device, mode: Mode, assignment: 'poles' | 'zeros'): ModeAnswer {
  const frequency = terahertz(device, mode.k.re);
  return {
    k: [mode.k.re, mode.k.im],
    kError: mode.kError,
    errors: mode.error,
    q: mode.q,
    qError: mode.qError,
    wavelength: (2 * Math.PI) / mode.k.re,
    frequency,
    lifetime: frequency === null ? null : mode.q / (2 * Math.PI * frequency),
    assignment,
    multiplicity: mode.multiplicity,
    label: mode.label,
    layerShare: mode.layerShare,
    layerSensitivity: mode.layerSensitivity,
  };
}

function crossingAnswer(device: Device, mode: AxisMode, sense: 'gain' | 'loss'): CrossingAnswer {
  return {
    k: mode.k,
    kError: mode.kError,
    wavelength: (2 * Math.PI) / mode.k,
    frequency: terahertz(device, mode.k),
    multiplicity: mode.multiplicity,
    label: mode.label,
    bodies: groupsOf(device).map(({ name, body }) => {
      const total = regionMaterialOf(device, body, mode.level, sense);
      const own = device.bodies[body];
      const added = gainReport(
        (sense === 'gain' ? 1 : -1) * mode.level * own.pumpWeight,
        own.permittivity,
        mode.k,
        device.metres,
        own.permeability,
      );
      return {
        name,
        permittivity: [total.re, total.im],
        units: {
          level: mode.level * own.pumpWeight,
          imIndex: added.imIndex,
          perCentimetre: added.perCentimetre,
          decibelPerCentimetre: added.decibelPerCentimetre,
        },
      };
    }),
    from: [mode.path.ks[0].re, mode.path.ks[0].im],
    reached: mode.reached,
  };
}

/** Total permittivity of a body at a level. */
function regionMaterialOf(device: Device, body: number, level: number, sense: 'gain' | 'loss'): Complex {
  const { p, q } = regionMaterial(device, body, level, sense);
  if (device.polarization === 'Ez') return q;
  const norm = p.re * p.re + p.im * p.im;
  return { re: p.re / norm, im: -p.im / norm };
}

/** Active bodies, one line for each group of equal members. */
function groupsOf(device: Device): { name: string; body: number }[] {
  const seen = new Map<string, number>();
  device.bodies.forEach((b, i) => {
    if (b.pumpWeight > 0) seen.set(`${b.group} ${b.pumpWeight}`, seen.get(`${b.group} ${b.pumpWeight}`) ?? i);
  });
  return [...seen.values()].map((body) => {
    const own = device.bodies[body];
    const alone = device.bodies.filter((b) => b.group === own.group && b.pumpWeight === own.pumpWeight).length === 1;
    return { name: alone ? own.name : own.group, body };
  });
}

export function driveTerms(amplitudes: Multipoles): DriveTerm[] {
  const order = (amplitudes.length / 2 - 1) / 2;
  const out: DriveTerm[] = [];
  for (let m = -order; m <= order; m++) {
    const re = amplitudes[2 * (m + order)];
    const im = amplitudes[2 * (m + order) + 1];
    if (Math.hypot(re, im) > SMALLEST_AMPLITUDE) out.push({ m, amplitude: [re, im] });
  }
  return out;
}

interface FieldInput {
  readonly id: string;
  readonly label: string;
  readonly kind: RunField['kind'];
  readonly k: Pair;
  readonly level: number | null;
  readonly order: number;
  readonly vector: ComplexArray;
  readonly drive: readonly DriveTerm[] | null;
  readonly pattern: Float64Array | null;
}

export interface Book {
  readonly marks: RunMark[];
  readonly arrays: Record<string, RunArray>;
  addField(input: FieldInput): void;
  close(command: string, sentence: string, cautions: readonly string[], answer: Record<string, unknown>): RunParts;
}

/** Collects the fields, marks and arrays of a run. */
export function openBook(device: Device, prepared: Prepared, order: number, context: RunContext): Book {
  const { mesh } = prepared;
  const arrays: Record<string, RunArray> = {};
  const marks: RunMark[] = [];
  const fields: RunField[] = [];
  const index = Math.sqrt(device.background.permittivity * device.background.permeability);
  const display: DisplayMesh = displayMesh(mesh, [
    index * device.band.kMax,
    ...device.bodies.map((b) => Math.sqrt(modulus(b.permittivity) * modulus(b.permeability)) * device.band.kMax),
  ]);
  arrays['display-points'] = display.points;
  arrays['display-triangles'] = display.triangles;
  arrays['display-regions'] = display.regions;
  const meshArrays = {
    vertices: 'mesh-vertices',
    triangles: 'mesh-triangles',
    regions: 'mesh-regions',
    edges: 'mesh-edges',
    triangleEdges: 'mesh-triangle-edges',
    edgeTriangles: 'mesh-edge-triangles',
    edgeCurve: 'mesh-edge-curve',
    curves: 'mesh-curves',
  } as const;
  if (prepared.shifts) arrays['mesh-shifts'] = prepared.shifts;
  for (const [key, name] of Object.entries(meshArrays)) arrays[name] = mesh[key as keyof typeof meshArrays];
  if (mesh.edgeFree) arrays['mesh-edge-free'] = mesh.edgeFree;
  const walls = wallsOfMesh(mesh, PIXELS_ACROSS / mesh.rimRadius).flatMap(pieces);
  if (walls.length > 0) arrays['display-walls'] = Float64Array.from(walls);
  const bodies = device.bodies.map((body, i) => ({
    name: body.name,
    group: body.group,
    material: body.material,
    permittivity: [body.permittivity.re, body.permittivity.im] as const,
    pumpWeight: body.pumpWeight,
    outlines: body.shape.map((outline, j) => {
      const name = `outline-${i}-${j}`;
      arrays[name] = polyline(outline);
      return name;
    }),
  }));
  return {
    marks,
    arrays,
    addField(input) {
      const space = spaceOf(prepared, input.order);
      const raw = sampleField(space, display, input.vector);
      const peak = largestValue(raw);
      // a driven field keeps the size and phase that its drive gives it; a mode's largest value becomes 1
      const scale = input.drive ? Math.sqrt(peak.norm) : 1;
      const by = input.drive ? { re: 1, im: 0 } : { re: peak.re / peak.norm, im: -peak.im / peak.norm };
      const coefficients = turned(Float64Array.from(input.vector), by);
      arrays[`field-${input.id}`] = coefficients;
      arrays[`display-${input.id}`] = sampleField(space, display, coefficients).map((v) => v / scale);
      if (input.pattern) arrays[`far-${input.id}`] = input.pattern;
      fields.push({
        id: input.id,
        label: input.label,
        kind: input.kind,
        k: input.k,
        level: input.level,
        coefficients: `field-${input.id}`,
        order: input.order,
        display: `display-${input.id}`,
        scale,
        drive: input.drive,
        farField: input.pattern ? `far-${input.id}` : null,
      });
    },
    close: (command, sentence, cautions, answer) => ({
      record: {
        format: RUN_FORMAT,
        version: RUN_VERSION,
        program: { name: 'wavewell', version: context.version, node: context.node },
        command,
        options: context.options,
        when: context.when,
        device: {
          file: context.deviceFile,
          title: device.title,
          lengthUnit: device.lengthUnit,
          metres: device.metres,
          polarization: device.polarization,
          band: {
            quantity: device.band.quantity,
            limits: device.band.limits,
            unit: device.band.unit,
            kMin: device.band.kMin,
            kMax: device.band.kMax,
          },
          background: { material: device.background.material, permittivity: device.background.permittivity },
          bodies,
        },
        sentence,
        cautions,
        answer,
        marks,
        fields,
        display: {
          points: 'display-points',
          triangles: 'display-triangles',
          regions: 'display-regions',
          tolerance: display.tolerance,
          ...(walls.length > 0 ? { walls: 'display-walls' } : {}),
          ...(isWalled(device) ? { enclosed: true as const } : {}),
        },
        mesh: {
          order,
          ...(prepared.shifts ? { shifts: 'mesh-shifts' } : {}),
          center: mesh.center,
          rimRadius: mesh.rimRadius,
          endRadius: mesh.endRadius,
          curveOrder: mesh.curveOrder,
          arrays: mesh.edgeFree ? { ...meshArrays, edgeFree: 'mesh-edge-free' } : meshArrays,
        },
      },
      arrays,
    }),
  };
}

/** Curved walls are cut for pictures of about this size. */
const PIXELS_ACROSS = 600;

/** [x0,y0,x1,y1] of each piece of a line of points. */
function pieces(line: Float64Array): number[] {
  const out: number[] = [];
  for (let i = 0; i + 3 < line.length; i += 2) out.push(line[i], line[i + 1], line[i + 2], line[i + 3]);
  return out;
}

function addCrossings(
  book: Book,
  answer: Omit<CrossingsAnswer, 'crossings'> & { readonly crossings: readonly AxisMode[] },
  kind: 'pole' | 'zero',
  fieldKind: 'lasing' | 'absorbing',
  pattern: (mode: AxisMode) => Float64Array | null,
  drive: (mode: AxisMode, member: number) => readonly DriveTerm[] | null,
): void {
  const parameter = kind === 'pole' ? 'pump' : 'loss';
  answer.crossings.forEach((mode, i) => {
    const id = `${fieldKind}-${i + 1}`;
    const n = mode.group.vectors.length / (2 * mode.multiplicity);
    for (let j = 0; j < mode.multiplicity; j++) {
      const own = mode.multipoles[j];
      book.addField({
        id: j === 0 ? id : `${id}-${j + 1}`,
        label: `${fieldKind} mode at k = ${mode.k.toPrecision(6)}${part(j, mode.multiplicity)}`,
        kind: fieldKind,
        k: [mode.k, 0],
        level: mode.level,
        order: mode.order,
        vector: mode.group.vectors.subarray(2 * n * j, 2 * n * (j + 1)),
        drive: drive(mode, j),
        pattern: pattern(mode) && (j === 0 ? pattern(mode) : farField(own)),
      });
    }
    const start = mode.path.ks[0];
    book.marks.push({
      id: `mark-${i + 1}`,
      kind,
      k: [start.re, start.im],
      kError: mode.kError,
      q: start.re / (2 * Math.abs(start.im)),
      multiplicity: mode.multiplicity,
      label: mode.label,
      field: id,
      path: addPath(book, `path-${i + 1}`, parameter, mode.path),
      crossing: { k: mode.k, kError: mode.kError, level: mode.level, levelError: mode.levelError, field: id },
    });
  });
  answer.others.forEach((other, i) => {
    const start = other.ks[0];
    book.marks.push({
      id: `mark-${answer.crossings.length + i + 1}`,
      kind,
      k: [start.re, start.im],
      kError: 10 ** -answer.digits * start.re,
      q: start.re / (2 * Math.abs(start.im)),
      multiplicity: other.multiplicity,
      label: '',
      field: null,
      path: addPath(book, `path-other-${i + 1}`, parameter, other),
      crossing: null,
    });
  });
}

function addPath(
  book: Book,
  name: string,
  parameter: string,
  path: { readonly levels: readonly number[]; readonly ks: readonly Complex[] },
): RunMark['path'] {
  book.arrays[`${name}-levels`] = Float64Array.from(path.levels);
  book.arrays[`${name}-ks`] = Float64Array.from(path.ks.flatMap((k) => [k.re, k.im]));
  return { parameter, levels: `${name}-levels`, ks: `${name}-ks` };
}

/** Points along an outline for drawing: arcs every 3 degrees. */
function polyline(outline: Device['bodies'][number]['shape'][number]): Float64Array {
  const out: number[] = [];
  for (const piece of outline) {
    const steps = piece.kind === 'line' ? 1 : Math.max(2, Math.ceil(Math.abs(piece.sweep) / (Math.PI / 60)));
    for (let i = 0; i < steps; i++) out.push(...pointAt(piece, i / steps));
  }
  return Float64Array.from(out);
}

function largestValue(values: Float32Array): { re: number; im: number; norm: number } {
  let best = { re: 1, im: 0, norm: 0 };
  for (let i = 0; i < values.length; i += 2) {
    const norm = values[i] * values[i] + values[i + 1] * values[i + 1];
    if (norm > best.norm) best = { re: values[i], im: values[i + 1], norm };
  }
  return best.norm > 0 ? best : { re: 1, im: 0, norm: 1 };
}

function turned(values: ComplexArray, by: Complex): ComplexArray {
  for (let i = 0; i < values.length; i += 2) {
    const a = values[i];
    const b = values[i + 1];
    values[i] = by.re * a - by.im * b;
    values[i + 1] = by.re * b + by.im * a;
  }
  return values;
}
