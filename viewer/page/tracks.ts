// Where does a mark stand at a level of pump or loss, and which stored field belongs to it there?

import type { Pair, RunMark } from '../../src/results/format.ts';
import type { PageRun } from './run.ts';

/** A mark with its stored path. */
export interface Track {
  readonly mark: RunMark;
  /** Levels in increasing order, or null where no path is stored. */
  readonly levels: Float64Array | null;
  /** k at these levels, interleaved. */
  readonly ks: Float64Array | null;
}

export async function loadTracks(run: PageRun): Promise<Track[]> {
  const paths = run.record.marks.flatMap(({ path }) => (path ? [path.levels, path.ks] : []));
  const arrays = await run.arrays(paths);
  const byName = new Map(paths.map((name, i) => [name, arrays[i] as Float64Array]));
  return run.record.marks.map((mark) => ({
    mark,
    levels: mark.path ? byName.get(mark.path.levels)! : null,
    ks: mark.path ? byName.get(mark.path.ks)! : null,
  }));
}

/**
 * k at a level, linear between stored points. `known` is false beyond the path's ends, where the last point stands, and
 * for a mark without a path at any level but zero.
 */
export function positionAt({ mark, levels, ks }: Track, level: number): { readonly k: Pair; readonly known: boolean } {
  if (!levels || !ks || levels.length === 0) return { k: mark.k, known: level === 0 };
  const { crossing } = mark;
  if (crossing && level === crossing.level) return { k: [crossing.k, 0], known: true };
  const last = levels.length - 1;
  if (level <= levels[0]) return { k: [ks[0], ks[1]], known: level === levels[0] || level === 0 };
  if (level >= levels[last]) return { k: [ks[2 * last], ks[2 * last + 1]], known: level === levels[last] };
  let i = 0;
  while (levels[i + 1] < level) i++;
  const f = (level - levels[i]) / (levels[i + 1] - levels[i]);
  return {
    k: [ks[2 * i] + f * (ks[2 * i + 2] - ks[2 * i]), ks[2 * i + 1] + f * (ks[2 * i + 3] - ks[2 * i + 1])],
    known: true,
  };
}

/** The field on the axis when the level is that of the crossing, the mark's own one elsewhere. */
export function fieldAtLevel(mark: RunMark, level: number): string | null {
  const { crossing } = mark;
  if (crossing?.field && (level === crossing.level || !mark.field)) return crossing.field;
  return mark.field;
}

/** Largest level worth reaching: a little above the last crossing, or the end of the longest path. */
export function levelReach(tracks: readonly Track[]): number {
  let crossing = 0;
  let end = 0;
  for (const { mark, levels } of tracks) {
    crossing = Math.max(crossing, mark.crossing?.level ?? 0);
    end = Math.max(end, levels?.at(-1) ?? 0);
  }
  return crossing > 0 ? Math.max(1.08 * crossing, Math.min(end, 1.25 * crossing)) : end;
}

/** The mark that answers the question: the first to cross, or else the one nearest to the axis. */
export function firstMark(marks: readonly RunMark[]): RunMark | null {
  const shown = marks.filter((mark) => mark.field ?? mark.crossing?.field);
  const crossing = shown.filter((mark) => mark.crossing);
  if (crossing.length > 0) return crossing.reduce((a, b) => (b.crossing!.level < a.crossing!.level ? b : a));
  if (shown.length > 0) return shown.reduce((a, b) => (Math.abs(b.k[1]) < Math.abs(a.k[1]) ? b : a));
  return marks[0] ?? null;
}
