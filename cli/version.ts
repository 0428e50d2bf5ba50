// Which version is this?

import { existsSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

/** The folder that holds package.json, seen from the source and from dist/cli alike. */
export const packageFolder = (): string =>
  ['../', '../../']
    .map((up) => fileURLToPath(new URL(up, import.meta.url)))
    .find((folder) => existsSync(`${folder}package.json`))!;

export const programVersion = (): string =>
  (JSON.parse(readFileSync(`${packageFolder()}package.json`, 'utf8')) as { version: string }).version;
