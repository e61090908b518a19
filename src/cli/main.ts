#!/usr/bin/env node
import process from 'node:process';

/** What nobody foresaw is told in one line as well, with its place for whoever looks for it. */
process.on('uncaughtException', (error) => {
  const [, place] = /\n\s+at (.*)/.exec(error?.stack ?? '') ?? [];
  process.stderr.write(`${error?.message ?? error}${place ? ` (at ${place})` : ''}\n`);
  process.exit(3);
});

// Loaded after that: where a machine gives no memory, loading is what fails.
const { runCli } = await import('./cli.ts');
process.exitCode = await runCli(process.argv.slice(2));
