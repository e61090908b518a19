import Papa from 'papaparse';
import { expect, test } from 'vitest';
import { currentsCommand } from '../../src/cli/currents.ts';
import { decibels } from '../../src/elementary/elementary.ts';
import { planFreeSpace } from '../../src/run/freeSpace.ts';
import { boxProblem } from '../../src/run/question.ts';
import { observerCell } from '../../src/scenario/sites.ts';
import { asked, solveHere } from './solveHere.ts';

/** CODATA 2022 and the metre. */
const MU = 1.256_637_061_27e-6;
const C = 299_792_458;
const EPSILON = 1 / (MU * C * C);

const SIGMA = 0.04e-9;

/** A tilted wire with a slow wave that comes back, and a loop, in cells that are no cubes. */
const scenario = {
  sources: [
    {
      type: 'wire',
      points: [
        ['-7 mm', '3 mm', '-9 mm'],
        ['2 mm', '-4 mm', '1 mm'],
        ['9 mm', '-2 mm', '8 mm'],
      ],
      current: {
        profile: 'travelling',
        speed: 0.8,
        reflection: { end: -1 },
        waveform: { type: 'gaussian', amplitude: '2 A', delay: 8.6 * SIGMA, sigma: SIGMA },
      },
    },
    {
      type: 'loop',
      centre: ['1 mm', '2 mm', '-3 mm'],
      normal: [1, -2, 2],
      radius: '6 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: 9 * SIGMA, sigma: SIGMA } },
    },
  ],
  grid: {
    cellSize: ['3 mm', '2.5 mm', '2 mm'],
    precision: 'double',
    box: { from: ['-30 mm', '-25 mm', '-24 mm'], to: ['30 mm', '25 mm', '24 mm'] },
  },
  duration: '0.6 ns',
};
const PLACES = [
  [0.021, 0.009, -0.012],
  [-0.013, -0.019, 0.011],
] as const;

/**
 * What a user makes of the exported file: Yee's scheme (Yee 1966) on an own grid with conducting walls so far away that
 * nothing comes back, E driven from nΔt to (n+1)Δt by −Δt/ε · I((n+½)Δt)/(area of the edge's face). It knows the file and
 * the cell sizes, nothing of the project.
 */
function yeeFromFile(csv: string, cellSize: readonly number[], probes: readonly (readonly number[])[]) {
  const [header, ...rows] = Papa.parse<string[]>(csv.trim()).data;
  const instants = header!.slice(8).map(Number);
  const timeStep = instants[1]! - instants[0]!;
  const steps = instants.length;
  const room = Math.ceil((C * timeStep * steps) / (2 * Math.min(...cellSize))) + 4;
  const nodes = [...rows.map((row) => row.slice(1, 4).map(Number)), ...probes];
  const low = [0, 1, 2].map((a) => Math.min(...nodes.map((node) => node[a]!)) - room);
  const size = [0, 1, 2].map((a) => Math.max(...nodes.map((node) => node[a]!)) + room - low[a]! + 1);
  const stride = [1, size[0]!, size[0]! * size[1]!];
  const at = (node: readonly number[]) => node.reduce((sum, n, a) => sum + stride[a]! * (n - low[a]!), 0);
  const E = [0, 1, 2].map(() => new Float64Array(stride[2]! * size[2]!));
  const H = E.map((field) => field.slice());
  const traces = probes.map(() => Array.from({ length: 6 }, () => new Float64Array(steps)));
  for (let n = 0; n < steps; n++) {
    for (const [fields, others, sign, gain] of [
      [E, H, -1, timeStep / EPSILON],
      [H, E, 1, -timeStep / MU],
    ] as const) {
      for (const x of [0, 1, 2]) {
        const [y, z] = [(x + 1) % 3, (x + 2) % 3];
        const [a, by, bz] = [fields[x]!, others[y]!, others[z]!];
        const [sy, sz] = [sign * stride[y]!, sign * stride[z]!];
        const [gy, gz] = [(-sign * gain) / cellSize[y]!, (-sign * gain) / cellSize[z]!];
        for (let k = 1; k < size[2]! - 1; k++)
          for (let j = 1; j < size[1]! - 1; j++)
            for (let p = stride[2]! * k + stride[1]! * j + 1, end = p + size[0]! - 2; p < end; p++)
              a[p]! += gy * (bz[p]! - bz[p + sy]!) - gz * (by[p]! - by[p + sz]!);
      }
      if (fields === E)
        for (const [axis, i, j, k, , , , , ...currents] of rows) {
          const a = 'xyz'.indexOf(axis!);
          const area = cellSize[(a + 1) % 3]! * cellSize[(a + 2) % 3]!;
          E[a]![at([i, j, k].map(Number))]! -= (timeStep * Number(currents[n])) / (EPSILON * area);
        }
    }
    probes.forEach((node, p) => {
      for (let c = 0; c < 3; c++) {
        traces[p]![c]![n] = E[c]![at(node)]!;
        traces[p]![3 + c]![n] = H[c]![at(node)]!;
      }
    });
  }
  return { traces, steps };
}

test('another Yee code, driven with the exported currents, gives the grid’s trace in free space', () => {
  const question = asked(scenario);
  const { grid } = question.scenario;
  const cells = PLACES.map((at) => observerCell(grid, at));
  const { floor } = planFreeSpace(boxProblem(question, [{ cell: Int32Array.from(cells.flat()), every: 1 }]), 12e9)!;
  const free = solveHere(question, PLACES).free();
  const { traces, steps } = yeeFromFile(currentsCommand(scenario), grid.cellSize, cells);
  expect(steps).toBe(question.steps);
  const rows = PLACES.map((at, p) => {
    const row: Record<string, string | number> = { place: at.join() };
    for (const [field, first] of [
      ['E', 0],
      ['H', 3],
    ] as const) {
      let off = 0;
      let most = 0;
      for (let c = first; c < first + 3; c++)
        for (let n = 0; n < steps; n++) {
          const value = free.values[(6 * p + c) * steps + n]!;
          most = Math.max(most, Math.abs(value));
          off = Math.max(off, Math.abs(value - traces[p]![c]![n]!));
        }
      expect(most).toBeGreaterThan(field === 'E' ? 1 : 1e-3);
      row[`${field}, dB`] = decibels(off / most);
    }
    return row;
  });
  console.table(rows);
  console.log(`what the grid's own run without walls leaves: ${decibels(floor).toFixed(0)} dB`);
  // That floor is of root mean squares, and here are largest values: 6 dB more.
  for (const row of rows) for (const field of ['E', 'H']) expect(row[`${field}, dB`]).toBeLessThan(decibels(floor) + 6);
});
