// Can a device that reads well also be solved?

import { boundingCircle } from '../geometry/bounding-circle.ts';
import type { Circle } from '../geometry/bounding-circle.ts';
import { containsPoint } from '../geometry/inside.ts';
import { pointAt } from '../geometry/curves.ts';
import { thinPlaces } from '../geometry/thin-places.ts';
import { divide, modulus, multiply, squareRoot } from '../numerics/complex.ts';
import type { Complex } from '../numerics/complex.ts';
import type { PlacedBody } from './bodies.ts';
import { showNumber } from './findings.ts';
import { show } from './materials.ts';
import type { Body, Device } from './model.ts';
import { deviceCircle } from './reach.ts';
import type { Log } from './numbers.ts';
import { deviceSize } from './size.ts';

/** Larger devices need more memory than machines have: see `deviceSize`. */
const MOST_WAVELENGTHS_ACROSS = 2000;
/** Smaller devices are slips of the length unit: nothing resonates there. */
const FEWEST_WAVELENGTHS_ACROSS = 1e-5;
/** Bodies, gaps and walls smaller than this part of the device cannot be meshed together with it. */
const SMALLEST_PART = 1e-6;
/** Boundaries nearer than this part of the device touch: sums of rounded numbers agree that well. */
const TOUCHING = 1e-11;

/** Refuses, with the figure, what would fail after long work. `placed` gives the file entry of each body. */
export function checkSanity(device: Device, placed: readonly PlacedBody[], log: Log): void {
  checkSize(device, placed, log);
  if (log.findings.length > 0) return;
  checkThinPlaces(device, placed, log);
  checkFlatResonance(device, placed, log);
}

function checkSize(device: Device, placed: readonly PlacedBody[], log: Log): void {
  const { circle, bytes, wavelengthsAcross } = deviceSize(device);
  const wavelength = (2 * Math.PI) / device.band.kMax;
  const unit = device.lengthUnit === 'none' ? '' : ` ${device.lengthUnit}`;
  const lengths = `${showNumber(2 * circle.radius)}${unit} across at a vacuum wavelength of ${showNumber(wavelength)}${unit}`;
  const circles = device.bodies.map((body) => boundingCircle([body.shape]));
  let most = wavelengthsAcross;
  let least = wavelengthsAcross;
  device.bodies.forEach((body, i) => {
    const across = (2 * circles[i].radius * modulus(indexOf(body))) / wavelength;
    most = Math.max(most, across);
    least = Math.max(least, (2 * circle.radius * modulus(indexOf(body))) / wavelength);
  });
  if (!(most <= MOST_WAVELENGTHS_ACROSS))
    log.report(
      ['bodies'],
      `a device of ${lengths}: ${showNumber(most)} wavelengths in its densest material, about ${showBytes(bytes)} of memory`,
      `at most ${MOST_WAVELENGTHS_ACROSS} wavelengths`,
      'check the length unit and the band, or make the device smaller',
      'key',
    );
  else if (least < FEWEST_WAVELENGTHS_ACROSS)
    log.report(
      ['bodies'],
      `a device of ${lengths}: ${showNumber(least)} wavelengths`,
      `at least ${FEWEST_WAVELENGTHS_ACROSS} wavelengths`,
      'check the length unit and the band',
      'key',
    );
  else checkParts(circles, circle, placed, log);
}

/** One finding for each entry of the file that has a body too small. */
function checkParts(circles: readonly Circle[], whole: Circle, placed: readonly PlacedBody[], log: Log): void {
  const small = placed.filter((_, i) => circles[i].radius < SMALLEST_PART * whole.radius);
  for (const { body, path } of new Map(small.map((one) => [one.body.group, one])).values())
    log.report(
      path,
      `${body.name}, ${showNumber(2 * boundingCircle([body.shape]).radius)} across in a device of ${showNumber(2 * whole.radius)}`,
      `at least ${SMALLEST_PART} of the device`,
      'remove it, or make it larger',
    );
}

/** One finding for each pair of entries. */
function checkThinPlaces(device: Device, placed: readonly PlacedBody[], log: Log): void {
  const shapes = device.bodies.map((body) => body.shape);
  if (shapes.length === 0) return;
  const { radius } = deviceCircle(device);
  const unit = device.lengthUnit === 'none' ? '' : ` ${device.lengthUnit}`;
  const seen = new Set<string>();
  for (const { first, second, width, place } of thinPlaces(shapes, TOUCHING * radius, SMALLEST_PART * radius)) {
    const [a, b] = [placed[first], placed[second]];
    const pair = `${a.body.group} ${b.body.group}`;
    if (seen.has(pair)) continue;
    seen.add(pair);
    // A coordinate that is zero but for rounding is shown as zero.
    const where = `at [${place.map((v) => showNumber(Math.abs(v) < 1e-12 * radius ? 0 : v)).join(', ')}]`;
    log.report(
      b.path,
      first === second
        ? `${b.body.name} only ${showNumber(width)}${unit} thick ${where}`
        : `a place ${showNumber(width)}${unit} wide between the boundaries of ${a.body.name} and ${b.body.name} ${where}`,
      `at least ${showNumber(SMALLEST_PART * radius)}${unit}, or 0 (touching): thinner ones cannot be meshed in this device`,
      first === second ? 'make it thicker, or remove it' : 'let them touch exactly, or move them apart',
    );
  }
}

/** Refractive index √(εμ). */
const indexOf = (body: Body): Complex => squareRoot(multiply(body.permittivity, body.permeability));

export function showBytes(bytes: number): string {
  const units = ['bytes', 'kB', 'MB', 'GB', 'TB'];
  let value = bytes;
  let i = 0;
  for (; i < units.length - 1 && value >= 1000; i++) value /= 1000;
  return `${showNumber(Number(value.toPrecision(2)))} ${units[i]}`;
}

/**
 * Where the ratio of p (1/ε in `Hz`, 1/μ in `Ez`) across a flat boundary is −1, waves of any short length fit on it and the problem has no
 * solution space: refused. Nearby ratios at corners are another matter.
 */
function checkFlatResonance(device: Device, placed: readonly PlacedBody[], log: Log): void {
  const quantity = device.polarization === 'Hz' ? 'permittivity' : 'permeability';
  const valueOf = (body: Body): Complex => body[quantity];
  const outside: Complex = { re: device.background[quantity], im: 0 };
  const kinds = new Map([outside, ...device.bodies.map(valueOf)].map((value) => [`${value.re} ${value.im}`, value]));
  if (![...kinds.values()].some((a) => [...kinds.values()].some((b) => isOpposite(a, b)))) return;
  const reported = new Set<string>();
  const refuse = (i: number, value: Complex, other: Complex, neighbour: string): void => {
    const { body, path } = placed[i];
    if (reported.has(body.material)) return;
    reported.add(body.material);
    log.report(
      [...path, 'material'],
      `${body.material} with ${quantity} ${show(value)} against ${neighbour} with ${show(other)}: their ratio is -1`,
      `a ratio other than -1 in ${device.polarization}: there waves of every short length fit on the boundary, and no mesh resolves them`,
      `change one ${quantity}, or give it a loss`,
    );
  };
  device.bodies.forEach((body, i) => {
    const value = valueOf(body);
    if (isOpposite(value, outside) && meetsBackground(device.bodies, i))
      refuse(i, value, outside, `the background ${device.background.material}`);
    if (!(value.re < 0)) return;
    device.bodies.forEach((other, j) => {
      if (j !== i && isOpposite(value, valueOf(other)) && near(body, other))
        refuse(i, value, valueOf(other), other.name);
    });
  });
}

const isOpposite = (a: Complex, b: Complex): boolean => {
  const ratio = divide(a, b);
  return Math.hypot(ratio.re + 1, ratio.im) < 1e-9;
};

/** Whether some sampled point of the body's boundary lies in no other body. */
function meetsBackground(bodies: readonly Body[], i: number): boolean {
  const samples = bodies[i].shape.flat().flatMap((piece) => [pointAt(piece, 0), pointAt(piece, 0.5)]);
  return samples.some((p) => !bodies.some((other, j) => j !== i && containsPoint(other.shape, p)));
}

function near(a: Body, b: Body): boolean {
  const p = boundingCircle([a.shape]);
  const q = boundingCircle([b.shape]);
  const d = Math.hypot(p.center[0] - q.center[0], p.center[1] - q.center[1]);
  return d <= (p.radius + q.radius) * (1 + 1e-9);
}
