/**
 * The grid solver as plain JavaScript, for threads of Node, which does not read TypeScript: tests and benchmarks run the
 * real leader and the real followers.
 */
import { mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { Worker } from 'node:worker_threads';
import { build } from 'vite';

const root = fileURLToPath(new URL('../../', import.meta.url));

/**
 * Bundles modules of the project into a folder of their own below .cache/.
 * @param {Record<string, string>} input name → path from the project's root
 * @returns {Promise<(name: string) => string>} URL of a bundled module
 */
export async function bundle(input) {
  mkdirSync(join(root, '.cache'), { recursive: true });
  const outDir = mkdtempSync(join(root, '.cache/grid-'));
  process.on('exit', () => rmSync(outDir, { recursive: true, force: true }));
  await build({
    root,
    configFile: false,
    logLevel: 'error',
    // whole, so that a browser can have the same file
    ssr: { noExternal: true },
    build: { ssr: true, target: 'node20', minify: false, emptyOutDir: true, outDir, rollupOptions: { input } },
  });
  return (name) => pathToFileURL(join(outDir, `${name}.js`)).href;
}

/**
 * Threads that follow runs, one run after another.
 * @param {string} entry URL of the bundled src/fdtd/run.ts
 * @param {number} count
 */
export function startFollowers(entry, count) {
  const workers = Array.from({ length: count }, () => {
    const worker = new Worker(new URL('./follower.mjs', import.meta.url), { workerData: { entry } });
    worker.unref();
    return worker;
  });
  return {
    /** Has threads − 1 of them follow a run; the caller leads it. Resolved when they have left. */
    follow: (setup) =>
      Promise.all(
        workers.slice(0, setup.threads - 1).map(
          (worker) =>
            new Promise((resolve, reject) => {
              worker.ref();
              worker.once('error', reject);
              worker.once('message', () => {
                worker.off('error', reject);
                worker.unref();
                resolve(undefined);
              });
              worker.postMessage(setup);
            }),
        ),
      ),
    stop: () => Promise.all(workers.map((worker) => worker.terminate())),
  };
}
