// Do the exported tables say what the run says?

import { expect, test } from 'vitest';
import { crossingTableCsv, driveCsv, driveTableCsv, modeTableCsv, polePathCsv } from '../../src/results/export-csv.ts';
import { fieldGridCsv, fieldLineCsv, fieldNodesCsv, MOST_ROWS } from '../../src/results/export-field-csv.ts';
import { exampleBody, exampleDrive, exampleField, exampleRun, exampleSampler } from './example-run.ts';

const run = exampleRun();
/** Rows as header → cell; the example holds no quoted cells unless a test says so. */
function rowsOf(text: string): Record<string, string>[] {
  const [header, ...lines] = text
    .trimEnd()
    .split('\r\n')
    .map((line) => line.split(','));
  return lines.map((cells) => Object.fromEntries(header.map((name, i) => [name, cells[i]])));
}

test('field on a grid: x runs fastest, corners are hit, values are the field', () => {
  const text = fieldGridCsv(run, 'mode', exampleSampler, { box: [-1, -0.5, 1, 0.5], nx: 5, ny: 3 });
  expect(text.split('\r\n')[0]).toBe(
    'x [um],y [um],re_Ez [arbitrary],im_Ez [arbitrary],abs_Ez [arbitrary],phase [deg],body',
  );
  const rows = rowsOf(text);
  expect(rows.map((r) => `${r['x [um]']} ${r['y [um]']}`).slice(0, 6)).toEqual([
    '-1 -0.5',
    '-0.5 -0.5',
    '0 -0.5',
    '0.5 -0.5',
    '1 -0.5',
    '-1 0',
  ]);
  expect(rows).toHaveLength(15);
  for (const r of rows) {
    const [re, im] = exampleField(Number(r['x [um]']), Number(r['y [um]']));
    expect(Number(r['re_Ez [arbitrary]'])).toBe(re);
    expect(Number(r['abs_Ez [arbitrary]'])).toBeCloseTo(Math.hypot(re, im), 15);
    const phase = (Number(r['phase [deg]']) * Math.PI) / 180;
    expect(Math.hypot(re, im) * Math.cos(phase)).toBeCloseTo(re, 13);
  }
  expect(new Set(rows.map((r) => r.body))).toEqual(new Set(['background', 'disk']));
});

test('beyond the rim a grid keeps its rows, without values', () => {
  const rows = rowsOf(fieldGridCsv(run, 'mode', exampleSampler, { box: [-2, 0, 2, 0], nx: 3, ny: 1 }));
  expect(rows.map((r) => r.body)).toEqual(['outside', 'disk', 'outside']);
  expect(rows[0]['re_Ez [arbitrary]']).toBe('');
});

test('field along a line: both ends included, the distance is walked', () => {
  const rows = rowsOf(fieldLineCsv(run, 'twin', exampleSampler, { from: [0, 0], to: [0.6, 0.8], count: 11 }));
  expect(rows).toHaveLength(11);
  expect(rows[0]['distance [um]']).toBe('0');
  expect(Number(rows[10]['distance [um]'])).toBeCloseTo(1, 15);
  expect(rows[10]['y [um]']).toBe('0.8');
  expect(rows[5]['re_Ez [per unit drive]']).toBe(String(exampleField(0.3, 0.4)[0]));
});

test('field on the nodes: exact with a sampler, to 7 digits without; bodies from the triangles', () => {
  const exact = rowsOf(fieldNodesCsv(run, 'mode', exampleSampler));
  const stored = rowsOf(fieldNodesCsv(run, 'mode'));
  expect(exact).toHaveLength(run.array('points').length / 2);
  let bodiesAgree = 0;
  exact.forEach((r, i) => {
    const [x, y] = [Number(r['x [um]']), Number(r['y [um]'])];
    // The rim itself may lie outside by rounding; the stored value stands in there.
    if (Math.hypot(x, y) < 1.4999) expect(Number(r['re_Ez [arbitrary]'])).toBe(exampleField(x, y)[0]);
    expect(Number(stored[i]['re_Ez [arbitrary]'])).toBeCloseTo(Number(r['re_Ez [arbitrary]']), 6);
    const body = exampleBody(x, y);
    if (r.body === (body < 0 ? 'background' : ['disk', 'post'][body])) bodiesAgree++;
  });
  expect(bodiesAgree / exact.length).toBeGreaterThan(0.96);
});

test('the drive table: power adds to one, both signs of time, phases in [0, 360)', () => {
  const rows = rowsOf(driveTableCsv(run, 'twin'));
  expect(rows.map((r) => r.m)).toEqual(['-2', '0', '3']);
  expect(rows.map((r) => r['phase [deg]'])).toEqual(['0', '', '270']);
  expect(rows.map((r) => r['phase_engineers [deg]'])).toEqual(['0', '', '90']);
  expect(rows.map((r) => r.m_engineers)).toEqual(['2', '0', '-3']);
  expect(rows[0]['amplitude [dB]']).toBe(String(20 * Math.log10(0.6)));
  expect(rows.reduce((s, r) => s + Number(r.power_share), 0)).toBeCloseTo(1, 15);
  for (const phase of [-180, -1e-15, 1e-15, 359.9999999999999]) {
    const angle = (phase * Math.PI) / 180;
    const [row] = rowsOf(driveCsv([{ m: 1, amplitude: [Math.cos(angle), Math.sin(angle)] }]));
    for (const key of ['phase [deg]', 'phase_engineers [deg]']) {
      expect(Number(row[key])).toBeGreaterThanOrEqual(0);
      expect(Number(row[key])).toBeLessThan(360);
    }
  }
});

test("engineers' drive is the conjugate wave: Re of the field at any time agrees", () => {
  // u(φ, t) = Re Σ a e^{imφ} e^{−iωt} = Re Σ a′ e^{jm′φ} e^{+jωt}; ωt = 0.3, φ = 1.1.
  const rows = rowsOf(driveCsv(exampleDrive)).filter((r) => r['phase [deg]'] !== '');
  const sum = (m: string, phase: string, time: number): number =>
    rows.reduce(
      (s, r) => s + Number(r.amplitude) * Math.cos((Number(r[phase]) * Math.PI) / 180 + Number(r[m]) * 1.1 + time),
      0,
    );
  expect(sum('m_engineers', 'phase_engineers [deg]', 0.3)).toBeCloseTo(sum('m', 'phase [deg]', -0.3), 14);
});

test('the mode table', () => {
  const [row] = rowsOf(modeTableCsv(run));
  expect(row['re_k [1/um]']).toBe('4.2');
  expect(row['wavelength [um]']).toBe('1.4959965017094254');
  expect(row.assignment).toBe('poles');
});

test('the crossing table: one row an active body, proof included, labels harmless', () => {
  const [row] = rowsOf(crossingTableCsv(run));
  expect(row).toMatchObject({
    kind: 'absorption',
    D: '0.04',
    body: 'disk',
    outgoing: '3e-12',
    own_mesh_outgoing: '4e-9',
    label: "'=4+1",
    directionality: '',
  });
  const evil = crossingTableCsv(exampleRun({ disk: '=HYPERLINK("http://x","y"),z' }));
  expect(evil).toContain(`"'=HYPERLINK(""http://x"",""y""),z"`);
});

test('paths: all marks that have one, or the one asked for', () => {
  expect(rowsOf(polePathCsv(run))).toHaveLength(18);
  const rows = rowsOf(polePathCsv(run, 'zero-1'));
  expect(rows).toHaveLength(9);
  expect(rows[8]).toMatchObject({ mark: 'zero-1', level: '0.04', 're_k [1/um]': '4.21', 'im_k [1/um]': '0' });
});

test('what is not there is refused with what there is', () => {
  expect(() => fieldNodesCsv(run, 'nix')).toThrow('no field "nix" in this run; it holds: twin, mode');
  expect(() => driveTableCsv(run, 'mode')).toThrow(/no drive; fields with one: twin/);
  expect(() => polePathCsv(run, 'pole-2')).toThrow(/marks with one: pole-1, zero-1/);
  const bare = { ...run, record: { ...run.record, answer: { cautions: [] } } };
  expect(() => modeTableCsv(bare)).toThrow(/holds no modes; it holds: cautions/);
  const grid = { box: [0, 0, 1, 1] as const, nx: 2, ny: 2 };
  expect(() => fieldGridCsv(run, 'mode', exampleSampler, { ...grid, nx: 0 })).toThrow(/nx = 0/);
  expect(() => fieldGridCsv(run, 'mode', exampleSampler, { ...grid, box: [1, 0, 0, 1] })).toThrow(/box 1, 0, 0, 1/);
  expect(() => fieldGridCsv(run, 'mode', exampleSampler, { ...grid, nx: MOST_ROWS })).toThrow(/at most 2000000/);
  expect(() => fieldLineCsv(run, 'mode', exampleSampler, { from: [0, NaN], to: [1, 1], count: 2 })).toThrow(/finite/);
});

test('a dimensionless run has no units in its header', () => {
  const device = { ...run.record.device, lengthUnit: 'none' as const, metres: null };
  const bare = { ...run, record: { ...run.record, device } };
  expect(modeTableCsv(bare).split('\r\n')[0]).toMatch(
    /^mode,assignment,re_k,im_k,k_error,Q,Q_error,wavelength,frequency/,
  );
});
