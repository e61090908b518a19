import workerpool from 'workerpool';
import { type PackedProblem, unpackProblem } from '../fdtd/pack.ts';
import { follow, type GridResult, type GridRun, type GridSetup, lead, prepareGridRun } from '../fdtd/run.ts';
import { gridSources, nodeGridOf } from '../gridding/gridding.ts';
import { predictLatticeError } from '../lattice/predict.ts';
import { predictLatticeErrorBySpectrum } from '../lattice/spectral.ts';
import { griddedHistory } from '../retarded/gridded.ts';
import { exactHistory } from '../retarded/history.ts';
import type { Method } from '../retarded/prepare.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Axis, Scenario } from '../scenario/model.ts';
import { timeStepOf } from '../scenario/sites.ts';
import { type Instants, samplePoints, type Trace } from '../trace/trace.ts';
import { type Judged, judgeTraces } from './judge/judgeTraces.ts';
import { framesOf, type SliceShape, withBelow } from './planes.ts';
import { type Found, type Frame, type Goal, searchPlan } from './planSearch.ts';

/** What a worker can do. Arguments and results are structured-cloneable; scenarios travel as the file's JSON. */
export interface Tasks {
  /** leads a grid run; emits the number of steps done */
  leadGrid(packed: PackedProblem, prepared: PreparedGrid, stillLevel: number | null): GridResult;
  /** the same on this thread alone, where memory cannot be shared */
  marchGrid(packed: PackedProblem, stillLevel: number | null): GridResult;
  /** leads a grid run whose first group of samples is a film; emits `GridFrames`, returns the second group's samples */
  leadFilm(packed: PackedProblem, prepared: PreparedGrid, shapes: readonly SliceShape[]): Float64Array;
  filmAlone(packed: PackedProblem, shapes: readonly SliceShape[]): Float64Array;
  /** the exact field of designed or gridded currents at cells of a slice: data[(frame·9 + channel)·cells + cell] */
  filmExact(
    scenario: unknown,
    cells: Int32Array,
    normal: Axis,
    instants: Instants,
    of: 'designed' | 'gridded',
  ): Float32Array;
  /** helps a grid run until its leader is done */
  followGrid(setup: GridSetup): void;
  /** the exact field at the sites of some cells */
  exactField(scenario: unknown, cells: Int32Array, instants: Instants, method: Method): ExactPiece;
  /** the exact field of the gridded currents at the sites of some cells */
  griddedField(scenario: unknown, cells: Int32Array, instants: Instants, accuracy: number): GriddedPiece;
  /** what the lattice is predicted to add at the sites of some cells: values as in `FieldHistory` */
  predictLattice(scenario: unknown, cells: Int32Array, instants: Instants, form: LatticeForm): Float64Array;
  /** the cheapest set-up that is predicted to meet a goal */
  searchPlan(scenario: unknown, goal: Goal, frame: Frame): Found;
  /** another solver's traces against the exact field; emits `[stage, fraction]`. */
  judge(scenario: unknown, traces: readonly Trace[], file: string, notes: readonly string[]): JudgeAnswer;
}

/** A judgement, or why the traces cannot be judged: an error's kind does not survive the journey from a worker. */
export type JudgeAnswer = Judged | { readonly refusal: string };

/** How a prediction is made: in time, or with the exact numerical phase, some thirty times dearer. */
export type LatticeForm = 'time' | 'spectrum';

/** A prepared run as it travels: without what cannot be cloned. */
export type PreparedGrid = Omit<GridRun, 'problem' | 'region'>;

export interface ExactPiece {
  readonly values: Float64Array;
  /** one a site: point·6 + component */
  readonly errorBound: Float64Array;
  readonly evaluations: number;
}

export interface GriddedPiece {
  readonly values: Float64Array;
  /** found by checks, relative to the peak at a point */
  readonly difference: number;
  readonly evaluations: number;
}

/** The newest scenario of this worker: most tasks ask about the same one as the task before. */
let newest: { readonly text: string; readonly scenario: Scenario } | undefined;

/** The scenario that a task was sent; it was checked before it was sent. */
function scenarioOf(json: unknown): Scenario {
  const text = JSON.stringify(json);
  if (newest?.text !== text) newest = { text, scenario: loadedScenario(json) };
  return newest.scenario;
}

function loadedScenario(json: unknown): Scenario {
  const loaded = loadScenario(json);
  if ('problems' in loaded)
    throw new Error(`a worker was sent a scenario with problems: ${loaded.problems[0]!.message}`);
  return loaded.scenario;
}

function march(run: GridRun, stillLevel: number | null): GridResult {
  return lead(run, {
    onProgress: (steps) => workerpool.workerEmit(steps),
    ...(stillLevel === null ? {} : { stopWhenStill: { level: stillLevel } }),
  });
}

function film(run: GridRun, shapes: readonly SliceShape[]): Float64Array {
  let shown = 0;
  const { samples } = lead(run, {
    onSamples: ([slices]) => {
      const { values, taken } = slices!;
      const count = values.length / (12 * shapes.reduce((sum, { cells }) => sum + cells, 0));
      if (taken > shown) workerpool.workerEmit(framesOf(values, count, shown, taken, shapes));
      shown = taken;
    },
  });
  return samples[1] ?? new Float64Array(0);
}

const tasks: Tasks = {
  leadGrid: (packed, prepared, stillLevel) => march({ ...prepared, problem: unpackProblem(packed) }, stillLevel),
  marchGrid: (packed, stillLevel) => march(prepareGridRun(unpackProblem(packed)), stillLevel),
  leadFilm: (packed, prepared, shapes) => film({ ...prepared, problem: unpackProblem(packed) }, shapes),
  filmAlone: (packed, shapes) => film(prepareGridRun(unpackProblem(packed)), shapes),
  filmExact(json, cells, normal, instants, of) {
    const { sources, medium, grid } = scenarioOf(json);
    const points = samplePoints(withBelow(cells, normal), grid.box.from, grid.cellSize);
    const { values } =
      of === 'designed'
        ? exactHistory(sources, medium, points, instants)
        : griddedHistory(
            gridSources(sources, nodeGridOf(grid)),
            grid.box.from,
            grid.cellSize,
            medium,
            points,
            instants,
          );
    return framesOf(values, instants.count, 0, instants.count, [{ cells: cells.length / 3, normal }]).slices[0]!;
  },
  followGrid: follow,
  exactField(json, cells, instants, method) {
    const { sources, medium, grid } = scenarioOf(json);
    return exactHistory(sources, medium, samplePoints(cells, grid.box.from, grid.cellSize), instants, { method });
  },
  griddedField(json, cells, instants, accuracy) {
    const { sources, medium, grid } = scenarioOf(json);
    const points = samplePoints(cells, grid.box.from, grid.cellSize);
    const gridded = gridSources(sources, nodeGridOf(grid));
    const { values, difference, evaluations } = griddedHistory(
      gridded,
      grid.box.from,
      grid.cellSize,
      medium,
      points,
      instants,
      { accuracy },
    );
    return { values, difference, evaluations };
  },
  predictLattice(json, cells, instants, form) {
    const { sources, medium, grid } = scenarioOf(json);
    const { edges } = gridSources(sources, nodeGridOf(grid));
    const lattice = { cellSize: grid.cellSize, timeStep: timeStepOf(grid, medium), medium };
    const predict = form === 'time' ? predictLatticeError : predictLatticeErrorBySpectrum;
    return predict(edges, lattice, samplePoints(cells, grid.box.from, grid.cellSize), instants);
  },
  searchPlan: (json, goal, frame) => searchPlan(scenarioOf(json), goal, frame),
  judge(json, traces, file, notes) {
    try {
      return judgeTraces(scenarioOf(json), json, traces, file, notes, (stage, fraction) =>
        workerpool.workerEmit([stage, fraction]),
      );
    } catch (error) {
      if (error instanceof RangeError) return { refusal: error.message };
      throw error;
    }
  },
};

workerpool.worker(tasks as unknown as Record<string, (...args: never[]) => unknown>);
