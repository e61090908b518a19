import { memoryLimit, threadsAvailable } from '#platform';
import { boundaryText } from '../compare/boundaryWords.ts';
import type { Plan, PlannedSetup } from '../compare/planResult.ts';
import { formatPercent, formatQuantity } from '../elementary/quantity.ts';
import type { EdgeCurrents } from '../gridding/edges.ts';
import { type Bounds, sourceBounds } from '../scenario/distance.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { observerCell } from '../scenario/sites.ts';
import { instantsOf } from '../trace/trace.ts';
import { withTeam } from './compare.ts';
import { type Given, given } from './given.ts';
import { goalPlaces } from './goal.ts';
import { runGrid } from './gridRun.ts';
import { exactField } from './integrals.ts';
import { type Found, type Frame, type Goal, WALLS } from './planSearch.ts';
import type { Team } from './pool.ts';
import { errorsAt } from './predict.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import { boxProblem, questionOf } from './question.ts';
import { VERSION } from './version.ts';

export interface PlanOptions {
  /** a fraction; the scenario's own by default */
  readonly tolerance?: number;
  /** name of the observer where it must hold; all of them by default */
  readonly at?: string;
  /** m: it must hold at this distance from the sources instead, in every direction that radiates */
  readonly distance?: number;
  /** Hz: it must hold in every sixth-octave band up to here, instead of for the whole signal */
  readonly band?: number;
  /** cell updates a second of another solver, to tell its time */
  readonly ownRate?: number;
  /** false: the plan is not checked by a run */
  readonly check?: boolean;
  readonly threads?: number;
  readonly onProgress?: (progress: Progress) => void;
  readonly signal?: AbortSignal;
}

/** Cells of clearance that are tried; nearer, absorbers of few layers send back more than is predicted. */
const CLEARANCES = [4, 6, 8, 12, 16, 24, 32, 48, 64];

/** A run that takes longer is left to the user, s. */
const LONGEST_CHECK = 30;

/** Below this tolerance single precision's own rounding, −67 dB at worst, would be felt. */
const SINGLE_SERVES = 2e-3;

/**
 * The cheapest cell size, boundary and clearance whose predicted error of E meets a tolerance, found without a run and
 * checked by one where it is short.
 * @param input a scenario; of its grid only the proportions of the cells, `courant`, `gridding` and `precision` count
 * @throws Refusal naming every problem; WorkerDied; the signal's reason when aborted
 */
export async function planScenario(input: unknown, options: PlanOptions = {}): Promise<Plan> {
  const asked = given(input);
  const prepared = prepareGoal(asked, options);
  const { goal, base, frame } = prepared;
  const threads = options.threads ?? threadsAvailable();
  const meter = new ProgressMeter(options.onProgress ?? (() => {}), [
    ['set-ups predicted', 2],
    ['the speed of this machine', 0.2],
    ['the plan tried out', 1],
  ]);
  return withTeam(threads, options.signal, async (team) => {
    meter.enter(0);
    const started = performance.now();
    const found = await team.run('searchPlan', [base, goal, frame]);
    const searchSeconds = (performance.now() - started) / 1000;
    meter.enter(1);
    const plan = planOf(asked, prepared, found, {
      cellsPerSecond: await cellRate(team, asked.scenario),
      ownRate: options.ownRate,
      searchSeconds,
    });
    const { seconds, fits } = plan.machine;
    meter.enter(2);
    if (options.check !== false && plan.met && fits && seconds! <= LONGEST_CHECK)
      return checked(plan, await measured(team, given(plan.scenario), goal, (done) => meter.at(done)));
    return plan.met ? { ...plan, notes: [...plan.notes, uncheckedNote(options, fits, seconds!)] } : plan;
  });
}

/** What a search found as a plan that no run has checked. */
export function planOf(
  asked: Given,
  { goal, precision, notes }: PreparedGoal,
  found: Found,
  speed: {
    readonly cellsPerSecond: number;
    readonly ownRate?: number | undefined;
    readonly searchSeconds: number;
  },
): Plan {
  const { chosen } = found;
  const { cellsPerSecond, ownRate, searchSeconds } = speed;
  const planned = chosen && plannedScenario(asked, goal, chosen, precision);
  const loaded = planned && loadScenario(planned);
  return {
    title: asked.scenario.title,
    version: VERSION,
    tolerance: goal.tolerance,
    band: goal.band,
    met: found.met,
    chosen,
    places: found.places,
    alternatives: found.alternatives,
    curve: found.curve,
    machine: {
      cellsPerSecond,
      seconds: chosen && chosen.work / cellsPerSecond,
      fits: chosen !== null && loaded !== null && 'scenario' in loaded && chosen.memoryBytes <= memoryLimit(),
    },
    own: ownRate && chosen ? { cellsPerSecond: ownRate, seconds: chosen.work / ownRate } : null,
    check: null,
    searchSeconds,
    sentence: sentenceOf(found, goal.tolerance, null),
    notes: [...notes, ...found.notes],
    scenario: planned,
  };
}

/** A plan with what a run of it showed. */
function checked(
  plan: Plan,
  { errors, seconds }: { readonly errors: readonly number[]; readonly seconds: number },
): Plan {
  const worst = Math.max(...errors);
  return {
    ...plan,
    places: plan.places.map((place, p) => ({ ...place, measured: errors[p]! })),
    check: { measured: worst, ratio: plan.chosen!.predicted / worst, seconds },
    sentence: sentenceOf(plan, plan.tolerance, worst),
  };
}

/** What a search is given. */
export interface PreparedGoal {
  readonly goal: Goal;
  /** the scenario file with the precision that is planned */
  readonly base: Given['json'];
  readonly frame: Frame;
  readonly precision: Scenario['grid']['precision'];
  readonly notes: readonly string[];
}

/** What is to be met, where, and what may be chosen for it. @throws Refusal where there is no such place */
export function prepareGoal(
  { json, scenario }: Given,
  options: Pick<PlanOptions, 'tolerance' | 'at' | 'distance' | 'band'>,
): PreparedGoal {
  const tolerance = options.tolerance ?? scenario.tolerance;
  const { places, notes: leftOut } = goalPlaces(scenario, options.at, options.distance);
  const goal: Goal = { tolerance, places, band: options.band ?? null };
  const precision = tolerance < SINGLE_SERVES ? 'double' : scenario.grid.precision;
  const notes = [...leftOut];
  if (precision !== scenario.grid.precision)
    notes.push(`Double precision is planned: single precision rounds at up to ${formatPercent(SINGLE_SERVES / 4)}.`);
  return {
    goal,
    base: { ...json, grid: { ...json.grid, precision } },
    frame: frameOf(scenario, places),
    precision,
    notes,
  };
}

/** The box holds sources and places; the first source's lower corner is a node, so that a source on grid lines stays on them. */
function frameOf({ sources }: Scenario, places: Goal['places']): Frame {
  const bounds = sources.map(sourceBounds);
  const all = [...bounds, ...places.map(({ at }): Bounds => ({ from: at, to: at }))];
  const along = (of: (a: 0 | 1 | 2) => number): Vec3 => [of(0), of(1), of(2)];
  return {
    holds: {
      from: along((a) => Math.min(...all.map(({ from }) => from[a]))),
      to: along((a) => Math.max(...all.map(({ to }) => to[a]))),
    },
    anchor: bounds[0]!.from,
    clearances: CLEARANCES,
    walls: WALLS,
    keepsCells: false,
  };
}

// ------------------------------------------------------------------------------------------------- the planned scenario

/** The scenario file with the planned grid; planes outside its box are left out, places that are no observers put in. */
function plannedScenario(
  { json, scenario }: Given,
  { tolerance, places }: Goal,
  setup: PlannedSetup,
  precision: string,
) {
  const { cellSize, box, boundary } = setup;
  const cube = cellSize.every((d) => d === cellSize[0]);
  const planes = (json.planes as unknown[] | undefined)?.filter((_, m) => {
    const { normal, at } = scenario.planes[m]!;
    return at >= box.from[normal] && at <= box.to[normal];
  });
  const known = new Set(scenario.observers.map(({ name }) => name));
  const added = places.filter(({ name }) => !known.has(name));
  const observers = [...((json.observers as unknown[] | undefined) ?? []), ...added];
  return {
    ...json,
    grid: { ...json.grid, cellSize: cube ? cellSize[0] : cellSize, box, boundary, precision },
    observers,
    ...(planes ? { planes } : {}),
    tolerance,
  };
}

/** Errors of E that a run of the planned scenario shows at the goal's places. */
async function measured(
  team: Team,
  { json, scenario }: Given,
  { places, band }: Goal,
  onProgress: (fraction: number) => void,
): Promise<{ errors: number[]; seconds: number }> {
  const question = questionOf(scenario);
  const cells = Int32Array.from(places.flatMap(({ at }) => observerCell(scenario.grid, at)));
  const problem = boxProblem(question, [{ cell: cells, every: 1 }]);
  const run = await runGrid(team, problem, null, (steps) => onProgress(steps / question.steps));
  const instants = instantsOf(question.steps, question.timeStep);
  const { history } = await exactField(team, scenario, json, cells, instants, 'best', () => {});
  const grid = { ...history, values: run.samples[0]! };
  return { errors: places.map((_, p) => Math.max(...errorsAt(grid, history, p, band))), seconds: run.seconds };
}

/** A block of cells marched to see how fast this machine is. */
const TRIAL_CELLS = 72;
const TRIAL_STEPS = 40;

/** Cell updates a second. */
export async function cellRate(team: Team, scenario: Scenario): Promise<number> {
  const none: EdgeCurrents = {
    count: 0,
    axis: new Uint8Array(0),
    node: new Int32Array(0),
    pairStart: new Int32Array(1),
    weight: new Float64Array(0),
    delay: new Float64Array(0),
    waveform: new Uint16Array(0),
    waveforms: [],
  };
  const problem = {
    ...boxProblem(questionOf(scenario), [{ cell: Int32Array.of(1, 1, 1), every: TRIAL_STEPS }]),
    boxCells: [TRIAL_CELLS, TRIAL_CELLS, TRIAL_CELLS] as const,
    steps: TRIAL_STEPS,
    currents: none,
  };
  const { cellUpdates, seconds } = await runGrid(team, problem, null, () => {});
  return cellUpdates / seconds;
}

// --------------------------------------------------------------------------------------------------------------- words

function sentenceOf(
  { met, chosen, places }: Pick<Found, 'met' | 'chosen' | 'places'>,
  tolerance: number,
  measuredError: number | null,
): string {
  const within = `Within ${formatPercent(tolerance, 3)}:`;
  if (chosen === null) return `${within} no set-up was found.`;
  const { cellSize, boundary, clearance, predicted } = chosen;
  const size = cellSize.every((d) => d === cellSize[0])
    ? formatQuantity(cellSize[0], 'm')
    : cellSize.map((d) => formatQuantity(d, 'm')).join(' × ');
  const setup = `cells of ${size}, ${boundaryText(boundary)}, ${clearance} cells of clearance`;
  const worst = places.reduce((a, b) => (b.total > a.total ? b : a));
  const error = `predicted ${formatPercent(predicted)} at ${worst.name}`;
  if (!met) return `${within} no set-up is predicted to meet it; best ${setup}: ${error}.`;
  return `${within} ${setup}; ${error}${measuredError === null ? '' : `, measured ${formatPercent(measuredError)}`}.`;
}

function uncheckedNote({ check }: PlanOptions, fits: boolean, seconds: number): string {
  if (check === false) return 'Not checked by a run, as was asked.';
  if (!fits) return 'Not checked by a run: it does not fit on this machine.';
  return `Not checked by a run: it would take ${formatQuantity(seconds, 's')}; \`compare\` the planned scenario to do so.`;
}
