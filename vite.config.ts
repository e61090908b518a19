/// <reference types="vitest/config" />
import { defineConfig } from 'vite';
import { LongestFirst } from './test/longestFirst.ts';

/** Where a build server wants the runner's own report. */
const report = process.env.FIELDASSAY_TEST_REPORT;
/** Tests that measure times. */
const PROMPT = 'test/page/prompt.test.ts';
const stress = process.argv.includes('stress');

/**
 * One configuration for the two jobs: bundling the command line with its worker (`vite build --ssr`), and running the
 * tests. The projects are the depths of `DEVELOPERS.md`: unit, command (the built command line and the queue, as users have
 * them), page (likewise, and the package), prompt (how soon the page answers), verify (ladders and published checks), and
 * stress (the long counts, on request only). It imports vite alone, so that building needs no development package.
 */
export default defineConfig({
  build: {
    ssr: true,
    target: 'node20',
    minify: false,
    // The notices of all packages that the bundles hold go where the bundles go.
    license: { fileName: 'NOTICES.md' },
    rollupOptions: {
      input: { main: 'src/cli/main.ts', worker: 'src/run/worker.ts', index: 'src/index.ts' },
      output: { format: 'es', entryFileNames: '[name].js', chunkFileNames: 'shared/[name]-[hash].js' },
    },
  },
  // One file to read instead of hundreds: half the time until the command line and its workers are there.
  ssr: { noExternal: true },
  cacheDir: '.cache/vite',
  test: {
    environment: 'node',
    // Every processor has work, from the first file to the last.
    maxWorkers: '100%',
    sequence: { sequencer: LongestFirst },
    reporters: report ? ['default', 'json'] : ['default'],
    ...(report ? { outputFile: { json: report } } : {}),
    projects: [
      {
        extends: true,
        test: {
          name: 'unit',
          include: ['test/**/*.test.ts'],
          exclude: ['test/{cli,queue,page,library,verify,stress}/**'],
          testTimeout: 60_000,
        },
      },
      { extends: true, test: { name: 'command', include: ['test/{cli,queue}/**/*.test.ts'], testTimeout: 60_000 } },
      {
        extends: true,
        test: {
          name: 'page',
          include: ['test/{page,library}/**/*.test.ts'],
          exclude: [PROMPT],
          testTimeout: 120_000,
          hookTimeout: 240_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'prompt',
          include: [PROMPT],
          testTimeout: 120_000,
          // After the others: what a page takes is measured while nothing else runs.
          sequence: { groupOrder: 1 },
        },
      },
      { extends: true, test: { name: 'verify', include: ['test/verify/**/*.test.ts'], testTimeout: 600_000 } },
      ...(stress
        ? [
            {
              extends: true as const,
              test: { name: 'stress', include: ['test/stress/**/*.test.ts'], testTimeout: 3_600_000 },
            },
          ]
        : []),
    ],
  },
});
