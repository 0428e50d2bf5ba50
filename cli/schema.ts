// wavewell schema: which keys does a device file have?

import type { Command } from 'commander';
import { deviceJsonSchema } from '../src/index.ts';
import { sayJson } from './paper.ts';

export function addSchema(program: Command): void {
  program
    .command('schema')
    .description('prints the JSON Schema of the device file, for editors')
    .action(() => sayJson(deviceJsonSchema()));
}
