// Do the cautions follow the command and the frequency, and do they reach the file?

import { describe, expect, test } from 'vitest';
import { cautionsFor } from '../../src/results/cautions.ts';
import { readFirstText } from '../../src/results/read-first.ts';
import { exampleRun } from './example-run.ts';

const optical = { metres: 1e-6, band: { kMin: 3.9, kMax: 4.2 } };
const microwave = { metres: 1e-3, band: { kMin: 0.17, kMax: 0.26 } };
const dimensionless = { metres: null, band: { kMin: 3, kMax: 6 } };

describe.each(['threshold', 'absorb', 'drive'] as const)('%s', (kind) => {
  test('names the hazard of its frequency range, both without a unit', () => {
    expect(cautionsFor(kind, optical).join()).toMatch(/IEC 60825-1 or the local equivalent/);
    expect(cautionsFor(kind, optical).join()).not.toMatch(/ICNIRP/);
    expect(cautionsFor(kind, microwave).join()).toMatch(/ICNIRP guidelines, IEEE C95.1 or the local limit/);
    expect(cautionsFor(kind, microwave).join()).not.toMatch(/60825/);
    expect(cautionsFor(kind, dimensionless).join()).toMatch(/60825.*ICNIRP/s);
  });

  test('says what the model is and who decides', () => {
    const text = cautionsFor(kind, optical).join('\n');
    expect(text).toMatch(/two-dimensional model/);
    expect(text).toMatch(/licensed or appointed safety officer/);
    expect(text).toMatch(kind === 'threshold' ? /linear model gives no amplitude/ : /heat in the absorber/);
  });

  test('is short', () => {
    const list = cautionsFor(kind, dimensionless);
    expect(list.length).toBeLessThanOrEqual(5);
    for (const sentence of list) expect(sentence.length).toBeLessThan(160);
  });
});

test('a list of modes is a prediction, no more', () => {
  expect(cautionsFor('modes', optical)).toHaveLength(1);
});

test('the file beside the tables carries sentence, cautions, units and signs', () => {
  const { record } = exampleRun();
  const text = readFirstText(record);
  expect(text).toMatch(/^READ FIRST\r\n/);
  expect(text).toContain(record.sentence);
  for (const caution of cautionsFor('absorb', record.device)) expect(text).toContain(caution);
  expect(text).toContain('Lengths are in um');
  expect(text).toContain('exp(-i w t)');
  expect(readFirstText({ ...record, cautions: ['Mind the step.'] })).toContain('* Mind the step.');
});
