import { stratify } from '../compare/stratify.ts';
import { formatQuantity } from '../elementary/quantity.ts';
import type { SampleGroup } from '../fdtd/problem.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Observer, Scenario } from '../scenario/model.ts';
import type { Problem } from '../scenario/reading.ts';
import { observerCell } from '../scenario/sites.ts';
import { type Question, sampleInterval } from './question.ts';
import { Refusal } from './refusal.ts';

/** One seed for everything drawn by lot, so that the same scenario gives the same numbers. */
export const SEED = 20_240_229;

/** Points of the budget where the scenario has no observer. */
const BUDGET_POINTS = 48;

/** Where fields are read: budget points at every step, a sample of the volume at every `every`-th. */
export interface Places {
  readonly inside: readonly Observer[];
  readonly outside: readonly Observer[];
  /** cells of the observers inside, or of some volume samples where there is none */
  readonly budgetCells: Int32Array;
  readonly budgetWeights: Float64Array;
  readonly volume: VolumeSample;
  readonly every: number;
  readonly outsideCells: Int32Array;
  readonly groups: readonly SampleGroup[];
}

/**
 * Chooses where fields are read.
 * @throws Refusal for observers on a source
 */
export function placesOf(question: Question): Places {
  const { scenario } = question;
  const { grid, observers, sources } = scenario;
  const inside = observers.filter((o) => o.inside);
  const outside = observers.filter((o) => !o.inside);
  const reach = NEAREST * Math.max(...grid.cellSize);
  refuseObserversOnSources(scenario, reach);
  const volume = clearOfSources(
    stratify(
      { cells: grid.cells, origin: grid.box.from, cellSize: grid.cellSize },
      (position) => distanceToSources(sources, position),
      SEED,
    ),
    reach,
  );
  const every = sampleInterval(question);
  const observed = inside.flatMap(({ at }) => observerCell(grid, at));
  const stand = standIns(volume.distance, grid.mask);
  const budgetCells = Int32Array.from(
    inside.length > 0 ? observed : stand.flatMap((p) => [...volume.cell.subarray(3 * p, 3 * p + 3)]),
  );
  const budgetWeights = Float64Array.from(
    inside.length > 0 ? inside.map(() => 1) : stand.map((p) => volume.weight[p]!),
  );
  const outsideCells = Int32Array.from(
    outside.flatMap(({ at }) => at.map((x, a) => Math.round((x - grid.box.from[a]!) / grid.cellSize[a]!))),
  );
  return {
    inside,
    outside,
    budgetCells,
    budgetWeights,
    volume,
    every,
    outsideCells,
    groups: [
      { cell: budgetCells, every: 1 },
      { cell: volume.cell, every },
    ],
  };
}

/** In cells. Nearer to a source a cell's sites lie among the edges that carry its current, where fields are infinite. */
const NEAREST = 1.5;

function refuseObserversOnSources({ observers, sources, grid }: Scenario, reach: number): void {
  const problems = observers.flatMap(({ name, at, inside }, m): Problem[] => {
    const distance = distanceToSources(sources, at);
    if (!inside || distance >= reach) return [];
    return [
      {
        path: `observers.${m}.at`,
        value: at,
        message:
          `Observer “${name}” is ${formatQuantity(distance, 'm')} from a source; it must be at least ${NEAREST} cells ` +
          `(${formatQuantity(reach, 'm')}) away, since nearer by it reads the very edges that carry the current. ` +
          `Move it off or lower grid.cellSize (now ${formatQuantity(Math.max(...grid.cellSize), 'm')}).`,
      },
    ];
  });
  if (problems.length > 0) throw new Refusal(problems);
}

export type VolumeSample = ReturnType<typeof stratify>;

/** A sample without the cells that lie on the sources. */
function clearOfSources(sample: VolumeSample, reach: number): VolumeSample {
  const kept = [...sample.distance.keys()].filter((p) => sample.distance[p]! >= reach);
  const pick = <T extends Float64Array | Int32Array>(of: T) => of.filter((_, p) => sample.distance[p]! >= reach) as T;
  return {
    ...sample,
    cell: Int32Array.from(kept.flatMap((p) => [...sample.cell.subarray(3 * p, 3 * p + 3)])),
    distance: pick(sample.distance),
    wallDistance: pick(sample.wallDistance),
    weight: pick(sample.weight),
    strata: { ...sample.strata, of: pick(sample.strata.of) },
  };
}

/** Volume samples outside the mask, thinned evenly to `BUDGET_POINTS`. */
function standIns(distance: Float64Array, mask: number): number[] {
  const far = [...distance.keys()].filter((p) => distance[p]! >= mask);
  const stride = Math.max(1, far.length / BUDGET_POINTS);
  return Array.from({ length: Math.min(BUDGET_POINTS, far.length) }, (_, m) => far[Math.floor(m * stride)]!);
}
