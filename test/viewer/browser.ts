// How do tests get a real browser on a machine that has none?

import { spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, mkdtempSync, readFileSync, renameSync, rmSync } from 'node:fs';
import { writeFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { tmpdir } from 'node:os';
import { dirname, join } from 'node:path';
import { brotliDecompressSync } from 'node:zlib';
import chromium from '@sparticuz/chromium';
import { chromium as playwright } from 'playwright-core';
import type { Browser } from 'playwright-core';

/** WebGL 2 in software; nothing that weakens the page's policies; no traffic of the browser's own. */
const FLAGS = [
  '--no-sandbox',
  '--ignore-gpu-blocklist',
  '--use-gl=angle',
  '--use-angle=swiftshader',
  '--enable-unsafe-swiftshader',
  '--disable-background-networking',
];

/** Headless Chromium from the package's own archive; its libraries too, where the system lacks them. */
export async function launchBrowser(): Promise<Browser> {
  const executablePath = await chromium.executablePath();
  const env: Record<string, string> = {};
  for (const [name, value] of Object.entries(process.env)) if (value !== undefined) env[name] = value;
  if (lacksLibraries(executablePath)) {
    const libraries = unpackLibraries();
    env['LD_LIBRARY_PATH'] = [libraries, env['LD_LIBRARY_PATH']].filter(Boolean).join(':');
  }
  // A machine without fonts draws no text at all: the package brings one.
  if (!existsSync('/usr/share/fonts') && existsSync(join(tmpdir(), 'fonts')))
    env['FONTCONFIG_PATH'] ??= join(tmpdir(), 'fonts');
  return playwright.launch({ executablePath, args: FLAGS, env, headless: true });
}

function lacksLibraries(executable: string): boolean {
  const { stdout, error } = spawnSync('ldd', [executable], { encoding: 'utf8' });
  return error !== undefined || stdout.includes('not found');
}

/** Unpacks the archive of shared libraries into a folder of the temporary one, whole or not at all. */
function unpackLibraries(): string {
  const target = join(tmpdir(), 'wavewell-browser-libraries');
  if (existsSync(target)) return join(target, 'lib');
  const entry = createRequire(import.meta.url).resolve('@sparticuz/chromium');
  const archive = join(dirname(entry), '..', '..', 'bin', 'al2023.tar.br');
  const partial = mkdtempSync(join(tmpdir(), 'wavewell-browser-'));
  extractTar(brotliDecompressSync(readFileSync(archive)), partial);
  try {
    renameSync(partial, target);
  } catch {
    // Another test run was faster.
    rmSync(partial, { recursive: true });
  }
  return join(target, 'lib');
}

/** Plain files of a POSIX ustar archive: 512-byte headers, name at 0, size in octal at 124, kind at 156, prefix at 345. */
function extractTar(bytes: Buffer, folder: string): void {
  const text = (at: number, length: number): string => bytes.toString('latin1', at, at + length).replace(/\0.*$/s, '');
  for (let at = 0; at + 512 <= bytes.length && bytes[at] !== 0;) {
    const size = Number.parseInt(text(at + 124, 12), 8) || 0;
    const kind = text(at + 156, 1);
    const name = [text(at + 345, 155), text(at, 100)].filter(Boolean).join('/');
    if ((kind === '0' || kind === '') && !name.includes('..')) {
      const path = join(folder, name);
      mkdirSync(dirname(path), { recursive: true });
      writeFileSync(path, bytes.subarray(at + 512, at + 512 + size), { mode: 0o755 });
    }
    at += 512 + 512 * Math.ceil(size / 512);
  }
}
