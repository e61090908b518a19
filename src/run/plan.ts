import { memoryLimit, threadsAvailable } from '#platform';
import { boundaryText, type Plan, type PlannedSetup } from '../compare/planResult.ts';
import { formatPercent, formatQuantity } from '../elementary/quantity.ts';
import type { EdgeCurrents } from '../gridding/edges.ts';
import { type Bounds, distanceToSources, sourceBounds } from '../scenario/distance.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { observerCell } from '../scenario/sites.ts';
import { instantsOf } from '../trace/trace.ts';
import { withTeam } from './compare.ts';
import { type Given, given } from './given.ts';
import { runGrid } from './gridRun.ts';
import { exactField } from './integrals.ts';
import { type Found, type Frame, type Goal, WALLS } from './planSearch.ts';
import type { Team } from './pool.ts';
import { errorsAt, strengths } from './predict.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import { boxProblem, questionOf } from './question.ts';
import { Refusal } from './refusal.ts';
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

/** Cells of clearance that are tried. */
const CLEARANCES = [2, 3, 4, 6, 8, 12, 16, 24, 32, 48, 64];

/** A run that takes longer is left to the user, s. */
const LONGEST_CHECK = 30;

/** Below this tolerance single precision's own rounding, −67 dB at worst, would be felt. */
const SINGLE_SERVES = 2e-3;

/**
 * The cheapest cell size, boundary and clearance whose predicted error of E meets a tolerance, found without a run and
 * checked by one where it is short.
 * @param input a scenario; of its grid only the proportions of the cells, `courant`, `gridding` and `precision` count
 * @throws Refusal naming every problem; Error where a worker died; the signal's reason when aborted
 */
export async function planScenario(input: unknown, options: PlanOptions = {}): Promise<Plan> {
  const asked = given(input);
  const { scenario } = asked;
  const tolerance = options.tolerance ?? scenario.tolerance;
  const { places, notes } = goalPlaces(scenario, options);
  const goal: Goal = { tolerance, places, band: options.band ?? null };
  const precision = tolerance < SINGLE_SERVES ? 'double' : scenario.grid.precision;
  if (precision !== scenario.grid.precision)
    notes.push(`Double precision is planned: single precision rounds at up to ${formatPercent(SINGLE_SERVES / 4)}.`);
  const base = { ...asked.json, grid: { ...asked.json.grid, precision } };
  const threads = options.threads ?? threadsAvailable();
  const meter = new ProgressMeter(options.onProgress ?? (() => {}), [
    ['set-ups predicted', 2],
    ['the speed of this machine', 0.2],
    ['the plan tried out', 1],
  ]);
  return withTeam(threads, options.signal, async (team) => {
    meter.enter(0);
    const started = performance.now();
    const found = await team.run('searchPlan', [base, goal, frameOf(scenario, places)]);
    const searchSeconds = (performance.now() - started) / 1000;
    meter.enter(1);
    const { chosen } = found;
    const planned = chosen && plannedScenario(asked, goal, chosen, precision);
    const rate = await cellRate(team, scenario);
    const seconds = chosen && chosen.work / rate;
    const loaded = planned && loadScenario(planned);
    const fits = chosen !== null && loaded !== null && 'scenario' in loaded && chosen.memoryBytes <= memoryLimit();
    meter.enter(2);
    const wanted = options.check !== false && found.met && fits && seconds! <= LONGEST_CHECK;
    const run = wanted ? await measured(team, given(planned), goal, (done) => meter.at(done)) : null;
    const all = found.places.map((place, p) => ({ ...place, measured: run?.errors[p] ?? null }));
    const worst = run && Math.max(...run.errors);
    return {
      title: scenario.title,
      version: VERSION,
      tolerance,
      band: goal.band,
      met: found.met,
      chosen,
      places: all,
      alternatives: found.alternatives,
      curve: found.curve,
      machine: { cellsPerSecond: rate, seconds, fits },
      own:
        options.ownRate && chosen ? { cellsPerSecond: options.ownRate, seconds: chosen.work / options.ownRate } : null,
      check: run && { measured: worst!, ratio: chosen!.predicted / worst!, seconds: run.seconds },
      searchSeconds,
      sentence: sentenceOf(found, tolerance, worst),
      notes: [...notes, ...found.notes, ...(wanted || !found.met ? [] : [uncheckedNote(options, fits, seconds!)])],
      scenario: planned,
    };
  });
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

// ------------------------------------------------------------------------------------------------------------ the goal

/** E that stands lower than this against ηH vanishes by symmetry: its relative error means nothing. −60 dB. */
const VANISHING = 1e-3;

/** Directions whose field is 20 dB below the strongest's are ignored. */
const RADIATES = 0.1;

function goalPlaces(scenario: Scenario, options: PlanOptions): { places: Goal['places']; notes: string[] } {
  const { at, distance } = options;
  if (at !== undefined && distance !== undefined)
    throw refusal('', at, 'Both an observer and a distance were given; a plan is made for one of them. Leave one out.');
  return distance === undefined ? observersOf(scenario, at) : placesAround(scenario, distance);
}

const refusal = (path: string, value: unknown, message: string) => new Refusal([{ path, value, message }]);

function observersOf(scenario: Scenario, name: string | undefined): { places: Goal['places']; notes: string[] } {
  const { observers, sources } = scenario;
  const inside = observers.filter((o) => o.inside);
  const wanted =
    name === undefined ? (inside.length > 0 ? inside : observers) : observers.filter((o) => o.name === name);
  if (wanted.length === 0)
    throw name === undefined
      ? refusal('observers', [], 'There is no observer; a plan needs a place. Add one, or give a distance.')
      : refusal(
          'observers',
          name,
          `There is no observer “${name}”; there are ${observers.map((o) => `“${o.name}”`).join(', ') || 'none'}.`,
        );
  const near = wanted.find(({ at }) => distanceToSources(sources, at) === 0);
  if (near) throw refusal('observers', near.at, `Observer “${near.name}” lies on a source; move it off.`);
  const strength = strengths(
    scenario,
    wanted.map(({ at }) => at),
  );
  const seen = wanted.filter((_, p) => strength[p]!.E > VANISHING * strength[p]!.etaH);
  const blind = wanted.filter((o) => !seen.includes(o)).map((o) => `“${o.name}”`);
  if (seen.length === 0)
    throw refusal(
      'observers',
      wanted.map(({ at }) => at),
      `E vanishes at ${blind.join(', ')} while the run lasts, so that it has no relative error; choose another place.`,
    );
  const notes = blind.map((o) => `E vanishes at observer ${o}: it has no relative error and was left out.`);
  return { places: seen.map(({ name: own, at }) => ({ name: own, at })), notes };
}

/** Places at a distance from the nearest source along axes and space diagonals, those whose field counts. */
function placesAround(scenario: Scenario, distance: number): { places: Goal['places']; notes: string[] } {
  if (!(distance > 0)) throw refusal('', distance, `The distance is ${distance} m; it must be above 0.`);
  const { sources } = scenario;
  const bounds = sources.map(sourceBounds);
  const middle = [0, 1, 2].map(
    (a) => (Math.min(...bounds.map((b) => b.from[a]!)) + Math.max(...bounds.map((b) => b.to[a]!))) / 2,
  );
  const reach = Math.max(...bounds.flatMap(({ from, to }) => [0, 1, 2].map((a) => to[a]! - from[a]!)));
  const places = directions().map(({ name, along }) => {
    const point = (r: number): Vec3 => [0, 1, 2].map((a) => middle[a]! + r * along[a]!) as unknown as Vec3;
    // From beyond, where the distance only grows along the ray, inwards by bisection.
    let [near, far] = [0, distance + 2 * reach * Math.sqrt(3)];
    for (let round = 0; round < 60; round++) {
      const r = (near + far) / 2;
      if (distanceToSources(sources, point(r)) < distance) near = r;
      else far = r;
    }
    return { name, at: point(far) };
  });
  const strength = strengths(
    scenario,
    places.map(({ at }) => at),
  );
  const strongest = Math.max(...strength.map(({ E }) => E));
  if (strongest === 0)
    throw refusal(
      'duration',
      scenario.duration,
      `No field arrives at ${formatQuantity(distance, 'm')} while the run lasts; lengthen duration or come nearer.`,
    );
  const strong = places.filter((_, p) => strength[p]!.E >= RADIATES * strongest);
  return {
    places: strong,
    notes: [
      `The plan is for ${strong.length} of ${places.length} directions at ${formatQuantity(distance, 'm')} from the sources; in the others the field is 20 dB or more below the strongest.`,
    ].filter(() => strong.length < places.length),
  };
}

function directions(): { readonly name: string; readonly along: Vec3 }[] {
  const list: { name: string; along: Vec3 }[] = [];
  for (const x of [-1, 0, 1])
    for (const y of [-1, 0, 1])
      for (const z of [-1, 0, 1]) {
        const count = Math.abs(x) + Math.abs(y) + Math.abs(z);
        if (count !== 1 && count !== 3) continue;
        const r = 1 / Math.sqrt(count);
        const name = [x, y, z].map((s, a) => (s === 0 ? '' : `${s < 0 ? '−' : '+'}${'xyz'[a]}`)).join('');
        list.push({ name, along: [x * r, y * r, z * r] });
      }
  return list;
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
async function cellRate(team: Team, scenario: Scenario): Promise<number> {
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

function sentenceOf({ met, chosen, places }: Found, tolerance: number, measuredError: number | null): string {
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
