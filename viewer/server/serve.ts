// How does a stored run reach the browser, and nobody else?

import { existsSync } from 'node:fs';
import { createServer } from 'node:http';
import type { IncomingMessage, Server, ServerResponse } from 'node:http';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import sirv from 'sirv';

import { fieldSampler } from '../../src/results/evaluate.ts';
import { bodyName } from '../../src/results/run-view.ts';
import type { FieldSampler } from '../../src/results/run-view.ts';
import { readRun } from '../../src/results/store.ts';
import type { LoadedRun } from '../../src/results/store.ts';

export type { FieldSampler };

export interface ServeOptions {
  /** TCP port; a free one when absent. */
  readonly port?: number;
  /** Closes the server when it fires. */
  readonly signal?: AbortSignal;
  /** Folder of the built page; by default the one that `vite build` fills. */
  readonly page?: string;
  /** Makes the exact read-out of a run, when it is first asked for; by default that of src/results/evaluate. */
  readonly fieldSampler?: (run: LoadedRun) => FieldSampler;
}

export interface RunServer {
  /** Address of the page, ending in a slash. */
  readonly url: string;
  close(): Promise<void>;
}

/** The port is taken, forbidden or senseless, or the page has not been built; the message says what to do. */
export class ServeError extends Error {
  override readonly name = 'ServeError';
}

/** Numbers under the cursor, as `/probe` answers. Outside the rim `inside` is false and the rest is absent. */
export type ProbeAnswer =
  | { readonly inside: false }
  | {
      readonly inside: true;
      readonly re: number;
      readonly im: number;
      readonly modulus: number;
      /** Radians in (−π, π]. */
      readonly phase: number;
      /** Index into `device.bodies`, −1 for the background. */
      readonly body: number;
      /** Its name, or 'background'. */
      readonly name: string;
    };

const LOOPBACK = '127.0.0.1';

/**
 * Serves the page, the run and exact field values on the loopback interface until closed.
 *
 *   /                       the page
 *   /run.json               the record
 *   /arrays.bin             its arrays; ranges of bytes are answered
 *   /probe?field=&x=&y=     a ProbeAnswer
 *
 * @param folder of a run, read once: a run replaced later does not disturb what is being looked at.
 * @throws RunStoreError when the folder holds no readable run; ServeError when the page or the port fails.
 */
export async function serveRun(folder: string, options: ServeOptions = {}): Promise<RunServer> {
  const { port = 0, signal } = options;
  if (!Number.isInteger(port) || port < 0 || port > 65535)
    throw new ServeError(`port: came ${port}, expected a whole number from 0 (any free one) to 65535`);
  signal?.throwIfAborted();
  const run = readRun(folder);
  const answer = answerer(run, options.page ?? builtPage(), options.fieldSampler ?? fieldSampler);
  const server = createServer(answer);
  await listen(server, port);
  const stop = (): void => {
    server.close();
    server.closeAllConnections();
  };
  signal?.addEventListener('abort', stop, { once: true });
  const closed = new Promise<void>((done) => server.once('close', done));
  const close = (): Promise<void> => {
    signal?.removeEventListener('abort', stop);
    stop();
    return closed;
  };
  const address = server.address();
  const chosen = typeof address === 'object' && address ? address.port : port;
  return { url: `http://${LOOPBACK}:${chosen}/`, close };
}

/** dist/viewer/page, seen from the source and from the compiled server alike. */
function builtPage(): string {
  const candidates = ['../page', '../../dist/viewer/page'].map((path) => fileURLToPath(new URL(path, import.meta.url)));
  const built = candidates.find((path) => existsSync(join(path, 'index.html')) && !existsSync(join(path, 'main.ts')));
  if (!built) throw new ServeError(`the page is not built: none at ${candidates.join(' or ')}; run \`npm run build\``);
  return built;
}

async function listen(server: Server, port: number): Promise<void> {
  await new Promise<void>((done, failed) => {
    server.once('error', failed);
    server.listen({ host: LOOPBACK, port, exclusive: true }, () => {
      server.off('error', failed);
      done();
    });
  }).catch((error: NodeJS.ErrnoException) => {
    const why =
      error.code === 'EADDRINUSE'
        ? 'is in use'
        : error.code === 'EACCES'
          ? 'is reserved by the system'
          : `cannot be opened (${error.message})`;
    throw new ServeError(`port ${port} ${why}: choose another, or none to get a free one`);
  });
}

type Answerer = (request: IncomingMessage, response: ServerResponse) => void;

function answerer(run: LoadedRun, page: string, makeSampler: (run: LoadedRun) => FieldSampler): Answerer {
  const record = Buffer.from(JSON.stringify(run.record));
  const arrays = Buffer.from(run.buffer);
  const files = sirv(page, { etag: true });
  let made: FieldSampler | null = null;
  const sampler: FieldSampler = (field, x, y) => (made ??= makeSampler(run))(field, x, y);
  return (request, response) => {
    for (const [name, value] of Object.entries(SECURITY_HEADERS)) response.setHeader(name, value);
    if (!isLoopbackHost(request.headers.host)) return refuse(response, 403, 'only http://127.0.0.1 is served here');
    if (request.method !== 'GET' && request.method !== 'HEAD') {
      response.setHeader('Allow', 'GET, HEAD');
      return refuse(response, 405, 'only GET and HEAD are answered');
    }
    const url = parseTarget(request.url);
    if (!url) return refuse(response, 400, 'this address cannot be read');
    response.setHeader('Cache-Control', 'no-store');
    if (url.pathname === '/run.json') return sendBytes(request, response, record, 'application/json; charset=utf-8');
    if (url.pathname === '/arrays.bin') return sendBytes(request, response, arrays, 'application/octet-stream');
    if (url.pathname === '/probe') return sendProbe(response, run, sampler, url.searchParams);
    files(request, response, () => refuse(response, 404, 'there is no such page'));
  };
}

const SECURITY_HEADERS = {
  'Content-Security-Policy':
    "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' data:; connect-src 'self'; " +
    "base-uri 'none'; form-action 'none'; frame-ancestors 'none'",
  'Cross-Origin-Opener-Policy': 'same-origin',
  'Cross-Origin-Resource-Policy': 'same-origin',
  'Referrer-Policy': 'no-referrer',
  'X-Content-Type-Options': 'nosniff',
};

/** A page of another site whose name was made to point here (DNS rebinding) shows that name in the Host header. */
function isLoopbackHost(host: string | undefined): boolean {
  return host !== undefined && /^(127\.0\.0\.1|localhost|\[::1\])(:\d{1,5})?$/i.test(host);
}

function parseTarget(target: string | undefined): URL | null {
  if (!target?.startsWith('/')) return null;
  try {
    return new URL(`http://${LOOPBACK}${target}`);
  } catch {
    return null;
  }
}

function refuse(response: ServerResponse, status: number, reason: string): void {
  response.writeHead(status, { 'Content-Type': 'text/plain; charset=utf-8' });
  response.end(reason + '\n');
}

/** Sends all bytes, or the one range that is asked for (RFC 9110, section 14). */
function sendBytes(request: IncomingMessage, response: ServerResponse, bytes: Buffer, type: string): void {
  response.setHeader('Content-Type', type);
  response.setHeader('Accept-Ranges', 'bytes');
  const range = request.headers.range === undefined ? null : parseRange(request.headers.range, bytes.length);
  if (range === 'none') {
    response.setHeader('Content-Range', `bytes */${bytes.length}`);
    return refuse(response, 416, 'this range of bytes does not exist');
  }
  const part = range ? bytes.subarray(range.first, range.last + 1) : bytes;
  if (range) response.setHeader('Content-Range', `bytes ${range.first}-${range.last}/${bytes.length}`);
  response.writeHead(range ? 206 : 200, { 'Content-Length': part.length });
  response.end(request.method === 'HEAD' ? undefined : part);
}

/** null: a header that is not one simple range, which the standard lets a server ignore. */
function parseRange(header: string, size: number): { first: number; last: number } | 'none' | null {
  const match = /^bytes=(\d*)-(\d*)$/.exec(header);
  if (!match || (match[1] === '' && match[2] === '')) return null;
  const first = match[1] === '' ? Math.max(0, size - Number(match[2])) : Number(match[1]);
  const last = match[1] === '' || match[2] === '' ? size - 1 : Math.min(Number(match[2]), size - 1);
  return first > last ? 'none' : { first, last };
}

function sendProbe(response: ServerResponse, run: LoadedRun, sampler: FieldSampler, query: URLSearchParams): void {
  const field = query.get('field') ?? '';
  if (!run.record.fields.some(({ id }) => id === field)) return refuse(response, 404, `there is no field '${field}'`);
  const [x, y] = [query.get('x'), query.get('y')].map((text) => (text?.trim() ? Number(text) : NaN));
  if (!Number.isFinite(x) || !Number.isFinite(y)) return refuse(response, 400, 'x and y: expected finite numbers');
  let value: ReturnType<FieldSampler>;
  try {
    value = sampler(field, x, y);
  } catch (error) {
    return refuse(
      response,
      500,
      `the field could not be evaluated: ${error instanceof Error ? error.message : 'unknown'}`,
    );
  }
  response.writeHead(200, { 'Content-Type': 'application/json; charset=utf-8' });
  response.end(JSON.stringify(probeAnswer(run, value)));
}

function probeAnswer(run: LoadedRun, value: ReturnType<FieldSampler>): ProbeAnswer {
  if (!value) return { inside: false };
  const { re, im, body } = value;
  const name = bodyName(run.record, body);
  return { inside: true, re, im, modulus: Math.hypot(re, im), phase: Math.atan2(im, re), body, name };
}
