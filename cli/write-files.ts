// How do files reach the disk whole?

import { mkdirSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { dirname } from 'node:path';
import { InputError } from './faults.ts';

/** Writes each file beside its place first and renames it: a reader never meets half of one. Path → content. */
export function writeFiles(files: Readonly<Record<string, string | Uint8Array>>): void {
  for (const [path, content] of Object.entries(files)) {
    const temporary = `${path}.writing-${String(process.pid)}`;
    try {
      mkdirSync(dirname(path), { recursive: true });
      writeFileSync(temporary, content);
      renameSync(temporary, path);
    } catch (error) {
      rmSync(temporary, { force: true });
      const { code } = error as NodeJS.ErrnoException;
      if (code === undefined) throw error;
      throw new InputError(
        path,
        `a place that cannot be written (${code})`,
        'a folder to write to',
        'name another with --out',
      );
    }
  }
}
