import { boundaryText } from '../compare/boundaryWords.ts';
import type { PlannedSetup } from '../compare/planResult.ts';
import { type Remedy, type Result, withinTolerance } from '../compare/result.ts';
import { formatNumber, formatPercent, formatQuantity } from '../elementary/quantity.ts';
import { FACES, type Scenario } from '../scenario/model.ts';
import { isUsual } from '../scenario/walls.ts';
import type { Asked } from './answers.ts';
import type { Comparison } from './conclude.ts';
import { describeBoundary } from './describe.ts';
import { goalPlaces, placesAround } from './goal.ts';
import { type Frame, type Goal, WALLS } from './planSearch.ts';
import type { Team } from './pool.ts';
import { isPredictable, type Wall } from './predict.ts';
import { Refusal } from './refusal.ts';

/** Cells by which walls may move outwards. */
const OUTWARDS = [0, 4, 8, 16, 32];

/**
 * A comparison outside its tolerance with the cheapest change that is predicted to meet it: of cells, walls and the room
 * before them, together, since parts may cancel and mending the largest alone can make things worse. One that meets its
 * tolerance, and trusts some distance, is returned as it is.
 */
export async function withRemedy(team: Team, { question, json }: Asked, comparison: Comparison): Promise<Comparison> {
  const { scenario } = question;
  const { result } = comparison;
  const goal = goalOf(scenario, result);
  if (goal === null) return comparison;
  const found = await team.run('searchPlan', [json, goal, frameOf(scenario)]);
  const remedy = remedyOf(scenario, result, found.met ? found.chosen : null);
  return { ...comparison, result: { ...result, verdict: { ...result.verdict, remedy } } };
}

/** Where the tolerance was missed: at observers, else at the best distance there is; null where it was not. */
function goalOf(scenario: Scenario, result: Result): Goal | null {
  const { tolerance, verdict, observers } = result;
  const none = verdict.closest.status === 'none' ? verdict.closest.best.distance : null;
  try {
    if (!withinTolerance(result) && observers.some(({ E }) => E !== null))
      return { tolerance, places: goalPlaces(scenario, undefined, undefined).places, band: null };
    return none === null ? null : { tolerance, places: placesAround(scenario, none).places, band: null };
  } catch (error) {
    // E vanishes wherever it was looked for: nothing to be predicted.
    if (error instanceof Refusal) return null;
    throw error;
  }
}

/** The scenario's own box and cells, and walls beside its own. */
function frameOf({ grid }: Scenario): Frame {
  const own = ownWall({ grid });
  const others = WALLS.filter(({ type, layers }) => type !== own?.type || layers !== own.layers);
  return {
    holds: grid.box,
    anchor: grid.box.from,
    clearances: OUTWARDS,
    walls: own && isPredictable(own) && isUsual(grid.boundary['x-']) ? [own, ...others] : others,
    keepsCells: true,
  };
}

/** The walls where all are alike, as far as predictions tell them apart; null where they are not. */
export function ownWall({ grid }: Pick<Scenario, 'grid'>): Wall | null {
  const walls = FACES.map((face) => grid.boundary[face]);
  const first = walls[0]!;
  if (walls.some((wall) => JSON.stringify(wall) !== JSON.stringify(first))) return null;
  return 'layers' in first ? { type: first.type, layers: first.layers } : { type: first.type };
}

function remedyOf(scenario: Scenario, { timings }: Result, setup: PlannedSetup | null): Remedy {
  if (setup === null)
    return { sentence: 'Remedy: no change of cells, walls or box is predicted to meet the tolerance.', change: null };
  const { cellSize, boundary, clearance, box, cells, steps, predicted } = setup;
  const own = scenario.grid;
  const work = setup.work / timings.box.cellUpdates;
  const wall = ownWall(scenario);
  const size = (d: readonly number[]) =>
    d.every((x) => x === d[0]) ? formatQuantity(d[0]!, 'm') : d.map((x) => formatQuantity(x, 'm')).join(' × ');
  const changes = [
    ...(size(cellSize) === size(own.cellSize) ? [] : [`cells of ${size(cellSize)} instead of ${size(own.cellSize)}`]),
    ...(wall?.type === boundary.type && wall.layers === boundary.layers
      ? []
      : [`${boundaryText(boundary)}${wall ? ` instead of ${describeBoundary(scenario)}` : ', on every face'}`]),
    ...(clearance === 0 ? [] : [`walls ${clearance} cells further out`]),
  ];
  if (changes.length === 0)
    return {
      sentence: `Remedy: none is predicted; by prediction this set-up meets the tolerance (${formatPercent(predicted)}).`,
      change: null,
    };
  return {
    sentence: `Remedy: ${changes.join(', ')}; predicted error ${formatPercent(predicted)}, ${formatNumber(work, 2)} times the work.`,
    change: { cellSize, boundary, clearance, box, cells, steps, work, predicted },
  };
}
