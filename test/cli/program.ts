// How do tests run the command line?

import { spawn, type ChildProcess } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const ROOT = fileURLToPath(new URL('../../', import.meta.url));
const COMPILED = join(ROOT, 'dist/cli/main.js');

/** The compiled program where it is newer than every source, as after an install; else the source under the loader. */
const PROGRAM: readonly string[] = isFresh()
  ? [COMPILED]
  : ['--import', import.meta.resolve('tsx'), join(ROOT, 'cli/main.ts')];

function isFresh(): boolean {
  if (!existsSync(COMPILED)) return false;
  const built = statSync(COMPILED).mtimeMs;
  return ['cli', 'src', 'viewer/server'].every((folder) =>
    readdirSync(join(ROOT, folder), { recursive: true, encoding: 'utf8' })
      .filter((name) => name.endsWith('.ts') && !name.includes('wasm/'))
      .every((name) => statSync(join(ROOT, folder, name)).mtimeMs < built),
  );
}

export interface Ended {
  readonly code: number | null;
  readonly stdout: string;
  readonly stderr: string;
}

/** A folder of its own for one test file; `remove` when done. */
export function workFolder(): { readonly path: string; write(name: string, text: string): string; remove(): void } {
  const path = mkdtempSync(join(tmpdir(), 'wavewell-cli-'));
  return {
    path,
    write(name, text) {
      writeFileSync(join(path, name), text);
      return name;
    },
    remove: () => rmSync(path, { recursive: true, force: true }),
  };
}

export function start(cwd: string, args: readonly string[]): { child: ChildProcess; ended: Promise<Ended> } {
  const child = spawn(process.execPath, [...PROGRAM, ...args], { cwd, stdio: ['ignore', 'pipe', 'pipe'] });
  let stdout = '';
  let stderr = '';
  child.stdout.setEncoding('utf8').on('data', (text: string) => (stdout += text));
  child.stderr.setEncoding('utf8').on('data', (text: string) => (stderr += text));
  const ended = new Promise<Ended>((done, failed) => {
    child.once('error', failed);
    child.once('close', (code) => done({ code, stdout, stderr }));
  });
  return { child, ended };
}

export const run = (cwd: string, ...args: readonly string[]): Promise<Ended> => start(cwd, args).ended;

/** A disk with one twofold resonance in its band: every question about it takes about a second. */
export const TINY_DISK = `# a comment that the copy keeps
wavewell: 1
title: Tiny disk
length: um
polarization: Ez
band: { wavenumber: [2.35, 2.45] }
knobs: { radius: 1 }
materials: { glass: { index: 2 } }
bodies:
  - { name: disk, material: glass, disk: { center: [0, 0], radius: radius } }
pump: { bodies: { disk: 1 } }
`;
