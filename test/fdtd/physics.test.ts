import { describe, expect, test } from 'vitest';
import { readField, writeField } from '../../src/fdtd/fields.ts';
import { latticeCells } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { type GridSetup, lead, marchAlone, prepareGridRun } from '../../src/fdtd/run.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { courantStep, cpml, Dice, edgesOf, everyFace, PEC, plainProblem, type Triple } from './problems.ts';

const pulse = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 0.12e-9, sigma: 0.02e-9 });

/** Fields after a run, with the run. */
function fieldsAfter(problem: GridProblem, onStart?: (setup: GridSetup) => void) {
  const run = prepareGridRun(problem);
  lead(run, onStart ? { onStart } : {});
  return { run, fields: [0, 1, 2, 3, 4, 5].map((f) => readField(run.setup, f)) };
}

describe('invariants of the lattice', () => {
  const cells: Triple = [11, 9, 10];
  const cellSize: Triple = [3e-3, 4e-3, 5e-3];
  const problem = plainProblem(cells, {
    cellSize,
    timeStep: courantStep(0.97, cellSize, 299792458),
    steps: 150,
    scale: 100,
    currents: edgesOf(
      [
        { axis: 0, node: [4, 4, 5], weight: 1 },
        { axis: 1, node: [5, 4, 5], weight: 0.7, delay: 0.03e-9 },
        { axis: 2, node: [3, 6, 4], weight: -0.4 },
      ],
      pulse,
    ),
  });
  const n = latticeCells(problem);
  const at = (i: number, j: number, k: number) => i + (n[0] + 1) * (j + (n[1] + 1) * k);
  const step = [1, n[0] + 1, (n[0] + 1) * (n[1] + 1)];
  const { run, fields } = fieldsAfter(problem);
  /** area of a face times 1/d of the scaled field that crosses it */
  const flux = [0, 1, 2].map((a) => (cellSize[(a + 1) % 3]! * cellSize[(a + 2) % 3]!) / cellSize[a]!);

  test('no magnetic charge: the flux of B out of every cell vanishes to rounding', () => {
    let worst = 0;
    let largest = 0;
    for (let k = 0; k < n[2] - 1; k++)
      for (let j = 0; j < n[1] - 1; j++)
        for (let i = 0; i < n[0] - 1; i++) {
          let out = 0;
          for (let a = 0; a < 3; a++) {
            const [ahead, here] = [fields[3 + a]![at(i, j, k) + step[a]!]!, fields[3 + a]![at(i, j, k)]!];
            out += flux[a]! * (ahead - here);
            largest = Math.max(largest, flux[a]! * Math.abs(ahead));
          }
          worst = Math.max(worst, Math.abs(out));
        }
    // Each of the steps rounds each of the six fluxes once or twice, at the size of the largest there has been.
    expect(largest).toBeGreaterThan(0);
    expect(worst).toBeLessThan(2 * 6 * problem.steps * Number.EPSILON * largest);
  });

  test('the charge at every node is what the currents have carried there', () => {
    // Q = Σ ε E·area out of the node = −Σ currents flowing out · Δt, each at its half step (physics of the scheme).
    const charge = new Float64Array(fields[0]!.length);
    const { currents, timeStep } = problem;
    for (let e = 0; e < currents.count; e++) {
      const [i, j, k] = currents.node.subarray(3 * e, 3 * e + 3) as unknown as Triple;
      let carried = 0;
      for (let m = 0; m < problem.steps; m++) {
        const t = (m + 0.5) * timeStep - currents.delay[e]!;
        carried += currents.weight[e]! * (t < 0 ? 0 : pulse.value(t)) * timeStep;
      }
      charge[at(i, j, k)]! -= carried;
      charge[at(i, j, k) + step[currents.axis[e]!]!]! += carried;
    }
    let worst = 0;
    let largest = 0;
    for (let k = 1; k < n[2]; k++)
      for (let j = 1; j < n[1]; j++)
        for (let i = 1; i < n[0]; i++) {
          let out = 0;
          for (let a = 0; a < 3; a++)
            out += flux[a]! * (fields[a]![at(i, j, k)]! - fields[a]![at(i, j, k) - step[a]!]!);
          const expected = charge[at(i, j, k)]!;
          worst = Math.max(worst, Math.abs(problem.medium.permittivity * out - expected));
          largest = Math.max(largest, Math.abs(expected));
        }
    expect(largest).toBeGreaterThan(1e-12);
    expect(worst / largest).toBeLessThan(2 * 6 * problem.steps * Number.EPSILON);
    expect(run.setup.layout.cells).toEqual(cells);
  });
});

describe('rotation', () => {
  /** Samples of a dipole along `axis` in a cube, with place and component turned along with it. */
  function turned(axis: number, boundary: GridProblem['boundary'], layers: number): number[] {
    const turn = (v: readonly number[]) => [0, 1, 2].map((a) => v[(a - axis + 3) % 3]!);
    const result = marchAlone(
      plainProblem([13, 13, 13], {
        steps: 60,
        precision: 'single',
        boundary,
        pad: everyFace(layers),
        currents: edgesOf([{ axis, node: turn([5, 6, 8]) }], pulse),
        samples: [{ cell: Int32Array.from(turn([9, 4, 3])), every: 1 }],
      }),
    );
    const values = result.samples[0]!;
    return [0, 1, 2, 3, 4, 5].flatMap((c) => {
      const component = (c < 3 ? 0 : 3) + (((c % 3) + axis) % 3);
      return [...values.subarray(component * 60, (component + 1) * 60)];
    });
  }

  test.each([
    ['pec', everyFace(PEC), 0],
    ['cpml', everyFace(cpml(5)), 5],
  ])('the same pulse along x, y and z gives the same numbers (%s)', (_, boundary, layers) => {
    const alongX = turned(0, boundary, layers);
    expect(Math.max(...alongX.map(Math.abs))).toBeGreaterThan(1);
    expect(turned(1, boundary, layers)).toEqual(alongX);
    expect(turned(2, boundary, layers)).toEqual(alongX);
  });
});

describe('the Courant limit', () => {
  const cellSize: Triple = [3e-3, 4e-3, 5e-3];
  const cells: Triple = [8, 7, 6];

  /** Largest field after so many steps from random fields of size 1 in a conducting box. */
  function largestAfter(courant: number, steps: number): number {
    const problem = plainProblem(cells, { cellSize, timeStep: courantStep(courant, cellSize, 299792458), steps });
    const dice = new Dice(7);
    const { fields } = fieldsAfter(problem, (setup) => {
      // h alone: tangential e on the walls must stay 0.
      for (const f of [3, 4, 5])
        writeField(
          setup,
          f,
          Float64Array.from({ length: 9 * 8 * 7 }, () => dice.real(-1, 1)),
        );
    });
    return Math.max(...fields.map((field) => field.reduce((m, x) => Math.max(m, Math.abs(x)), 0)));
  }

  test('stable over thousands of steps at S = 1, and unstable just where this box says', () => {
    // The highest mode of a box of n cells has k·d = π(n − 1)/n, so that its limit lies a little above S = 1:
    // S² Σ sin²(π(n − 1)/(2n))/d² / Σ 1/d² = 1 (the dispersion relation at ω = π/Δt).
    const sum = (f: (a: number) => number) => [0, 1, 2].reduce((total, a) => total + f(a) / cellSize[a]! ** 2, 0);
    const limit = Math.sqrt(sum(() => 1) / sum((a) => Math.sin((Math.PI * (cells[a]! - 1)) / (2 * cells[a]!)) ** 2));
    const rows = {
      1: largestAfter(1, 5000),
      below: largestAfter(0.999 * limit, 5000),
      above: largestAfter(1.001 * limit, 5000),
    };
    console.table({ limit, ...rows });
    expect(rows[1]).toBeLessThan(100);
    expect(rows.below).toBeLessThan(100);
    // Just above, it grows by 1 + 2√(2·0.001) a step: e^440 in 5000 steps.
    expect(rows.above).toBeGreaterThan(1e100);
  });
});
