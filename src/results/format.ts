// What does a stored run hold, and how are its bytes laid out?

import type { BandQuantity, LengthUnit } from '../device/model.ts';
import type { Polarization } from '../numerics/conventions.ts';

export const RUN_FORMAT = 'wavewell-run';
export const RUN_VERSION = 1;

export type Pair = readonly [re: number, im: number];

/** Where an array sits in `arrays.bin`: little-endian, each aligned to 8 bytes. */
export interface ArrayEntry {
  readonly type: 'f64' | 'f32' | 'i32' | 'u32';
  /** In bytes from the start of the file. */
  readonly offset: number;
  /** In elements. */
  readonly length: number;
}

export type RunArray = Float64Array | Float32Array | Int32Array | Uint32Array;

/** One resonance as `modes` reports it. k in 1/length unit, wavelength in length units, frequency in THz. */
export interface ModeAnswer {
  readonly k: Pair;
  readonly kError: number;
  /** kError apart: discretisation, what the layer returns, rounding. */
  readonly errors?: { readonly discretization: number; readonly boundary: number; readonly algebra: number };
  readonly q: number;
  readonly qError: number;
  readonly wavelength: number;
  readonly frequency: number | null;
  /** Photon lifetime of the energy, picoseconds (null when dimensionless): Q/ω. */
  readonly lifetime: number | null;
  readonly assignment: 'poles' | 'zeros';
  readonly multiplicity: number;
  /** For example "m = 5", or "" where the device shows no symmetry. */
  readonly label: string;
  /** Share of ∫|ε||u|² that lies in the stretched layer. */
  readonly layerShare: number;
  /** |dk/dθ|/|k| by the layer's angle θ: of order 1 for modes of the layer, which are dropped. */
  readonly layerSensitivity?: number;
}

/** What an independent count says of a list: members of a group one by one. */
export interface CompleteAnswer {
  readonly found: number;
  readonly counted: number;
  /** The count is settled and equals what was found. */
  readonly proven: boolean;
  /** Why not, else "". */
  readonly reason: string;
  /** Crossings: the list is complete below this level. */
  readonly below?: number;
}

/** Pump or loss in the units engineers use. */
export interface LevelAnswer {
  /** D: active permittivity is ε ∓ i D w. */
  readonly level: number;
  readonly imIndex: number;
  /** Power gain or loss coefficient; null when dimensionless. */
  readonly perCentimetre: number | null;
  readonly decibelPerCentimetre: number | null;
}

export interface DriveTerm {
  readonly m: number;
  readonly amplitude: Pair;
}

export interface PowerCheck {
  readonly incoming: number;
  readonly outgoing: number;
  readonly absorbed: number;
  /** incoming − outgoing − absorbed, as a share of incoming. */
  readonly balance: number;
}

/** A driven solve closed exactly on the rim, and beside it the scattered-field form with the stretched layer. */
export interface ForwardAnswer extends PowerCheck {
  readonly scattered?: PowerCheck;
}

/** S-parameters at one k: `S[i][j]` is the amplitude out of channel i for unit amplitude into channel j, exp(−iωt). */
export interface ScatterAnswerPoint {
  readonly k: Pair;
  readonly wavelength: number;
  /** THz, or null. */
  readonly frequency: number | null;
  /** Absent where the run holds S as an array: `spectrumView` reads both. */
  readonly S?: readonly (readonly Pair[])[];
  /** Of every entry. */
  readonly error: number;
  /** Channels that carry power at this k. */
  readonly propagates: readonly boolean[];
  /** Share of unit power into each channel that the device absorbs. */
  readonly absorbed: readonly number[];
  /** Null where it was not counted: points of a projected model. */
  readonly balance: number | null;
  readonly unitarity: number | null;
  readonly reciprocity: number;
  /** Points of a projected model: its certified error against the full solve on the same mesh. */
  readonly modelError?: number;
  /** Largest and smallest share that any drive can lose to the device. */
  readonly best?: number;
  readonly worst?: number;
  /** Sum of the delays of all eigenchannels times c, in length units. */
  readonly delay?: number;
  /** Smallest singular value of S between the inputs asked for. */
  readonly smallest?: number | null;
  /** Put in to resolve a sharp resonance. */
  readonly added?: boolean;
}

/** A reflectionless mode at real k, with the driven solve of an independent mesh that proves it. */
export interface MatchAnswerRow {
  readonly k: number;
  readonly kError: number;
  /** Loss or pump, or the knob's value. */
  readonly level: number;
  readonly levelError: number;
  readonly drive: readonly { readonly channel: string; readonly amplitude: Pair }[];
  /** Power out of every channel for unit power in. */
  readonly out: readonly number[];
  readonly reflected: number;
  readonly absorbed: number;
  readonly balance: number;
  /** The same on the mesh of the search. */
  readonly sameMesh: { readonly reflected: number; readonly absorbed: number; readonly balance: number };
}

/** A choice of input channels with its reflectionless mode nearest to the real axis; null where the window has none. */
export interface ChoiceAnswerRow {
  readonly inputs: readonly string[];
  readonly k: Readonly<Pair> | null;
  readonly kError: number | null;
  readonly q: number | null;
  /** Complex k of its other modes in the window. */
  readonly others: readonly Readonly<Pair>[];
}

/** A mode on the real axis: a lasing threshold (pump) or a coherent absorption point (loss). */
export interface CrossingAnswer {
  readonly k: number;
  readonly kError: number;
  readonly wavelength: number;
  readonly frequency: number | null;
  readonly multiplicity: number;
  readonly label: string;
  /** `threshold`: D with its error. */
  readonly pump?: number;
  readonly pumpError?: number;
  /** `absorb`: D with its error. */
  readonly loss?: number;
  readonly lossError?: number;
  /** Total permittivity of each active body at the crossing. */
  readonly bodies: readonly { readonly name: string; readonly permittivity: Pair; readonly units: LevelAnswer }[];
  /** k of the same mode at parameter zero. */
  readonly from: Pair;
  /** `absorb`: unit total power; one list for each of the `multiplicity` orthonormal drives. */
  readonly drive?: readonly DriveTerm[];
  readonly drives?: readonly (readonly DriveTerm[])[];
  readonly forward?: ForwardAnswer & { readonly ownMesh: ForwardAnswer };
  /** `absorb`: norm of what the next order adds to a drive of unit power. */
  readonly driveError?: number;
  /** `absorb`: outgoing share to be expected on the own mesh from the errors of k and loss. */
  readonly outgoingExpected?: number;
  /** The errors are below the digits asked for. */
  readonly reached?: boolean;
  /** `threshold`: where the light goes. */
  readonly farField?: { readonly directionality: number; readonly peakAngle: number };
}

export interface RunBody {
  readonly name: string;
  readonly group: string;
  readonly material: string;
  readonly permittivity: Pair;
  readonly pumpWeight: number;
  /** Closed polylines [x0,y0,x1,y1,…] of the body's own outlines, one array name each, for drawing. */
  readonly outlines: readonly string[];
}

/** A cross (pole) or circle (zero) of the complex plane, its path to the axis, and the field that belongs to it. */
export interface RunMark {
  readonly id: string;
  readonly kind: 'pole' | 'zero';
  readonly k: Pair;
  readonly kError: number;
  readonly q: number;
  readonly multiplicity: number;
  readonly label: string;
  /** Id of a `RunField`, or null. */
  readonly field: string | null;
  /** Stored path: `levels` (real, one a point) and `ks` (interleaved complex), array names. */
  readonly path: { readonly parameter: string; readonly levels: string; readonly ks: string } | null;
  /** Where the path meets the real axis. */
  readonly crossing: {
    readonly k: number;
    readonly kError: number;
    readonly level: number;
    readonly levelError: number;
    readonly field: string | null;
  } | null;
}

export interface RunField {
  readonly id: string;
  /** Short name for a list or a heading, for example "lasing mode at 4.1253". */
  readonly label: string;
  readonly kind: 'mode' | 'lasing' | 'absorbing' | 'driven';
  readonly k: Pair;
  /** Pump or loss D at which it was computed, or null. */
  readonly level: number | null;
  /** Array name: interleaved complex coefficients of the finite-element space: max |u| about 1, or the field under `drive`. */
  readonly coefficients: string;
  /** Order of its space; absent: `mesh.order`. */
  readonly order?: number;
  /** Array name: interleaved complex (f32) values at the display points; scaled so that max |u| = 1. */
  readonly display: string;
  /** The factor that was divided out of `display`. */
  readonly scale: number;
  /** `absorbing`: the drive; otherwise null. */
  readonly drive: readonly DriveTerm[] | null;
  /** Array name: far-field power density at 0, 1, … 359 degrees (f64, mean 1), or null. */
  readonly farField: string | null;
}

export interface RunRecord {
  readonly format: typeof RUN_FORMAT;
  readonly version: typeof RUN_VERSION;
  readonly program: { readonly name: 'wavewell'; readonly version: string; readonly node: string };
  readonly command: string;
  readonly options: Readonly<Record<string, unknown>>;
  /** ISO 8601 time handed in by the command, or null. */
  readonly when: string | null;
  readonly device: {
    readonly file: string;
    readonly title: string;
    readonly lengthUnit: LengthUnit;
    readonly metres: number | null;
    readonly polarization: Polarization;
    readonly band: {
      readonly quantity: BandQuantity;
      readonly limits: Pair;
      readonly unit: string;
      readonly kMin: number;
      readonly kMax: number;
    };
    readonly background: { readonly material: string; readonly permittivity: number };
    readonly bodies: readonly RunBody[];
  };
  /** The answer in one sentence, words and numbers. */
  readonly sentence: string;
  readonly cautions: readonly string[];
  /** The same object that `--json` prints. */
  readonly answer: Readonly<Record<string, unknown>>;
  readonly marks: readonly RunMark[];
  readonly fields: readonly RunField[];
  /** Sampled triangles for drawing, inside the rim only; curved and high-order shapes followed to `tolerance`. */
  readonly display: {
    /** f64 [x0,y0,…] */
    readonly points: string;
    /** u32, three a triangle, counterclockwise. */
    readonly triangles: string;
    /** i32, one a triangle: index into device.bodies, or -1 for the background. */
    readonly regions: string;
    readonly tolerance: number;
    /** f64 [x0,y0,x1,y1, …]: straight pieces of walls, open ends of guides left out; absent: none. */
    readonly walls?: string;
    /** Walls all around: the rim is only a circle about them. */
    readonly enclosed?: true;
  };
  /** The finite-element mesh (fields of src/mesh/mesh.ts by name) and the highest order of its space. */
  readonly mesh: {
    readonly order: number;
    /** Array name: i32, one a triangle, what its order is above (below) that of the field; absent: all alike. */
    readonly shifts?: string;
    readonly center: Pair;
    readonly rimRadius: number;
    readonly endRadius: number;
    readonly curveOrder: number;
    readonly arrays: Readonly<
      Record<
        'vertices' | 'triangles' | 'regions' | 'edges' | 'triangleEdges' | 'edgeTriangles' | 'edgeCurve' | 'curves',
        string
      >
    > & {
      /** Devices with walls: tags of outer edges left free. */
      readonly edgeFree?: string;
    };
  };
  readonly arrays: Readonly<Record<string, ArrayEntry>>;
  /** Files of the run folder other than `run.json`, made when it is stored: reading checks `arrays.bin` against it. */
  readonly files?: Readonly<Record<string, { readonly bytes: number; readonly sha256: string }>>;
}
