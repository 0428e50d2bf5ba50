// Which waves drive a device with openings, and where does their power go?

import { complex, type ComplexArray, divide, modulus, scale } from '../numerics/complex.ts';
import type { ClosedOpenings } from '../operator/closed-openings.ts';
import { absorbedPowers } from './scatter.ts';

/** Powers of a driven solve closed with outgoing waves everywhere, for unit power in. */
export interface DrivenPowers {
  /** Out of each channel, inputs among them. */
  readonly out: Float64Array;
  /** Out of the inputs. */
  readonly reflected: number;
  readonly absorbed: number;
  readonly balance: number;
}

/** Incoming amplitudes of a reflectionless mode at real k; unit power, largest real. Zero when nothing comes in. */
export function driveOf(
  closed: ClosedOpenings,
  at: { readonly k: number; readonly vector: ComplexArray },
  inputs: readonly boolean[],
): ComplexArray {
  const drive = closed.amplitudes(complex(at.k), at.vector, () => 'incoming');
  inputs.forEach((input, i) => {
    if (!input) drive.fill(0, 2 * i, 2 * i + 2);
  });
  normaliseInputs(drive, inputs, null);
  return drive;
}

/** The driven solve with all waves outgoing: what comes back, what passes, what stays. */
export function drivenPowers(
  closed: ClosedOpenings,
  at: { readonly k: number; readonly level: number },
  drive: ComplexArray,
  inputs: readonly boolean[],
): DrivenPowers {
  const k = complex(at.k);
  const { matrix, fields } = closed.scatter(k, at.level);
  const n = inputs.length;
  const N = fields.length / (2 * n);
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let re = 0;
    let im = 0;
    for (let j = 0; j < n; j++) {
      const e = 2 * (i + j * n);
      re += matrix[e] * drive[2 * j] - matrix[e + 1] * drive[2 * j + 1];
      im += matrix[e] * drive[2 * j + 1] + matrix[e + 1] * drive[2 * j];
    }
    out[i] = re * re + im * im;
  }
  const field = new Float64Array(2 * N);
  for (let j = 0; j < n; j++)
    for (let g = 0; g < N; g++) {
      const e = 2 * (g + j * N);
      field[2 * g] += fields[e] * drive[2 * j] - fields[e + 1] * drive[2 * j + 1];
      field[2 * g + 1] += fields[e] * drive[2 * j + 1] + fields[e + 1] * drive[2 * j];
    }
  const [absorbed] = absorbedPowers(closed, k, at.level, field, 1);
  const total = drive.reduce((sum, v) => sum + v * v, 0);
  return {
    out,
    reflected: out.reduce((sum, v, i) => (inputs[i] ? sum + v : sum), 0),
    absorbed,
    balance: total - absorbed - out.reduce((a, b) => a + b, 0),
  };
}

/** The field that a drive excites with all waves outgoing. */
export function drivenField(closed: ClosedOpenings, k: number, level: number, drive: ComplexArray): ComplexArray {
  const { fields } = closed.scatter(complex(k), level);
  const n = drive.length / 2;
  const N = fields.length / (2 * n);
  const field = new Float64Array(2 * N);
  for (let j = 0; j < n; j++)
    for (let g = 0; g < N; g++) {
      const e = 2 * (g + j * N);
      field[2 * g] += fields[e] * drive[2 * j] - fields[e + 1] * drive[2 * j + 1];
      field[2 * g + 1] += fields[e] * drive[2 * j + 1] + fields[e + 1] * drive[2 * j];
    }
  return field;
}

/** Scales amplitudes (and the field they belong to) to unit incoming power, the largest input real and positive. */
export function normaliseInputs(
  amplitudes: ComplexArray,
  inputs: readonly boolean[],
  vector: ComplexArray | null,
): void {
  let total = 0;
  let largest = complex(0);
  inputs.forEach((input, i) => {
    if (!input) return;
    const a = complex(amplitudes[2 * i], amplitudes[2 * i + 1]);
    total += modulus(a) ** 2;
    if (modulus(a) > modulus(largest)) largest = a;
  });
  if (!(total > 0)) return;
  const by = divide(complex(1 / Math.sqrt(total)), scale(largest, 1 / modulus(largest)));
  for (const array of vector ? [amplitudes, vector] : [amplitudes])
    for (let i = 0; i < array.length; i += 2) {
      const [re, im] = [array[i], array[i + 1]];
      array[i] = re * by.re - im * by.im;
      array[i + 1] = re * by.im + im * by.re;
    }
}
