import { hostName, memoryLimit, threadsAvailable } from '#platform';
import { bandOf } from '../compare/band.ts';
import { boundaryLevel, budgetAt, budgetOf, type Histories, type Levels } from '../compare/budget.ts';
import { closestDistance } from '../compare/closest.ts';
import { farthestDistance } from '../compare/farthest.ts';
import { FIELDS, FIRST_COMPONENT, type Field, type Level, samplesOf } from '../compare/fields.ts';
import { relativeL1, relativeL2, relativeLinf } from '../compare/norms.ts';
import { observerErrors } from '../compare/observer.ts';
import { pointErrors, pointStatus } from '../compare/pointError.ts';
import { budgetResult, normsResult, type ObserverResult, observerFieldResult, type Result } from '../compare/result.ts';
import { type Spectra, spectraOf } from '../compare/spectrum.ts';
import { stratify } from '../compare/stratify.ts';
import { verdictOf } from '../compare/verdict.ts';
import { wallClearance } from '../compare/wall.ts';
import { decibels } from '../elementary/elementary.ts';
import { formatDecibels, formatQuantity } from '../elementary/quantity.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import type { GridResult } from '../fdtd/run.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { distanceToSources, lastArrival } from '../scenario/distance.ts';
import { loadScenario, type Problem } from '../scenario/load.ts';
import { type Boundary, FACES, type Observer, type Scenario, type Vec3 } from '../scenario/model.ts';
import { observerCell } from '../scenario/sites.ts';
import { COMPONENTS, type FieldHistory, type Instants, instantsOf, type SamplePoints } from '../trace/trace.ts';
import { dispersionErrorAt, farthestModel } from './farthest.ts';
import { type FreeSpacePlan, planFreeSpace } from './freeSpace.ts';
import { gaugeResidual } from './gauge.ts';
import { runGrid } from './gridRun.ts';
import { exactField, griddedField, type IntegralField } from './integrals.ts';
import { Team } from './pool.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import { boxProblem, type Question, questionOf, sampleInterval } from './question.ts';
import { VERSION } from './version.ts';

export interface CompareOptions {
  /** worker threads; all that the machine has by default */
  readonly threads?: number;
  readonly onProgress?: (progress: Progress) => void;
  /** aborting it ends all workers at once and rejects with its reason */
  readonly signal?: AbortSignal;
}

/** A result with the signals behind it. */
export interface Comparison {
  readonly result: Result;
  /** the fields at observers inside the box, one point an observer in their order; null without any */
  readonly signals: Histories | null;
  /** exact fields of observers outside the box */
  readonly outside: FieldHistory;
  readonly observers: readonly Observer[];
  readonly spectra: readonly { readonly observer: string; readonly field: Field; readonly spectra: Spectra }[];
}

/** The scenario was refused: nothing was computed. */
export class Refusal extends Error {
  constructor(readonly problems: readonly Problem[]) {
    super(problems.map(({ path, message }) => (path ? `${path}: ${message}` : message)).join('\n'));
    this.name = 'Refusal';
  }
}

/** What still radiates (1 % of the peak of w′) must have passed a point for its error to be counted. */
const ACTIVE = 0.01;

/** Runs end when no sample moves more than this fraction of its peak any longer. */
const STILL = { single: 1e-6, double: 1e-9 };

/** A factor whose products round differently: the same run driven with it shows what rounding does. */
const ROUNDING_PROBE = 0.7315;

const SEED = 20_240_229;

/** Points of the budget where the scenario has no observer. */
const BUDGET_POINTS = 48;

/**
 * Both solvers on one scenario: the grid in its box, the same grid without walls, the exact field of the gridded currents
 * and of the designed ones, over the same places and instants; and what their differences say.
 * @param input a scenario: the text of its file, or what JSON.parse made of it
 * @throws Refusal naming every problem of the scenario; Error where a worker died; the signal's reason when aborted
 */
export async function compareSolvers(input: unknown, options: CompareOptions = {}): Promise<Comparison> {
  const json = typeof input === 'string' ? parsed(input) : input;
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  options.signal?.throwIfAborted();

  const question = questionOf(loaded.scenario);
  const places = placesOf(question);
  const box = boxProblem(question, places.groups);
  const limit = memoryLimit();
  refuseTooLarge(box, limit);
  const free = planFreeSpace(box, limit);

  const team = new Team(options.threads ?? threadsAvailable());
  let abort = () => {};
  const aborted = new Promise<never>((_, reject) => {
    abort = () => {
      reject(options.signal!.reason);
      void team.end();
    };
  });
  aborted.catch(() => {});
  options.signal?.addEventListener('abort', abort, { once: true });
  try {
    const answers = answer(team, question, json, places, box, free, options.onProgress ?? (() => {}));
    // Once aborted, the workers' own ends are of no interest.
    answers.catch(() => {});
    return conclude(question, json, places, await Promise.race([answers, aborted]), free, box, team.threads);
  } finally {
    options.signal?.removeEventListener('abort', abort);
    await team.end();
  }
}

/** JSON.parse of a text that may be no JSON: the loader tells where, so the text itself goes on to it. */
function parsed(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return text;
  }
}

function refuseTooLarge(box: GridProblem, limit: number): void {
  let bytes: number;
  try {
    bytes = memoryNeeded(box).bytes;
  } catch (error) {
    if (error instanceof RangeError)
      throw new Refusal([{ path: 'grid.cellSize', value: box.cellSize, message: error.message }]);
    throw error;
  }
  if (bytes > limit)
    throw new Refusal([
      {
        path: 'grid.cellSize',
        value: box.cellSize,
        message:
          `The grid needs ${formatQuantity(bytes, 'B')}; this machine has ${formatQuantity(limit, 'B')} to give. ` +
          'Raise grid.cellSize or shrink grid.box.',
      },
    ]);
}

/** Where fields are read: budget points at every step, a sample of the volume at every `every`-th. */
interface Places {
  readonly inside: readonly Observer[];
  readonly outside: readonly Observer[];
  /** cells of the observers inside, or of some volume samples where there is none */
  readonly budgetCells: Int32Array;
  readonly budgetWeights: Float64Array;
  readonly volume: VolumeSample;
  readonly every: number;
  readonly outsideCells: Int32Array;
  readonly groups: readonly { readonly cell: Int32Array; readonly every: number }[];
}

function placesOf(question: Question): Places {
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

type VolumeSample = ReturnType<typeof stratify>;

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

/** What the solvers say: budget points and volume, from each of the runs. */
interface Answers {
  readonly box: GridResult;
  readonly probe: GridResult;
  readonly free: GridResult | null;
  readonly exact: IntegralField;
  readonly computed: IntegralField;
  readonly gridded: IntegralField;
  readonly volumeExact: IntegralField;
  readonly outsideExact: IntegralField;
  readonly seconds: { readonly exact: number; readonly started: number };
}

async function answer(
  team: Team,
  question: Question,
  json: unknown,
  places: Places,
  box: GridProblem,
  free: FreeSpacePlan | null,
  onProgress: (progress: Progress) => void,
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
    ['the grid in its box', updates(box) / GRID_RATE],
    ['the same grid driven with other roundings', updates(box) / GRID_RATE],
    ['the grid without walls', (free?.cellUpdates ?? 0) / GRID_RATE],
    ['the exact field', (2 * cells.budget + cells.volume + cells.outside) / CELL_RATE],
    ['the exact field of the gridded currents', cells.budget / CELL_RATE],
  ]);
  const grid = (stage: number, problem: GridProblem) => {
    meter.enter(stage);
    return runGrid(team, problem, still, (done) => meter.at(done / steps));
  };
  const boxRun = await grid(0, box);
  const probe = await grid(1, driven(box, ROUNDING_PROBE));
  const freeRun = free ? await grid(2, free.problem) : null;

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
  return {
    box: boxRun,
    probe,
    free: freeRun,
    exact,
    computed: byQuadrature ?? exact,
    gridded,
    volumeExact,
    outsideExact,
    seconds: { exact: (performance.now() - started) / 1000, started: performance.now() },
  };
}

/** Cell updates, and cells of exact histories, that a second is guessed to hold: they only weight the progress bar. */
const GRID_RATE = 5e8;
const CELL_RATE = 2e3;

/** The same problem with all currents times a factor. */
function driven(problem: GridProblem, factor: number): GridProblem {
  const { currents } = problem;
  return { ...problem, currents: { ...currents, weight: currents.weight.map((w) => w * factor) } };
}

/** From answers to findings. */
function conclude(
  question: Question,
  json: unknown,
  places: Places,
  answers: Answers,
  plan: FreeSpacePlan | null,
  box: GridProblem,
  threads: number,
): Comparison {
  const { scenario, steps, timeStep } = question;
  const { grid, medium, sources, tolerance } = scenario;
  const concluding = performance.now();
  const history = (points: SamplePoints, instants: Instants, values: Float64Array): FieldHistory => ({
    points,
    instants,
    values,
  });
  const { points, instants } = answers.exact.history;
  const volumePoints = answers.volumeExact.history.points;
  const volumeInstants = answers.volumeExact.history.instants;

  const at = (group: number, run: GridResult) =>
    group === 0 ? history(points, instants, run.samples[0]!) : history(volumePoints, volumeInstants, run.samples[1]!);
  const signals: Histories = {
    grid: at(0, answers.box),
    ...(answers.free ? { free: at(0, answers.free) } : {}),
    gridded: answers.gridded.history,
    computed: answers.computed.history,
    exact: answers.exact.history,
  };
  const volume = {
    grid: at(1, answers.box),
    free: answers.free ? at(1, answers.free) : null,
    exact: answers.volumeExact.history,
  };
  const none: Level = () => 0;
  const truncation =
    (exact: FieldHistory): Level =>
    (field, p) =>
      (plan?.floor ?? 0) * rootMeanSquare(exact, field, p);
  const levels: Levels = {
    rounding: probeLevel(answers, 0, points, instants),
    truncation: truncation(signals.exact),
    gridded: boundLevel(answers.gridded),
    computed: boundLevel(answers.computed),
    exact: boundLevel(answers.exact),
  };
  const volumeLevels: Levels = {
    rounding: probeLevel(answers, 1, volumePoints, volumeInstants),
    truncation: truncation(volume.exact),
    gridded: none,
    computed: none,
    exact: boundLevel(answers.volumeExact),
  };

  const cellCentre = (cells: Int32Array, p: number): Vec3 =>
    [0, 1, 2].map((a) => grid.box.from[a]! + (cells[3 * p + a]! + 0.5) * grid.cellSize[a]!) as unknown as Vec3;
  const arrivals = Float64Array.from({ length: volumePoints.count }, (_, p) =>
    lastArrival(sources, medium, cellCentre(places.volume.cell, p), ACTIVE),
  );
  const outer = { distance: places.volume.distance, weight: places.volume.weight };
  const model = farthestModel(question);
  const perField = <T>(find: (field: Field) => T): Record<Field, T> => ({ E: find('E'), H: find('H') });
  const errors = (a: FieldHistory, field: Field) =>
    pointErrors(a, volume.exact, volume.exact, field, arrivals, volumeLevels).error;
  const closest = perField((field) =>
    closestDistance({ ...outer, error: errors(volume.free ?? volume.grid, field) }, tolerance, SEED),
  );
  const farthest = perField((field) => farthestDistance(closest[field].bins, tolerance, model));
  const wall = perField((field) => {
    const near = closest[field];
    return wallClearance(
      { distance: places.volume.wallDistance, error: errors(volume.grid, field), weight: places.volume.weight },
      places.volume.distance,
      'distance' in near ? near.distance : 0,
      tolerance,
    );
  });

  const budget = budgetOf(signals, levels, 'E', places.budgetWeights);
  const budgetPoints = Array.from({ length: points.count }, (_, p) => p);
  const level = boundaryLevel(signals, levels, 'E', budgetPoints);
  const integralError = Math.max(0, ...budgetPoints.map((p) => relativeBound(answers.exact, 'E', p)));

  const inside = places.inside.map((observer, p) => {
    const cell = places.budgetCells.subarray(3 * p, 3 * p + 3);
    const arrival = lastArrival(sources, medium, cellCentre(places.budgetCells, p), ACTIVE);
    const perObserver = (field: Field) => {
      const band = bandOf(
        signals.grid,
        signals.exact,
        field,
        p,
        levels.rounding(field, p) + levels.exact(field, p),
        tolerance,
      );
      const found = observerErrors(signals.grid, signals.exact, field, p, arrival);
      return observerFieldResult(found, pointStatus(signals.exact, field, p, arrival, levels), band);
    };
    const site = (c: number) => [...points.position.subarray((p * 6 + c) * 3, (p * 6 + c) * 3 + 3)] as unknown as Vec3;
    const result: ObserverResult = {
      name: observer.name,
      at: observer.at,
      snapped: [0, 1, 2].map((a) => grid.box.from[a]! + cell[a]! * grid.cellSize[a]!) as unknown as Vec3,
      sites: Object.fromEntries(COMPONENTS.map((name, c) => [name, site(c)])) as ObserverResult['sites'],
      inside: true,
      distance: distanceToSources(sources, cellCentre(places.budgetCells, p)),
      E: perObserver('E'),
      H: perObserver('H'),
      budget: budgetResult(budgetAt(signals, levels, 'E', p)),
      extrapolated: null,
    };
    return result;
  });
  const outside = places.outside.map((observer, p): ObserverResult => {
    const distance = distanceToSources(sources, observer.at);
    const error = dispersionErrorAt(question, directionTo(observer.at, grid.box), distance);
    return {
      name: observer.name,
      at: observer.at,
      snapped: [0, 1, 2].map(
        (a) => grid.box.from[a]! + places.outsideCells[3 * p + a]! * grid.cellSize[a]!,
      ) as unknown as Vec3,
      sites: null,
      inside: false,
      distance,
      E: null,
      H: null,
      budget: null,
      extrapolated: {
        exactPeakE: peakOf(answers.outsideExact.history, 'E', p),
        exactPeakH: peakOf(answers.outsideExact.history, 'H', p),
        error: Number.isNaN(error) ? null : error,
      },
    };
  });

  const verdict = verdictOf({
    tolerance,
    closest,
    farthest,
    wall,
    bands: inside.map(({ name, distance, E, H }) => ({ observer: name, distance, E: E!.band, H: H!.band })),
    budget,
    boundary: describeBoundary(scenario),
    boundaryLevel: level,
    integralError,
  });

  const beyondMask = places.volume.distance.map((d, p) => (d >= grid.mask ? places.volume.weight[p]! : 0));
  const masked = beyondMask.filter((w) => w === 0).length;
  const norms = (field: Field) =>
    normsResult(
      relativeL1(volume.grid, volume.exact, field, beyondMask),
      relativeL2(volume.grid, volume.exact, field, beyondMask, places.volume.strata),
      relativeLinf(volume.grid, volume.exact, field, beyondMask),
      masked,
    );

  const memory = Math.max(memoryNeeded(box).bytes, plan?.memoryBytes ?? 0);
  const timing = ({ seconds, cellUpdates }: GridResult) => ({ seconds, cellUpdates });
  const result: Result = {
    title: scenario.title,
    version: VERSION,
    tolerance,
    norms: perField(norms),
    budget: budgetResult(budget),
    observers: scenario.observers.map(({ name }) => [...inside, ...outside].find((o) => o.name === name)!),
    verdict: { ...verdict },
    integral: {
      errorEstimate: integralError,
      gaugeResidual: gaugeResidual(
        sources,
        medium,
        inside.length > 0
          ? inside.map((o) => o.snapped)
          : budgetPoints.slice(0, 3).map((p) => cellCentre(places.budgetCells, p)),
        steps * timeStep,
      ),
    },
    grid: {
      cells: grid.cells[0] * grid.cells[1] * grid.cells[2],
      shape: grid.cells,
      steps,
      timeStep,
      memoryBytes: memory,
    },
    timings: {
      box: timing(answers.box),
      rounding: timing(answers.probe),
      free: answers.free ? timing(answers.free) : null,
      exact: {
        seconds: answers.seconds.exact,
        evaluations: [
          answers.exact,
          answers.computed,
          answers.gridded,
          answers.volumeExact,
          answers.outsideExact,
        ].reduce((sum, { evaluations }) => sum + evaluations, 0),
      },
      comparison: { seconds: (performance.now() - concluding) / 1000 },
    },
    environment: { host: hostName(), threads, precision: grid.precision },
    notes: [...scenario.notes, ...notesOf(question, places, plan, answers)],
    scenario: json,
  };
  const spectra = places.inside.flatMap(({ name }, p) =>
    FIELDS.map((field) => ({ observer: name, field, spectra: spectraOf(signals.grid, signals.exact, field, p) })),
  );
  return {
    result,
    signals: places.inside.length > 0 ? signals : null,
    outside: answers.outsideExact.history,
    observers: [...places.inside, ...places.outside],
    spectra,
  };
}

/** Rounding of a grid run: its difference to the run of other roundings, scaled back; root mean square of the vector. */
function probeLevel(answers: Answers, group: number, points: SamplePoints, instants: Instants): Level {
  const [a, b] = [answers.box.samples[group]!, answers.probe.samples[group]!];
  const difference: FieldHistory = { points, instants, values: a.map((v, i) => v - b[i]! / ROUNDING_PROBE) };
  return (field, p) => rootMeanSquare(difference, field, p);
}

/** The bound of an integral's error as the amplitude of a vector. */
function boundLevel({ errorBound }: IntegralField): Level {
  return (field, p) => {
    const first = p * 6 + FIRST_COMPONENT[field];
    return Math.sqrt(errorBound.subarray(first, first + 3).reduce((sum, b) => sum + b * b, 0));
  };
}

function rootMeanSquare(history: FieldHistory, field: Field, point: number): number {
  let sum = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++)
    for (const v of samplesOf(history, point, c)) sum += v * v;
  return Math.sqrt(sum / history.instants.count);
}

/** The bound of the exact field's error at a point, relative to its root mean square. */
function relativeBound(exact: IntegralField, field: Field, point: number): number {
  const amplitude = rootMeanSquare(exact.history, field, point);
  return amplitude > 0 ? boundLevel(exact)(field, point) / amplitude : 0;
}

function peakOf(history: FieldHistory, field: Field, point: number): number {
  let peak = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++)
    for (const v of samplesOf(history, point, c)) peak = Math.max(peak, Math.abs(v));
  return peak;
}

function directionTo(p: Vec3, box: Scenario['grid']['box']): Vec3 {
  const d = [0, 1, 2].map((a) => p[a]! - (box.from[a]! + box.to[a]!) / 2);
  const length = Math.sqrt(d.reduce((sum, x) => sum + x * x, 0));
  return d.map((x) => x / length) as unknown as Vec3;
}

function describeWall(boundary: Boundary): string {
  switch (boundary.type) {
    case 'pec':
      return 'perfect conductor';
    case 'mur1':
      return 'Mur 1';
    case 'cpml':
      return `CPML, ${boundary.layers} layers`;
  }
}

/** The walls in a few words: "CPML, 10 layers", or face by face where they differ. */
function describeBoundary({ grid }: Scenario): string {
  const walls = FACES.map((face) => describeWall(grid.boundary[face]));
  if (walls.every((wall) => wall === walls[0])) return walls[0]!;
  return FACES.map((face, f) => `${face} ${walls[f]}`).join('; ');
}

function notesOf(question: Question, places: Places, plan: FreeSpacePlan | null, answers: Answers): string[] {
  const notes: string[] = [];
  const { scenario, steps } = question;
  if (plan)
    notes.push(
      `Free space is ${plan.description}; what it leaves of reflections is below ${formatDecibels(decibels(plan.floor))} of the exact field.`,
    );
  else notes.push('The free-space run does not fit into memory: boundary and lattice are known by their sum alone.');
  const stopped = answers.free?.outcome === 'still' ? answers.free.stepsMarched : null;
  if (stopped !== null)
    notes.push(`The grid without walls was still after ${stopped} of ${steps} steps; its last values were held.`);
  if (places.inside.length === 0)
    notes.push(
      `There is no observer inside the box: the budget is pooled over ${places.budgetCells.length / 3} samples of the volume.`,
    );
  const thin = places.volume.underfilled.filter(({ of }) => of === 'distance to the source');
  if (thin.length > 0)
    notes.push(
      `Distances ${thin.map(({ from, to }) => `${formatQuantity(from, 'm')} to ${formatQuantity(to, 'm')}`).join(', ')} hold too few cells to be judged.`,
    );
  const rough = scenario.sources.filter(({ waveform }) => waveform.expectedOrder.order < 2);
  for (const { name, waveform } of rough)
    notes.push(
      `${name}: ${waveform.expectedOrder.reason}; expect order ${waveform.expectedOrder.order} of the grid, not 2.`,
    );
  return notes;
}
