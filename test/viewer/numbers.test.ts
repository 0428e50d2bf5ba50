// Are numbers written so that a reader neither loses digits nor is shown false ones?

import { describe, expect, test } from 'vitest';

import {
  figure,
  fullFigure,
  hertz,
  roundBelow,
  roundSteps,
  seconds,
  typeset,
  withError,
} from '../../viewer/page/numbers.ts';

describe('figures', () => {
  test.each([
    [0, 3, '0'],
    [-0, 3, '0'],
    [12345.678, 5, '12346'],
    [0.0012345, 3, '0.00123'],
    [0.00012345, 3, '1.23 × 10⁻⁴'],
    [-1e-17, 2, '−1.0 × 10⁻¹⁷'],
    [1234567, 3, '1.23 × 10⁶'],
    [9.9996, 4, '10.00'],
    [999999.6, 6, '1.00000 × 10⁶'],
    [NaN, 3, '–'],
    [Infinity, 3, '–'],
  ])('%d to %i digits', (value, digits, text) => expect(figure(value, digits)).toBe(text));

  test.each([
    [4.12534123, 0.00021, '4.12534 ± 0.00021'],
    [-0.0000123, 4e-8, '(−1.2300 ± 0.0040) × 10⁻⁵'],
    [1523, 12, '1523 ± 12'],
    [3.6049, 0.012, '3.605 ± 0.012'],
    [2e8, 3e5, '(2.0000 ± 0.0030) × 10⁸'],
    [4.1, 0, '4.100000000'],
    [-4e-7, 3e-6, '(−0.4 ± 3.0) × 10⁻⁶'],
    [0, 0.002, '0.0000 ± 0.0020'],
    [1, 1e-20, '1.000000000000000 ± 1.0 × 10⁻²⁰'],
  ])('%d with the uncertainty %d', (value, error, text) => expect(withError(value, error)).toBe(text));

  test('all digits of a double come back', () => {
    const plain = (text: string): number => Number(text.replace('−', '-'));
    for (const value of [Math.PI, -1 / 3, 0.1 + 0.2, 123456789.123]) expect(plain(fullFigure(value))).toBe(value);
    expect(fullFigure(-2.5e-17)).toBe('−2.5 × 10⁻¹⁷');
  });

  test('a plain sentence is set as on paper', () => {
    expect(typeset('At 1.6 um ± 3e-9 (k = -3.8 /um) with 29 /cm in body-2 e-beam')).toBe(
      'At 1.6\u00a0µm\u00a0±\u00a03\u00a0×\u00a010⁻⁹ (k\u00a0=\u00a0−3.8\u00a0/µm) with 29\u00a0/cm in body-2 e-beam',
    );
    expect(typeset('3 modes, 5 more')).toBe('3 modes, 5 more');
  });

  test('seconds and hertz find their prefix', () => {
    expect(seconds(6.91e-15)).toBe('6.91 fs');
    expect(seconds(1e-9)).toBe('1.00 ns');
    expect(seconds(2)).toBe('2.00 s');
    expect(hertz(1.9447e14, 1e10)).toBe('194.470 ± 0.010 THz');
    expect(hertz(1e9, 1e3)).toBe('1.0000000 ± 0.0000010 GHz');
  });
});

describe('steps', () => {
  test('are round, in order and inside', () => {
    expect(roundSteps(1.45, 2.1, 4).map(({ text }) => text)).toEqual(['1.6', '1.8', '2.0']);
    expect(roundSteps(2.1, 1.45, 4).map(({ text }) => text)).toEqual(['1.6', '1.8', '2.0']);
    expect(roundSteps(-1, 1, 4).map(({ text }) => text)).toEqual(['−1.0', '−0.5', '0.0', '0.5', '1.0']);
    expect(roundSteps(1, 1, 4)).toEqual([]);
  });

  test('the largest round length below a bound', () => {
    expect([0.9, 1, 2.3, 7, 49, 1e-9].map(roundBelow)).toEqual([0.5, 1, 2, 5, 20, 1e-9]);
  });
});
