/**
 * Whether the schedule chosen by working set is near the best there is, and whether a cell costs the same at every size.
 * Schedules and sizes are marched in turns; each ratio is a median over the rounds, so that a busy machine spoils none.
 */
import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { bundle, startFollowers } from '../fdtd/bundle.mjs';
import { median } from './median.mjs';

const THREADS = 2;
const SCANNED = { sizes: [128, 200, 320], blockSteps: [4, 8, 12, 16], tilesPerThread: [1, 2, 4] };
const SIZES = [128, 160, 200, 256, 320, 400];
/** The largest lattice that the kernel is asked to march here: 2.0 GB of fields. */
const LARGEST = 440;

/** Does something with `march(problem, options)`, which gives a run's rate in million cell updates a second. */
async function marching(act) {
  setFlagsFromString('--expose-gc');
  const collect = runInNewContext('gc');
  const entry = (await bundle({ marching: 'test/bench/marching.ts' }))('marching');
  const { measure, bare } = await import(entry);
  const followers = startFollowers(entry, THREADS - 1);
  try {
    return await act(async (size, steps, schedule) => {
      collect();
      const options = { threads: THREADS, random: true, ...(schedule ? { schedule } : {}) };
      return await measure(bare(size, steps), options, followers.follow);
    });
  } finally {
    await followers.stop();
  }
}

/** Medians of each list of rates, and of its ratios to the first list, round by round. */
const against = (lists, first) =>
  lists.map((rates) => ({ median: median(rates), ratio: median(rates.map((rate, n) => rate / first[n])), rates }));

/** @returns {Promise<{ title: string, results: object[] }>} */
export function benchSchedules(rounds = 7) {
  return marching(async (march) => {
    const results = [];
    for (const size of SCANNED.sizes) {
      const steps = 48;
      const wishes = SCANNED.blockSteps.flatMap((blockSteps) =>
        SCANNED.tilesPerThread.map((tiles) => ({ blockSteps, tileRows: Math.ceil(size / (tiles * THREADS)) })),
      );
      const all = [undefined, ...wishes];
      const rates = all.map(() => []);
      for (let round = 0; round <= rounds; round++)
        for (const [n, wish] of all.entries()) {
          const { rate } = await march(size, steps, wish);
          if (round > 0) rates[n].push(rate);
        }
      const found = against(rates, rates[0]);
      const best = found.slice(1).reduce((a, b) => (b.ratio > a.ratio ? b : a));
      results.push({
        size,
        chosen: found[0].median,
        bestFoundByScan: best.median,
        best: wishes[found.indexOf(best) - 1],
        bestOfChosen: best.ratio,
        scan: wishes.map((wish, n) => ({ ...wish, ratio: found[n + 1].ratio, rates: found[n + 1].rates })),
      });
    }
    return { title: 'Schedules: the one chosen against the best of a scan, two threads', results };
  });
}

/** @returns {Promise<{ title: string, results: object[] }>} */
export function benchSizes(rounds = 5) {
  return marching(async (march) => {
    const steps = (size) => Math.max(16, 8 * Math.round(3e7 / size ** 3));
    const rates = SIZES.map(() => []);
    for (let round = 0; round <= rounds; round++)
      for (const [n, size] of SIZES.entries()) {
        const { rate } = await march(size, steps(size));
        if (round > 0) rates[n].push(rate);
      }
    const found = against(rates, rates[SIZES.indexOf(200)]);
    const largest = await march(LARGEST, 8);
    return {
      title: 'Sizes: cost of a cell update, two threads',
      results: [
        ...SIZES.map((size, n) => ({ size, median: found[n].median, of200: found[n].ratio, rates: found[n].rates })),
        { size: LARGEST, completes: true, rate: largest.rate, startSeconds: largest.startSeconds },
      ],
    };
  });
}
