import { memoryLimit } from '#platform';
import { boundaryText } from '../compare/boundaryWords.ts';
import type { Reflection } from '../compare/reflection.ts';
import type { Outcome, ReflectionResult } from '../compare/surveyResult.ts';
import { decibels } from '../elementary/elementary.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import { sourceBounds } from '../scenario/distance.ts';
import { FACES, type Scenario } from '../scenario/model.ts';
import { cellsBehind } from '../scenario/walls.ts';
import { type Asked, answer, type Means } from './answers.ts';
import { prepareCase } from './compare.ts';
import { conclude } from './conclude.ts';
import { describeBoundary } from './describe.ts';
import { measureAngles, measureReflection, type WallAngles } from './reflection.ts';

/**
 * One case of a survey: the comparison, and where asked what its walls send back.
 * @param limit bytes that one run may take
 * @throws Refusal for a scenario with problems; WorkerDied
 */
export async function runCase(
  json: unknown,
  means: Means,
  withReflection: boolean,
  limit = memoryLimit(),
): Promise<Outcome> {
  const asked = prepareCase(json, false, limit);
  const { scenario, steps } = asked.question;
  const answers = await answer(asked, means);
  const { result } = conclude({ ...asked, answers, threads: means.gridThreads });
  const measured = withReflection ? await measureReflection(asked, answers.exact.history, means) : null;
  const angles = withReflection ? await measureAngles(asked, means) : [];
  const { cells, bytes } = memoryNeeded(asked.box);
  return {
    norms: result.norms,
    budget: result.budget,
    grid: result.grid,
    timings: result.timings,
    observers: result.observers,
    verdict: result.verdict.sentence,
    notes: result.notes,
    environment: result.environment,
    walls: wallsOf(scenario),
    cost: { cells, cellUpdates: cells * steps, memoryBytes: bytes },
    cellSize: [...scenario.grid.cellSize],
    expectedOrder: Math.min(...scenario.sources.map(({ waveform }) => waveform.expectedOrder.order)),
    reflection: measured && reflectionResult(asked, measured, angles),
  };
}

function wallsOf(scenario: Scenario): Outcome['walls'] {
  const { grid, sources } = scenario;
  const layers = FACES.map((face) => cellsBehind(grid.boundary[face]));
  const bounds = sources.map(sourceBounds);
  const clearance = Math.min(
    ...bounds.flatMap(({ from, to }) =>
      [0, 1, 2].flatMap((a) => [from[a]! - grid.box.from[a]!, grid.box.to[a]! - to[a]!]),
    ),
  );
  return {
    description: describeBoundary(scenario),
    layers,
    thickness: layers.map((n, f) => n * grid.cellSize[f >> 1]!),
    clearance,
  };
}

const dB = (ratio: number): number | null => {
  const value = decibels(ratio);
  return Number.isFinite(value) ? value : null;
};

const levels = (ratios: Float64Array): (number | null)[] => Array.from(ratios, (v) => rounded(dB(v)));

/** Curves are for looking at: a hundredth of a decibel is enough. */
const rounded = (value: number | null): number | null => (value === null ? null : Math.round(value * 100) / 100);

/** Every observer's reflection; of places that stand in for observers, the worst alone. */
function reflectionResult(
  { places, question }: Asked,
  { points, echoesPast, floor }: NonNullable<Awaited<ReturnType<typeof measureReflection>>>,
  angles: readonly WallAngles[],
): ReflectionResult {
  const written = (point: Reflection, p: number, observer: string | null) => ({
    observer,
    peak: dB(point.peak),
    transient: dB(point.transient),
    late: dB(point.late),
    static: dB(point.static),
    echoesPast: echoesPast[p]!,
    time: { t: [...point.time.t], reflected: levels(point.time.reflected), exact: levels(point.time.exact) },
    frequency: { f: [...point.frequency.f], ratio: levels(point.frequency.ratio) },
  });
  const worst = points.reduce((a, point, p) => (point.peak > points[a]!.peak ? p : a), 0);
  return {
    floor: dB(floor),
    observers:
      places.inside.length > 0
        ? points.map((point, p) => written(point, p, places.inside[p]!.name))
        : points.length > 0
          ? [written(points[worst]!, worst, null)]
          : [],
    angles: angles.map(({ wall, faces, frequency, floor: own, angles: theta, reflected }) => ({
      wall: boundaryText(wall),
      faces,
      frequency,
      cellsPerWavelength: (question.cellsPerWavelength * question.highestFrequency) / frequency,
      floor: dB(own),
      angle: theta.map((angle) => (angle * 180) / Math.PI),
      reflected: reflected.map((r) => rounded(dB(r))),
    })),
  };
}
