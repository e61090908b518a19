import type { NotPredicted, PredictedLattice } from '../compare/agreement.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import type { GridResult } from '../fdtd/run.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { instantsOf } from '../trace/trace.ts';
import type { FreeSpacePlan } from './freeSpace.ts';
import { runGrid } from './gridRun.ts';
import { exactField, griddedField, type IntegralField } from './integrals.ts';
import { predictLattice } from './latticeCheck.ts';
import type { Places } from './places.ts';
import type { Team } from './pool.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import type { Question } from './question.ts';

/** Runs end when no sample moves more than this fraction of its peak any longer. */
const STILL = { single: 1e-6, double: 1e-9 };

/** A factor whose products round differently: the same run driven with it shows what rounding does. */
export const ROUNDING_PROBE = 0.7315;

/** What the solvers say: budget points and volume, from each of the runs. */
export interface Answers {
  readonly box: GridResult;
  readonly probe: GridResult;
  readonly free: GridResult | null;
  readonly exact: IntegralField;
  readonly computed: IntegralField;
  readonly gridded: IntegralField;
  readonly volumeExact: IntegralField;
  readonly outsideExact: IntegralField;
  /** what the lattice part ought to be */
  readonly lattice: PredictedLattice | NotPredicted;
  /** wall time of all integrals, s */
  readonly exactSeconds: number;
}

/** With what a case is run. */
export interface Means {
  readonly team: Team;
  /** threads of a grid run: all of the team, or one where cases run beside each other */
  readonly gridThreads: number;
  readonly onProgress: (progress: Progress) => void;
  /** where cases ask for the same thing, does it once */
  readonly share?: Share;
}

/**
 * Does a piece of work, or hands out what it gave before: the grid without walls (for reflections, in double precision), the
 * guide without an end, or the exact fields.
 * None of them knows what the walls of the box are.
 */
export type Share = <T>(
  work: 'free' | 'reflectionFree' | 'guide' | 'integrals' | 'lattice',
  make: () => Promise<T>,
) => Promise<T>;

const alone: Share = (_, make) => make();

/** What is asked. */
export interface Asked {
  readonly question: Question;
  /** the scenario as it was given */
  readonly json: unknown;
  readonly places: Places;
  readonly box: GridProblem;
  readonly free: FreeSpacePlan | null;
  /** bytes that one run may take */
  readonly memoryLimit: number;
}

/** Asks both solvers, one run after another. */
export async function answer(
  { question, json, places, box, free }: Asked,
  { team, gridThreads, onProgress, share = alone }: Means,
): Promise<Answers> {
  const { scenario, steps, timeStep } = question;
  const still = STILL[scenario.grid.precision];
  const instants = instantsOf(steps, timeStep);
  const volumeInstants = instantsOf(steps, timeStep, places.every);
  const updates = (p: GridProblem) => memoryNeeded(p).cells * steps;
  const cells = {
    budget: places.budgetCells.length / 3,
    volume: places.volume.cell.length / 3,
    outside: places.outside.length,
  };
  const meter = new ProgressMeter(onProgress, [
    ['the grid without walls', (free?.cellUpdates ?? 0) / GRID_RATE],
    ['the grid in its box', updates(box) / GRID_RATE],
    ['the same grid driven with other roundings', updates(box) / GRID_RATE],
    ['the exact field', (2 * cells.budget + cells.volume + cells.outside) / CELL_RATE],
    ['the exact field of the gridded currents', cells.budget / CELL_RATE],
  ]);
  const grid = (stage: number, problem: GridProblem) => {
    meter.enter(stage);
    return runGrid(team, problem, still, (done) => meter.at(done / steps), gridThreads);
  };
  // The largest first: its memory serves the others.
  const freeRun = free ? await share('free', () => grid(0, free.problem)) : null;
  const boxRun = await grid(1, box);
  const probe = await grid(2, driven(box, ROUNDING_PROBE));
  const integrals = await share('integrals', async () => {
    const started = performance.now();
    meter.enter(3);
    const hasClosedForm = prepareSources(scenario.sources, scenario.medium, 'best').waves.length > 0;
    let doneCells = 0;
    const total = cells.volume + cells.outside + cells.budget * (hasClosedForm ? 2 : 1);
    const count = (n: number) => {
      doneCells += n;
      meter.at(doneCells / total);
    };
    const [volumeExact, outsideExact, exact, byQuadrature] = await Promise.all([
      exactField(team, scenario, json, places.volume.cell, volumeInstants, 'best', count),
      exactField(team, scenario, json, places.outsideCells, instants, 'best', count),
      exactField(team, scenario, json, places.budgetCells, instants, 'best', count),
      hasClosedForm ? exactField(team, scenario, json, places.budgetCells, instants, 'quadrature', count) : null,
    ]);
    meter.enter(4);
    const gridded = await griddedField(team, scenario, json, places.budgetCells, instants, () => {});
    const exactSeconds = (performance.now() - started) / 1000;
    return { exact, computed: byQuadrature ?? exact, gridded, volumeExact, outsideExact, exactSeconds };
  });
  const lattice = await share('lattice', () => {
    const freeHistory = freeRun && { ...integrals.gridded.history, values: freeRun.samples[0]! };
    return predictLattice(team, question, json, places, freeHistory, integrals.gridded.history);
  });
  return { box: boxRun, probe, free: freeRun, ...integrals, lattice };
}

/** Cell updates, and cells of exact histories, that a second is guessed to hold: they only weight progress and order. */
export const GRID_RATE = 5e8;
export const CELL_RATE = 2e3;

/** The same problem with all currents times a factor. */
function driven(problem: GridProblem, factor: number): GridProblem {
  const { currents } = problem;
  return { ...problem, currents: { ...currents, weight: currents.weight.map((w) => w * factor) } };
}
