// How are times taken and printed in the benchmark?

import { loadavg } from 'node:os';

/** Processor seconds of this process, all threads. */
export function cpu(): number {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
}

/** Result, processor seconds and seconds on the wall. */
export function timed<T>(work: () => T): { result: T; seconds: number; wall: number } {
  const start = cpu();
  const clock = performance.now();
  const result = work();
  return { result, seconds: cpu() - start, wall: (performance.now() - clock) / 1000 };
}

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2;
}

/** Slope of log y over log x by least squares; NaN for a single x. */
export function exponent(x: readonly number[], y: readonly number[]): number {
  const mean = (v: readonly number[]): number => v.reduce((sum, a) => sum + Math.log(a), 0) / v.length;
  const [mx, my] = [mean(x), mean(y)];
  let above = 0;
  let below = 0;
  x.forEach((a, i) => {
    above += (Math.log(a) - mx) * (Math.log(y[i]) - my);
    below += (Math.log(a) - mx) ** 2;
  });
  return above / below;
}

export function print(line: string): void {
  process.stdout.write(`${line}\n`);
}

/** What else the machine is doing: times on the wall mean little when this is above a few tenths at the start. */
export const machineLoad = (): string => `load ${loadavg()[0].toFixed(1)} at the start of this part`;
