import { EXAMPLES } from '../../src/scenario/examples.ts';

/** A scenario that runs in a moment. */
export const SMALL = {
  ...EXAMPLES['dipole-near-corner'],
  title: 'Small',
  grid: { cellSize: '10 mm', box: EXAMPLES['dipole-near-corner'].grid.box, boundary: { type: 'cpml', layers: 6 } },
  duration: '3 ns',
  observers: [{ name: 'A', at: ['-30 mm', '-20 mm', '10 mm'] }],
};

/** Four cases of it. */
export const SURVEY = {
  title: 'Small ladder',
  scenario: SMALL,
  vary: { 'grid.cellSize': ['12.5 mm', '10 mm'], 'grid.boundary': [{ type: 'mur1' }, { type: 'cpml', layers: 6 }] },
};
