import type { Pattern, PatternLine } from '../compare/quantities.ts';
import { type BoxSurface, type SurfaceLine, surfaceLine, surfaceOf } from '../derived/nearToFar.ts';
import { energySpectrum } from '../derived/radiation.ts';
import { AXES, evenDirections, overSphere } from '../derived/sphere.ts';
import { farPhasorOf, squareOf } from '../retarded/farPhasor.ts';
import type { Complex } from '../retarded/waveformSpectrum.ts';
import { lastArrival, sourceBounds } from '../scenario/distance.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { type FieldHistory, instantsOf } from '../trace/trace.ts';
import { runGrid } from './gridRun.ts';
import { exactField } from './integrals.ts';
import type { Team } from './pool.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import { boxProblem, type Question, sampleInterval } from './question.ts';

/** Cells between the surface and the walls of the box. */
const DEPTH = 2;

/** Cells at least between a source and the surface: nearer, its field is no smooth function on a face. */
const CLEAR = 3;

/** Samples held at a time, B: twice, for the grid's and for the exact ones. */
const BUDGET = 64e6;

/** Cells along an edge of the surface: as many as the budget allows, within these. */
const STATIONS = { least: 8, most: 24 };

/** Lines: the highest frequency at which |ωW| is −20 dB of its peak, and shares of it. */
const LEVEL = 0.1;
const SHARES = [0.25, 0.5, 1];

/** Directions in which patterns are looked at, beside the axes. */
const DIRECTIONS = 200;

/** Half of the largest intensity. */
const LOBE = Math.SQRT1_2;

/** Relative error of the energy over directions. */
const SPHERE_ACCURACY = 1e-4;

/** What still radiates must have passed the surface: 1 % of the peak of w′. */
const ACTIVE = 0.01;

/** The runs end when no sample moves more than this fraction of its peak any longer. */
const STILL = 1e-6;

/**
 * Error of the grid's far field by direction: near-to-far transform of its fields on a box just inside the walls, and of
 * the exact ones on the very same, so that the transform's own error is both told and, to first order, cancelled.
 * @throws RangeError naming what stands in the way: a source too near to the surface, a window that ends too early
 */
export async function patternOf(
  team: Team,
  question: Question,
  json: unknown,
  gridThreads: number,
  onProgress: (progress: Progress) => void,
): Promise<Pattern> {
  const { scenario, steps, timeStep } = question;
  const { grid, sources } = scenario;
  refuse(question);
  const every = sampleInterval(question);
  const instants = instantsOf(steps, timeStep, every);
  const stations = Math.floor(Math.sqrt(BUDGET / (12 * 6 * 8 * instants.count)));
  if (stations < STATIONS.least)
    throw new RangeError(
      `the far field needs ${instants.count} instants of ${12 * STATIONS.least * STATIONS.least} cells, more than ` +
        `${BUDGET / 1e6} MB. Shorten duration.`,
    );
  const surface = surfaceOf(grid.cells, grid.cellSize, DEPTH, Math.min(STATIONS.most, stations));
  const cells = surface.cells.length / 3;
  const meter = new ProgressMeter(onProgress, [
    ['the grid once more, read on a surface', 1],
    ['the exact field on the surface', 4],
    ['far fields', 1],
  ]);
  meter.enter(0);
  const problem = boxProblem(question, [{ cell: surface.cells, every }]);
  const run = await runGrid(team, problem, STILL, (done) => meter.at(done / steps), gridThreads);
  meter.enter(1);
  let done = 0;
  const { history: exact } = await exactField(team, scenario, json, surface.cells, instants, 'best', (n) => {
    done += n;
    meter.at(done / cells);
  });
  meter.enter(2);
  const fields = { grid: { ...exact, values: run.samples[0]! }, exact };
  const top = Math.max(...sources.map(({ waveform }) => waveform.highestFrequency(LEVEL)));
  const lines = SHARES.map((share, n) => {
    meter.at(n / SHARES.length);
    return patternLine(scenario, surface, fields, share * top);
  });
  return { depth: DEPTH, samples: cells, lines };
}

/** @throws RangeError */
function refuse({ scenario, steps, timeStep }: Question): void {
  const { grid, sources, medium } = scenario;
  for (const source of sources) {
    const { from, to } = sourceBounds(source);
    for (const a of [0, 1, 2] as const) {
      const h = grid.cellSize[a];
      const gap = Math.min(from[a] - grid.box.from[a], grid.box.to[a] - to[a]) / h - DEPTH;
      if (gap < CLEAR)
        throw new RangeError(
          `source “${source.name}” is ${gap + DEPTH} cells from a wall along ${'xyz'[a]}; a far field needs ` +
            `${DEPTH + CLEAR}, a surface between the two. Enlarge grid.box.`,
        );
    }
  }
  const { from, to } = grid.box;
  const corners = [0, 1, 2, 3, 4, 5, 6, 7].map(
    (n) => [0, 1, 2].map((a) => ((n >> a) & 1 ? from : to)[a]!) as unknown as Vec3,
  );
  const last = Math.max(...corners.map((corner) => lastArrival(sources, medium, corner, ACTIVE)));
  if (last > steps * timeStep)
    throw new RangeError(
      `duration is ${steps * timeStep} s; a far field needs ${last} s, when the pulse has left the box. Raise duration.`,
    );
}

function patternLine(
  { sources, medium }: Scenario,
  surface: BoxSurface,
  fields: { readonly grid: FieldHistory; readonly exact: FieldHistory },
  frequency: number,
): PatternLine {
  const known = farPhasorOf(sources, medium, 'pulse');
  const [grid, exact] = [fields.grid, fields.exact].map((field) => surfaceLine(surface, field, medium, frequency)) as [
    SurfaceLine,
    SurfaceLine,
  ];
  const look = (direction: Vec3) => {
    const truth = known(direction, frequency);
    const transformed = exact.far(direction);
    return {
      direction,
      size: Math.sqrt(squareOf(truth)),
      // The transform's own error is in both, and cancels to first order.
      error: distance(grid.far(direction), transformed),
      own: distance(transformed, truth.values),
    };
  };
  const axes = AXES.map(look);
  const all = [...axes, ...evenDirections(DIRECTIONS).map(look)];
  const largest = Math.max(...all.map(({ size }) => size));
  const lobe = all
    .filter(({ size }) => size >= LOBE * largest)
    .reduce((worst, next) => (next.error / next.size > worst.error / worst.size ? next : worst));
  const gridFar = overSphere((n) => square(grid.far(n)), 0, SPHERE_ACCURACY);
  return {
    frequency,
    mainLobe: lobe.error / lobe.size,
    mainLobeDirection: lobe.direction,
    axes: axes.map(({ error }, m) => ({ direction: AXIS_NAMES[m]!, error: error / largest })),
    ownError: Math.max(...all.map(({ own }) => own)) / largest,
    energy: {
      exact: energySpectrum(sources, medium)(frequency).value,
      exactThroughSurface: exact.outflow,
      gridThroughSurface: grid.outflow,
      gridFar: (2 * gridFar.value) / medium.impedance,
    },
  };
}

const AXIS_NAMES = ['x', '−x', 'y', '−y', 'z', '−z'];

const square = (v: readonly Complex[]): number => v.reduce((sum, [re, im]) => sum + re * re + im * im, 0);

const distance = (a: readonly Complex[], b: readonly Complex[]): number =>
  Math.sqrt(a.reduce((sum, [re, im], c) => sum + (re - b[c]![0]) ** 2 + (im - b[c]![1]) ** 2, 0));
