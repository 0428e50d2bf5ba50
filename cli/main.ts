#!/usr/bin/env node
// How does the program begin, and how is it stopped?

import { INTERNAL_FAULT, INTERRUPTED } from './exit-codes.ts';

// These stand before anything heavy is loaded: from here on Ctrl-C always ends with the same code.
for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const) process.once(signal, interrupt);
for (const stream of [process.stdout, process.stderr]) stream.on('error', endOfPipe);

try {
  const { runCommandLine } = await import('./command-line.ts');
  await runCommandLine();
} catch (error) {
  // Only a damaged installation comes here: the command line reports its own faults.
  process.stderr.write(`wavewell: internal fault\n  came: ${String(error)}\n`);
  process.stderr.write(
    '  expected: a whole installation\n  mend: install again, and report it if that does not help\n',
  );
  process.exitCode = INTERNAL_FAULT;
}

/** Runs are written in one go between two turns of the event loop: here nothing is half-written. */
function interrupt(): void {
  // The progress line, if there is one.
  if (process.stderr.isTTY) process.stderr.write('\r\x1b[2K');
  process.exit(INTERRUPTED);
}

/** The reader of a pipe has gone (`| head`): nothing is left to say. */
function endOfPipe(error: NodeJS.ErrnoException): void {
  if (error.code === 'EPIPE') process.exit(process.exitCode);
  throw error;
}
