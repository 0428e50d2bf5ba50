// What goes to the thread beside the command, and what comes back?

import type { FaultReport } from './faults.ts';
import type { Assignment, Mesh, MeshQuality, ReadOptions, RunContext, RunParts } from '../src/index.ts';

/** What the worker is asked: one entry of its table of tasks, and what that task takes. */
export interface FarTask {
  readonly task: string;
  readonly input: unknown;
}

export type FarMessage =
  | { readonly kind: 'progress'; readonly stage: string; readonly done: number }
  | { readonly kind: 'done'; readonly output: unknown }
  | { readonly kind: 'fault'; readonly report: FaultReport };

export type RunCommand = 'modes' | 'threshold' | 'absorb' | 'spectrum' | 'match';

export interface Along {
  readonly knob: string;
  readonly range: readonly [number, number];
}

/** Everything a question depends on besides the device file: defaults filled in, so that equal questions look equal. */
export interface Settings {
  readonly digits: number;
  readonly band: readonly [number, number] | null;
  readonly knobs: Readonly<Record<string, number>>;
  /** GiB that refinement may use; absent: a share of the machine's. */
  readonly mostMemory?: number;
  /** Seconds after which nothing is refined any more. */
  readonly mostTime?: number;
  /** `modes`. */
  readonly assignment?: Assignment;
  readonly qMin?: number;
  /** `match`: channels or guides that take waves in; `spectrum`: channels whose part of S is judged. */
  readonly inputs?: readonly string[];
  readonly sense?: 'gain' | 'loss';
  /** `match`: all choices of inputs instead of one. */
  readonly everyChoice?: true;
  /** `spectrum`: points over the band. */
  readonly points?: number;
  readonly full?: true;
  readonly multipoles?: number;
  /** `threshold` and `absorb`; null: the default of the device. */
  readonly levelMax?: number | null;
  /** A knob as the parameter instead of pump or loss. */
  readonly along?: Along | null;
}

export interface RunInput {
  readonly command: RunCommand;
  readonly text: string;
  readonly read: ReadOptions;
  readonly settings: Settings;
  readonly context: RunContext;
}

/** Null when a knob brings no mode to the axis: there is nothing to store. */
export type RunOutput = RunParts | null;

export interface MeshInput {
  readonly text: string;
  readonly file: string;
  readonly read: ReadOptions;
  readonly digits: number;
}

export interface MeshOutput {
  readonly mesh: Mesh;
  readonly notes: readonly string[];
  readonly quality: MeshQuality;
  readonly order: number;
}
