import { expect, test } from 'vitest';
import type { LadderResult } from '../../src/compare/surveyResult.ts';
import { runSurvey } from '../../src/run/survey.ts';
import { loadSurvey } from '../../src/scenario/survey.ts';

/** −40 dB of what radiates at 2 GHz: the shortest wavelength is 0.15 m. */
const SIGMA = 0.312e-9;

/** A wire on a line of all grids with a current wave on it, observers ten cells of the coarsest off or more. */
const scenario = {
  sources: [
    {
      type: 'wire',
      points: [
        [0, 0, -0.03],
        [0, 0, 0.03],
      ],
      current: {
        profile: 'travelling',
        waveform: { type: 'gaussianDerivative', amplitude: 1, delay: 6 * SIGMA, sigma: SIGMA },
      },
    },
  ],
  grid: { cellSize: '10 mm', box: { from: [-0.03, -0.03, -0.06], to: [0.18, 0.15, 0.12] } },
  duration: 11.5 * SIGMA + 0.9e-9,
  observers: [
    { name: 'A', at: [0.12, 0.06, 0.03] },
    { name: 'B', at: [0.15, 0.09, -0.03] },
    { name: 'C', at: [0.06, 0.12, 0.09] },
  ],
};

/** Divisors of all places, so that observers and wire stay on their nodes. */
const SIZES = ['10 mm', '7.5 mm', '5 mm'];

async function ladderWith(boundary: object): Promise<LadderResult> {
  const grid = { ...scenario.grid, boundary };
  const loaded = loadSurvey({ scenario: { ...scenario, grid }, vary: { 'grid.cellSize': SIZES } }, () => null);
  if ('problems' in loaded) throw new Error(JSON.stringify(loaded.problems));
  const result = await runSurvey(loaded.survey);
  for (const { status, reason } of result.cases) if (status !== 'done') throw new Error(`${status}: ${reason}`);
  const { sizes, errors, orders, gci } = result.ladder!;
  console.log(
    `${sizes.map((h, m) => `${1000 * h} mm: ${(100 * errors[m]!).toFixed(3)} %`).join(', ')}; orders ${orders.map((p) => p!.toFixed(3)).join(', ')}; ` +
      `grid convergence index ${gci.value === null ? gci.reason : `${(100 * gci.value).toFixed(3)} %, true error ${(100 * gci.trueError).toFixed(3)} %, ${gci.covered ? 'covered' : 'not covered'}`}`,
  );
  return result.ladder!;
}

test('three grids with good walls: order 1.9 to 2.2, and the index covers the true error', async () => {
  const ladder = await ladderWith({ type: 'cpml', layers: 10 });
  for (const order of ladder.orders) {
    expect(order!).toBeGreaterThan(1.9);
    expect(order!).toBeLessThan(2.2);
  }
  expect(ladder.held).toBe('layers');
  expect(ladder.gci.trueError).toBe(ladder.errors[2]);
  expect('covered' in ladder.gci && ladder.gci.covered).toBe(true);
  // Roache's factor on an error that is all discretisation: about 1.25 times the truth.
  expect(ladder.gci.value! / ladder.gci.trueError!).toBeGreaterThan(1);
  expect(ladder.gci.value! / ladder.gci.trueError!).toBeLessThan(1.5);
});

test('walls that reflect: the error stops falling, and the index does not see it', async () => {
  const ladder = await ladderWith({ type: 'mur1' });
  expect(ladder.held).toBe('no layers');
  expect(ladder.orders[1]!).toBeLessThan(1);
  expect('covered' in ladder.gci && ladder.gci.covered).toBe(false);
  const lattice = ladder.parts.find(({ part }) => part === 'lattice')!;
  for (const order of lattice.orders) {
    expect(order!).toBeGreaterThan(1.9);
    expect(order!).toBeLessThan(2.2);
  }
});
