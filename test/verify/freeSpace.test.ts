import { expect, test } from 'vitest';
import { decibels, fromDecibels } from '../../src/elementary/elementary.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { planFreeSpace, planReflectionFree } from '../../src/run/freeSpace.ts';
import { boxProblem, questionOf } from '../../src/run/question.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { FACES } from '../../src/scenario/model.ts';

/**
 * The floor of the free-space run, measured: its samples against the same lattice with an absorber more than twice as
 * thick behind six times the clearance, in double precision. What the plan claims as its floor must hold at every point.
 */
function question(cellsPerWavelength: number, boxCells: number, type: string) {
  const sigma = 0.189598e-9; // −40 dB of what radiates at 3 GHz, shortest wavelength 0.1 m
  const h = 0.1 / cellsPerWavelength;
  const half = (boxCells / 2) * h;
  const loaded = loadScenario({
    sources: [
      {
        type: 'dipole',
        at: [0.3 * h, -0.2 * h, 1.1 * h],
        direction: [0.3, 0.2, 1],
        length: h,
        current: { waveform: { type, amplitude: 1, delay: 5.5 * sigma, sigma } },
      },
    ],
    grid: { cellSize: h, box: { from: [-half, -half, -half], to: [half, half, half] }, precision: 'double' },
    duration: 11 * sigma + 1.5e-9,
  });
  if ('problems' in loaded) throw new Error(JSON.stringify(loaded.problems));
  return questionOf(loaded.scenario);
}

test.each([
  [10, 24, 'gaussianDerivative'],
  [10, 48, 'gaussian'],
  [20, 24, 'gaussianDerivative'],
] as const)('the floor holds at %d cells per wavelength, box of %d³, %s', (cells, boxCells, type) => {
  const asked = question(cells, boxCells, type);
  const [c, n] = [boxCells / 2, boxCells - 1];
  const cell = Int32Array.from([2, 3, 4, n - 3, n - 2, 3, c, n - 3, c, 0, 0, 0, n, c, c, c + 3, c, c]);
  const box = boxProblem(asked, [{ cell, every: 1 }]);
  const plan = planFreeSpace(box, 8e9)!;
  const better: GridProblem = {
    ...plan.problem,
    pad: Object.fromEntries(FACES.map((face) => [face, 66])) as never,
    boundary: Object.fromEntries(FACES.map((face) => [face, { ...plan.problem.boundary[face], layers: 36 }])) as never,
    activeRegion: { margin: 12 },
  };
  const a = marchAlone(plan.problem).samples[0]!;
  const b = marchAlone(better).samples[0]!;
  const levels = Array.from({ length: cell.length / 3 }, (_, p) => {
    const [from, to] = [p * 6 * asked.steps, (p * 6 + 3) * asked.steps];
    let difference = 0;
    let reference = 0;
    for (let i = from; i < to; i++) {
      difference += (a[i]! - b[i]!) ** 2;
      reference += b[i]! ** 2;
    }
    return decibels(Math.sqrt(difference / reference));
  });
  console.log(
    `${cells} cells per wavelength, ${boxCells}³, ${type}, ${asked.steps} steps, ${plan.description}: ` +
      `${(plan.cellUpdates / (boxCells ** 3 * asked.steps)).toFixed(1)} boxes; claimed ${decibels(plan.floor).toFixed(0)} dB, ` +
      `measured ${levels.map((level) => level.toFixed(1)).join(' ')} dB`,
  );
  for (const level of levels) expect(fromDecibels(level)).toBeLessThan(plan.floor);
});

test('the lattice that reflections are told against lets through what it claims, or less', () => {
  for (const type of ['gaussianDerivative', 'gaussian'] as const) {
    const asked = question(10, 24, type);
    const cell = Int32Array.from([2, 3, 4, 21, 21, 3, 12, 21, 12, 0, 0, 0, 23, 12, 12]);
    const plan = planReflectionFree(boxProblem(asked, [{ cell, every: 1 }]), 8e9)!;
    const { activeRegion: _, ...whole } = plan.problem;
    // The whole lattice may meet its own walls, but what comes back from there comes after the window.
    const a = marchAlone(plan.problem).samples[0]!;
    const b = marchAlone(whole).samples[0]!;
    const levels = Array.from({ length: cell.length / 3 }, (_, p) => {
      const [from, to] = [p * 6 * asked.steps, (p * 6 + 3) * asked.steps];
      const peak = b.subarray(from, to).reduce((most, v) => Math.max(most, Math.abs(v)), 0);
      return decibels(
        a.subarray(from, to).reduce((most, v, i) => Math.max(most, Math.abs(v - b[from + i]!)), 0) / peak,
      );
    });
    console.log(
      `${type}: claimed ${decibels(plan.floor).toFixed(0)} dB, measured ${levels.map((x) => x.toFixed(1)).join(' ')} dB of the peak`,
    );
    for (const level of levels) expect(level).toBeLessThan(decibels(plan.floor));
  }
});
