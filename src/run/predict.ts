import { bandOf } from '../compare/band.ts';
import { energy } from '../compare/budget.ts';
import { pointError } from '../compare/pointError.ts';
import { fromDecibels } from '../elementary/elementary.ts';
import { predictGridField, predictLatticeError } from '../lattice/predict.ts';
import { predictGridFieldBySpectrum, predictLatticeErrorBySpectrum } from '../lattice/spectral.ts';
import { exactHistory } from '../retarded/history.ts';
import type { Boundary, Scenario, Vec3 } from '../scenario/model.ts';
import { type FieldHistory, type Instants, instantsOf, type SamplePoints, samplePoints } from '../trace/trace.ts';
import { questionOf, sampleInterval } from './question.ts';

/**
 * What a grid solver's error will be at some places, without a run. In free space the field that the lattice will show is
 * known (src/lattice/), and the exact one too: their difference is lattice and gridding parts together, with whatever
 * they cancel of each other. What walls send back is a share of what perfect conductors would.
 *
 * An error is a list of relative L2 errors of E: one over the window, or, for a band, one of each sixth-octave band in it.
 */
export type ErrorList = Float64Array;

/** Predicted errors of E at one place. */
export interface PlaceErrors {
  /** lattice and gridding together */
  readonly free: ErrorList;
  readonly lattice: ErrorList;
  readonly gridding: ErrorList;
}

export type Form = 'time' | 'spectrum';

/** Where and how errors are looked at. */
export interface Asked {
  /** the cells of the lattice that are read, 3 a place */
  readonly cells: Int32Array;
  /** Hz; null: the whole signal */
  readonly band: number | null;
}

/** A scenario's fields at cells, as far as predictions need them. */
interface Lookout {
  readonly points: SamplePoints;
  readonly instants: Instants;
  readonly exact: FieldHistory;
}

function lookout(scenario: Scenario, cells: Int32Array, instants: Instants): Lookout {
  const { grid, sources, medium } = scenario;
  const points = samplePoints(cells, grid.box.from, grid.cellSize);
  const { values } = exactHistory(sources, medium, points, instants);
  return { points, instants, exact: { points, instants, values } };
}

/**
 * Predicted errors without walls. The time form is right to 10 % at 8 or more cells per shortest wavelength while the
 * error is below some 4 %; the spectral form to 5 %, and to 15 % from 4 cells on, at some thirty times the cost.
 * @throws RangeError where a cell's sites lie on edges that carry the current
 */
export function predictFree(scenario: Scenario, { cells, band }: Asked, form: Form): PlaceErrors[] {
  const question = questionOf(scenario);
  const { gridded, timeStep, steps } = question;
  const { grid, medium } = scenario;
  const { points, instants, exact } = lookout(scenario, cells, instantsOf(steps, timeStep, sampleInterval(question)));
  const lattice = { cellSize: grid.cellSize, timeStep, medium };
  const [fieldOf, errorOf] =
    form === 'time'
      ? [predictGridField, predictLatticeError]
      : [predictGridFieldBySpectrum, predictLatticeErrorBySpectrum];
  const field = fieldOf(gridded.edges, lattice, points, instants);
  const added = errorOf(gridded.edges, lattice, points, instants);
  const plus = (part: (i: number) => number): FieldHistory => ({
    ...exact,
    values: exact.values.map((v, i) => v + part(i)),
  });
  const withAll = { ...exact, values: field };
  const withLattice = plus((i) => added[i]!);
  const withGridding = plus((i) => field[i]! - exact.values[i]! - added[i]!);
  return Array.from({ length: points.count }, (_, p) => ({
    free: errorsAt(withAll, exact, p, band),
    lattice: errorsAt(withLattice, exact, p, band),
    gridding: errorsAt(withGridding, exact, p, band),
  }));
}

/**
 * What six perfectly conducting walls of the box would send back at first, relative to the exact field: the
 * root-sum-square of the fields of the source's six images. An image's field at p is the mirror image of the source's
 * own at the mirrored p, so that no image needs to be made.
 */
export function imageLevels(scenario: Scenario, { cells, band }: Asked): ErrorList[] {
  const question = questionOf(scenario);
  const { sources, medium, grid } = scenario;
  const instants = instantsOf(question.steps, question.timeStep, sampleInterval(question));
  const { points, exact } = lookout(scenario, cells, instants);
  const squares = Array.from({ length: points.count }, (): Float64Array | null => null);
  for (const a of [0, 1, 2] as const)
    for (const wall of [grid.box.from[a], grid.box.to[a]]) {
      const position = points.position.map((x, n) => (n % 3 === a ? 2 * wall - x : x));
      const { values } = exactHistory(sources, medium, { ...points, position }, instants);
      const withImage = { ...exact, values: exact.values.map((v, i) => v + values[i]!) };
      for (let p = 0; p < points.count; p++) {
        const levels = errorsAt(withImage, exact, p, band).map((e) => e * e);
        squares[p] = squares[p] ? squares[p]!.map((s, m) => s + levels[m]!) : levels;
      }
    }
  return squares.map((sum) => sum!.map(Math.sqrt));
}

/**
 * What a wall sends back, as a share of what a perfect conductor does: root mean square over scenarios of
 * `test/stress/predict.test.ts`, which checks the figures.
 */
const CPML_REFLECTION_DB: Readonly<Record<number, number>> = { 6: -68, 8: -83, 10: -89, 12: -93 };
const MUR_REFLECTION = 0.53;

/** The share for a boundary; null where it was not measured. */
export function reflectionOf(boundary: {
  readonly type: Boundary['type'];
  readonly layers?: number | undefined;
}): number | null {
  if (boundary.type === 'mur1') return MUR_REFLECTION;
  if (boundary.type === 'pec') return 1;
  const dB = CPML_REFLECTION_DB[boundary.layers ?? 0];
  return dB === undefined ? null : fromDecibels(dB);
}

/** Relative errors of E at one point: over the window, or in the sixth-octave bands that begin below `band`. */
export function errorsAt(grid: FieldHistory, exact: FieldHistory, point: number, band: number | null): ErrorList {
  if (band === null) return Float64Array.of(pointError(grid, exact, exact, 'E', point));
  return Float64Array.from(
    bandOf(grid, exact, 'E', point, 0, 1)
      .bands.filter(({ from }) => from < band)
      .map(({ error }) => error),
  );
}

/** Root mean square of E and of ηH at places, V/m: where fields are strong, and where E vanishes. */
export function strengths(
  scenario: Scenario,
  places: readonly Vec3[],
): { readonly E: number; readonly etaH: number }[] {
  const question = questionOf(scenario);
  const { sources, medium } = scenario;
  const position = Float64Array.from(places.flatMap((at) => [0, 1, 2, 3, 4, 5].flatMap(() => at)));
  const points = { count: places.length, cell: new Int32Array(3 * places.length), position };
  const instants = instantsOf(question.steps, question.timeStep, sampleInterval(question));
  const { values } = exactHistory(sources, medium, points, instants);
  const history = { points, instants, values };
  const amplitude = (field: 'E' | 'H', p: number) => Math.sqrt(energy(history, field, p) / instants.count);
  return places.map((_, p) => ({ E: amplitude('E', p), etaH: medium.impedance * amplitude('H', p) }));
}
