// Does the page show a run in a real browser as it should?

import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Browser, Page } from 'playwright-core';
import { build } from 'vite';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';

import { readRun, writeRun } from '../../src/results/store.ts';
import { serveRun } from '../../viewer/server/serve.ts';
import type { RunServer } from '../../viewer/server/serve.ts';
import type { State } from '../../viewer/page/state.ts';
import type {} from '../../viewer/page/watched.ts';
import { syntheticRun } from '../results/synthetic-run.ts';
import { launchBrowser } from './browser.ts';

const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const COMMANDS = ['modes', 'threshold', 'absorb'] as const;
type Command = (typeof COMMANDS)[number] | 'walled';

let base: string;
let browser: Browser;
const servers = new Map<Command, RunServer>();
const runs = new Map(
  [...COMMANDS, 'walled' as const].map((command): [Command, ReturnType<typeof syntheticRun>] => {
    const run = syntheticRun(command === 'walled' ? 'modes' : command, { rings: 24, sectors: 72 });
    return [command, command === 'walled' ? withWalls(run) : withPair(run)];
  }),
);

/** Walls all around, two straight pieces of them drawn. */
function withWalls<R extends ReturnType<typeof syntheticRun>>(run: R): R {
  const display = { ...run.record.display, walls: 'display-walls', enclosed: true as const };
  const arrays = { ...run.arrays, 'display-walls': Float64Array.of(-1, 0.5, 1, 0.5, -1, -0.5, 1, -0.5) };
  return { ...run, record: { ...run.record, display }, arrays };
}

/** The first field twice: the two modes of a degenerate pair. */
function withPair<R extends ReturnType<typeof syntheticRun>>(run: R): R {
  const [first] = run.record.fields;
  const second = { ...first, id: `${first.id}-2`, label: `${first.label} (2 of 2)` };
  return { ...run, record: { ...run.record, fields: [...run.record.fields, second] } };
}

beforeAll(async () => {
  base = mkdtempSync(join(tmpdir(), 'wavewell-viewer-'));
  const built = join(base, 'page');
  await build({
    configFile: join(ROOT, 'vite.config.ts'),
    root: join(ROOT, 'viewer/page'),
    logLevel: 'error',
    build: { outDir: built, emptyOutDir: true },
  });
  for (const [command, { record, arrays, fieldSampler }] of runs) {
    const folder = join(base, command);
    writeRun(folder, record, arrays);
    servers.set(command, await serveRun(folder, { page: built, fieldSampler }));
  }
  browser = await launchBrowser();
});
afterAll(async () => {
  await browser?.close();
  for (const server of servers.values()) await server.close();
  rmSync(base, { recursive: true, force: true });
});

let page: Page;
let troubles: string[];
let strangers: string[];

beforeEach(() => {
  troubles = [];
  strangers = [];
});
afterEach(async () => {
  await page.context().close();
  // Every test ends so: nothing went wrong on the page, and it spoke to nobody but the server.
  expect(troubles).toEqual([]);
  expect(strangers).toEqual([]);
});

async function open(command: Command, { still = false, width = 1000, height = 640, dark = false } = {}): Promise<void> {
  const context = await browser.newContext({
    viewport: { width, height },
    reducedMotion: still ? 'reduce' : 'no-preference',
    colorScheme: dark ? 'dark' : 'light',
  });
  page = await context.newPage();
  page.on('console', (message) => {
    if (!['error', 'warning'].includes(message.type())) return;
    // Reading colours back, as only tests do, makes the driver remark on it.
    if (!message.text().includes('GPU stall due to ReadPixels')) troubles.push(message.text());
  });
  page.on('pageerror', (error) => troubles.push(error.message));
  const { url } = servers.get(command)!;
  page.on('request', (request) => {
    if (!request.url().startsWith(url)) strangers.push(request.url());
  });
  await page.goto(url);
  await page.waitForFunction(() => window.wavewell?.ready());
}

/** Colours on a grid over the picture. */
const colours = (): Promise<number[][]> =>
  page.evaluate(() => {
    const pixels: [number, number][] = [];
    for (let i = 1; i < 12; i++)
      for (let j = 1; j < 8; j++) pixels.push([(window.innerWidth * i) / 12, (window.innerHeight * j) / 12]);
    return window.wavewell!.sample(pixels);
  });

const state = (): Promise<State> => page.evaluate(() => window.wavewell!.state());

describe.each(COMMANDS)('a run of %s', (command) => {
  test('stands on the page with its sentence, its marks and a picture', async () => {
    await open(command, { still: true });
    const { record } = runs.get(command)!;
    const sentence = (await page.textContent('#sentence'))!.replaceAll('\u00a0', ' ');
    expect(sentence).toBe(record.sentence);
    expect(await page.locator('.mark.pole').count()).toBe(record.marks.filter(({ kind }) => kind === 'pole').length);
    expect(await page.locator('.mark.zero').count()).toBe(record.marks.filter(({ kind }) => kind === 'zero').length);
    expect(new Set((await colours()).map(String)).size).toBeGreaterThan(15);
  });
});

describe('time', () => {
  test('runs from the start, and two instants differ; a pause holds the picture still', async () => {
    await open('threshold');
    const first = await colours();
    await expect.poll(colours).not.toEqual(first);
    await page.keyboard.press(' ');
    const held = await state();
    expect(held.playing).toBe(false);
    const still = await colours();
    await page.waitForTimeout(300);
    expect(await colours()).toEqual(still);
    expect((await state()).phase).toBe(held.phase);
    await page.keyboard.press(' ');
    await expect.poll(async () => (await state()).phase).not.toBe(held.phase);
  });

  test('stands still at first for those who want less motion', async () => {
    await open('threshold', { still: true });
    expect((await state()).playing).toBe(false);
  });

  test('is turned by hand both ways, and by keys', async () => {
    await open('threshold', { still: true });
    const box = (await page.locator('.dial').boundingBox())!;
    const [cx, cy, r] = [box.x + box.width / 2, box.y + box.height / 2, (box.width / 2) * 0.8];
    await page.mouse.move(cx + r, cy);
    await page.mouse.down();
    await page.mouse.move(cx, cy - r, { steps: 4 });
    expect((await state()).phase).toBeCloseTo(Math.PI / 2, 1);
    await page.mouse.move(cx + r, cy, { steps: 4 });
    await page.mouse.move(cx, cy + r, { steps: 4 });
    expect((await state()).phase).toBeCloseTo((3 * Math.PI) / 2, 1);
    await page.mouse.up();
    const { phase } = await state();
    await page.locator('#picture').focus();
    await page.keyboard.press('ArrowLeft');
    expect((await state()).phase).toBeCloseTo(phase - Math.PI / 36, 6);
  });

  test('half a turn later the wave has the opposite sign, the intensity is the same', async () => {
    await open('absorb', { still: true });
    const at = await page.evaluate(() => window.wavewell!.toPixel(1.1, 0.05));
    const colour = (phase: number): Promise<number[]> =>
      page.evaluate(
        ([now, x, y]) => (window.wavewell!.set({ phase: now }), window.wavewell!.sample([[x, y]])[0]),
        [phase, ...at],
      );
    const warmth = ([red, , blue]: number[]): number => red - blue;
    const [one, other] = [await colour(0.4), await colour(0.4 + Math.PI)];
    // Brown is below zero and warmer than the ground, teal is above and cooler.
    expect(Math.sign(warmth(one) - 15)).toBe(-Math.sign(warmth(other) - 15));
    await page.keyboard.press('2');
    expect(await colour(0.4)).toEqual(await colour(2));
  });
});

describe('marks', () => {
  test('a click on a pole shows its field', async () => {
    await open('modes', { still: true });
    const before = await state();
    const picture = await colours();
    const other = page.locator(`.mark.pole:not(.chosen)`).first();
    const id = await other.getAttribute('data-mark');
    await other.click();
    await page.waitForFunction((wanted) => window.wavewell!.state().mark === wanted && window.wavewell!.ready(), id);
    expect((await state()).field).not.toBe(before.field);
    expect(await colours()).not.toEqual(picture);
    expect(await page.textContent('#facts h2')).toMatch(/^Pole at/);
  });

  test('keys go from mark to mark, and Enter shows the field', async () => {
    await open('modes', { still: true });
    const before = await state();
    await page.locator('.mark.chosen').focus();
    await page.keyboard.press('ArrowRight');
    expect((await state()).mark).toBe(before.mark);
    await page.keyboard.press('Enter');
    expect((await state()).mark).not.toBe(before.mark);
  });

  test('the level moves them along their paths, to the field on the axis and away from it', async () => {
    await open('threshold', { still: true });
    const { level, field } = await state();
    const place = (): Promise<string | null> => page.locator('.mark.chosen').getAttribute('transform');
    const onAxis = await place();
    await page.evaluate(() => window.wavewell!.set({ level: 0 }));
    expect(await place()).not.toBe(onAxis);
    expect((await state()).field).not.toBe(field);
    await page.locator('#level [role=slider]').focus();
    await page.keyboard.press('PageUp');
    expect((await state()).level).toBe(level);
    expect((await state()).field).toBe(field);
    expect(await place()).toBe(onAxis);
  });

  test('the table lists them all and shows one', async () => {
    await open('threshold', { still: true });
    await page.locator('#ways').getByText('numbers').click();
    expect(await page.locator('#sheet tbody tr').count()).toBe(runs.get('threshold')!.record.marks.length);
    await page.locator('#sheet tbody button').nth(3).focus();
    await page.keyboard.press('ArrowDown');
    await page.keyboard.press('Enter');
    expect((await state()).mark).toBe('mark4');
    expect(await page.locator('#sheet').isVisible()).toBe(false);
  });
});

describe('numbers', () => {
  test('the read-out is the exact value of the field, to the last digit', async () => {
    await open('threshold', { still: true });
    const [px, py] = await page.evaluate(() => window.wavewell!.toPixel(0.95, 0.31));
    await page.mouse.move(px, py);
    await page.waitForSelector('#readout dl');
    const shown = (await page.evaluate(() => window.wavewell!.readout()))!;
    const { fieldSampler } = runs.get('threshold')!;
    const exact = fieldSampler(readRun(join(base, 'threshold')))((await state()).field!, shown.x, shown.y)!;
    expect(shown.probe).toMatchObject({ re: exact.re, im: exact.im, name: 'resonator' });
    expect(Math.hypot(shown.x - 0.95, shown.y - 0.31)).toBeLessThan(0.02);
    const texts = await page.locator('#readout dd').allTextContents();
    const plain = (text: string): string =>
      [...text]
        .map((c) => '⁻⁰¹²³⁴⁵⁶⁷⁸⁹'.indexOf(c))
        .map((at, i) => (at < 0 ? text[i] : '-0123456789'[at]))
        .join('');
    const number = (text: string): number => Number(plain(text).replaceAll('−', '-').replace(' × 10', 'e'));
    expect(texts.slice(0, 2).map(number)).toEqual([shown.x, shown.y]);
    expect(texts.slice(2, 4).map(number)).toEqual([exact.re, exact.im]);
  });

  test('a click pins it, another lets go', async () => {
    await open('threshold', { still: true });
    const [px, py] = await page.evaluate(() => window.wavewell!.toPixel(0.95, 0.31));
    await page.mouse.click(px, py);
    await page.waitForSelector('#readout dl');
    expect(await page.textContent('#readout h2')).toBe('Pinned');
    const values = await page.locator('#readout dd').allTextContents();
    await page.mouse.move(px + 90, py);
    await page.waitForTimeout(150);
    expect(await page.locator('#readout dd').allTextContents()).toEqual(values);
    await page.mouse.click(px, py);
    await page.waitForFunction(() => document.querySelector('#readout h2')?.textContent !== 'Pinned');
  });

  test('the drive and its proof stand beside an absorbing field; the cautions are one click away', async () => {
    await open('absorb', { still: true });
    const text = (await page.textContent('#aside'))!;
    for (const word of ['Send in', 'm +3', 'Forward check', 'absorbed', 'returned', 'balance'])
      expect(text).toContain(word);
    await page.getByText('read first').click();
    for (const caution of runs.get('absorb')!.record.cautions)
      expect(await page.textContent('#sheet')).toContain(caution);
  });

  test('each mode of a degenerate pair can be shown', async () => {
    await open('modes', { still: true });
    const first = runs.get('modes')!.record.fields[0].id;
    await page.evaluate((field) => window.wavewell!.set({ field }), first);
    await page.getByText('second', { exact: true }).click();
    expect((await state()).field).toBe(`${first}-2`);
    await page.waitForFunction(() => window.wavewell!.ready());
    expect(await page.getAttribute('.members [aria-checked="true"]', 'aria-checked')).toBe('true');
    await page.getByText('first', { exact: true }).click();
    expect((await state()).field).toBe(first);
  });

  test('the far field stands beside a lasing one', async () => {
    await open('threshold', { still: true });
    await page.waitForSelector('.rose .petal');
    expect(await page.textContent('#aside')).toContain('directionality');
  });
});

describe('moving about', () => {
  test('wheel, drag and keys; 0 shows all of it again', async () => {
    await open('modes', { still: true });
    const corner = (): Promise<[number, number]> => page.evaluate(() => window.wavewell!.toPixel(0, 0));
    const home = await corner();
    await page.mouse.move(500, 250);
    await page.mouse.wheel(0, -300);
    await expect.poll(corner).not.toEqual(home);
    await page.mouse.down();
    await page.mouse.move(560, 280, { steps: 3 });
    await page.mouse.up();
    await page.keyboard.press('0');
    expect(await corner()).toEqual(home);
    await page.keyboard.press('+');
    expect(await corner()).not.toEqual(home);
    // A drag is no click.
    expect(await page.locator('#readout').textContent()).not.toContain('Pinned');
  });

  test.each([
    [800, 600],
    [2560, 1440],
  ])('nothing lies over anything else at %i × %i', async (width, height) => {
    await open('absorb', { still: true, width, height });
    const boxes = await page.evaluate(() =>
      ['says', 'ways', 'facts', 'time', 'aside', 'legend', 'water'].map((id) => {
        const { left, top, right, bottom } = document.getElementById(id)!.getBoundingClientRect();
        return { id, left, top, right, bottom };
      }),
    );
    for (const a of boxes) {
      expect(a.right, a.id).toBeLessThanOrEqual(width + 1);
      expect(a.bottom, a.id).toBeLessThanOrEqual(height + 1);
      for (const b of boxes) {
        const apart = a.right <= b.left || b.right <= a.left || a.bottom <= b.top || b.bottom <= a.top;
        expect(a === b || apart, `${a.id} and ${b.id}`).toBe(true);
      }
    }
  });

  test('a device with walls all around has no rim', async () => {
    await open('modes', { still: true });
    expect(await page.locator('#overlay .rim').count()).toBe(1);
    await page.context().close();
    await open('walled', { still: true });
    expect(await page.locator('#overlay .rim').count()).toBe(0);
  });

  test('dark and light are one word apart', async () => {
    await open('modes', { still: true, dark: true });
    const ground = (): Promise<string> => page.evaluate(() => getComputedStyle(document.body).backgroundColor);
    const dark = await ground();
    const picture = await colours();
    await page.locator('#ways').getByText('light').click();
    expect(await ground()).not.toBe(dark);
    expect(await colours()).not.toEqual(picture);
  });
});
