// Which loss, frequency and input wave make a device absorb everything, and is it so?

import { returnedToMode } from '../accuracy/layer-return.ts';
import { HIGHEST_ORDER } from '../accuracy/resolution.ts';
import type { Device } from '../device/model.ts';
import { scaleColumn, transposeProduct } from '../eigen/columns.ts';
import type { Complex, ComplexArray } from '../numerics/complex.ts';
import { closeByChannels } from '../operator/channel-boundary.ts';
import { driveMultipoles, normaliseDrive, power } from '../scattering/amplitudes.ts';
import {
  absorbedPower,
  type ContrastProblem,
  multipoleJumps,
  multipoleOrder,
  type Multipoles,
} from '../scattering/contrast.ts';
import type { KnobCrossing } from './knob-crossing.ts';
import { type CrossingsAnswer, type CrossingsRequest, findCrossings } from './crossings.ts';
import type { AxisMode } from './polish-crossing.ts';
import { familyOf, ownMesh, type Prepared, spaceOf } from './prepare.ts';

/** Powers of one driven solve, as shares of the incoming power. */
export interface PowerBalance {
  readonly incoming: number;
  readonly outgoing: number;
  readonly absorbed: number;
  /** incoming − outgoing − absorbed. */
  readonly balance: number;
}

/** A drive of unit total power: incoming amplitudes a_m for m = −M … M, its largest real and positive. */
export interface AbsorbingDrive {
  readonly amplitudes: Multipoles;
  /** Driven solves on the mesh of the crossing: prove the algebra. */
  readonly sameMesh: ForwardCheck;
  /** Driven solves on a mesh of its own, one order higher: prove the device. */
  readonly ownMesh: ForwardCheck;
}

/** Two driven solves with independent open boundaries. */
export interface ForwardCheck {
  /** Closed exactly, channel by channel, on the rim: no layer, power balanced to rounding. */
  readonly channels: PowerBalance;
  /** Scattered-field form with the outgoing stretched layer; amplitudes from the bodies. */
  readonly scattered: PowerBalance;
}

export interface AbsorbingMode extends AxisMode {
  /** One orthonormal drive a member of the degenerate group; the group's vectors are the fields under these drives. */
  readonly drives: readonly AbsorbingDrive[];
  /** Largest outgoing share to be expected on the own mesh, from the errors of k and level on both meshes. */
  readonly outgoingExpected: number;
}

export interface AbsorbAnswer extends Omit<CrossingsAnswer, 'crossings'> {
  readonly crossings: readonly AbsorbingMode[];
}

/** Triangles of the own mesh are smaller by this factor. */
const OWN_MESH_REFINEMENT = 0.83;

/**
 * All coherent-absorption points in the band with added loss D ≤ levelMax, lowest first: real k and real D ≥ 0 at which
 * a zero of ε + iD·weight lies on the axis, with the drive and two forward checks of each.
 *
 * @throws RangeError when no body is active, or for digits out of range.
 */
export function findAbsorption(device: Device, request: CrossingsRequest = {}): AbsorbAnswer {
  const answer = findCrossings(device, 'loss', request);
  const own = ownMesh(answer.prepared, device, OWN_MESH_REFINEMENT, highestDriven(answer.crossings));
  const crossings = answer.crossings.map((mode, i) => {
    request.progress?.('forward checks', i / answer.crossings.length);
    return prove(answer.prepared, own, mode);
  });
  return { ...answer, crossings };
}

/** Drive and forward checks of a zero that a knob has brought to the axis: no loss beyond the file's. */
export function proveKnobCrossing(crossing: KnobCrossing): AbsorbingMode {
  const { device, answer, mode } = crossing;
  const { prepared, order } = answer;
  const space = spaceOf(prepared, order);
  const M = multipoleOrder(device, prepared.bodyRadius, crossing.k);
  const multipoles = multipoleJumps(
    { device, space, k: crossing.k, level: 0, sense: 'loss', order: M },
    mode.vectors,
    null,
  );
  const vectors = new Float64Array(2 * space.unknowns * mode.multiplicity);
  mode.vectors.forEach((v, i) => vectors.set(v, 2 * space.unknowns * i));
  const axis: AxisMode = {
    k: crossing.k,
    kError: crossing.kError,
    level: 0,
    levelError: 0,
    multiplicity: crossing.multiplicity,
    label: crossing.label,
    group: { k: mode.k, spread: 0, slope: { re: 0, im: 0 }, multiplicity: mode.multiplicity, vectors },
    order,
    multipoles,
    multipolesError: 0,
    path: crossing.path,
    reached: crossing.reached,
    stopped: crossing.reached ? null : 'order',
  };
  const own = ownMesh(prepared, device, OWN_MESH_REFINEMENT, highestDriven([axis]));
  return prove(prepared, own, axis);
}

/** Highest |m| that holds more than 1e-9 of a member's power, at any k. */
function highestDriven(modes: readonly Pick<AxisMode, 'multipoles'>[]): () => number {
  let highest = 0;
  for (const amplitudes of modes.flatMap((mode) => mode.multipoles)) {
    const M = (amplitudes.length / 2 - 1) / 2;
    const least = 1e-9 * power(amplitudes);
    for (let m = -M; m <= M; m++) {
      const i = 2 * (m + M);
      if (amplitudes[i] ** 2 + amplitudes[i + 1] ** 2 > least) highest = Math.max(highest, Math.abs(m));
    }
  }
  return () => highest;
}

function prove(prepared: Prepared, own: Prepared, mode: AxisMode): AbsorbingMode {
  const { drives, vectors } = orthonormalDrives(mode);
  const same = forwardCheck(prepared, mode.order, mode, drives);
  const other = forwardCheck(own, mode.order + 1, mode, drives);
  // both meshes are off: twice the distance from the zero, and twice what the drive lacks; the layers return a little
  const off = 2 * (mode.kError + Math.abs(mode.group.slope.im) * mode.levelError);
  return {
    ...mode,
    group: { ...mode.group, vectors },
    multipoles: drives.map((a) => Float64Array.from(a, (v) => -v)),
    drives: drives.map((amplitudes, i) => ({ amplitudes, sameMesh: same[i], ownMesh: other[i] })),
    outgoingExpected: Math.min(
      1,
      (off * outgoingPerDetuning(prepared, mode, vectors)) ** 2 +
        (2 * mode.multipolesError) ** 2 +
        returnedToMode(own.layer, { re: mode.k, im: 0 }, drives) ** 2,
    ),
  };
}

/**
 * |db/dk| for a drive of unit power. Green's second identity between the fields at the zero and beside it gives
 * 8 p_b Σ (−1)^m a_{−m} b_m = ± δk uᵀA_k u, A_k = ∂A/∂k with the incoming layer; of a group the Frobenius mean. For a
 * lossless body of flat loss this is 1/(2 D |dk/dD|): the zero's distance from its pole.
 */
function outgoingPerDetuning(prepared: Prepared, mode: AxisMode, vectors: ComplexArray): number {
  const family = familyOf(prepared, mode.order, 'incoming', 'loss');
  const n = family.size;
  const { multiplicity: columns } = mode;
  const work = new Float64Array(2 * n * columns);
  family.multiplyInto(work, { re: mode.k, im: 0 }, mode.level, 'byK', vectors, columns);
  const { permittivity, permeability } = prepared.device.background;
  const background = prepared.device.polarization === 'Ez' ? permeability : permittivity;
  return (background * Math.hypot(...transposeProduct(vectors, columns, work, columns, n))) / (8 * Math.sqrt(columns));
}

/**
 * Gram–Schmidt on the members' incoming amplitudes, the first member leading, and the fields that belong to the results:
 * b − a of a field without outgoing waves is minus its drive.
 */
function orthonormalDrives(mode: AxisMode): { readonly drives: Multipoles[]; readonly vectors: ComplexArray } {
  const n = mode.group.vectors.length / (2 * mode.multiplicity);
  const vectors = Float64Array.from(mode.group.vectors);
  const drives: Multipoles[] = [];
  mode.multipoles.forEach((jump, j) => {
    const drive = jump.map((v) => -v);
    for (let pass = 0; pass < 2; pass++) {
      drives.forEach((other, i) => {
        const c = inner(other, drive);
        takeAway(drive, other, c);
        takeAway(vectors.subarray(2 * n * j, 2 * n * (j + 1)), vectors.subarray(2 * n * i, 2 * n * (i + 1)), c);
      });
    }
    const { drive: unit, factor } = normaliseDrive(drive);
    drives.push(unit);
    scaleColumn(vectors, j, n, factor.re, factor.im);
  });
  return { drives, vectors };
}

/** x ← x − c y. */
function takeAway(x: ComplexArray, y: ComplexArray, c: Complex): void {
  for (let i = 0; i < x.length; i += 2) {
    x[i] = x[i] - (c.re * y[i] - c.im * y[i + 1]);
    x[i + 1] = x[i + 1] - (c.re * y[i + 1] + c.im * y[i]);
  }
}

function inner(a: Multipoles, b: Multipoles): Complex {
  let re = 0;
  let im = 0;
  for (let i = 0; i < a.length; i += 2) {
    re += a[i] * b[i] + a[i + 1] * b[i + 1];
    im += a[i] * b[i + 1] - a[i + 1] * b[i];
  }
  return { re, im };
}

/** Drives the outgoing problem with both open boundaries and counts all power. */
function forwardCheck(
  prepared: Prepared,
  order: number,
  mode: AxisMode,
  drives: readonly Multipoles[],
): ForwardCheck[] {
  const driveOrder = (drives[0].length / 2 - 1) / 2;
  const problemAt = (p: number): ContrastProblem => ({
    device: prepared.device,
    space: spaceOf(prepared, p),
    k: mode.k,
    level: mode.level,
    sense: 'loss',
    order: driveOrder,
  });
  const k = { re: mode.k, im: 0 };
  const higher = Math.min(order + SCATTERED_ORDERS, HIGHEST_ORDER);
  const layered = familyOf(prepared, higher, 'outgoing', 'loss').factorize(k, mode.level);
  const scattered = driveMultipoles(problemAt(higher), layered, drives);
  layered.release();
  const family = familyOf(prepared, order, 'outgoing', 'loss');
  const closed = closeByChannels(prepared.device, family, CHANNELS_PER_MULTIPOLE * driveOrder).factorize(k, mode.level);
  const total = drives.map((drive) => closed.drive(drive));
  closed.release();
  const takenScattered = absorbedPower(
    problemAt(higher),
    scattered.map((d) => d.scattered),
    drives,
  );
  const takenTotal = absorbedPower(
    problemAt(order),
    total.map((d) => d.field),
    null,
  );
  return drives.map((drive, j) => ({
    channels: balanceOf(drive, total[j].outgoing, takenTotal[j]),
    scattered: balanceOf(drive, scattered[j].outgoing, takenScattered[j]),
  }));
}

/**
 * The channels balance whatever the mesh. The scattered form does not: its incident field is exact, its answer discrete,
 * and a sharp mode amplifies the difference. It is solved so many orders above the mode's.
 */
const SCATTERED_ORDERS = 2;

/** Channels beyond the drive's multipoles carry nothing out, but close the near field of the bodies. */
const CHANNELS_PER_MULTIPOLE = 2;

function balanceOf(drive: Multipoles, outgoing: Multipoles, perBody: Float64Array): PowerBalance {
  const incoming = power(drive);
  const out = power(outgoing) / incoming;
  const absorbed = perBody.reduce((a, b) => a + b, 0) / incoming;
  return { incoming: 1, outgoing: out, absorbed, balance: 1 - out - absorbed };
}
