/**
 * How fast the grid solver marches, in turns with the native baseline (native/yee.c) so that a busy machine slows both.
 *
 *   node test/bench/grid.mjs [--rounds 7] [--sizes 64,128,200,256,320]
 *
 * Rates are million cells of the lattice by steps a second: medians with least and most, and the median of the ratios of
 * each round. Targets: one step a pass at least 0.9 of native at equal threads; the wavefront at 200³ on two threads at
 * least 2.1 × native on two threads (aim 2.6), on one thread 1.1 × native on two; as a user runs it 1.8 × (aim 2.2).
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { cpus, tmpdir, totalmem } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { bundle, startFollowers } from '../fdtd/bundle.mjs';
import { median } from './median.mjs';

const NATIVE = fileURLToPath(new URL('native/yee.c', import.meta.url));
const FLAGS = ['-O3', '-march=native', '-ffast-math', '-fopenmp'];

/** The path of the compiled program, or undefined where there is no compiler. */
function compiled(folder) {
  const program = join(folder, 'yee');
  const cc = ['gcc', 'clang', 'cc'].find(
    (name) => spawnSync(name, [...FLAGS, '-o', program, NATIVE], { stdio: 'ignore' }).status === 0,
  );
  return cc && { program, cc };
}

function native({ program }, job, size, repeats, threads) {
  const { stdout, status } = spawnSync(program, [job, size, repeats, threads].map(String), { encoding: 'utf8' });
  if (status !== 0) throw new Error(`native/yee.c ended with status ${status}`);
  return JSON.parse(stdout);
}

/** Steps that take a native thread about a third of a second, in whole blocks. */
const stepsFor = (cells) => Math.min(512, Math.max(16, 8 * Math.round(16e6 / cells ** 3)));

/**
 * @param {{ rounds?: number, sizes?: number[] }} options
 * @returns {Promise<{ title: string, environment: object, results: object[] }>}
 */
export async function benchGrid({ rounds = 7, sizes = [64, 128, 200, 256, 320] } = {}) {
  const folder = mkdtempSync(join(tmpdir(), 'grid-'));
  // Each run has a memory of its own; it must be gone before the next one is made, here and in the followers.
  setFlagsFromString('--expose-gc');
  const collect = runInNewContext('gc');
  const entry = (await bundle({ marching: 'test/bench/marching.ts' }))('marching');
  const { measure, bare, asUsed, smoothPulse } = await import(entry);
  const followers = startFollowers(entry, 1);
  const run = async (problem, options) => {
    collect();
    return measure(problem, options, followers.follow);
  };
  try {
    // First of all, so that the kernel is compiled within it: what a user waits for before the first step.
    const start = await run({ ...asUsed(120, 1), samples: [] }, { threads: 2 });
    const baseline = compiled(folder);
    const results = [{ case: 'start-up of 100³ with 10 layers, two threads', milliseconds: 1000 * start.startSeconds }];

    for (const size of sizes) {
      const steps = stepsFor(size);
      const random = { random: true };
      const cases = {
        'one step a pass, 1 thread': () => run(bare(size, steps), { ...random, schedule: { order: 'sweep' } }),
        'one step a pass, 2 threads': () =>
          run(bare(size, steps), { ...random, threads: 2, schedule: { order: 'sweep' } }),
        'wavefront, 1 thread': () => run(bare(size, steps), random),
        'wavefront, 2 threads': () => run(bare(size, steps), { ...random, threads: 2 }),
        'as used, 1 thread': () => run(asUsed(size, steps), {}),
        'as used, 2 threads': () => run(asUsed(size, steps), { threads: 2 }),
        // A front crosses the box in 0.87 sizes of steps; that is 40 % of the run.
        ...(size === 200
          ? {
              'as used, whole window, 2 threads': () => run(asUsed(size, 435), { threads: 2 }),
              'as used, whole window, active region, 2 threads': () => run(asUsed(size, 435, true), { threads: 2 }),
            }
          : {}),
        ...(size === 128
          ? { 'double precision, wavefront, 1 thread': () => run(bare(size, steps, 'double'), random) }
          : {}),
        ...(baseline
          ? {
              'native, 1 thread': () => native(baseline, 'step', size, steps, 1),
              'native, 2 threads': () => native(baseline, 'step', size, steps, 2),
            }
          : {}),
      };
      const taken = Object.fromEntries(Object.keys(cases).map((name) => [name, []]));
      for (const measured of Object.values(cases)) await measured();
      for (let round = 0; round < rounds; round++)
        for (const [name, measured] of Object.entries(cases)) taken[name].push(await measured());
      for (const [name, list] of Object.entries(taken)) {
        const rates = list.map(({ rate }) => rate);
        const against = (threads) => {
          const other = taken[`native, ${threads} thread${threads > 1 ? 's' : ''}`];
          return other && median(rates.map((rate, n) => rate / other[n].rate));
        };
        results.push({
          size,
          case: name,
          steps,
          median: median(rates),
          least: Math.min(...rates),
          most: Math.max(...rates),
          ofNative1: against(1),
          ofNative2: against(2),
          rates,
          checksum: list[0].checksum,
        });
      }
    }

    // In cache, so that arithmetic is what takes the time. A run of random fields has no denormals.
    const pulses = [];
    for (let round = 0; round < rounds; round++) {
      const clean = await run(bare(48, 2000), { random: true });
      pulses.push((await run(smoothPulse(48, 2000), {})).rate / clean.rate);
    }
    results.push({
      case: 'smooth pulse over random fields, 48³, 2000 steps (denormals)',
      ratio: median(pulses),
      ratios: pulses,
    });
    if (baseline)
      for (const threads of [1, 2]) {
        const { rate } = native(baseline, 'triad', 4e8, 9, threads);
        results.push({
          case: `triad, ${threads} thread${threads > 1 ? 's' : ''}`,
          gigabytes: rate,
          limitAt72Bytes: 1000 * (rate / 72),
        });
      }
    return {
      title: 'The grid, million cell updates a second',
      environment: {
        processor: cpus()[0]?.model.trim(),
        threads: cpus().length,
        memoryGigabytes: Math.round(totalmem() / 1e9),
        node: process.version,
        v8: process.versions.v8,
        compiler:
          baseline &&
          `${spawnSync(baseline.cc, ['--version'], { encoding: 'utf8' }).stdout.split('\n')[0]} ${FLAGS.join(' ')}`,
      },
      results,
    };
  } finally {
    await followers.stop();
    rmSync(folder, { recursive: true, force: true });
  }
}

/** One line a result. */
export function printGrid({ title, environment, results }) {
  console.log(title, environment);
  for (const r of results) {
    const rates = r.size && `${r.median.toFixed(0).padStart(5)} (${r.least.toFixed(0)} to ${r.most.toFixed(0)})`;
    const ratios = r.ofNative2 && `  of native: ${r.ofNative1.toFixed(2)} (1 thread), ${r.ofNative2.toFixed(2)} (2)`;
    console.log(
      r.size ? `${String(r.size).padStart(4)}³ ${r.case.padEnd(48)} ${rates}${ratios ?? ''}` : JSON.stringify(r),
    );
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const { values } = parseArgs({ options: { rounds: { type: 'string' }, sizes: { type: 'string' } } });
  printGrid(
    await benchGrid({
      ...(values.rounds ? { rounds: Number(values.rounds) } : {}),
      ...(values.sizes ? { sizes: values.sizes.split(',').map(Number) } : {}),
    }),
  );
}
