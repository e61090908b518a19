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
    build: { ssr: true, target: 'node20', minify: false, emptyOutDir: true, outDir, rollupOptions: { input } },
  });
  return (name) => pathToFileURL(join(outDir, `${name}.js`)).href;
}

/**
 * Starts followers on threads of their own.
 * @param {string} entry URL of the bundled src/fdtd/run.ts
 * @param {{ threads: number }} setup
 * @returns {Promise<unknown>} resolved when all have left
 */
export function startFollowers(entry, setup) {
  const followers = Array.from({ length: setup.threads - 1 }, () => {
    const worker = new Worker(new URL('./follower.mjs', import.meta.url), { workerData: { entry, setup } });
    return new Promise((resolve, reject) => {
      worker.once('error', reject);
      worker.once('exit', resolve);
    });
  });
  return Promise.all(followers);
}
