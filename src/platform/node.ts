import { existsSync } from 'node:fs';
import { availableParallelism, totalmem } from 'node:os';
import { version } from 'node:process';
import { fileURLToPath } from 'node:url';

/** Threads that can run at once. */
export const threadsAvailable = (): number => availableParallelism();

/** Whether threads can share memory here. */
export const canShareMemory = (): boolean => true;

/** Where the bundled worker lies: beside the bundle that runs, or, from sources, in dist/. */
export function workerScript(): string {
  for (const place of ['./worker.js', '../worker.js', '../../dist/worker.js']) {
    const path = fileURLToPath(new URL(place, import.meta.url));
    if (existsSync(path)) return path;
  }
  throw new Error('the worker (dist/worker.js) is missing: run `npm run build`');
}

/**
 * Options for the pool's worker constructor. Flags of this process stay with it: a worker that got `--input-type`, with
 * which a program from standard input is run, would refuse its own file.
 */
export const poolOptions = { workerType: 'thread', workerThreadOpts: { execArgv: [] } } as const;

/** The host, for a result's `environment`. */
export const hostName = (): string => `Node ${version.slice(1)}, ${process.platform} ${process.arch}`;

/** Bytes that one run may take: most of the machine's memory, and no more than the rest can spare. */
export const memoryLimit = (): number => 0.7 * totalmem();
