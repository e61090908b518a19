import { type Frame, gridded } from '../../src/run/planSearch.ts';
import { boundaryErrors, predictFree, predictWalls, type Wall } from '../../src/run/predict.ts';
import { sourceBounds } from '../../src/scenario/distance.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { shortestWavelength } from '../../src/scenario/shortest.ts';
import { observerCell } from '../../src/scenario/sites.ts';
import { asked, relative, solveHere } from '../verify/solveHere.ts';
import type { PlanCase } from './planCases.ts';

/** Predicted over measured at one observer, double precision. */
export interface Prediction {
  readonly label: string;
  /** lattice and gridding together, a fraction of E */
  readonly measured: number;
  readonly time: number;
  readonly spectrum: number;
  /** the boundary part, by walls */
  readonly walls: readonly number[];
}

export const PREDICTED_WALLS: readonly Wall[] = [
  ...(['cpml', 'splitPml'] as const).flatMap((type) => [6, 8, 10, 12].map((layers) => ({ type, layers }))),
  ...(['mur1', 'mur2', 'higdon2', 'liao', 'pec', 'pmc'] as const).map((type) => ({ type })),
];

/** Runs a scenario on a lattice of so many cells per shortest wavelength, without walls and with each kind of them. */
export function predictionsOf({ label, json }: PlanCase, cellsPerWavelength: number, clearance: number): Prediction[] {
  const { scenario } = asked(json);
  const { sources, observers, grid } = scenario;
  const bounds = [...sources.map(sourceBounds), ...observers.map(({ at }) => ({ from: at, to: at }))];
  const along = (of: (a: 0 | 1 | 2) => number): Vec3 => [of(0), of(1), of(2)];
  const frame: Frame = {
    holds: {
      from: along((a) => Math.min(...bounds.map(({ from }) => from[a]))),
      to: along((a) => Math.max(...bounds.map(({ to }) => to[a]))),
    },
    anchor: sourceBounds(sources[0]!).from,
    clearances: [clearance],
    walls: PREDICTED_WALLS,
    keepsCells: false,
  };
  const factor = shortestWavelength(scenario).wavelength / cellsPerWavelength / grid.cellSize[0];
  const planned = gridded(scenario, factor, frame, clearance);
  const { cellSize, box } = planned.grid;
  const cells = Int32Array.from(observers.flatMap(({ at }) => observerCell(planned.grid, at)));
  const time = predictFree(planned, { cells, band: null }, 'time');
  const spectrum = predictFree(planned, { cells, band: null }, 'spectrum');
  const images = predictWalls(planned, { cells, band: null });
  const solver = (boundary: Wall) =>
    solveHere(
      asked({ ...json, grid: { cellSize, box, boundary, precision: 'double' } }),
      observers.map(({ at }) => at),
    );
  const first = solver(PREDICTED_WALLS[0]!);
  const exact = first.exact();
  const free = first.free();
  const grids = PREDICTED_WALLS.map((wall) => solver(wall).grid());
  return observers.map(({ name }, p) => {
    const measured = relative(free, exact, exact, p);
    return {
      label: `${label}, ${name}, N ${cellsPerWavelength}, clearance ${clearance}`,
      measured,
      time: time[p]!.free[0]! / measured,
      spectrum: spectrum[p]!.free[0]! / measured,
      walls: PREDICTED_WALLS.map(
        (wall, w) => boundaryErrors(images[p]!, wall)[0]! / relative(grids[w]!, free, exact, p),
      ),
    };
  });
}

const WALL_NAMES = PREDICTED_WALLS.map(({ type, layers }) => `${type}${layers ?? ''}`);

export function printPredictions(list: readonly Prediction[]): void {
  console.table(
    list.map(({ label, measured, time, spectrum, walls }) => ({
      case: label,
      'measured, %': (100 * measured).toFixed(3),
      time: time.toFixed(3),
      spectrum: spectrum.toFixed(3),
      ...Object.fromEntries(walls.map((ratio, w) => [WALL_NAMES[w], ratio.toFixed(2)])),
    })),
  );
}

/** Share of boundary terms within a factor of 2, by walls. */
export function withinTwo(list: readonly Prediction[]): Record<string, number> {
  return Object.fromEntries(
    WALL_NAMES.map((name, w) => [
      name,
      list.filter(({ walls }) => walls[w]! > 0.5 && walls[w]! < 2).length / list.length,
    ]),
  );
}

/**
 * The worst of predicted/measured and its inverse in both forms, and the share of the spectral ones within 1.05. What lies
 * beyond are cases at 8 or 9 cells per shortest wavelength where lattice and gridding parts cancel each other by half and
 * more, or bursts, whose energy lies near that wavelength: there the next order shows.
 */
export function factors(list: readonly Prediction[]) {
  const off = (form: 'time' | 'spectrum') => list.map((each) => Math.max(each[form], 1 / each[form]));
  const spectrum = off('spectrum');
  return {
    time: Math.max(...off('time')),
    spectrum: Math.max(...spectrum),
    within: spectrum.filter((factor) => factor <= 1.05).length / list.length,
  };
}
