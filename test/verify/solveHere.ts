import type { GridProblem } from '../../src/fdtd/problem.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { griddedHistory } from '../../src/retarded/gridded.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import { planFreeSpace } from '../../src/run/freeSpace.ts';
import { boxProblem, type Question, questionOf } from '../../src/run/question.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { observerCell } from '../../src/scenario/sites.ts';
import { type FieldHistory, instantsOf, samplePoints } from '../../src/trace/trace.ts';

/** The question of a scenario given as JSON. */
export function asked(json: object): Question {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Error(loaded.problems.map(({ message }) => message).join('\n'));
  return questionOf(loaded.scenario);
}

/** Both solvers in this thread, at the cells nearest to some places: what a test of a single part needs. */
export function solveHere(question: Question, places: readonly Vec3[]) {
  const { scenario, gridded, steps, timeStep } = question;
  const { grid, medium, sources } = scenario;
  const cell = Int32Array.from(places.flatMap((at) => observerCell(grid, at)));
  const points = samplePoints(cell, grid.box.from, grid.cellSize);
  const instants = instantsOf(steps, timeStep);
  const history = (values: Float64Array): FieldHistory => ({ points, instants, values });
  const box = boxProblem(question, [{ cell, every: 1 }]);
  const march = (problem: GridProblem) => history(marchAlone(problem).samples[0]!);
  return {
    points,
    instants,
    box,
    march,
    /** the grid in its own box */
    grid: () => march(box),
    free: () => march(planFreeSpace(box, 12e9)!.problem),
    gridded: () => history(griddedHistory(gridded, grid.box.from, grid.cellSize, medium, points, instants).values),
    exact: () => history(exactHistory(sources, medium, points, instants).values),
  };
}

/** √(Σ|a − b|²) / √(Σ|c|²) over the components of E (or H) and all instants of one point. */
export function relative(
  a: FieldHistory,
  b: FieldHistory,
  c: FieldHistory,
  point: number,
  field: 'E' | 'H' = 'E',
): number {
  const n = c.instants.count;
  const from = (point * 6 + (field === 'E' ? 0 : 3)) * n;
  let difference = 0;
  let reference = 0;
  for (let i = from; i < from + 3 * n; i++) {
    difference += (a.values[i]! - b.values[i]!) ** 2;
    reference += c.values[i]! ** 2;
  }
  return Math.sqrt(difference / reference);
}

/** Observed orders between consecutive errors of a ladder: log(e₁/e₂)/log(h₁/h₂). */
export function orders(cellSizes: readonly number[], errors: readonly number[]): number[] {
  return errors.slice(1).map((e, m) => Math.log(errors[m]! / e) / Math.log(cellSizes[m]! / cellSizes[m + 1]!));
}
