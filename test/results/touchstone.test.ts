// Are Touchstone files read and written by the rules, and refused with the line where they break one?

import { describe, expect, test } from 'vitest';
import {
  fromPair,
  scatteringOfNetwork,
  TouchstoneError,
  type TouchstoneFormat,
  type TouchstoneNetwork,
  toPair,
} from '../../src/results/touchstone.ts';
import { readTouchstone } from '../../src/results/touchstone-read.ts';
import { touchstoneText } from '../../src/results/touchstone-write.ts';
import { randomStream } from '../../src/numerics/random.ts';

// Rules: Touchstone File Format Specification 1.1 and 2.0 (IBIS Open Forum; 2.0 ratified 24 April 2009), partly from memory.

function network(ports: number, version: 1 | 2, format: TouchstoneFormat, points = 3): TouchstoneNetwork {
  const random = randomStream(ports);
  return {
    version,
    unit: 'GHz',
    parameter: 'S',
    format,
    ports,
    reference: Array.from({ length: ports }, () => 50),
    frequencies: Float64Array.from({ length: points }, (_, i) => 8.2 + i / 3),
    matrices: Float64Array.from({ length: 2 * ports * ports * points }, () => random.normal()),
    noise: [],
  };
}

const entry = ({ matrices, ports: n }: TouchstoneNetwork, i: number, j: number, f = 0): [number, number] => {
  const at = 2 * (i + j * n + n * n * f);
  return [matrices[at], matrices[at + 1]];
};

describe.each([1, 2] as const)('version %i', (version) => {
  test.each([1, 2, 3, 4, 5, 9, 41])('%i ports read back equal, bit by bit', (ports) => {
    const made = network(ports, version, 'RI');
    const text = touchstoneText(made, ['a comment', 'ohne µ']);
    const back = readTouchstone(text);
    expect(back).toEqual(made);
    expect(touchstoneText(back, ['a comment', 'ohne µ'])).toBe(text);
    expect(text).toMatch(/^[\t\r\n\x20-\x7e]*$/);
  });

  test.each(['MA', 'DB'] as const)('%s reads back to rounding', (format) => {
    const made = network(3, version, format);
    const back = readTouchstone(touchstoneText(made));
    back.matrices.forEach((v, i) => expect(v).toBeCloseTo(made.matrices[i], 13));
    expect(back.format).toBe(format);
  });
});

test('at most four pairs stand on a line of version 1, and a row of three or more ports begins a line', () => {
  for (const ports of [3, 5, 9]) {
    const lines = touchstoneText(network(ports, 1, 'RI', 1))
      .trimEnd()
      .split('\r\n')
      .slice(1);
    expect(lines).toHaveLength(ports * Math.ceil(ports / 4));
    lines.forEach((line, i) => expect(line.trim().split(/\s+/).length % 2).toBe(i === 0 ? 1 : 0));
  }
});

test('two-ports: version 1 stands as 11 21 12 22, version 2 as its keyword says', () => {
  const one = readTouchstone('# Hz S RI R 50\n1 11 0 21 0 12 0 22 0\n');
  expect([entry(one, 0, 0)[0], entry(one, 1, 0)[0], entry(one, 0, 1)[0], entry(one, 1, 1)[0]]).toEqual([
    11, 21, 12, 22,
  ]);
  const two = (order: string) =>
    readTouchstone(
      `[Version] 2.0\n# Hz S RI R 50\n[Number of Ports] 2\n[Two-Port Data Order] ${order}\n[Number of Frequencies] 1\n[Network Data]\n1 1 0 2 0 3 0 4 0\n[End]\n`,
    );
  expect(entry(two('12_21'), 0, 1)[0]).toBe(2);
  expect(entry(two('21_12'), 1, 0)[0]).toBe(2);
});

test('option line: any case and order, defaults GHz S MA R 50, further ones ignored, one resistance a port', () => {
  const plain = readTouchstone('#\n1 0.5 90\n');
  expect([plain.unit, plain.parameter, plain.format, plain.reference]).toEqual(['GHz', 'S', 'MA', [50]]);
  expect(entry(plain, 0, 0)[1]).toBeCloseTo(0.5, 15);
  const mixed = readTouchstone('! first\n# r 75 ri mhz s ! why\r# kHz\r\n1\t1 2\r2 3 4');
  expect([mixed.unit, mixed.reference, [...mixed.frequencies]]).toEqual(['MHz', [75], [1, 2]]);
  expect(readTouchstone('# S RI R 50 75\n1 1 0 2 0 3 0 4 0\n').reference).toEqual([50, 75]);
});

test('triangles, references over lines, information and keywords in any case', () => {
  const text = `[VERSION] 2.0
# GHz S RI
[number of PORTS] 3
[Number of Frequencies] 2
[Reference] 50 75
 0.5
[Matrix Format] lower
[Begin Information]
[anything] goes
[End Information]
[Network Data]
1 11 0
 21 0 22 0
 31 0 32 0 33 0
2 1 1 2 2 3 3 4 4 5 5 6 6
[End]`;
  const read = readTouchstone(text);
  expect(read.reference).toEqual([50, 75, 0.5]);
  expect([entry(read, 1, 0), entry(read, 0, 1), entry(read, 1, 2)]).toEqual([[21, 0], [21, 0], [32, 0]]); // prettier-ignore
  expect(entry(readTouchstone(text.replace('lower', 'Upper')), 0, 1, 1)).toEqual([2, 2]);
});

test('noise of a two-port begins where the frequency falls back', () => {
  const text = '# GHz S MA R 50\n2 1 0 2 0 3 0 4 0\n3 1 0 2 0 3 0 4 0\n1 0.7 0.6 170 0.4\n2.5 0.8 0.5 160 0.3\n';
  const read = readTouchstone(text);
  expect(read.frequencies).toHaveLength(2);
  expect(read.noise).toEqual([[1, 0.7, 0.6, 170, 0.4], [2.5, 0.8, 0.5, 160, 0.3]]); // prettier-ignore
  expect(readTouchstone(touchstoneText(read)).noise).toEqual(read.noise);
  expect(readTouchstone(touchstoneText({ ...read, version: 2 })).noise).toEqual(read.noise);
});

test('Z, Y, G and H of a series and a shunt resistor become their S', () => {
  // series 50 in 50: S11 = 1/3, S21 = 2/3; shunt 25 in 50: S11 = −1/2, S21 = 1/2 (elementary)
  const of = (text: string) => {
    const { matrices } = scatteringOfNetwork(readTouchstone(text));
    return [matrices[0], matrices[2], matrices[4], matrices[6]].map((v) => Math.round(v * 1e12) / 1e12);
  };
  const series = [1 / 3, 2 / 3, 2 / 3, 1 / 3].map((v) => Math.round(v * 1e12) / 1e12);
  expect(of('# Hz Y RI R 50\n1 1 0 -1 0 -1 0 1 0')).toEqual(series);
  expect(of('# Hz H RI R 50\n1 1 0 -1 0 1 0 0 0')).toEqual(series);
  expect(of('# Hz Z RI R 50\n1 0.5 0 0.5 0 0.5 0 0.5 0')).toEqual([-0.5, 0.5, 0.5, -0.5]);
  expect(of('# Hz G RI R 50\n1 2 0 1 0 -1 0 0 0')).toEqual([-0.5, 0.5, 0.5, -0.5]);
  const second = (parameter: string, values: string) =>
    of(
      `[Version] 2.0\n# Hz ${parameter} RI R 50\n[Number of Ports] 2\n[Two-Port Data Order] 12_21\n[Number of Frequencies] 1\n[Network Data]\n1 ${values}\n[End]`,
    );
  expect(second('Z', '25 0 25 0 25 0 25 0')).toEqual([-0.5, 0.5, 0.5, -0.5]);
  expect(second('Y', '0.02 0 -0.02 0 -0.02 0 0.02 0')).toEqual(series);
});

test('the engineers’ phases change their sign on the way in', () => {
  const { matrices, hertz } = scatteringOfNetwork(readTouchstone('# MHz S RI R 50\n3 0.1 0.2'));
  expect([matrices[0], matrices[1], hertz[0]]).toEqual([0.1, -0.2, 3e6]);
});

test('pairs: degrees and 20 log₁₀', () => {
  expect(fromPair('DB', -20, 180).re).toBeCloseTo(-0.1, 15);
  expect(toPair('MA', 0, -2)).toEqual([2, -90]);
  expect(toPair('DB', 0, 0)).toEqual([-400, 0]);
});

const V2 = (data: string, head = '[Number of Ports] 1\n[Number of Frequencies] 1') =>
  `[Version] 2.0\n# GHz S RI R 50\n${head}\n[Network Data]\n${data}\n[End]`;

test.each([
  ['no data', '! nothing\n', 1, /nothing/],
  ['no option line', '! c\n1 0.5 0\n', 2, /begins with #/],
  ['an unknown word in the option line', '# GHz S RJ R 50\n1 0 0', 1, /RJ/],
  ['a resistance below zero', '# GHz S RI R -50\n1 0 0', 1, /-50/],
  ['a word among the numbers', '# GHz S RI R 50\n1 0 0\n2 0 nan', 3, /nan.*a number/],
  ['a character beyond ASCII', '# GHz S RI R 50\n1 0 0\n2 0 0°', 3, /U\+00B0/],
  ['frequencies that fall', '# GHz S RI R 50\n2 0 0\n1 0 0', 3, /1 after 2/],
  ['a frequency twice', '# GHz S RI R 50\n2 0 0\n2 0 0', 3, /2 after 2/],
  ['a frequency below zero', '# GHz S RI R 50\n-2 0 0', 2, /-2/],
  ['too few pairs', '# GHz S RI R 50\n1 1 0 2 0 3 0 4 0\n2 1 0 2 0 3 0', 3, /3 pairs.*4 of 2/],
  ['too many pairs', '# GHz S RI R 50\n1 1 0\n2 1 0 2 0', 3, /2 pairs.*1 of 1/],
  ['five pairs on a line', '# GHz S RI R 50\n1 1 0 2 0 3 0 4 0 5 0', 2, /11 numbers/],
  ['pairs before a frequency', '# GHz S RI R 50\n1 0\n1 1 0', 2, /a frequency first/],
  ['H of one port', '# GHz H RI R 50\n1 1 0', 2, /two ports/],
  ['three resistances for two ports', '# GHz S RI R 50 50 50\n1 1 0 2 0 3 0 4 0', 2, /3 resistances/],
  ['a keyword in version 1', '# GHz S RI R 50\n[Reference] 50\n1 1 0', 2, /\[Version\] 2\.0/],
  ['a version that is not known', '[Version] 3.0\n# GHz S RI R 50', 1, /3\.0/],
  ['version 2 without [End]', V2('1 0 0').replace('\n[End]', ''), 6, /\[End\]/],
  ['data after [End]', V2('1 0 0') + '\n2 0 0', 8, /nothing after/],
  ['an unknown keyword', V2('1 0 0', '[Number of Port] 1'), 3, /Number of Port\]/],
  ['a keyword twice', V2('1 0 0', '[Number of Ports] 1\n[Number of Ports] 1'), 4, /a second/],
  ['the wrong number of frequencies', V2('1 0 0\n2 0 0'), 4, /1 announced, 2 found/],
  [
    'two ports without their order',
    V2('1 1 0 2 0 3 0 4 0', '[Number of Ports] 2\n[Number of Frequencies] 1'),
    7,
    /12_21/,
  ],
  [
    'an order for one port',
    V2('1 1 0', '[Number of Ports] 1\n[Two-Port Data Order] 12_21\n[Number of Frequencies] 1'),
    4,
    /two ports/,
  ],
  [
    'a reference too few',
    V2(
      '1 1 0 2 0 3 0 4 0',
      '[Number of Ports] 2\n[Two-Port Data Order] 12_21\n[Number of Frequencies] 1\n[Reference] 50',
    ),
    6,
    /one a port/,
  ],
  ['mixed-mode ports', V2('1 1 0', '[Mixed-Mode Order] D2,3'), 3, /single-ended/],
])('it refuses %s', (_, text, line, message) => {
  let caught: unknown;
  try {
    readTouchstone(text);
  } catch (error) {
    caught = error;
  }
  expect(caught).toBeInstanceOf(TouchstoneError);
  expect((caught as TouchstoneError).line).toBe(line);
  expect((caught as TouchstoneError).message).toMatch(message);
});

test('the name of the file must agree with the data', () => {
  expect(() => readTouchstone('# GHz S RI R 50\n1 0 0', 2)).toThrow(/1 pairs.*4 of 2/);
  expect(() => readTouchstone(V2('1 0 0'), 2)).toThrow(/as the name/);
});
