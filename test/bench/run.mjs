/**
 * All benchmarks, one after another; prints medians and writes everything, raw pairs and environment included, to
 * out/bench.json.
 *
 *   npm run bench -- [whole] [integral] [grid] [schedules] [sizes] [draw] [queue] [page]      all of them where none is named
 */
import { mkdirSync, writeFileSync } from 'node:fs';
import { cpus, loadavg, totalmem } from 'node:os';

const BENCHMARKS = {
  whole: async () => (await import('./whole.mjs')).benchWhole(),
  integral: async () => (await import('./retarded.mjs')).benchRetarded(),
  grid: async () => (await import('./grid.mjs')).benchGrid(),
  schedules: async () => (await import('./schedules.mjs')).benchSchedules(),
  sizes: async () => (await import('./schedules.mjs')).benchSizes(),
  draw: async () => (await import('./draw.mjs')).benchDraw(),
  queue: async () => (await import('./queue.mjs')).benchQueue(),
  page: async () => (await import('./page.mjs')).benchPage(),
};

const named = process.argv.slice(2);
const unknown = named.filter((name) => !Object.hasOwn(BENCHMARKS, name));
if (unknown.length > 0) {
  console.error(`there is no benchmark ${unknown.join(', ')}; there are ${Object.keys(BENCHMARKS).join(', ')}`);
  process.exit(2);
}

/** Raw lists are for the file. */
const brief = (value) => JSON.stringify(value, (_, v) => (Array.isArray(v) && v.length > 5 ? `${v.length} values` : v));

const results = {};
for (const name of named.length > 0 ? named : Object.keys(BENCHMARKS)) {
  const found = await BENCHMARKS[name]();
  results[name] = found;
  console.log(`\n${found.title}`);
  for (const result of found.results ?? [found]) console.log(`  ${brief(result)}`);
}
mkdirSync('out', { recursive: true });
writeFileSync(
  'out/bench.json',
  `${JSON.stringify(
    {
      environment: {
        processor: cpus()[0]?.model.trim(),
        threads: cpus().length,
        memoryGigabytes: Math.round(totalmem() / 1e9),
        node: process.version,
        loadBefore: loadavg(),
        date: new Date().toISOString(),
      },
      results,
    },
    null,
    2,
  )}\n`,
);
console.log('\nWritten: out/bench.json');
