// Does each kind of wrong device file give place, value, expectation and mend?

import { describe, expect, test } from 'vitest';
import { DeviceError } from '../../src/device/findings.ts';
import type { Finding } from '../../src/device/findings.ts';
import { readDevice } from '../../src/device/read.ts';
import type { ReadOptions } from '../../src/device/read.ts';

const GOOD = `wavewell: 1
title: Pumped disk
length: um
polarization: Ez
band: { wavelength: [1.5, 1.6] }
knobs:
  radius: 3
  gap: 0.2
materials:
  glass: { index: 1.444 }
  core: { permittivity: 8, loss_tangent: 0.001 }
background: glass
bodies:
  - { name: core, material: core, disk: { center: [0, 0], radius: radius } }
  - { name: post, material: core, disk: { center: [radius + gap + 1, 0], radius: 1 } }
pump: { bodies: { core: 1 } }
`;

function findingsOf(text: string, options?: ReadOptions): readonly Finding[] {
  try {
    readDevice(text, 'a.yaml', options);
  } catch (error) {
    if (error instanceof DeviceError) return error.findings;
    throw error;
  }
  return [];
}

/** The good file with one line replaced (1-based), or lines added after it. */
const withLine = (line: number, ...replacement: string[]): string =>
  GOOD.split('\n')
    .toSpliced(line - 1, 1, ...replacement)
    .join('\n');

const disk = (keys: string): string => withLine(15, `  - { name: post, material: core, ${keys} }`);

test('the file itself is good', () => {
  expect(findingsOf(GOOD)).toEqual([]);
});

/** Text, then line, column, and parts of path, came, expected, mend. */
type Row = [
  what: string,
  text: string,
  line: number,
  column: number,
  path: string,
  came: string,
  expected: string,
  mend: string,
];

const rows: Row[] = [
  // Text that is no YAML
  ['empty file', '', 1, 1, '', 'an empty file', 'wavewell', 'begin with the line'],
  ['only a comment', '# nothing\n', 1, 1, '', 'an empty file', 'wavewell', 'begin with the line'],
  ['a list', '- 1\n', 1, 1, '', '- 1', 'keys with values', 'begin with the line'],
  ['a word', 'hello', 1, 1, '', 'hello', 'keys with values', 'begin with the line'],
  ['unclosed bracket', withLine(5, 'band: { wavelength: [1.5, 1.6 }'), 5, 31, '', '}', 'YAML or JSON', 'bracket'],
  ['tab', withLine(7, '\tradius: 3'), 7, 1, '', 'radius', 'YAML or JSON', 'spaces'],
  ['bad indent', withLine(8, ' gap: 0.2'), 8, 1, '', 'gap', 'YAML or JSON', 'indent'],
  ['two documents', `${GOOD}---\nwavewell: 1\n`, 17, 1, '', '---', 'YAML or JSON', 'one device a file'],
  ['unknown tag', withLine(7, '  radius: !far 3'), 7, 11, '', '!far', 'YAML or JSON', 'tag'],
  [
    'duplicate key',
    withLine(8, '  gap: 0.2', '  gap: 0.3'),
    9,
    3,
    'knobs.gap',
    '"gap" a second time',
    'once',
    'remove one',
  ],
  ['unknown alias', withLine(8, '  gap: *radius'), 8, 8, 'knobs.gap', '*radius', 'anchor', 'left factor'],
  ['alias to itself', withLine(8, '  gap: &a [*a]'), 8, 12, 'knobs.gap[0]', '*a', 'anchor', ''],
  ['empty key', withLine(8, '  : 2'), 8, 1, 'knobs', 'null', 'plain word', 'key: value'],
  ['JSON cut off', '{"wavewell": 1,\n "band": {', 2, 11, '', '', 'YAML or JSON', ''],

  // Keys and kinds
  ['no version', withLine(1, ''), 2, 1, 'wavewell', 'no key "wavewell"', '1', 'for example 1'],
  ['other version', withLine(1, 'wavewell: 2'), 1, 11, 'wavewell', '2', '1', 'write 1'],
  [
    'unknown key',
    withLine(4, 'polarisation: Ez', 'polarization: Ez'),
    4,
    1,
    'polarisation',
    '"polarisation"',
    '"polarization"',
    'write "polarization"',
  ],
  ['unknown key far from all', withLine(2, 'xyzzy: 1'), 2, 1, 'xyzzy', '"xyzzy"', '"title"', 'remove the key'],
  [
    'key of a body',
    disk('dsk: { center: [0, 0], radius: 1 }'),
    15,
    35,
    'bodies[1].dsk',
    '"dsk"',
    '"disk"',
    'write "disk"',
  ],
  [
    'key of a disk',
    disk('disk: { centre: [9, 0], radius: 1 }'),
    15,
    43,
    'bodies[1].disk.centre',
    '"centre"',
    '"center"',
    'write "center"',
  ],
  [
    'key of a knob',
    withLine(7, '  radius: { value: 3, rang: [2, 4] }'),
    7,
    23,
    'knobs.radius.rang',
    '"rang"',
    '"range"',
    'write "range"',
  ],
  [
    'key of an array',
    disk('disk: { center: [9, 0], radius: 1 }, array: { count: [2, 2], pich: [3, 3] }'),
    15,
    96,
    'bodies[1].array.pich',
    '"pich"',
    '"pitch"',
    'write "pitch"',
  ],
  ['key not yet taken', withLine(16, 'feeds: []'), 16, 1, 'feeds', '"feeds"', '"bodies"', ''],
  ['polarization missing', withLine(4), 1, 1, 'polarization', 'no key', '"Ez" or "Hz"', 'add the key "polarization"'],
  ['polarization misspelt', withLine(4, 'polarization: ez'), 4, 15, 'polarization', '"ez"', '"Ez" or "Hz"', 'write Ez'],
  ['length unit', withLine(3, 'length: inch'), 3, 9, 'length', '"inch"', '"um"', 'write'],
  ['band missing', withLine(5), 1, 1, 'band', 'no key', 'keys with values', 'add the key "band"'],
  [
    'bodies missing',
    withLine(13, 'knob: ').replace(/knob:[^]*/, ''),
    1,
    1,
    'bodies',
    'no key',
    'a list',
    'add the key "bodies"',
  ],
  [
    'no bodies',
    withLine(13, 'bodies: []').split('\n').slice(0, 13).join('\n'),
    13,
    9,
    'bodies',
    '[]',
    '1 entries or more',
    'add',
  ],
  [
    'bodies no list',
    withLine(13, 'bodies: 5').split('\n').slice(0, 13).join('\n'),
    13,
    9,
    'bodies',
    '5',
    'a list',
    'replace',
  ],
  ['empty value', withLine(8, '  gap:'), 8, 7, 'knobs.gap', 'an empty value', 'a number', 'give "gap" a value'],
  [
    'number as text',
    disk('disk: { center: [9, 0], radius: [1] }'),
    15,
    67,
    'bodies[1].disk.radius',
    '[1]',
    'a number',
    'replace',
  ],
  [
    'point too short',
    disk('disk: { center: [9], radius: 1 }'),
    15,
    51,
    'bodies[1].disk.center',
    '[9]',
    '2 entries',
    'add',
  ],
  [
    'point too long',
    disk('disk: { center: [9, 0, 0], radius: 1 }'),
    15,
    51,
    'bodies[1].disk.center',
    '[9,0,0]',
    '2 entries',
    'remove',
  ],
  ['text for a map', withLine(16, 'pump: core'), 16, 7, 'pump', '"core"', 'keys with values', 'replace'],
  ['number for a name', disk('disk: 7'), 15, 41, 'bodies[1].disk', '7', 'keys with values', 'replace'],
  [
    'gain no boolean',
    withLine(11, '  core: { permittivity: 8, gain: yes }'),
    11,
    34,
    'materials.core.gain',
    '"yes"',
    'true or false',
    'replace',
  ],
  ['name of a knob', withLine(8, '  gap: 0.2', '  2nd: 1'), 9, 3, 'knobs.2nd', '"2nd"', 'letter first', 'rename'],
  [
    'name of a body',
    withLine(15, '  - { name: "post[1]", material: core, disk: { center: [9, 0], radius: 1 } }'),
    15,
    13,
    'bodies[1].name',
    '"post[1]"',
    'letters',
    'rename',
  ],
  [
    'NaN',
    disk('disk: { center: [9, .nan], radius: 1 }'),
    15,
    55,
    'bodies[1].disk.center[1]',
    'NaN',
    'a number',
    'finite',
  ],
  [
    'infinity',
    disk('disk: { center: [9, 0], radius: .inf }'),
    15,
    67,
    'bodies[1].disk.radius',
    'Infinity',
    'a number',
    'finite',
  ],
  [
    'number too large',
    disk('disk: { center: [9, 0], radius: 1e999 }'),
    15,
    67,
    'bodies[1].disk.radius',
    'Infinity',
    'a number',
    'finite',
  ],
  [
    'two shapes',
    disk('disk: { center: [9, 0], radius: 1 }, ellipse: { center: [9, 0], radii: [1, 2] }'),
    15,
    72,
    'bodies[1].ellipse',
    '2 shapes',
    'exactly one',
    'body of its own',
  ],
  [
    'no shape',
    withLine(15, '  - { name: post, material: core }'),
    15,
    5,
    'bodies[1]',
    'no shape',
    'exactly one',
    'add a shape',
  ],
  [
    'array and scatter',
    disk(
      'disk: { center: [9, 0], radius: 1 }, array: { count: [1, 1], pitch: [1, 1] }, scatter: { inside: { disk: { center: [0, 0], radius: 9 } }, count: 1, seed: 1, minimum_gap: 0 }',
    ),
    15,
    113,
    'bodies[1].scatter',
    'array and scatter',
    'one of the two',
    'keep one',
  ],

  // Expressions and knobs
  [
    'unknown knob',
    disk('disk: { center: [2*radus, 0], radius: 1 }'),
    15,
    54,
    'bodies[1].disk.center[0]',
    'unknown knob radus at column 3',
    'radius, gap',
    'write radius',
  ],
  [
    'expression not closed',
    withLine(8, '  gap: 2*(radius'),
    8,
    17,
    'knobs.gap',
    'is not closed at column 10',
    ')',
    'add the )',
  ],
  ['expression in quotes', withLine(8, '  gap: "2 $ 3"'), 8, 11, 'knobs.gap', 'unexpected $', 'numbers', 'remove'],
  [
    'comma in brackets',
    disk('disk: { center: [max(radius, gap), 0], radius: 1 }'),
    15,
    51,
    'bodies[1].disk.center',
    '["max(radius","gap)",0]',
    '2 entries',
    '',
  ],
  ['division by zero', withLine(8, '  gap: 1/(radius - 3)'), 8, 9, 'knobs.gap', 'division by zero', 'finite', 'change'],
  [
    'square root of a negative',
    disk('disk: { center: [9, 0], radius: sqrt(gap - 1) }'),
    15,
    67,
    'bodies[1].disk.radius',
    'sqrt of -0.8',
    'finite',
    'change',
  ],
  [
    'knobs in a ring',
    withLine(8, '  gap: 2*width', '  width: gap + 1'),
    9,
    10,
    'knobs.width',
    'gap → width → gap',
    'one after the other',
    'as a number',
  ],
  [
    'knob of itself',
    withLine(8, '  gap: gap + 1'),
    8,
    8,
    'knobs.gap',
    'gap → gap',
    'one after the other',
    'as a number',
  ],
  [
    'knob called pi',
    withLine(8, '  gap: 0.2', '  pi: 3'),
    9,
    3,
    'knobs.pi',
    'a knob called pi',
    'no function',
    'rename',
  ],
  [
    'range reversed',
    withLine(8, '  gap: { value: 0.2, range: [1, 0] }'),
    8,
    29,
    'knobs.gap.range',
    '[1, 0]',
    'smaller value first',
    'order',
  ],
  [
    'value out of range',
    withLine(8, '  gap: { value: 0.2, range: [1, 2] }'),
    8,
    17,
    'knobs.gap.value',
    '0.2',
    '1 to 2',
    'change',
  ],
  [
    'tolerance negative',
    withLine(8, '  gap: { value: 0.2, tolerance: -1 }'),
    8,
    33,
    'knobs.gap.tolerance',
    '-1',
    'above 0',
    'positive',
  ],
  [
    'sigma zero',
    withLine(8, '  gap: { value: 0.2, tolerance: { sigma: 0 } }'),
    8,
    42,
    'knobs.gap.tolerance.sigma',
    '0',
    'above 0',
    'positive',
  ],

  // Shapes
  [
    'negative radius',
    disk('disk: { center: [9, 0], radius: -1 }'),
    15,
    67,
    'bodies[1].disk.radius',
    '-1',
    'a radius above 0',
    'positive',
  ],
  [
    'negative radius by knobs',
    disk('disk: { center: [9, 0], radius: gap - 1 }'),
    15,
    67,
    'bodies[1].disk.radius',
    '"gap - 1" (= -0.8)',
    'a radius above 0',
    'positive',
  ],
  [
    'zero radius',
    disk('disk: { center: [9, 0], radius: 0 }'),
    15,
    67,
    'bodies[1].disk.radius',
    '0',
    'a radius above 0',
    'positive',
  ],
  [
    'inner above outer',
    disk('ring: { center: [9, 0], outer: 1, inner: 1 }'),
    15,
    76,
    'bodies[1].ring.inner',
    '1',
    'below the outer one, 1',
    'smaller',
  ],
  [
    'semi-axis',
    disk('ellipse: { center: [9, 0], radii: [1, 0] }'),
    15,
    73,
    'bodies[1].ellipse.radii[1]',
    '0',
    'a semi-axis above 0',
    'positive',
  ],
  [
    'side',
    disk('rectangle: { center: [9, 0], size: [-1, 1] }'),
    15,
    71,
    'bodies[1].rectangle.size[0]',
    '-1',
    'a side above 0',
    'positive',
  ],
  [
    'corner radius',
    disk('rectangle: { center: [9, 0], size: [2, 1], corner_radius: 0.6 }'),
    15,
    93,
    'bodies[1].rectangle.corner_radius',
    '0.6',
    'half the shorter side, 0.5',
    'smaller',
  ],
  [
    'two sides',
    disk('regular_polygon: { center: [9, 0], radius: 1, sides: 2 }'),
    15,
    88,
    'bodies[1].regular_polygon.sides',
    '2',
    'whole number from 3',
    'whole number',
  ],
  [
    'half a side',
    disk('regular_polygon: { center: [9, 0], radius: 1, sides: 3.5 }'),
    15,
    88,
    'bodies[1].regular_polygon.sides',
    '3.5',
    'whole number from 3',
    'whole number',
  ],
  [
    'two points',
    disk('polygon: { points: [[0, 0], [1, 1]] }'),
    15,
    54,
    'bodies[1].polygon.points',
    '[[0,0],[1,1]]',
    '3 entries or more',
    'add',
  ],
  [
    'bow tie',
    disk('polygon: { points: [[8, 0], [10, 2], [10, 0], [8, 2]] }'),
    15,
    72,
    'bodies[1].polygon.points[2]',
    'sides 1 and 3 cross at [9, 1]',
    'common corners',
    'in order',
  ],
  [
    'repeated point',
    disk('polygon: { points: [[8, 0], [10, 2], [10, 0], [8, 0]] }'),
    15,
    81,
    'bodies[1].polygon.points[3]',
    '[8, 0] twice',
    'common corners',
    'remove',
  ],
  [
    'flat polygon',
    disk('polygon: { points: [[8, 0], [9, 0], [10, 0]] }'),
    15,
    71,
    'bodies[1].polygon.points[2]',
    'without area',
    'common corners',
    'off the line',
  ],
  [
    'gap of 1e-9',
    withLine(8, '  gap: 1e-9'),
    15,
    5,
    'bodies[1]',
    '1e-9 um wide between the boundaries of core and post at [3, 0]',
    'touching',
    'move them apart',
  ],
  [
    'wall of 1e-9',
    disk('ring: { center: [9, 0], outer: 1, inner: 1 - 1e-9 }'),
    15,
    5,
    'bodies[1]',
    '1e-9 um thick',
    'touching',
    'thicker',
  ],
  [
    'speck',
    disk('disk: { center: [9, 0], radius: 1e-9 }'),
    15,
    5,
    'bodies[1]',
    'post, 2e-9 across',
    'of the device',
    'larger',
  ],

  // Copies
  [
    '1e9 bodies in an array',
    disk('disk: { center: [9, 0], radius: 1 }, array: { count: [1e5, 1e4], pitch: [3, 3] }'),
    15,
    88,
    'bodies[1].array.count',
    '1000000000 bodies',
    'at most 100000',
    'fewer',
  ],
  [
    '1e9 bodies in a wheel',
    disk('disk: { center: [0, 0], radius: 1 }, array: { around: [0, 0], radius: 9, count: 1e9 }'),
    15,
    115,
    'bodies[1].array.count',
    '1000000000',
    '1 to 100000',
    'at most 100000',
  ],
  [
    '1e9 bodies in a scatter',
    disk(
      'disk: { center: [0, 0], radius: 1 }, scatter: { inside: { disk: { center: [0, 0], radius: 9 } }, count: 1e9, seed: 1, minimum_gap: 0.1 }',
    ),
    15,
    139,
    'bodies[1].scatter.count',
    '1000000000',
    '1 to 100000',
    '',
  ],
  [
    'more bodies together',
    withLine(
      15,
      '  - { name: a, material: core, disk: { center: [9, 0], radius: 1 }, array: { count: [300, 300], pitch: [3, 3] } }',
      '  - { name: b, material: core, disk: { center: [9, 0], radius: 1 }, array: { count: [300, 300], pitch: [3, 3] } }',
    ),
    13,
    1,
    'bodies',
    '180001 bodies',
    'at most 100000',
    'smaller',
  ],
  [
    'members on each other',
    disk('disk: { center: [9, 0], radius: 1 }, array: { count: [2, 1], pitch: [0, 3] }'),
    15,
    103,
    'bodies[1].array.pitch',
    '[0, 3]',
    'other than 0',
    'distance',
  ],
  [
    'scatter that cannot fit',
    disk(
      'disk: { center: [0, 0], radius: 1 }, scatter: { inside: { disk: { center: [0, 0], radius: 4 } }, count: 40, seed: 1, minimum_gap: 0.1 }',
    ),
    15,
    139,
    'bodies[1].scatter.count',
    '40 members, of which',
    'as many as fit',
    'fewer',
  ],
  [
    'negative gap',
    disk(
      'disk: { center: [0, 0], radius: 1 }, scatter: { inside: { disk: { center: [0, 0], radius: 9 } }, count: 2, seed: 1, minimum_gap: -1 }',
    ),
    15,
    164,
    'bodies[1].scatter.minimum_gap',
    '-1',
    '0 or more',
    'positive',
  ],
  [
    'duplicate names',
    withLine(15, '  - { name: core, material: core, disk: { center: [9, 0], radius: 1 } }'),
    15,
    13,
    'bodies[1].name',
    '"core" a second time (first on line 14)',
    'name of its own',
    'rename',
  ],

  // Materials
  [
    'unknown material',
    withLine(15, '  - { name: post, material: cor, disk: { center: [9, 0], radius: 1 } }'),
    15,
    29,
    'bodies[1].material',
    '"cor"',
    '"core"',
    'write "core"',
  ],
  [
    'unknown background',
    withLine(12, 'background: water'),
    12,
    13,
    'background',
    '"water"',
    '"glass"',
    'define "water"',
  ],
  ['lossy background', withLine(12, 'background: core'), 12, 13, 'background', '8 + 0.008i', 'lossless', 'lossless'],
  [
    'negative loss',
    withLine(11, '  core: { permittivity: [8, -0.1] }'),
    11,
    25,
    'materials.core.permittivity',
    '8 - 0.1i',
    'exp(-iωt)',
    'gain: true',
  ],
  [
    'negative loss tangent',
    withLine(11, '  core: { permittivity: 8, loss_tangent: -0.1 }'),
    11,
    42,
    'materials.core.loss_tangent',
    '-0.1',
    '0 or more',
    'positive',
  ],
  [
    'zero permittivity',
    withLine(11, '  core: { permittivity: 0 }'),
    11,
    25,
    'materials.core.permittivity',
    '0',
    '0.000001 to 1000000',
    'check',
  ],
  [
    'absurd permittivity',
    withLine(11, '  core: { permittivity: 1e30 }'),
    11,
    25,
    'materials.core.permittivity',
    '1e+30',
    '1000000',
    'check',
  ],
  [
    'negative index',
    withLine(11, '  core: { index: -1.5 }'),
    11,
    18,
    'materials.core.index',
    '-1.5',
    '0 or more',
    'sign',
  ],
  [
    'index and permittivity',
    withLine(11, '  core: { index: 2, permittivity: 4 }'),
    11,
    21,
    'materials.core.permittivity',
    'together',
    'exactly one',
    'keep one',
  ],
  ['neither', withLine(11, '  core: { gain: true }'), 11, 3, 'materials.core', 'neither', 'exactly one', 'index: 1.5'],
  [
    'loss tangent of an index',
    withLine(11, '  core: { index: 2, loss_tangent: 0.1 }'),
    11,
    21,
    'materials.core.loss_tangent',
    'beside index',
    'permittivity only',
    'instead',
  ],
  [
    'loss given twice',
    withLine(11, '  core: { permittivity: [4, 1], loss_tangent: 0.1 }'),
    11,
    33,
    'materials.core.loss_tangent',
    'beside a complex',
    'once',
    'remove',
  ],
  [
    'vacuum defined',
    withLine(11, '  core: { index: 2 }', '  vacuum: { index: 1 }'),
    12,
    3,
    'materials.vacuum',
    'vacuum',
    'built in',
    'rename',
  ],
  [
    'ratio -1 in Hz',
    GOOD.replace('Ez', 'Hz')
      .replace('index: 1.444', 'permittivity: 2')
      .replace('permittivity: 8, loss_tangent: 0.001', 'permittivity: -2'),
    14,
    29,
    'bodies[0].material',
    'ratio is -1',
    'other than -1',
    'give it a loss',
  ],

  // Band
  [
    'empty band',
    withLine(5, 'band: { wavelength: [1.6, 1.5] }'),
    5,
    21,
    'band.wavelength',
    '[1.6, 1.5]',
    'smaller limit first',
    '[smaller, larger]',
  ],
  [
    'band of one point',
    withLine(5, 'band: { wavelength: [1.6, 1.6] }'),
    5,
    21,
    'band.wavelength',
    '[1.6, 1.6]',
    'smaller limit first',
    '[smaller, larger]',
  ],
  [
    'band from 0',
    withLine(5, 'band: { wavelength: [0, 1.6] }'),
    5,
    21,
    'band.wavelength',
    '[0, 1.6]',
    'above 0',
    'positive',
  ],
  ['band without quantity', withLine(5, 'band: {}'), 5, 1, 'band', 'without a quantity', 'exactly one', 'wavelength'],
  [
    'two quantities',
    withLine(5, 'band: { wavelength: [1, 2], wavenumber: [1, 2] }'),
    5,
    29,
    'band.wavenumber',
    '2 quantities',
    'exactly one',
    'keep one',
  ],
  [
    'frequency without unit',
    withLine(5, 'band: { frequency: [180, 200] }'),
    5,
    9,
    'band.frequency',
    'without a unit',
    '"THz"',
    'add "unit',
  ],
  [
    'unit of another quantity',
    withLine(5, 'band: { frequency: [180, 200], unit: eV }'),
    5,
    38,
    'band.unit',
    'eV',
    '"THz"',
    'change',
  ],
  [
    'unit beside wavelength',
    withLine(5, 'band: { wavelength: [1.5, 1.6], unit: THz }'),
    5,
    33,
    'band.unit',
    'THz',
    'length unit',
    'remove',
  ],
  [
    'frequency without length unit',
    withLine(3, 'length: none').replace('wavelength: [1.5, 1.6]', 'frequency: [1, 2], unit: THz'),
    5,
    9,
    'band.frequency',
    'frequency',
    'wavelength or wavenumber',
    'length: mm',
  ],

  // Pump
  [
    'no active body',
    withLine(16, 'pump: { bodies: {} }'),
    16,
    9,
    'pump.bodies',
    'without an active body',
    'at least one',
    'name a body',
  ],
  [
    'unknown active body',
    withLine(16, 'pump: { bodies: { kore: 1 } }'),
    16,
    19,
    'pump.bodies.kore',
    '"kore"',
    '"core" or "post"',
    'write "core"',
  ],
  [
    'weight zero',
    withLine(16, 'pump: { bodies: { core: 0 } }'),
    16,
    25,
    'pump.bodies.core',
    '0',
    'a weight above 0',
    'positive',
  ],
  [
    'weight infinite',
    withLine(16, 'pump: { bodies: { core: .inf } }'),
    16,
    25,
    'pump.bodies.core',
    'Infinity',
    'a number',
    'finite',
  ],

  // Size
  [
    'too large',
    withLine(3, 'length: um').replace('radius: 3', 'radius: 30000'),
    13,
    1,
    'bodies',
    'wavelengths in its densest material, about',
    'at most 2000',
    'length unit',
  ],
  [
    'too small',
    withLine(5, 'band: { wavelength: [1.5e7, 1.6e7] }'),
    13,
    1,
    'bodies',
    'wavelengths',
    'at least 0.00001',
    'length unit',
  ],
];

describe('wrong files', () => {
  test.each(rows)('%s', (_, text, line, column, path, came, expected, mend) => {
    const [finding, ...more] = findingsOf(text);
    expect(more).toEqual([]);
    expect(finding).toMatchObject({ file: 'a.yaml', line, column, path });
    expect(finding.came).toContain(came);
    expect(finding.expected).toContain(expected);
    expect(finding.mend).toContain(mend);
    expect(finding.mend.length).toBeGreaterThan(5);
  });
});

describe('options', () => {
  test('an unknown knob', () => {
    const [finding] = findingsOf(GOOD, { knobs: { radus: 2 } });
    expect(finding).toMatchObject({ file: 'option knobs', line: 0, path: 'radus', mend: 'write "radius" instead' });
  });

  test('a knob that makes a body impossible', () => {
    const [finding] = findingsOf(GOOD, { knobs: { radius: -2 } });
    expect(finding).toMatchObject({ line: 14, path: 'bodies[0].disk.radius', came: '"radius" (= -2)' });
  });

  test('a knob that is no number', () => {
    expect(findingsOf(GOOD, { knobs: { radius: NaN } })[0]).toMatchObject({ file: 'option knobs', came: 'NaN' });
  });

  test.each([
    [1.6, 1.5],
    [NaN, 1.5],
    [0, 1],
    [1, Infinity],
  ])('the band %d, %d', (a, b) => {
    expect(findingsOf(GOOD, { band: [a, b] })[0]).toMatchObject({ file: 'option band', line: 0 });
  });
});

test('a message has four lines a finding', () => {
  expect(() => readDevice(disk('disk: { center: [9, 0], radius: -1 }'), 'dir/a.yaml')).toThrow(
    [
      'dir/a.yaml:15:67  bodies[1].disk.radius',
      '  came: -1',
      '  expected: a radius above 0',
      '  mend: give a positive number',
    ].join('\n'),
  );
});

test('all findings are told at once, in the order of the file', () => {
  const text = GOOD.replace('radius: 1 }', 'radius: -1 }').replace('1.5, 1.6', '2, 1').replace('gap: 0.2', 'gap: 1 +');
  expect(findingsOf(text).map(({ path }) => path)).toEqual(['knobs.gap', 'band.wavelength', 'bodies[1].disk.radius']);
});

test('a fault of a knob is told once, not at each use', () => {
  expect(findingsOf(withLine(7, '  radius: 2 +')).map(({ path }) => path)).toEqual(['knobs.radius']);
});

test('JSON gives places alike', () => {
  const text =
    '{\n  "wavewell": 1,\n  "polarization": "Ez",\n  "band": {"wavenumber": [2, 1]},\n  "bodies": [{"material": "vacuum", "disk": {"center": [0, 0], "radius": "2*"}}]\n}';
  expect(findingsOf(text)).toMatchObject([
    { line: 4, column: 26, path: 'band.wavenumber' },
    { line: 5, column: 77, path: 'bodies[0].disk.radius' },
  ]);
});

test('an alias is written out, and its faults have the place of the anchor', () => {
  const text = `wavewell: 1
polarization: Ez
band: { wavenumber: [1, 2] }
materials: { a: { index: 2 } }
bodies:
  - { material: a, disk: &spot { center: [0, 0], radius: 0 } }
  - { material: a, disk: *spot }
`;
  expect(findingsOf(text)).toMatchObject([
    { line: 6, column: 58, path: 'bodies[0].disk.radius' },
    { line: 6, column: 58, path: 'bodies[1].disk.radius' },
  ]);
});
