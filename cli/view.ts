// wavewell view RUN: what does the result look like, moving?

import type { Command } from 'commander';
import { fieldSampler } from '../src/index.ts';
import { serveRun } from '../viewer/server/serve.ts';
import { readWhole } from './options.ts';
import { ink, say } from './paper.ts';

export function addView(program: Command): void {
  program
    .command('view')
    .description('serves a run as a page on this machine, until Ctrl-C')
    .argument('<RUN>', 'run folder')
    .option('--port <N>', 'port of the page (a free one if absent)', (text: string) =>
      readWhole(text, '--port', 0, 65535),
    )
    .action(async (folder: string, { port }: { port?: number }) => {
      const server = await serveRun(folder, { fieldSampler, ...(port === undefined ? {} : { port }) });
      say(`${ink.bold(`Open ${server.url}`)} in a browser on this machine; Ctrl-C ends it.`);
    });
}
