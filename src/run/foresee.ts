import { formatNumber } from '../elementary/quantity.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import { distanceToSources } from '../scenario/distance.ts';
import { FACES, type Scenario, type Vec3 } from '../scenario/model.ts';
import { observerCell } from '../scenario/sites.ts';
import { isUsual } from '../scenario/walls.ts';
import { describeBoundary } from './describe.ts';
import { goalPlaces } from './goal.ts';
import {
  CELLS_PER_RISE,
  FEWEST_CELLS,
  MOST_FOR_TIME_FORM,
  MOST_RESPONSES,
  NEAREST_CELLS,
  totalOf,
} from './planSearch.ts';
import { boundaryErrors, isPredictable, predictFree, predictWalls, type Wall } from './predict.ts';
import { boxProblem, questionOf } from './question.ts';
import { Refusal } from './refusal.ts';
import { ownWall } from './remedy.ts';

/** Predicted relative L2 errors of E at one observer; the boundary's is null where it is not known. */
export interface Foreseen {
  readonly name: string;
  readonly at: Vec3;
  readonly total: number;
  /** lattice and gridding together, with what they cancel of each other */
  readonly free: number;
  readonly lattice: number;
  readonly gridding: number;
  readonly boundary: number | null;
}

/** What a comparison of a scenario as it stands will come to, or why that is not predicted. */
export type Foresight =
  | {
      /** the observers inside the box, or where there are none those outside it */
      readonly places: readonly Foreseen[];
      readonly worst: Foreseen;
      /** cells × steps of the grid in its box, absorber included */
      readonly work: number;
      /** what was left out, and why */
      readonly notes: readonly string[];
    }
  | { readonly reason: string };

/** Absorbers nearer to sources or observers than this, in cells, send back more than is predicted. */
const NEAREST_WALL = 4;

/**
 * Predicts the errors of E at a scenario's observers, in a tenth of a second or so and without a run: lattice and gridding
 * by the closed form (src/lattice/), the walls by the source's images.
 */
export function foresee(scenario: Scenario): Foresight {
  const reason = beyondPrediction(scenario);
  if (reason) return { reason };
  try {
    const { places, notes } = goalPlaces(scenario, undefined, undefined);
    const near = places.find(
      ({ at }) => distanceToSources(scenario.sources, at) < NEAREST_CELLS * Math.max(...scenario.grid.cellSize),
    );
    if (near) return { reason: `observer ${near.name} is nearer to a source than ${NEAREST_CELLS} cells` };
    const cells = Int32Array.from(places.flatMap(({ at }) => observerCell(scenario.grid, at)));
    const asked = { cells, band: null };
    const largest = (list: readonly { readonly free: Float64Array }[]) => Math.max(...list.map(({ free }) => free[0]!));
    let errors = isKinked(scenario) ? null : predictFree(scenario, asked, 'time');
    // The time form leaves out the square of a large error.
    if (errors === null || largest(errors) > MOST_FOR_TIME_FORM) errors = predictFree(scenario, asked, 'spectrum');
    const wall = foreseeableWall(scenario);
    const walls = 'reason' in wall ? null : predictWalls(scenario, asked);
    const found = places.map(({ name, at }, p): Foreseen => {
      const { free, lattice, gridding } = errors[p]!;
      const sentBack = walls === null || 'reason' in wall ? null : boundaryErrors(walls[p]!, wall);
      return {
        name,
        at,
        total: sentBack ? totalOf(free, sentBack) : free[0]!,
        free: free[0]!,
        lattice: lattice[0]!,
        gridding: gridding[0]!,
        boundary: sentBack ? sentBack[0]! : null,
      };
    });
    const worst = found.reduce((a, b) => (b.total > a.total ? b : a));
    const question = questionOf(scenario);
    const work = memoryNeeded(boxProblem(question, [])).cells * question.steps;
    return { places: found, worst, work, notes: 'reason' in wall ? [...notes, wall.reason] : notes };
  } catch (error) {
    if (error instanceof Refusal) return { reason: unended(error.problems[0]!.message) };
    // A sample on an edge that carries the current.
    if (error instanceof RangeError) return { reason: unended(error.message) };
    throw error;
  }
}

const unended = (sentence: string): string => sentence.replace(/\.$/, '');

const isKinked = ({ sources }: Scenario): boolean => sources.some(({ waveform }) => waveform.expectedOrder.order < 2);

/** Why a scenario lies outside what predictions hold for; undefined where it does not. */
function beyondPrediction(scenario: Scenario): string | undefined {
  const question = questionOf(scenario);
  const { grid, medium, sources, observers } = scenario;
  if (observers.length === 0) return 'there is no observer to predict it at; a click in a pane adds one';
  if (isKinked(scenario)) {
    const rise = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
    const cells = (medium.speed * rise) / Math.max(...grid.cellSize);
    if (cells < CELLS_PER_RISE)
      return `predictions hold from ${CELLS_PER_RISE} cells in the rise of the current on, and there are ${formatNumber(cells, 2)}`;
  } else if (question.cellsPerWavelength < FEWEST_CELLS)
    return `predictions hold from ${FEWEST_CELLS} cells per shortest wavelength on, and there are ${formatNumber(question.cellsPerWavelength, 2)}`;
  const responses = 6 * observers.length * question.gridded.edges.count * (isKinked(scenario) ? 2 * question.steps : 1);
  return responses > MOST_RESPONSES ? 'the sources have too many edges for a prediction while one waits' : undefined;
}

/** The walls as predictions know them, or why they do not. */
function foreseeableWall(scenario: Scenario): Wall | { readonly reason: string } {
  const wall = ownWall(scenario);
  const unknown = (why: string) => ({ reason: `What the walls send back is not in it: ${why}.` });
  if (!wall || !isPredictable(wall)) return unknown(`${describeBoundary(scenario)} is not among what is predicted`);
  const { boundary, box, cellSize } = scenario.grid;
  if (!FACES.every((face) => isUsual(boundary[face])))
    return unknown(`predictions know a ${describeBoundary(scenario)} with its usual parameters only`);
  const close = scenario.observers.some(
    ({ at, inside }) =>
      inside &&
      [0, 1, 2].some(
        (a) => Math.min(at[a]! - box.from[a]!, box.to[a]! - at[a]!) < (NEAREST_WALL - 1e-9) * cellSize[a]!,
      ),
  );
  return close && wall.layers !== undefined
    ? unknown(`an observer is nearer to a wall than ${NEAREST_WALL} cells`)
    : wall;
}
