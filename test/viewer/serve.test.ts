// Does the server give the run to this machine's browser, and to nobody else?

import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { request } from 'node:http';
import { connect } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';

import { readRun, writeRun } from '../../src/results/store.ts';
import type { LoadedRun } from '../../src/results/store.ts';
import { ServeError, serveRun } from '../../viewer/server/serve.ts';
import type { RunServer } from '../../viewer/server/serve.ts';
import { syntheticRun } from '../results/synthetic-run.ts';

const synthetic = syntheticRun('absorb', { rings: 5, sectors: 12, many: 2 });
let base: string;
let run: LoadedRun;
let page: string;
let server: RunServer;

beforeAll(async () => {
  base = mkdtempSync(join(tmpdir(), 'wavewell-serve-'));
  const folder = join(base, 'run');
  writeRun(folder, synthetic.record, synthetic.arrays);
  run = readRun(folder);
  page = join(base, 'page');
  mkdirSync(page);
  writeFileSync(join(page, 'index.html'), '<!doctype html><title>page</title>');
  writeFileSync(join(page, 'main.js'), 'export {};');
  server = await serveRun(folder, { page, fieldSampler: synthetic.fieldSampler });
});
afterAll(async () => {
  await server.close();
  rmSync(base, { recursive: true, force: true });
});

/** A request as it stands, without the clean-up that fetch does. */
function ask(
  path: string,
  headers: Record<string, string> = {},
  method = 'GET',
): Promise<{ status: number; body: Buffer; headers: Record<string, unknown> }> {
  const { hostname, port } = new URL(server.url);
  return new Promise((done, failed) => {
    const asked = request({ hostname, port, path, method, headers }, (response) => {
      const parts: Buffer[] = [];
      response.on('data', (part: Buffer) => parts.push(part));
      response.on('end', () =>
        done({ status: response.statusCode!, body: Buffer.concat(parts), headers: response.headers }),
      );
    });
    asked.on('error', failed);
    asked.end();
  });
}

describe('what is served', () => {
  test('the page, with its type and a policy that lets nothing in from outside', async () => {
    const { status, headers, body } = await ask('/');
    expect(status).toBe(200);
    expect(headers['content-type']).toMatch(/^text\/html/);
    expect(headers['content-security-policy']).toContain("default-src 'none'");
    expect(headers['x-content-type-options']).toBe('nosniff');
    expect(body.toString()).toContain('<title>page</title>');
    expect((await ask('/main.js')).headers['content-type']).toMatch(/javascript/);
  });

  test('the record and its arrays', async () => {
    const record = await ask('/run.json');
    expect(record.headers['content-type']).toMatch(/^application\/json/);
    expect(JSON.parse(record.body.toString())).toEqual(run.record);
    expect(new Uint8Array((await ask('/arrays.bin')).body)).toEqual(new Uint8Array(run.buffer));
  });

  test.each([
    ['bytes=8-15', 206, [8, 16]],
    ['bytes=0-0', 206, [0, 1]],
    ['bytes=-4', 206, [-4, undefined]],
    ['bytes=0-999999999', 206, [0, undefined]],
    ['lines=1-2', 200, [0, undefined]],
  ] as const)('range %s', async (range, status, slice) => {
    const got = await ask('/arrays.bin', { range });
    expect(got.status).toBe(status);
    expect(new Uint8Array(got.body)).toEqual(new Uint8Array(run.buffer.slice(slice[0], slice[1])));
  });

  test('a range past the end', async () => {
    const got = await ask('/arrays.bin', { range: 'bytes=999999999-' });
    expect(got.status).toBe(416);
    expect(got.headers['content-range']).toBe(`bytes */${run.buffer.byteLength}`);
  });

  test('the exact value at a point', async () => {
    const field = run.record.fields[1].id;
    const [x, y] = [0.7 + 0.2, -1 / 3];
    const expected = synthetic.fieldSampler(run)(field, x, y)!;
    const answer = JSON.parse((await ask(`/probe?field=${field}&x=${x}&y=${y}`)).body.toString());
    expect(answer).toMatchObject({ inside: true, re: expected.re, im: expected.im, name: 'resonator', body: 0 });
    expect(answer.modulus).toBe(Math.hypot(expected.re, expected.im));
    expect(answer.phase).toBe(Math.atan2(expected.im, expected.re));
    const outside = JSON.parse((await ask(`/probe?field=${field}&x=99&y=0`)).body.toString());
    expect(outside).toEqual({ inside: false });
  });

  test.each([
    ['/probe?field=none&x=0&y=0', 404],
    ['/probe?field=field0&x=&y=0', 400],
    ['/probe?field=field0&x=0', 400],
    ['/probe?field=field0&x=NaN&y=1e999', 400],
    ['/nothing', 404],
  ])('%s answers %i', async (path, status) => expect((await ask(path)).status).toBe(status));
});

describe('what is refused', () => {
  test.each(['evil.example', 'evil.example:80', '127.0.0.1.evil.example', '127.0.0.1@evil.example', 'localhost.evil'])(
    'host %j: a name that was made to point here',
    async (host) => expect((await ask('/run.json', { host })).status).toBe(403),
  );

  test.each(['localhost', 'LOCALHOST:80', '[::1]:7', '127.0.0.1'])('host %j is this machine', async (host) => {
    expect((await ask('/run.json', { host })).status).toBe(200);
  });

  test.each([
    '/../run/run.json',
    '/..%2frun%2frun.json',
    '/%2e%2e/run/run.json',
    '/..\\run\\run.json',
    '//run/run.json',
    '/page/../../run/run.json',
    '/%00',
    '/%',
    '/%E0%A4%A',
  ])('path %s leads nowhere', async (path) => {
    const { status } = await ask(path);
    expect([400, 404]).toContain(status);
  });

  test.each(['POST', 'PUT', 'DELETE', 'OPTIONS'])('%s', async (method) => {
    expect((await ask('/', {}, method)).status).toBe(405);
  });

  test('other interfaces than loopback', async () => {
    const { port } = new URL(server.url);
    // All of 127.0.0.0/8 is loopback on Linux, yet only 127.0.0.1 was bound.
    await expect(
      new Promise((done, failed) =>
        connect({ host: '127.0.0.2', port: Number(port) }, () => done('open')).on('error', failed),
      ),
    ).rejects.toThrow();
  });
});

describe('starting and stopping', () => {
  test('a port in use', async () => {
    const port = Number(new URL(server.url).port);
    await expect(serveRun(run.folder, { page, port })).rejects.toThrow(ServeError);
    await expect(serveRun(run.folder, { page, port })).rejects.toThrow(`port ${port} is in use`);
  });

  test.each([-1, 70000, 1.5, NaN])('port %d is senseless', async (port) => {
    await expect(serveRun(run.folder, { page, port })).rejects.toThrow(/expected a whole number/);
  });

  test('a folder without a run', async () => {
    await expect(serveRun(page, { page })).rejects.toThrow(/has no run.json/);
  });

  test('a signal closes it, and closing twice does no harm', async () => {
    const stop = new AbortController();
    const other = await serveRun(run.folder, { page, signal: stop.signal });
    expect((await fetch(other.url)).status).toBe(200);
    stop.abort();
    await other.close();
    await other.close();
    await expect(fetch(other.url)).rejects.toThrow();
    await expect(serveRun(run.folder, { page, signal: stop.signal })).rejects.toThrow();
  });
});
