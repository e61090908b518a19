/**
 * The Yee kernel: two schedules over one plane-wise update. Drawn in ../README.md; driven by src/fdtd/.
 */
export { fill, lattice } from './memory';
export { coefficients } from './plane';
export { layersX, layersY, layersZ, windows } from './rows';
export { samples } from './samples';
export { march, sweep } from './schedule';
export { sources } from './sources';
export { walls } from './walls';
