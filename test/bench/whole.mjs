/**
 * The default scenario from question to verdict, as a user runs it: wall time of the whole command, where the time goes,
 * and how it compares with what native C needs for the same cell updates alone (native/yee.c at 112³, in turns).
 *
 *   node test/bench/whole.mjs [--rounds 7]
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { median } from './median.mjs';

const MAIN = fileURLToPath(new URL('../../dist/main.js', import.meta.url));
const NATIVE = fileURLToPath(new URL('native/yee.c', import.meta.url));
const NATIVE_SIZE = 112; // the free-space lattice of the default scenario
const NATIVE_STEPS = 200;

function compiled(folder) {
  const program = join(folder, 'yee');
  const flags = ['-O3', '-march=native', '-ffast-math', '-fopenmp', '-o', program, NATIVE];
  return spawnSync('gcc', flags, { stdio: 'ignore' }).status === 0 ? program : undefined;
}

/** @returns {Promise<{ title: string, results: object[] }>} */
export async function benchWhole(rounds = 7) {
  const folder = mkdtempSync(join(tmpdir(), 'whole-'));
  try {
    const program = compiled(folder);
    const runs = [];
    for (let round = 0; round < rounds; round++) {
      const started = performance.now();
      const { stdout, status } = spawnSync(process.execPath, [MAIN, 'compare', '--json'], { encoding: 'utf8' });
      const seconds = (performance.now() - started) / 1000;
      if (status !== 0) throw new Error(`compare ended with status ${status}`);
      const { timings } = JSON.parse(stdout);
      const grids = [timings.box, timings.rounding, timings.free];
      const updates = grids.reduce((sum, { cellUpdates }) => sum + cellUpdates, 0);
      const native = program
        ? JSON.parse(
            spawnSync(program, ['step', NATIVE_SIZE, NATIVE_STEPS, 2].map(String), { encoding: 'utf8' }).stdout,
          )
        : undefined;
      runs.push({
        seconds,
        grids: grids.reduce((sum, g) => sum + g.seconds, 0),
        exact: timings.exact.seconds,
        comparison: timings.comparison.seconds,
        updates,
        ...(native ? { nativeSeconds: updates / 1e6 / native.rate, nativeRate: native.rate } : {}),
      });
    }
    const of = (key) => median(runs.map((run) => run[key]));
    return {
      title: 'The default scenario, from question to verdict',
      results: [
        {
          case: 'compare, the whole command',
          seconds: of('seconds'),
          gridSeconds: of('grids'),
          exactSeconds: of('exact'),
          comparisonSeconds: of('comparison'),
          cellUpdates: runs[0].updates,
          ...(program
            ? {
                nativeSecondsForTheSameUpdates: of('nativeSeconds'),
                ofNative: median(runs.map((run) => run.seconds / run.nativeSeconds)),
              }
            : {}),
          runs,
        },
      ],
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const { values } = parseArgs({ options: { rounds: { type: 'string' } } });
  console.log(JSON.stringify(await benchWhole(values.rounds ? Number(values.rounds) : 7), null, 2));
}
