// Is the basis of driven fields orthonormal, complete for what it was made of, and are its witnesses a norm?

import { expect, test } from 'vitest';
import { resolutionFor } from '../../src/accuracy/resolution.ts';
import { readDevice } from '../../src/device/read.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { prepareOpenings } from '../../src/questions/prepare-openings.ts';
import { projectScattering } from '../../src/scattering/project-scattering.ts';

const device = readDevice(
  `wavewell: 1
polarization: Ez
band: { wavenumber: [1, 2] }
materials: { glass: { index: 2 } }
bodies: [ { material: glass, disk: { center: [0.1, 0], radius: 0.6 } } ]`,
  'test.yaml',
);
const scope = { kMin: 1, kMax: 2, slope: 0.05 };
const openings = prepareOpenings(device, scope, resolutionFor(3), 1, 5);
const closed = openings.closed(5, 'loss');
const start = () => projectScattering(closed, { kMin: 1, kMax: 2, channels: openings.channels, tolerance: 1e-12 });
const fields = (k: number) => closed.scatter({ re: k, im: 0 }, 0).fields;

/** Largest |VᵀXV − 1|: stiffness and k₀² mass of the model add up to it where materials are real. */
function distanceFromOrthonormal(projection: ReturnType<typeof start>): number {
  const { size: r, terms } = projection.model();
  const [K, M] = terms.map((t) => t.matrix);
  let worst = 0;
  for (let j = 0; j < r; j++)
    for (let i = 0; i < r; i++)
      worst = Math.max(worst, Math.abs(K[i + j * r] + 2.5 * M[i + j * r] - (i === j ? 1 : 0)));
  return worst;
}

test('each snapshot of 11 channels brings about 11 directions; a second one of the same k none', () => {
  const projection = start();
  const first = projection.add(fields(1.2), 1.2);
  expect(first).toBeGreaterThan(5);
  expect(first).toBeLessThanOrEqual(13);
  expect(projection.add(fields(1.2), 1.2)).toBe(0);
  projection.add(fields(1.9), 1.9);
  expect(distanceFromOrthonormal(projection)).toBeLessThan(1e-10);
});

test('fields of very different size, as at a sharp resonance, spoil nothing', () => {
  const projection = start();
  const random = randomStream(4);
  const mixed = fields(1.4);
  const n = openings.channels.length;
  const N = mixed.length / (2 * n);
  // column c is 10^(4 − c) times as large, and holds a little of all others
  for (let c = 0; c < n; c++)
    for (let i = 0; i < 2 * N; i++) mixed[i + 2 * N * c] = 10 ** (4 - c) * (mixed[i + 2 * N * c] + 1e-3 * mixed[i] * random.uniform()); // prettier-ignore
  projection.add(mixed, 1.4);
  projection.add(fields(1.4), 1.4);
  expect(distanceFromOrthonormal(projection)).toBeLessThan(1e-9);
});

test('a field of the basis is itself again, and joins no second time', () => {
  const projection = start();
  projection.add(fields(1.2), 1.2);
  const size = projection.size;
  const vector = new Float64Array(2 * size);
  vector[0] = 0.6;
  vector[3] = 0.8;
  expect(projection.addField(projection.field(vector))).toBe(0);
  expect(projection.size).toBe(size);
});

test('the mean square of the witnesses is the norm in X⁻¹ within their spread', () => {
  const projection = start();
  projection.add(fields(1.2), 1.2);
  const { terms, witnesses: l, size: r } = projection.model();
  // X v of a basis field has norm 1 in X⁻¹
  let mean = 0;
  for (let b = 0; b < r; b++)
    for (let w = 0; w < l; w++)
      mean += (terms[0].witness[b * l + w] + 2.5 * terms[1].witness[b * l + w]) ** 2 / (l * r);
  expect(Math.abs(mean - 1)).toBeLessThan(0.25);
});
