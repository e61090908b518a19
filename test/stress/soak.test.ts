import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { expect, onTestFinished, test } from 'vitest';

/** For so long comparisons follow each other in one process, minutes. */
const MINUTES = 8;
/** Comparisons before anything is measured: code is compiled and pools of memory fill. */
const WARM = 10;

const PROGRAM = `
  import { compare, EXAMPLES } from '${new URL('../../dist/index.js', import.meta.url).href}';
  const end = performance.now() + ${MINUTES * 60_000};
  for (let n = 0; performance.now() < end; n++) {
    await compare(EXAMPLES['small-loop']);
    gc();
    const { rss, heapUsed, arrayBuffers, external } = process.memoryUsage();
    console.log(JSON.stringify({ rss, heapUsed, arrayBuffers, external }));
  }
`;

test('memory stays flat over comparisons without end', async () => {
  const folder = mkdtempSync(join(tmpdir(), 'soak-'));
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }));
  const program = join(folder, 'soak.mjs');
  writeFileSync(program, PROGRAM);
  const child = spawn(process.execPath, ['--expose-gc', program], { stdio: ['ignore', 'pipe', 'inherit'] });
  const taken: Record<'rss' | 'heapUsed' | 'arrayBuffers' | 'external', number>[] = [];
  for await (const line of createInterface(child.stdout)) taken.push(JSON.parse(line));
  expect(child.exitCode ?? (await new Promise((done) => child.once('close', done)))).toBe(0);
  expect(taken.length).toBeGreaterThan(3 * WARM);
  const part = Math.floor((taken.length - WARM) / 3);
  const median = (from: number, key: 'rss' | 'heapUsed' | 'arrayBuffers' | 'external') =>
    taken
      .slice(from, from + part)
      .map((m) => m[key])
      .sort((a, b) => a - b)[part >> 1]! / 1e6;
  for (const key of ['rss', 'heapUsed', 'arrayBuffers', 'external'] as const) {
    const first = median(WARM, key);
    const last = median(taken.length - part, key);
    console.log(`${key}: ${first.toFixed(1)} MB, after ${taken.length} comparisons ${last.toFixed(1)} MB`);
    // What leaks with every comparison (its smallest answer is 1 MB) would add up to far more than an allocator's play.
    expect(last - first, key).toBeLessThan(Math.max(10, 0.1 * first));
  }
});
