// What is being done, how far is it, and how long will it take?

import { errorInk } from './paper.ts';

export interface ProgressLine {
  /** `done` is the share of the stage, 0 … 1. */
  report(stage: string, done: number): void;
  clear(): void;
}

/** Milliseconds between two drawings. */
const PACE = 100;

let open: ProgressLine | null = null;

/** Removes the line that may stand on the terminal, before anything else is written there. */
export const clearProgress = (): void => open?.clear();

/** One line on stderr, rewritten in place, on a terminal only; the time left is that of the stage. */
export function progressLine(what: string): ProgressLine {
  const { stderr } = process;
  if (stderr.isTTY !== true) return { report: () => undefined, clear: () => undefined };
  let stage = '';
  let began = 0;
  let drawn = -Infinity;
  const line: ProgressLine = {
    report(now, done) {
      const time = performance.now();
      const fresh = now !== stage || done === 0;
      if (fresh) {
        stage = now;
        began = time;
      }
      if (!fresh && time - drawn < PACE) return;
      drawn = time;
      const share = done > 0 && done < 1 ? ` ${String(Math.floor(100 * done))} %` : '';
      const left = done >= 0.05 && done < 1 ? ((time - began) * (1 - done)) / done / 1000 : 0;
      const text = `${what}: ${stage}${share}${left >= 1 ? ` · ${timeText(left)} left` : ''}`;
      stderr.write(`\r\x1b[2K${errorInk.dim(text.slice(0, Math.max(20, (stderr.columns || 80) - 1)))}`);
    },
    clear() {
      if (drawn > -Infinity) stderr.write('\r\x1b[2K');
      drawn = -Infinity;
      stage = '';
    },
  };
  open = line;
  return line;
}

/** '12 s', '3 min', '2 h'. */
export function timeText(seconds: number): string {
  if (seconds < 90) return `${String(Math.max(1, Math.round(seconds)))} s`;
  const minutes = seconds / 60;
  return minutes < 90 ? `${String(Math.round(minutes))} min` : `${String(Math.round(minutes / 60))} h`;
}
