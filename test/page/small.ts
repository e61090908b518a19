import { EXAMPLES } from '../../src/scenario/examples.ts';

/** A scenario that runs in a moment. */
export const SMALL = {
  ...EXAMPLES['dipole-near-corner'],
  title: 'Small',
  grid: { cellSize: '10 mm', box: EXAMPLES['dipole-near-corner'].grid.box, boundary: { type: 'cpml', layers: 6 } },
  duration: '3 ns',
  observers: [{ name: 'A', at: ['-30 mm', '-20 mm', '10 mm'] }],
};
