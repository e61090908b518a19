/**
 * The first script of the page: it needs nothing, so that it can say what is missing. The solvers are WebAssembly with
 * 128-bit SIMD; the smallest module that uses it is asked for.
 */
const SIMD = Uint8Array.of(
  // magic, version; type: () -> v128; one function; its body: i32.const 0, i8x16.splat, i8x16.popcnt
  0,
  97,
  115,
  109,
  1,
  0,
  0,
  0,
  1,
  5,
  1,
  96,
  0,
  1,
  123,
  3,
  2,
  1,
  0,
  10,
  10,
  1,
  8,
  0,
  65,
  0,
  253,
  15,
  253,
  98,
  11,
);

if (typeof WebAssembly === 'object' && WebAssembly.validate(SIMD)) void import('./main.ts');
else {
  document.getElementById('sentence')!.textContent =
    'This browser cannot run the field solvers: it lacks WebAssembly SIMD.';
  document.getElementById('details')!.textContent =
    'Chrome and Edge have it from version 91, Firefox from 89, Safari from 16.4. Without a browser, `npx fieldassay compare SCENARIO --out DIR` gives the same verdict.';
}
