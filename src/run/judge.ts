import { hostName } from '#platform';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import type { Problem } from '../scenario/reading.ts';
import { observerCell } from '../scenario/sites.ts';
import { COMPONENTS, type Component, FEWEST_SAMPLES, samplePoints, type Trace } from '../trace/trace.ts';
import { withTeam } from './compare.ts';
import { given } from './given.ts';
import type { Judged } from './judge/judgeTraces.ts';
import type { Team } from './pool.ts';
import type { Progress } from './progress.ts';
import { Refusal } from './refusal.ts';

export type { Judged, JudgedTrace } from './judge/judgeTraces.ts';

/** The question that traces are to answer. */
export interface JudgeQuestion {
  readonly scenario: Scenario;
  readonly json: unknown;
  /** what readers of files want to know of it */
  readonly places: {
    readonly observers: readonly ObserverPlaces[];
    /** μ, H/m */
    readonly permeability: number;
  };
}

/**
 * The scenario that traces are judged by.
 * @param cellSize of the solver that is judged, where it is not the scenario's own: a length or three, as in a scenario
 * @throws Refusal naming every problem of the scenario
 */
export function judgeQuestion(input: unknown, cellSize?: number | string): JudgeQuestion {
  const own = given(input);
  const { json, scenario } =
    cellSize === undefined ? own : given({ ...own.json, grid: { ...own.json.grid, cellSize } });
  const { permeability } = scenario.medium;
  return { json, scenario, places: { observers: observerPlaces(scenario), permeability } };
}

/** An observer of the scenario, and where the components of its nearest node's Yee cell are. */
export interface ObserverPlaces {
  readonly name: string;
  readonly at: Vec3;
  readonly staggered: Readonly<Record<Component, Vec3>>;
}

/** Where the scenario's observers may have been read. */
function observerPlaces({ observers, grid }: Scenario): ObserverPlaces[] {
  return observers.map(({ name, at }) => {
    const { position } = samplePoints(Int32Array.from(observerCell(grid, at)), grid.box.from, grid.cellSize);
    const site = (c: number): Vec3 => [position[3 * c]!, position[3 * c + 1]!, position[3 * c + 2]!];
    return {
      name,
      at,
      staggered: Object.fromEntries(COMPONENTS.map((name, c) => [name, site(c)])) as ObserverPlaces['staggered'],
    };
  });
}

export interface JudgeOptions {
  /** the file's name, for the report; none by default */
  readonly file?: string;
  /** what should be known of how the traces were read */
  readonly notes?: readonly string[];
  readonly onProgress?: (progress: Progress) => void;
  /** aborting it ends the work at once and rejects with its reason */
  readonly signal?: AbortSignal;
}

/**
 * Traces of another solver against the exact field at their own places and instants.
 * @param question as `judgeQuestion` makes it of a scenario
 * @param traces V/m and A/m at m and s, instants ascending; `readForeignTraces` reads them from a file
 * @throws Refusal where they cannot be judged; WorkerDied; the signal's reason when aborted
 */
export async function judge(
  question: JudgeQuestion,
  traces: readonly Trace[],
  options: JudgeOptions = {},
): Promise<Judged> {
  refuseUnsound(traces);
  return await withTeam(1, options.signal, (team) => judgeWith(team, question, traces, options));
}

/** Traces may come from anywhere: those of a file have been checked row by row, a program's have not. */
function refuseUnsound(traces: readonly Trace[]): void {
  const problems = traces.flatMap((trace, n): Problem[] => {
    const problem = problemOf(trace);
    return problem ? [{ path: `traces.${n}.${problem.key}`, value: trace[problem.key], message: problem.message }] : [];
  });
  if (traces.length === 0) problems.push({ path: 'traces', value: traces, message: 'there is none to judge' });
  if (problems.length > 0) throw new Refusal(problems);
}

function problemOf({ component, at, time, values }: Trace): { key: keyof Trace; message: string } | null {
  const wrong = (key: keyof Trace, message: string) => ({ key, message });
  if (!COMPONENTS.includes(component))
    return wrong('component', `it is ${component}; it must be one of ${COMPONENTS.join(', ')}`);
  if (at?.length !== 3 || !at.every(Number.isFinite))
    return wrong('at', `it is ${at}; it must be x, y, z in m, three finite numbers`);
  for (const [key, list] of [
    ['time', time],
    ['values', values],
  ] as const) {
    if (!(list instanceof Float64Array))
      return wrong(key, 'it must be a Float64Array; Float64Array.from(…) makes one of other lists');
    const bad = list.findIndex((x) => !Number.isFinite(x));
    if (bad >= 0) return wrong(key, `number ${bad} is ${list[bad]}; all must be finite: leave that sample out`);
  }
  if (values.length !== time.length)
    return wrong('values', `there are ${values.length}; there must be one for each of the ${time.length} instants`);
  if (time.length < FEWEST_SAMPLES)
    return wrong('time', `there are ${time.length} instants; a trace needs at least ${FEWEST_SAMPLES}`);
  const turned = time.findIndex((t, n) => n > 0 && t <= time[n - 1]!);
  if (turned >= 0)
    return wrong('time', `number ${turned} is ${time[turned]} s, after ${time[turned - 1]} s; instants must ascend`);
  return null;
}

/** The same with a team that is there already. */
export async function judgeWith(
  team: Team,
  { json }: JudgeQuestion,
  traces: readonly Trace[],
  { file = '', notes = [], onProgress = () => {} }: JudgeOptions,
): Promise<Judged> {
  const found = await team.run('judge', [json, traces, file, notes], (event) => {
    const [stage, fraction] = event as [string, number];
    onProgress({ stage, fraction });
  });
  if ('refusal' in found) throw new Refusal([{ path: '', value: undefined, message: found.refusal }]);
  return { ...found, result: { ...found.result, environment: { host: hostName() } } };
}
