// What do exports and figures need of a stored run?

import type { RunArray, RunField, RunRecord } from './format.ts';

/** A run as read back: its record, and its arrays by name. */
export interface RunView {
  readonly record: RunRecord;
  /** Throws when the run holds no array of that name. */
  array(name: string): RunArray;
}

/** The field at one point, in the normalisation of its stored coefficients. */
export interface FieldSample {
  readonly re: number;
  readonly im: number;
  /** Index into `device.bodies`, -1 for the background. */
  readonly body: number;
}

/** Value of one of the run's fields at (x, y) in length units; null where the field is not known (beyond the rim). */
export type FieldSampler = (fieldId: string, x: number, y: number) => FieldSample | null;

/** The run's field of that id; throws with the ids there are. */
export function fieldOf(record: RunRecord, id: string): RunField {
  const field = record.fields.find((f) => f.id === id);
  if (field) return field;
  const known = record.fields.map((f) => f.id).join(', ') || 'none';
  throw new Error(`no field "${id}" in this run; it holds: ${known}`);
}

/** Name of a body by its index; -1 is the background. */
export function bodyName(record: RunRecord, index: number): string {
  return record.device.bodies[index]?.name ?? 'background';
}
