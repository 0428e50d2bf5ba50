// wavewell mesh FILE: into which triangles is the device cut, and how good are they?

import type { Command } from 'commander';
import { cautionsFor, DEFAULT_DIGITS, LAYER, meshFigure, type MeshQuality } from '../src/index.ts';
import { shown } from './ask.ts';
import { type DeviceFile, openDevice } from './device-file.ts';
import { farWork } from './far-work.ts';
import { type DeviceOptions, withDeviceOptions, withDigits } from './options.ts';
import { ink, say, sayFacts, sayJson, sayTable, withUnit } from './paper.ts';
import { pictureFiles } from './pictures.ts';
import type { MeshInput, MeshOutput } from './tasks.ts';
import { writeFiles } from './write-files.ts';

export function addMesh(program: Command): void {
  const command = withDigits(
    program
      .command('mesh')
      .description('cuts the device into triangles, measures and draws them')
      .argument('<FILE>', 'device file'),
  );
  withDeviceOptions(command, 'folder for mesh.svg and mesh.png').action(
    async (path: string, options: DeviceOptions & { digits?: number }) => {
      const file = openDevice(path, options);
      const input: MeshInput = {
        text: file.text,
        file: path,
        read: { ...(options.knob ? { knobs: options.knob } : {}), ...(options.band ? { band: options.band } : {}) },
        digits: options.digits ?? DEFAULT_DIGITS,
      };
      const output = await farWork<MeshOutput>('mesh', { task: 'mesh', input });
      const pictures = options.out === undefined ? {} : pictureFiles(options.out, 'mesh', drawn(file, output));
      writeFiles(pictures);
      const files = Object.keys(pictures).map(shown);
      const { quality, notes, order } = output;
      if (options.json)
        sayJson({ file: path, ...quality, order, notes, files, cautions: cautionsFor('modes', file.device) });
      else printMesh(file, output, files);
    },
  );
}

const drawn = ({ device }: DeviceFile, { mesh, order }: MeshOutput) =>
  meshFigure(mesh, {
    title: device.title,
    lengthUnit: device.lengthUnit,
    active: device.bodies.map((b) => b.pumpWeight > 0),
    order,
  });

function printMesh(
  { device }: DeviceFile,
  { quality, notes, order, mesh }: MeshOutput,
  files: readonly string[],
): void {
  const { lengthUnit } = device;
  const curved = mesh.edgeCurve.reduce((sum, c) => sum + (c >= 0 ? 1 : 0), 0);
  const sound = quality.faults.length === 0 ? '' : ` It is broken: ${quality.faults.join('; ')}.`;
  say(
    ink.bold(
      `${String(quality.triangles)} triangles, smallest angle ${quality.smallestAngle.toFixed(1)}°, ` +
        `elements of order ${String(order)} to begin with.${sound}`,
    ),
  );
  for (const note of notes) say(ink.dim(`Note: ${note}`));
  say();
  sayTable(
    [
      { head: 'region' },
      { head: 'triangles', align: 'right' },
      { head: withUnit('area', lengthUnit === 'none' ? '' : `${lengthUnit}²`), align: 'right' },
      { head: withUnit('shortest side', lengthUnit), align: 'right' },
      { head: withUnit('longest side', lengthUnit), align: 'right' },
    ],
    regionRows(device.bodies, quality),
  );
  say();
  sayFacts([
    ['vertices', String(quality.vertices)],
    ['curved sides', `${String(curved)}, of degree ${String(mesh.curveOrder)}`],
    ['least Jacobian', `${quality.smallestJacobianRatio.toFixed(3)} of the largest in the same triangle`],
    ['rim, end', `${mesh.rimRadius.toPrecision(6)}, ${mesh.endRadius.toPrecision(6)} from [${mesh.center.join(', ')}]`],
    ['drawn', files.join(', ')],
  ]);
}

/** Members of an array or scatter in one row. */
function regionRows(bodies: readonly { readonly group: string }[], { regions }: MeshQuality): string[][] {
  const rows = new Map<string, { triangles: number; area: number; shortest: number; longest: number }>();
  for (const r of regions) {
    const name = r.region === LAYER ? '(stretched layer)' : r.region < 0 ? '(background)' : bodies[r.region].group;
    const row = rows.get(name) ?? { triangles: 0, area: 0, shortest: Infinity, longest: 0 };
    rows.set(name, {
      triangles: row.triangles + r.triangles,
      area: row.area + r.area,
      shortest: Math.min(row.shortest, r.shortestSide),
      longest: Math.max(row.longest, r.longestSide),
    });
  }
  return [...rows].map(([name, r]) => [
    name,
    String(r.triangles),
    r.area.toPrecision(8),
    r.shortest.toPrecision(4),
    r.longest.toPrecision(4),
  ]);
}
