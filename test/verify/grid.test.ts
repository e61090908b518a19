import { expect, test } from 'vitest';
import { readField, writeField } from '../../src/fdtd/fields.ts';
import { lead, prepareGridRun } from '../../src/fdtd/run.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { courantStep, plainProblem, type Triple } from '../fdtd/problems.ts';

/**
 * A mode of a conducting box is a mode of the Yee lattice too, with the frequency of the discrete dispersion relation
 * (Yee 1966; Taflove & Hagness, Computational Electrodynamics, 3rd ed., ch. 4, from memory):
 *   [sin(ωΔt/2)/(vΔt)]² = Σ_a [sin(k_a d_a/2)/d_a]²,   k_a = π m_a/L_a.
 * Then E at any edge obeys E^{n+1} − 2 cos(ωΔt) E^n + E^{n−1} = 0.
 */
test.each([
  { mode: [2, 3, 0], along: [0, 0, 1] },
  { mode: [0, 1, 4], along: [1, 0, 0] },
  { mode: [3, 2, 5], along: [1, 2, 'free'] },
  { mode: [6, 1, 2], along: [-2, 'free', 1] },
  { mode: [13, 10, 8], along: ['free', 1, -1] },
])('mode $mode of a conducting box has the frequency of the discrete dispersion relation', ({ mode, along }) => {
  const cells: Triple = [14, 11, 9];
  const cellSize: Triple = [3e-3, 4e-3, 5e-3];
  const medium = mediumOf(2.5, 1.2);
  const timeStep = courantStep(0.98, cellSize, medium.speed);
  const K = cellSize.map((d, a) => (2 / d) * Math.sin((Math.PI * mode[a]!) / (2 * cells[a]!)));
  // The lattice's divergence of the mode vanishes: the amplitude is normal to K.
  const fixed = along.map((x) => (x === 'free' ? 0 : (x as number)));
  const free = along.indexOf('free');
  const dot = fixed.reduce((sum, x, a) => sum + x * K[a]!, 0);
  const amplitude = fixed.map((x, a) => (a === free ? -dot / K[a]! : x));
  if (free < 0) expect(dot).toBe(0);

  const steps = 40;
  const node: [number, number, number] = [cells[0] + 1, cells[1] + 1, cells[2] + 1];
  const shape = (component: number) => {
    const out = new Float64Array(node[0] * node[1] * node[2]);
    let n = 0;
    for (let k = 0; k < node[2]; k++)
      for (let j = 0; j < node[1]; j++)
        for (let i = 0; i < node[0]; i++, n++) {
          const where = [i, j, k];
          let value = amplitude[component]! * cellSize[component]!;
          for (let a = 0; a < 3; a++) {
            // Sines vanish on walls to the last bit, or the walls would hold a value of rounding size.
            const turn = (Math.PI * mode[a]!) / cells[a]!;
            if (a === component) value *= where[a] === cells[a] ? 0 : Math.cos(turn * (where[a]! + 0.5));
            else value *= where[a] === 0 || where[a] === cells[a] ? 0 : Math.sin(turn * where[a]!);
          }
          out[n] = value;
        }
    return out;
  };
  // Three runs of n, n + 1 and n + 2 steps: E of three instants at every edge, and H from the start's H = 0.
  const instants = [0, 1, 2].map((more) => {
    const run = prepareGridRun(plainProblem(cells, { cellSize, medium, timeStep, steps: steps + more, scale: 1e-3 }));
    lead(run, {
      onStart(setup) {
        for (let f = 0; f < 3; f++) writeField(setup, f, shape(f));
      },
    });
    return [0, 1, 2].map((f) => readField(run.setup, f));
  });

  const sine = medium.speed * timeStep * 0.5 * Math.sqrt(K.reduce((sum, k) => sum + k * k, 0));
  const twiceCosine = 2 - 4 * sine * sine;
  let worst = 0;
  let largest = 0;
  for (let f = 0; f < 3; f++)
    instants[1]![f]!.forEach((now, n) => {
      const residual = instants[2]![f]![n]! + instants[0]![f]![n]! - twiceCosine * now;
      worst = Math.max(worst, Math.abs(residual));
      largest = Math.max(largest, Math.abs(now));
    });
  // 2 cos ωΔt to the stated 1e-9; forty steps of rounding are some 1e-14.
  console.log(`mode ${mode}: 2 cos ωΔt = ${twiceCosine.toFixed(12)}, residual ${(worst / largest).toExponential(1)}`);
  expect(largest).toBeGreaterThan(1e-5);
  expect(worst / largest).toBeLessThan(1e-9);
});
