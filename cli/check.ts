// wavewell check FILE: what is in the device file, and can it be solved?

import type { Command } from 'commander';
import {
  areaOf,
  type Body,
  boundingCircle,
  cautionsFor,
  type Device,
  type Guide,
  guideEnds,
  standardGuide,
  transverseWavenumber,
  fromWavenumber,
  deviceFigure,
  type DeviceSize,
  deviceSize,
  showBytes,
} from '../src/index.ts';
import { bandFacts } from './answer.ts';
import { shown } from './ask.ts';
import { type DeviceFile, openDevice } from './device-file.ts';
import { type DeviceOptions, withDeviceOptions } from './options.ts';
import { ink, say, sayFacts, sayJson, sayTable, unitText, withUnit } from './paper.ts';
import { pictureFiles } from './pictures.ts';
import { writeFiles } from './write-files.ts';

export function addCheck(program: Command): void {
  const command = program
    .command('check')
    .description('reads a device file, lists what is in it and draws it')
    .argument('<FILE>', 'device file');
  withDeviceOptions(command, 'folder for device.svg and device.png').action((path: string, options: DeviceOptions) => {
    const file = openDevice(path, options);
    const pictures = options.out === undefined ? {} : pictureFiles(options.out, 'device', deviceFigure(file.device));
    writeFiles(pictures);
    const files = Object.keys(pictures).map(shown);
    if (options.json) sayJson({ ...contents(file), files, cautions: cautionsFor('modes', file.device) });
    else printContents(file, files);
  });
}

/** Bodies that were drawn together: a single one, an array, a scatter. */
interface Group {
  readonly name: string;
  readonly material: string;
  readonly count: number;
  readonly area: number;
  /** Diameter of the circle around one member. */
  readonly across: number;
  readonly permittivity: Body['permittivity'];
  readonly permeability: Body['permeability'];
  /** Active members and their weight. */
  readonly active: number;
  readonly weight: number;
}

function groupsOf(device: Device): Group[] {
  const groups = new Map<string, Body[]>();
  for (const body of device.bodies) groups.set(body.group, [...(groups.get(body.group) ?? []), body]);
  return [...groups].map(([name, members]) => ({
    name,
    material: members[0].material,
    count: members.length,
    area: members.reduce((sum, b) => sum + areaOf(b.shape), 0),
    across: Math.max(...members.map((b) => 2 * boundingCircle([b.shape]).radius)),
    permittivity: members[0].permittivity,
    permeability: members[0].permeability,
    active: members.filter((b) => b.pumpWeight > 0).length,
    weight: Math.max(...members.map((b) => b.pumpWeight)),
  }));
}

function contents({ path, device }: DeviceFile): Record<string, unknown> {
  const size = deviceSize(device);
  return {
    file: path,
    title: device.title,
    lengthUnit: device.lengthUnit,
    polarization: device.polarization,
    band: device.band,
    knobs: device.knobs,
    background: device.background,
    bodies: groupsOf(device).map(({ permittivity, permeability, ...group }) => ({
      ...group,
      permittivity: [permittivity.re, permittivity.im],
      permeability: [permeability.re, permeability.im],
    })),
    guides: (device.guides ?? []).map((guide) => {
      const [, size, , cutoff, next, recommended, channels] = guideCells(device, guide);
      return { name: guide.name, size, width: guide.width, cutoff, next, recommended, channels: Number(channels) };
    }),
    size: {
      center: size.circle.center,
      radius: size.circle.radius,
      wavelengthsAcross: size.wavelengthsAcross,
      unknowns: size.unknowns,
      bytes: size.bytes,
    },
  };
}

function printContents({ path, device }: DeviceFile, files: readonly string[]): void {
  const size = deviceSize(device);
  const groups = groupsOf(device);
  const { lengthUnit, band } = device;
  say(ink.bold(sentence(path, device, groups, size)));
  say();
  sayFacts([
    ...(device.title === '' ? [] : [['title', device.title] as const]),
    [
      'polarization',
      `${device.polarization} (${device.polarization === 'Ez' ? 'electric' : 'magnetic'} field out of the plane)`,
    ],
    ['background', `${device.background.material}, ε = ${shortNumber(device.background.permittivity)}`],
    ...bandFacts({ ...band, lengthUnit, metres: device.metres }),
    ['size', `${shortNumber(2 * size.circle.radius)} ${unitText(lengthUnit)} across`.replace('  ', ' ')],
    ['factorization', `about ${showBytes(size.bytes)} at five digits (${String(size.unknowns)} unknowns)`],
  ]);
  say();
  sayTable(
    [
      { head: 'bodies' },
      { head: 'count', align: 'right' },
      { head: 'material' },
      { head: 'ε', align: 'right' },
      { head: 'μ', align: 'right' },
      { head: withUnit('across', lengthUnit), align: 'right' },
      { head: withUnit('area', lengthUnit === 'none' ? '' : `${lengthUnit}²`), align: 'right' },
      { head: 'pump' },
    ],
    groups.map((g) => [
      g.name,
      g.count > 1 ? String(g.count) : '',
      g.material,
      complexText(g.permittivity),
      g.permeability.re === 1 && g.permeability.im === 0 ? '' : complexText(g.permeability),
      shortNumber(g.across),
      shortNumber(g.area),
      g.active === 0
        ? ''
        : `weight ${shortNumber(g.weight)}${g.active < g.count ? `, ${String(g.active)} of them` : ''}`,
    ]),
  );
  if (device.guides) {
    say();
    sayTable(
      [
        { head: 'guides' },
        { head: 'size' },
        { head: withUnit('width', lengthUnit), align: 'right' },
        { head: `cutoff [${band.unit}]`.replace(' []', ''), align: 'right' },
        { head: 'next mode', align: 'right' },
        { head: 'recommended' },
        { head: 'channels', align: 'right' },
      ],
      device.guides.map((guide) => guideCells(device, guide)),
    );
  }
  if (device.knobs.length > 0) {
    say();
    sayTable(
      [{ head: 'knobs' }, { head: 'value', align: 'right' }, { head: 'range' }, { head: 'tolerance' }],
      device.knobs.map((k) => [
        k.name,
        shortNumber(k.value),
        k.range ? k.range.map(shortNumber).join(' to ') : '',
        k.tolerance ? `${k.tolerance.kind === 'limit' ? '±' : 'σ ='} ${shortNumber(k.tolerance.value)}` : '',
      ]),
    );
  }
  say();
  if (files.length > 0) sayFacts([['drawn', files.join(', ')]]);
  else say(ink.dim('  --out DIR draws it.'));
}

function sentence(path: string, device: Device, groups: readonly Group[], size: DeviceSize): string {
  const count = device.bodies.length;
  const active = groups.filter((g) => g.active > 0).map((g) => g.name);
  return (
    `${path} reads well: ${String(count)} ${count === 1 ? 'body' : 'bodies'} in ${device.background.material}, ` +
    `${size.wavelengthsAcross.toPrecision(3)} wavelengths across` +
    `${active.length > 0 ? `, active: ${active.join(', ')}` : ', none active'}.`
  );
}

/** Cutoffs in the band's own quantity; the recommended band of a standard size in GHz. */
function guideCells(device: Device, guide: Guide): string[] {
  const { permittivity, permeability } = device.background;
  const index = Math.sqrt(permittivity * permeability);
  const ends = guideEnds(device.polarization, guide.wall);
  const { quantity, unit, kMax } = device.band;
  const cutoff = (j: number): number => transverseWavenumber(ends, guide.width, j) / index;
  const inBand = (k: number): string =>
    k === 0 ? 'none' : shortNumber(fromWavenumber(quantity, k, unit, device.metres));
  let propagating = 0;
  while (cutoff(propagating) < kMax) propagating++;
  const standard = guide.size === '' ? undefined : standardGuide(guide.size);
  return [
    guide.name,
    guide.size,
    shortNumber(guide.width),
    inBand(cutoff(0)),
    inBand(cutoff(1)),
    standard ? `${standard.band.map(String).join(' to ')} GHz` : '',
    String(guide.modes ?? propagating),
  ];
}

const shortNumber = (value: number): string => String(Number(value.toPrecision(7)));

const complexText = ({ re, im }: Body['permittivity']): string =>
  im === 0 ? shortNumber(re) : `${shortNumber(re)} ${im < 0 ? '−' : '+'} ${shortNumber(Math.abs(im))}i`;
