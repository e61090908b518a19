/** The package's own module: beside it `opentype.js` alone means one file to Node and another to a bundler. */
declare module 'opentype.js/dist/opentype.mjs' {
  export { parse } from 'opentype.js';
}
