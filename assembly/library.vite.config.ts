import { defineConfig } from 'vite';

/**
 * The library for browsers and bundlers: index.js, and the worker beside it (`--mode worker`), each one file that imports
 * nothing, because a bundler takes the worker along as it is.
 */
export default defineConfig(({ mode }) => ({
  cacheDir: '.cache/vite-library',
  build: {
    target: 'es2022',
    modulePreload: false,
    minify: false,
    license: { fileName: mode === 'worker' ? 'NOTICES-worker.md' : 'NOTICES.md' },
    lib: {
      entry: mode === 'worker' ? 'src/run/worker.ts' : 'src/index.ts',
      formats: ['es'],
      fileName: () => (mode === 'worker' ? 'worker.js' : 'index.js'),
    },
    rollupOptions: { output: { codeSplitting: false } },
  },
  define: { 'process.env.NODE_ENV': '"production"' },
  plugins: [
    {
      // Bundlers look for `new URL('./worker.js', import.meta.url)` to the letter.
      name: 'the worker, as bundlers find it',
      renderChunk: (code: string) => code.replaceAll('"" + import.meta.url', 'import.meta.url'),
    },
  ],
}));
