import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { expect, onTestFinished, test } from 'vitest';
import { SMALL } from '../run/surveyFolder.ts';
import { growthOf } from './steadiness.ts';

/** For so long rounds follow each other in one process, minutes. */
const MINUTES = 8;
/** Rounds before anything is measured: code is compiled and pools of memory fill. */
const WARM = 20;

/** The least of so many rounds in a row is what is held. */
const ROW = 8;

/**
 * What may be added a round, bytes, at most. The least that a round could leave behind is one comparison's answer (above
 * 1 MB: its volume samples are typed arrays, its result some 100 kB of objects) or a worker (a thread's heap and stack,
 * several MB), so that a tenth of the answer, or half of the result, tells a leak from none.
 */
const MOST = { rss: 100e3, heapUsed: 50e3, arrayBuffers: 100e3, external: 100e3 } as const;

/** A round: a comparison, one that is broken off in the middle, one that is refused. */
const PROGRAM = `
  import { compare } from '${new URL('../../dist/index.js', import.meta.url).href}';
  const end = performance.now() + ${MINUTES * 60_000};
  const scenario = ${JSON.stringify({ ...SMALL, duration: '2.4 ns' })};
  const unwell = (run) => run.then(() => { throw new Error('it ended well'); }, () => {});
  while (performance.now() < end) {
    await compare(scenario);
    const stop = new AbortController();
    const onProgress = ({ fraction }) => { if (fraction > 0.5) stop.abort(); };
    await unwell(compare(scenario, { signal: stop.signal, onProgress }));
    await unwell(compare({ ...scenario, duration: '3 mm' }));
    gc();
    const { rss, heapUsed, arrayBuffers, external } = process.memoryUsage();
    const held = process.getActiveResourcesInfo().length;
    console.log(JSON.stringify({ rss, heapUsed, arrayBuffers, external, held }));
  }
`;

type Taken = Record<keyof typeof MOST | 'held', number>;

test('memory stays flat over comparisons without end', async () => {
  const folder = mkdtempSync(join(tmpdir(), 'soak-'));
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }));
  const program = join(folder, 'soak.mjs');
  writeFileSync(program, PROGRAM);
  const child = spawn(process.execPath, ['--expose-gc', program], { stdio: ['ignore', 'pipe', 'inherit'] });
  const taken: Taken[] = [];
  for await (const line of createInterface(child.stdout)) taken.push(JSON.parse(line));
  expect(child.exitCode ?? (await new Promise((done) => child.once('close', done)))).toBe(0);
  const measured = taken.slice(WARM);
  // Fewer could not tell a rise of a tenth of a megabyte from an allocator's play.
  expect(measured.length).toBeGreaterThanOrEqual(8 * ROW);
  const growths = growthOf(measured, Object.keys(MOST) as (keyof typeof MOST)[], ROW);
  for (const { key, floors, rise, error } of growths)
    console.log(
      `${key}: ${floors.map((n) => (n / 1e6).toFixed(1)).join(' ')} MB, ${ROW} rounds each; ` +
        `${(rise / 1e3).toFixed(1)} ± ${(error / 1e3).toFixed(1)} kB a round, at most ${MOST[key] / 1e3} kB`,
    );
  // Two standard errors: what is not surely below the bound does not pass.
  for (const { key, rise, error } of growths) expect(rise + 2 * error, key).toBeLessThan(MOST[key]);
  // Threads, ports and timers that are left behind.
  expect(Math.max(...measured.map(({ held }) => held))).toBeLessThanOrEqual(taken[0]!.held);
});
