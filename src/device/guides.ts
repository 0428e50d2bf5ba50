// Which guides does the file describe?

import type { Shape } from '../geometry/curves.ts';
import { containsPoint } from '../geometry/inside.ts';
import { polygon } from '../geometry/shapes.ts';
import { METRES } from '../materials/spectral-units.ts';
import { listNames, nearestName, showNumber } from './findings.ts';
import type { Path } from './findings.ts';
import type { Material } from './materials.ts';
import type { Device, Guide } from './model.ts';
import { aboveZero, wholeFrom } from './numbers.ts';
import type { Log, NumberReader } from './numbers.ts';
import type { DeviceInput } from './schema.ts';
import { toRadians, usable } from './shapes.ts';
import { STANDARD_GUIDES, standardGuide } from './standard-guides.ts';
import { wallOf } from './walls.ts';

/** Channels of one guide. */
const MOST_MODES = 200;

/** Guides in file order; entries with findings are left out. */
export function readGuides(
  input: DeviceInput,
  materials: ReadonlyMap<string, Material | null>,
  numbers: NumberReader,
  log: Log,
): readonly Guide[] {
  const inputs = input.guides ?? [];
  return inputs.flatMap((guide, i): Guide[] => {
    const path: Path = ['guides', i];
    const before = log.findings.length;
    const first = inputs.findIndex((other) => other.name === guide.name);
    if (first < i)
      log.report(
        [...path, 'name'],
        `the name "${guide.name}" a second time`,
        'a name of its own',
        'rename one of the two',
      );
    const width = readWidth(guide, path, input, numbers, log);
    const from = numbers.readPoint(guide.from, [...path, 'from']);
    const angle = toRadians(numbers.read(guide.angle, [...path, 'angle']));
    const length =
      guide.length === undefined ? width : numbers.read(guide.length, [...path, 'length'], aboveZero('a length'));
    const reference = guide.reference === undefined ? 0 : numbers.read(guide.reference, [...path, 'reference']);
    const modes =
      guide.modes === undefined
        ? null
        : numbers.read(guide.modes, [...path, 'modes'], wholeFrom(1, MOST_MODES, 'a number of modes'));
    const wall = wallOf(guide.wall, [...path, 'wall'], materials, log);
    if (wall?.kind === 'conductor')
      log.report(
        [...path, 'wall'],
        `${guide.wall!}, a lossy wall`,
        '"electric wall" or "magnetic wall": the modes of a guide to infinity are those of perfect walls',
        'make the guide perfect, and the enclosure of the metal',
      );
    if (log.findings.length > before || !usable(width, ...from, angle, length, reference, modes ?? 0)) return [];
    const size = guide.size === undefined ? '' : standardGuide(guide.size)!.name;
    return [
      {
        name: guide.name,
        from,
        angle,
        width,
        length,
        reference,
        wall: wall!.kind as 'electric' | 'magnetic',
        modes,
        size,
      },
    ];
  });
}

/** Inner width in the length unit of the file; NaN with a finding made. */
function readWidth(
  guide: NonNullable<DeviceInput['guides']>[number],
  path: Path,
  input: DeviceInput,
  numbers: NumberReader,
  log: Log,
): number {
  if ((guide.width === undefined) === (guide.size === undefined)) {
    log.report(
      guide.width === undefined ? path : [...path, 'size'],
      guide.width === undefined ? 'neither size nor width' : 'size and width together',
      'exactly one of "size" or "width"',
      guide.width === undefined ? 'add one, such as size: WR-90' : 'keep one of the two',
      'key',
    );
    return NaN;
  }
  if (guide.width !== undefined) return numbers.read(guide.width, [...path, 'width'], aboveZero('a width'));
  const at: Path = [...path, 'size'];
  const standard = standardGuide(guide.size!);
  const metres = METRES[input.length ?? 'none'];
  if (!standard) {
    const names = STANDARD_GUIDES.map((g) => g.name);
    const near = nearestName(guide.size!, names);
    log.report(
      at,
      `the unknown guide "${guide.size!}"`,
      `one of ${listNames(names)}, or its R name`,
      near === undefined ? 'give the width instead' : `write ${near} instead`,
    );
    return NaN;
  }
  if (metres === null) {
    log.report(at, `${standard.name} in a file without a length unit`, 'length: mm, or another unit', 'add length: mm');
    return NaN;
  }
  if (input.polarization === 'Hz') {
    log.report(
      at,
      `${standard.name} with polarization Hz`,
      'polarization Ez: a rectangular guide is seen across its broad side, the electric field out of the plane',
      'use Ez, or give the width of a parallel-plate guide',
    );
    return NaN;
  }
  // millimetres to metres to units of the file, rounded to the digits of the table
  return Number(((standard.width * 1e-3) / metres).toPrecision(12));
}

/**
 * Refuses guides whose end does not stand free: what lies beyond the port line must be nothing, and what lies before it
 * the background alone, for there the guide is closed by its own modes.
 */
export function checkPorts(device: Pick<Device, 'guides' | 'enclosure' | 'bodies'>, log: Log): void {
  const guides = device.guides ?? [];
  guides.forEach((guide, i) => {
    const [dx, dy] = guideDirection(guide);
    const at = (s: number, t: number): [number, number] => [
      guide.from[0] + s * dx - t * dy,
      guide.from[1] + s * dy + t * dx,
    ];
    const across = Array.from({ length: PORT_SAMPLES }, (_, j) => ((j + 0.5) / PORT_SAMPLES - 0.5) * guide.width);
    const step = 1e-6 * guide.width;
    const spaces = [
      ...(device.enclosure?.spaces ?? []).map((shape) => ({ name: 'the enclosure', shape })),
      ...guides
        .filter((other) => other !== guide)
        .map((other) => ({ name: `guide ${other.name}`, shape: guideStretch(other, 0, other.length) })),
    ];
    const beyond = spaces.find(({ shape }) => across.some((t) => containsPoint(shape, at(guide.length + step, t))));
    const length = `length ${showNumber(guide.length)}`;
    if (beyond)
      log.report(
        ['guides', i],
        `guide ${guide.name} with ${length}, whose end lies inside ${beyond.name}`,
        'an end that stands free, for from there the guide runs to infinity',
        'make the guide longer, or turn it away',
      );
    const body = device.bodies.find(({ shape }) =>
      across.some(
        (t) => containsPoint(shape, at(guide.length - step, t)) || containsPoint(shape, at(guide.length + step, t)),
      ),
    );
    if (body)
      log.report(
        ['guides', i],
        `guide ${guide.name} with ${length}, at whose end lies the body ${body.name}`,
        'the background alone at the end, for there the guide is closed by its own modes',
        'make the guide longer, or the body shorter',
      );
  });
}

/** Points across a port line at which its surroundings are looked at. */
const PORT_SAMPLES = 24;

/** The stretch of a guide between two distances from its beginning, as a shape. */
export function guideStretch(guide: Pick<Guide, 'from' | 'angle' | 'width'>, start: number, end: number): Shape {
  const [dx, dy] = guideDirection(guide);
  const h = guide.width / 2;
  const corner = (s: number, t: number): [number, number] => [
    guide.from[0] + s * dx - t * dy,
    guide.from[1] + s * dy + t * dx,
  ];
  return polygon([corner(start, -h), corner(end, -h), corner(end, h), corner(start, h)]);
}

/** Unit vector along the guide, exact for multiples of 90°. */
export function guideDirection({ angle }: Pick<Guide, 'angle'>): [number, number] {
  const quarter = angle / (Math.PI / 2);
  const q = Math.round(quarter);
  if (Math.abs(quarter - q) < 1e-14)
    return (
      [
        [1, 0],
        [0, 1],
        [-1, 0],
        [0, -1],
      ] as const
    )[((q % 4) + 4) % 4].slice() as [number, number];
  return [Math.cos(angle), Math.sin(angle)];
}

/** Every space with walls around it: the enclosure's shapes and the guides' meshed stretches. */
export const walledSpaces = (device: Pick<Device, 'enclosure' | 'guides'>): readonly Shape[] => [
  ...(device.enclosure?.spaces ?? []),
  ...(device.guides ?? []).map((g) => guideStretch(g, 0, g.length)),
];
