import { type Reflection, reflectionAt } from '../compare/reflection.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import { lastArrival } from '../scenario/distance.ts';
import type { Boundary, Face, Vec3 } from '../scenario/model.ts';
import { type FieldHistory, samplePoints } from '../trace/trace.ts';
import type { Asked, Means } from './answers.ts';
import { ACTIVE } from './conclude.ts';
import { type FreeSpacePlan, planReflectionFree } from './freeSpace.ts';
import { runGrid } from './gridRun.ts';
import { type AngleMeasurement, angleReflections, distinctWalls, guideFor } from './guide.ts';
import { boxProblem } from './question.ts';

/** What the walls send back at the points of the budget, in double precision whatever the scenario's own is. */
export interface WallMeasurement {
  /** of every point, in their order */
  readonly points: readonly Reflection[];
  readonly echoesPast: readonly number[];
  /** a share of the exact peak */
  readonly floor: number;
}

/** The pair of runs that a reflection is the difference of. */
export interface ReflectionRuns {
  readonly box: GridProblem;
  readonly free: FreeSpacePlan;
}

/** Both runs in double precision; null where the one without walls does not fit. */
export function planReflection(
  { question, memoryLimit }: Pick<Asked, 'question' | 'memoryLimit'>,
  cells: Int32Array,
): ReflectionRuns | null {
  const { scenario } = question;
  const double = { ...question, scenario: { ...scenario, grid: { ...scenario.grid, precision: 'double' as const } } };
  const box = boxProblem(double, [{ cell: cells, every: 1 }]);
  const free = planReflectionFree(box, memoryLimit);
  return free && { box, free };
}

/** Nothing moves any more by this share of its peak: below every floor. */
const STILL = 1e-10;

/**
 * Runs the pair and tells what came back.
 * @param exact the exact field at the budget's points
 */
export async function measureReflection(
  asked: Asked,
  exact: FieldHistory,
  { team, gridThreads, share = (_, make) => make() }: Means,
): Promise<WallMeasurement | null> {
  const { question, places } = asked;
  const { sources, medium, grid } = question.scenario;
  const runs = planReflection(asked, places.budgetCells);
  if (!runs) return null;
  const march = (problem: GridProblem) => runGrid(team, problem, STILL, () => {}, gridThreads);
  const box = await march(runs.box);
  const free = await share('reflectionFree', () => march(runs.free.problem));
  const history = (values: Float64Array): FieldHistory => ({ ...exact, values });
  const { position } = samplePoints(places.budgetCells, grid.box.from, grid.cellSize);
  const echoesPast = Array.from({ length: exact.points.count }, (_, p) => {
    const place: Vec3 = [position[18 * p]!, position[18 * p + 1]!, position[18 * p + 2]!];
    // A wall's echo of a point's field is what arrives at the point's mirror image.
    const images = [0, 1, 2].flatMap((a) =>
      [grid.box.from[a]!, grid.box.to[a]!].map(
        (wall) => place.map((x, b) => (b === a ? 2 * wall - x : x)) as unknown as Vec3,
      ),
    );
    return Math.max(...images.map((image) => lastArrival(sources, medium, image, ACTIVE)));
  });
  return {
    points: echoesPast.map((past, p) =>
      reflectionAt(history(box.samples[0]!), history(free.samples[0]!), exact, 'E', p, runs.free.floor, past),
    ),
    echoesPast,
    floor: runs.free.floor,
  };
}

/** What each of the scenario's distinct walls sends back of plane waves, by their angle. */
export async function measureAngles(
  { question }: Asked,
  { team, gridThreads, share = (_, make) => make() }: Means,
): Promise<WallAngles[]> {
  const march = async (problem: GridProblem) => (await runGrid(team, problem, null, () => {}, gridThreads)).samples[0]!;
  const walls = distinctWalls(question.scenario);
  const guides = walls.map(({ wall, axis }) => guideFor(question, wall, axis));
  // Cubic cells make one guide without an end for all walls of all cases.
  const [dx, dy, dz] = question.scenario.grid.cellSize;
  const common = dx === dy && dy === dz ? await share('guide', () => march(guides[0]!.endless)) : null;
  const found: WallAngles[] = [];
  for (const [n, { wall, faces }] of walls.entries()) {
    const guide = guides[n]!;
    const endless = common ?? (await march(guide.endless));
    found.push({
      wall,
      faces,
      frequency: guide.frequency,
      ...angleReflections(guide, await march(guide.withWall), endless),
    });
  }
  return found;
}

export interface WallAngles extends AngleMeasurement {
  readonly wall: Boundary;
  readonly faces: readonly Face[];
  /** Hz */
  readonly frequency: number;
}
