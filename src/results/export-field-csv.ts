// How does a field leave as CSV: on the nodes, on a grid, along a line?

import { bodyName, fieldOf, type FieldSample, type FieldSampler, type RunView } from './run-view.ts';
import { column, csvText, type Cell } from './csv.ts';
import type { RunRecord } from './format.ts';

/** A box, corners (x0, y0) and (x1, y1), in length units. */
export type Box = readonly [x0: number, y0: number, x1: number, y1: number];

/** More rows than this no table holds: a longer one would not fit in one string. */
export const MOST_ROWS = 2_000_000;

/**
 * The field on the display points of the run, one row a point, in their stored order. The body is that of the triangles
 * around the point; on a boundary the later body, which covers. Without a sampler the values are the stored display
 * values (7 digits); with one they are evaluated in full precision.
 */
export function fieldNodesCsv(run: RunView, fieldId: string, sample?: FieldSampler): string {
  const field = fieldOf(run.record, fieldId);
  const points = run.array(run.record.display.points);
  const shown = run.array(field.display);
  const bodies = bodyOfPoints(run, points.length / 2);
  checkRows(points.length / 2);
  return fieldTable(run.record, fieldId, [], function* () {
    for (let i = 0; i < bodies.length; i++) {
      const [x, y] = [points[2 * i], points[2 * i + 1]];
      // A point of the rim may lie a rounding error outside of what the sampler knows: its stored value stands in.
      const exact = sample?.(fieldId, x, y);
      const re = exact?.re ?? shown[2 * i] * field.scale;
      const im = exact?.im ?? shown[2 * i + 1] * field.scale;
      yield fieldRow(run.record, x, y, { re, im, body: bodies[i] });
    }
  });
}

/**
 * The field on nx × ny points of the box, its edges included, x running fastest. Points beyond the rim, where the field
 * is not known, keep their row: empty values, body "outside".
 *
 * @throws when the box is empty or the grid has fewer than 1 or more than MOST_ROWS points
 */
export function fieldGridCsv(
  run: RunView,
  fieldId: string,
  sample: FieldSampler,
  grid: { readonly box: Box; readonly nx: number; readonly ny: number },
): string {
  const { box, nx, ny } = grid;
  checkCount('nx', nx);
  checkCount('ny', ny);
  checkRows(nx * ny);
  const [x0, y0, x1, y1] = box;
  if (!box.every(Number.isFinite) || x1 < x0 || y1 < y0) {
    throw new Error(`box ${box.join(', ')}: expected x0, y0, x1, y1 with x0 <= x1 and y0 <= y1`);
  }
  fieldOf(run.record, fieldId);
  return fieldTable(run.record, fieldId, [], function* () {
    for (let j = 0; j < ny; j++) {
      for (let i = 0; i < nx; i++) {
        const [x, y] = [between(x0, x1, i, nx), between(y0, y1, j, ny)];
        yield fieldRow(run.record, x, y, sample(fieldId, x, y));
      }
    }
  });
}

/**
 * The field on `count` evenly spaced points from one point to another, both included; a last column holds the distance
 * walked.
 */
export function fieldLineCsv(
  run: RunView,
  fieldId: string,
  sample: FieldSampler,
  line: {
    readonly from: readonly [number, number];
    readonly to: readonly [number, number];
    readonly count: number;
  },
): string {
  const { from, to, count } = line;
  checkCount('count', count);
  checkRows(count);
  if (![...from, ...to].every(Number.isFinite)) {
    throw new Error(`line from ${from.join(', ')} to ${to.join(', ')}: expected finite coordinates`);
  }
  fieldOf(run.record, fieldId);
  return fieldTable(run.record, fieldId, [column('distance', lengthText(run.record))], function* () {
    for (let i = 0; i < count; i++) {
      const [x, y] = [between(from[0], to[0], i, count), between(from[1], to[1], i, count)];
      yield [...fieldRow(run.record, x, y, sample(fieldId, x, y)), Math.hypot(x - from[0], y - from[1])];
    }
  });
}

/** 'um', or '' when the device has no unit. */
export const lengthText = (record: RunRecord): string =>
  record.device.lengthUnit === 'none' ? '' : record.device.lengthUnit;

/**
 * What the values are counted in. A mode has no amplitude of its own; a driven field is counted in units of an incoming
 * cylindrical wave H⁽²⁾ of unit amplitude.
 */
function fieldUnit(record: RunRecord, fieldId: string): string {
  const { kind } = fieldOf(record, fieldId);
  return kind === 'driven' || kind === 'absorbing' ? 'per unit drive' : 'arbitrary';
}

function fieldTable(
  record: RunRecord,
  fieldId: string,
  more: readonly string[],
  rows: () => Iterable<readonly Cell[]>,
): string {
  const length = lengthText(record);
  const unit = fieldUnit(record, fieldId);
  const u = record.device.polarization;
  return csvText(
    [
      column('x', length),
      column('y', length),
      column(`re_${u}`, unit),
      column(`im_${u}`, unit),
      column(`abs_${u}`, unit),
      'phase [deg]',
      'body',
      ...more,
    ],
    rows(),
  );
}

function fieldRow(record: RunRecord, x: number, y: number, value: FieldSample | null): Cell[] {
  if (!value) return [x, y, null, null, null, null, 'outside'];
  const { re, im, body } = value;
  return [x, y, re, im, Math.hypot(re, im), (Math.atan2(im, re) * 180) / Math.PI, bodyName(record, body)];
}

/** i-th of n evenly spaced numbers, both ends hit exactly; the middle when n = 1. */
function between(a: number, b: number, i: number, n: number): number {
  if (n === 1) return a + (b - a) / 2;
  return i === n - 1 ? b : a + ((b - a) * i) / (n - 1);
}

/** The highest body number among the display triangles that meet in each point; -1 (background) where there is none. */
function bodyOfPoints(run: RunView, count: number): Int32Array {
  const triangles = run.array(run.record.display.triangles);
  const regions = run.array(run.record.display.regions);
  const bodies = new Int32Array(count).fill(-1);
  for (let t = 0; t < regions.length; t++) {
    for (let c = 0; c < 3; c++) {
      const p = triangles[3 * t + c];
      if (regions[t] > bodies[p]) bodies[p] = regions[t];
    }
  }
  return bodies;
}

function checkCount(name: string, n: number): void {
  if (!Number.isInteger(n) || n < 1) throw new Error(`${name} = ${String(n)}: expected a whole number from 1 up`);
}

function checkRows(n: number): void {
  if (n > MOST_ROWS) throw new Error(`${String(n)} points: expected at most ${String(MOST_ROWS)} in one table`);
}
