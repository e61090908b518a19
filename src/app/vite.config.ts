import { defineConfig } from 'vite';

/**
 * The page: src/app/index.html with its script, the worker that coordinates a run, and the workers it shares it out to.
 * All are entries of one build, so that they share what they have in common. Served by `fieldassay view`, see src/cli/.
 */
export default defineConfig({
  root: 'src/app',
  base: './',
  cacheDir: '../../.cache/vite-page',
  build: {
    target: 'es2022',
    modulePreload: false,
    license: { fileName: 'NOTICES.md' },
    rollupOptions: {
      input: {
        index: 'src/app/index.html',
        coordinator: 'src/app/coordinator.ts',
        worker: 'src/run/worker.ts',
        encoder: 'src/app/encoder.ts',
        packer: 'src/app/packer.ts',
        predictor: 'src/app/predictor.ts',
        survey: 'src/app/ladders/coordinator.ts',
        judge: 'src/app/judge/coordinator.ts',
        writer: 'src/app/writer.ts',
        filmer: 'src/app/ladders/filmer.ts',
        planner: 'src/app/plan/planner.ts',
      },
      output: {
        format: 'es',
        // Workers are found beside the module that starts them: src/platform/browser.ts.
        entryFileNames: 'assets/[name].js',
        chunkFileNames: 'assets/[name]-[hash].js',
        // zod compiles its parsers with `new Function` where it may; the page's policy forbids it, so it must not even try.
        banner: 'globalThis.__zod_globalConfig ??= { jitless: true };',
      },
    },
  },
});
