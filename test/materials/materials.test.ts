// Do units, permittivities and gains turn into each other as the handbooks say?

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { constantPermittivity } from '../../src/materials/constant.ts';
import { gainReport, pumpOfGain } from '../../src/materials/gain.ts';
import { fromWavenumber, toWavenumber } from '../../src/materials/spectral-units.ts';
import { complex } from '../../src/numerics/complex.ts';

describe('permittivity', () => {
  test('is the square of the index', () => {
    expect(constantPermittivity({ index: complex(3, 0.5) })).toEqual({ re: 8.75, im: 3 });
  });

  test('has loss above 0 for a loss tangent', () => {
    // PTFE at 10 GHz, 2.05 and 2e-4: Riddle, Baker-Jarvis, Krupka, IEEE T-MTT 51, 727 (2003), seen through a university data page.
    expect(constantPermittivity({ permittivity: complex(2.05), lossTangent: 2e-4 })).toEqual({
      re: 2.05,
      im: expect.closeTo(4.1e-4, 16) as number,
    });
    expect(constantPermittivity({ permittivity: complex(2.05) })).toEqual({ re: 2.05, im: 0 });
  });
});

describe('wavelength, frequency, energy, wavenumber', () => {
  test('known values', () => {
    expect(toWavenumber('wavelength', 2, 'um', 1e-6)).toBe(Math.PI);
    expect(toWavenumber('wavenumber', 2, '', null)).toBe(2);
    // X band: free-space wavelength of 10 GHz is 29.9792458 mm (SI, exact).
    expect((2 * Math.PI) / toWavenumber('frequency', 10, 'GHz', 1e-3)).toBeCloseTo(29.9792458, 12);
    // h c / e = 1239.841984332 eV nm (CODATA 2018, exact constants).
    expect((2 * Math.PI) / toWavenumber('energy', 1, 'eV', 1e-9)).toBeCloseTo(1239.841984332, 8);
    expect(toWavenumber('energy', 1000, 'meV', 1e-6)).toBeCloseTo(toWavenumber('energy', 1, 'eV', 1e-6), 14);
  });

  test('there and back', () => {
    const kinds = fc.constantFrom(
      ['wavelength', 'um'] as const,
      ['frequency', 'THz'] as const,
      ['energy', 'eV'] as const,
      ['wavenumber', '1/um'] as const,
    );
    fc.assert(
      fc.property(kinds, fc.double({ min: 1e-3, max: 1e3, noNaN: true }), ([quantity, unit], value) => {
        const k = toWavenumber(quantity, value, unit, 1e-6);
        expect(fromWavenumber(quantity, k, unit, 1e-6) / value).toBeCloseTo(1, 14);
      }),
    );
  });

  test('frequency and energy need a length unit and a unit of their own', () => {
    expect(() => toWavenumber('frequency', 1, 'GHz', null)).toThrow('length unit');
    expect(() => toWavenumber('energy', 1, 'GHz', 1e-6)).toThrow('meV, eV');
  });
});

describe('gain', () => {
  // Im n = −g λ/(4π), Im ε = 2 n Im n, algebra recomputed with mpmath: λ (µm), n, g (1/cm), |Im n|, |Im ε|.
  // The first row's |Im ε| neglects (Im n)², which is 1.5e-4 of n: the digits asked for allow it.
  test.each([
    [1.55, 3.5, 1000, 0.012334508, 0.086341557],
    [1.55, 1.45, 0.05, 6.167254e-7, 1.788504e-6],
    [0.59, 1.36, 10, 4.695071e-5, 1.277059e-4],
    [1.55, 1.5, 1, 1.233451e-5, 3.700352e-5],
  ])('at %d um, index %d: %d /cm', (wavelength, index, gain, imIndex, imEps) => {
    const report = gainReport(imEps, complex(index ** 2), (2 * Math.PI) / wavelength, 1e-6);
    expect(report.imEps).toBeCloseTo(-imEps, 14);
    expect(report.imIndex / -imIndex).toBeCloseTo(1, 4);
    expect(report.perCentimetre! / gain).toBeCloseTo(1, 4);
    // 10 log10(e) = 4.342945.
    expect(report.decibelPerCentimetre! / (4.342945 * gain)).toBeCloseTo(1, 4);
    expect(pumpOfGain(gain, index ** 2, (2 * Math.PI) / wavelength, 1e-6) / imEps).toBeCloseTo(1, 4);
  });

  test('of a pump made for it is exact', () => {
    const k = 4;
    const pump = pumpOfGain(5000, 9, k, 1e-6);
    expect(gainReport(pump, complex(9), k, 1e-6).perCentimetre).toBeCloseTo(5000, 8);
  });

  test('loss is negative gain, and a material of its own loss counts it', () => {
    const loss = gainReport(-0.1, complex(9), 4, 1e-6);
    expect(loss.imEps).toBe(0.1);
    expect(loss.perCentimetre).toBeLessThan(0);
    expect(gainReport(0.1, complex(9, 0.1), 4, 1e-6)).toEqual({
      imEps: 0,
      imIndex: 0,
      perCentimetre: -0,
      decibelPerCentimetre: -0,
    });
  });

  test('has no 1/cm without a length unit', () => {
    expect(gainReport(0.1, complex(9), 4, null)).toMatchObject({ perCentimetre: null, decibelPerCentimetre: null });
  });
});
