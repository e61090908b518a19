import { describe, expect, test } from 'vitest';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { activeRegion, type CellBox, countCellUpdates, type Region, wholeLattice } from '../../src/fdtd/region.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { cpml, edgesOf, everyFace, MUR, PULSE, plainProblem, type Triple } from './problems.ts';

const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 0, sigma: 0.03e-9 });

function problemOf(changes: Partial<GridProblem> = {}): GridProblem {
  return plainProblem([14, 12, 10], {
    cellSize: [4e-3, 5e-3, 6e-3],
    pad: { 'x-': 12, 'x+': 9, 'y-': 10, 'y+': 14, 'z-': 11, 'z+': 13 },
    steps: 40,
    currents: edgesOf(
      [
        { axis: 2, node: [6, 5, 4] },
        { axis: 0, node: [6, 6, 4], weight: -0.5 },
      ],
      waveform,
    ),
    samples: [
      { cell: Int32Array.from([1, 2, 3, 13, 11, 9]), every: 1 },
      { cell: Int32Array.from([5, 5, 5]), every: 4 },
    ],
    ...changes,
  });
}

/** The cells that are needed to the last bit: information moves one cell a step, whatever the wave speed. */
const exactly = (problem: GridProblem) => activeRegion(problem, 0, Infinity);

describe('active region', () => {
  test.each([
    ['single', 1],
    ['double', 3],
  ] as const)('nothing is lost when it moves one cell a step (%s)', (precision, tileRows) => {
    const problem = problemOf({ precision });
    const schedule = { tileRows, blockSteps: 5 };
    const whole = marchAlone(problem, { schedule });
    const part = marchAlone(problem, { schedule, region: exactly(problem) });
    expect(part.cellUpdates).toBeLessThan(whole.cellUpdates);
    expect(part.samples).toEqual(whole.samples);
    expect(marchAlone(problem, { schedule: { order: 'sweep' }, region: exactly(problem) }).samples).toEqual(
      whole.samples,
    );
  });

  test('one cell less on any side, in either phase, is noticed', () => {
    const problem = problemOf({ precision: 'double' });
    const whole = marchAlone(problem).samples;
    const exact = exactly(problem);
    // Bounds as tight as they can be: H reaches one cell below E's cells and no further up.
    const steps = problem.steps;
    const source = { from: [6, 5, 4], to: [6, 6, 4] };
    const sample = { from: [1, 2, 3], to: [13, 11, 9] };
    const offset = [12, 10, 11];
    const cells = [35, 36, 34];
    const tight =
      (grow: number, shrink: number): Region =>
      (n) => {
        const box = exact(n);
        const from = [0, 1, 2].map((a) =>
          Math.max(
            0,
            source.from[a]! - n - 1 - grow + offset[a]!,
            sample.from[a]! - (steps - 1 - n) - 1 - shrink + offset[a]!,
          ),
        );
        const to = [0, 1, 2].map((a) =>
          Math.min(
            cells[a]!,
            source.to[a]! + n + 1 + grow + offset[a]!,
            sample.to[a]! + (steps - 1 - n) + 2 + shrink + offset[a]!,
          ),
        );
        expect([0, 1, 2].every((a) => from[a]! >= box.from[a]! && to[a]! <= box.to[a]!)).toBe(true);
        return { from, to } as unknown as CellBox;
      };
    expect(marchAlone(problem, { region: tight(0, 0) }).samples).toEqual(whole);
    expect(marchAlone(problem, { region: tight(-1, 0) }).samples).not.toEqual(whole);
    expect(marchAlone(problem, { region: tight(0, -3) }).samples).not.toEqual(whole);
  });

  test('a growing margin lowers the floor, and cells are counted beforehand', () => {
    const cells: Triple = [20, 20, 20];
    const base = plainProblem(cells, {
      steps: 200,
      pad: everyFace(70),
      currents: edgesOf([{ axis: 2, node: [9, 10, 11] }], PULSE),
      samples: [{ cell: Int32Array.from([2, 3, 4, 10, 17, 10, 15, 15, 15]), every: 1 }],
    });
    const floor = (values: Float64Array, exact: Float64Array) => {
      let worst = 0;
      let peak = 0;
      exact.forEach((value, n) => {
        if (Math.floor(n / base.steps) % 6 > 2) return;
        peak = Math.max(peak, Math.abs(value));
        worst = Math.max(worst, Math.abs(values[n]! - value));
      });
      return 20 * Math.log10(worst / peak);
    };
    const exact = marchAlone({ ...base, activeRegion: { margin: 24 } });
    const rows = [2, 6, 10].map((margin) => {
      const problem = { ...base, activeRegion: { margin } };
      const result = marchAlone(problem);
      expect(result.cellUpdates).toBe(countCellUpdates(problem));
      return { margin, cellUpdates: result.cellUpdates, floor: floor(result.samples[0]!, exact.samples[0]!) };
    });
    console.table(rows);
    expect(countCellUpdates(base)).toBe(160 ** 3 * 200);
    expect(rows[2]!.cellUpdates).toBeLessThan(0.4 * countCellUpdates(base));
    expect(rows[0]!.floor).toBeLessThan(-60);
    expect(rows[1]!.floor).toBeLessThan(rows[0]!.floor - 6);
    expect(rows[2]!.floor).toBeLessThan(rows[1]!.floor - 6);
  });

  test.each([
    ['mur1', MUR],
    ['mur2', { type: 'mur2' }],
    ['higdon2', { type: 'higdon2', angles: [0, Math.PI / 4], damping: 0.01 }],
    ['liao', { type: 'liao', damping: 0.01 }],
    ['pmc', { type: 'pmc' }],
  ] as const)('it goes with walls that read several cells (%s)', (_, wall) => {
    // Walls near enough for what they return to be sampled, and rows and planes that go together within the region's edge.
    const problem = problemOf({ boundary: everyFace(wall), pad: everyFace(3), precision: 'double', steps: 60 });
    const [whole, part] = [wholeLattice(problem), exactly(problem)].map(
      (region) => marchAlone(problem, { region, schedule: { tileRows: 3, blockSteps: 7 } }).samples[0]!,
    ) as [Float64Array, Float64Array];
    const largest = Math.max(...whole.map(Math.abs));
    // A wall that damps lets the bias, 1e-20 of the scale, decay where it is marched.
    expect(Math.max(...whole.map((x, n) => Math.abs(x - part[n]!)))).toBeLessThan(1e-13 * largest);
    expect(largest).toBeGreaterThan(1e-3);
  });

  test('it goes with absorbing layers too', () => {
    const problem = problemOf({ boundary: everyFace(cpml(6)), precision: 'single' });
    expect(marchAlone(problem, { region: exactly(problem) }).samples).toEqual(marchAlone(problem).samples);
  });
});
