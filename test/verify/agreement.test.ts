import { expect, test } from 'vitest';
import { latticeAgreement } from '../../src/compare/agreement.ts';
import { predictLatticeError } from '../../src/lattice/predict.ts';
import { planFreeSpace } from '../../src/run/freeSpace.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { levelsOf } from '../compare/synthetic.ts';
import { asked, solveHere } from './solveHere.ts';

/**
 * The standing check sees the slips that a grid solver is prone to: each is made here on purpose, on a run that agrees
 * without it.
 */
test('half a time step, a current of 1 % too much and a missing edge are seen; a sound run agrees', () => {
  const question = asked({ ...EXAMPLES['dipole-near-corner'], observers: [] });
  const { scenario, gridded, timeStep } = question;
  const solver = solveHere(question, [
    [0, 0, 0],
    [0.02, 0.03, 0.04],
  ]);
  const lattice = { cellSize: scenario.grid.cellSize, timeStep, medium: scenario.medium };
  const predicted = {
    points: Int32Array.of(0, 1),
    every: 1,
    remainder: 0.5 * ((2 * Math.PI) / question.cellsPerWavelength) ** 2,
    values: predictLatticeError(gridded.edges, lattice, solver.points, solver.instants),
  };
  const filaments = solver.gridded();
  const { problem } = planFreeSpace(solver.box, 12e9)!;
  const { delay, weight } = gridded.edges;
  const slips = {
    none: {},
    'half a time step': { delay: delay.map((t) => t + timeStep / 2) },
    'a current 1 % too strong': { weight: weight.map((w) => 1.01 * w) },
    'an edge left out': { weight: weight.map((w, p) => (p === 0 ? 0 : w)) },
  };
  const rows = Object.entries(slips).map(([slip, wrong]) => {
    const free = solver.march({ ...problem, currents: { ...gridded.edges, ...wrong } });
    const found = latticeAgreement({ free, gridded: filaments }, predicted, levelsOf(), scenario.medium.impedance);
    return { slip, status: found.status, 'mismatch, %': 100 * found.worst!.mismatch };
  });
  console.table(rows);
  expect(rows.map(({ status }) => status)).toEqual(['agrees', 'differs', 'differs', 'differs']);
});
