import { hostName } from '#platform';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { observerCell } from '../scenario/sites.ts';
import { COMPONENTS, type Component, samplePoints, type Trace } from '../trace/trace.ts';
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
}

/**
 * The scenario that traces are judged by.
 * @param cellSize of the solver that is judged, where it is not the scenario's own: a length or three, as in a scenario
 * @throws Refusal naming every problem of the scenario
 */
export function judgeQuestion(input: unknown, cellSize?: number | string): JudgeQuestion {
  const { json, scenario } = given(input);
  if (cellSize === undefined) return { json, scenario };
  return given({ ...json, grid: { ...json.grid, cellSize } });
}

/** An observer of the scenario, and where the components of its nearest node's Yee cell are. */
export interface ObserverPlaces {
  readonly name: string;
  readonly at: Vec3;
  readonly staggered: Readonly<Record<Component, Vec3>>;
}

/** Where the scenario's observers may have been read. */
export function observerPlaces({ observers, grid }: Scenario): ObserverPlaces[] {
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
  /** the file's name, for the report */
  readonly file: string;
  /** what should be known of how the traces were read */
  readonly notes?: readonly string[];
  readonly onProgress?: (progress: Progress) => void;
  /** aborting it ends the work at once and rejects with its reason */
  readonly signal?: AbortSignal;
}

/**
 * Traces of another solver against the exact field at their own places and instants.
 * @throws Refusal where they cannot be judged; Error where a worker died; the signal's reason when aborted
 */
export async function judge(question: JudgeQuestion, traces: readonly Trace[], options: JudgeOptions): Promise<Judged> {
  return await withTeam(1, options.signal, (team) => judgeWith(team, question, traces, options));
}

/** The same with a team that is there already. */
export async function judgeWith(
  team: Team,
  { json }: JudgeQuestion,
  traces: readonly Trace[],
  { file, notes = [], onProgress = () => {} }: JudgeOptions,
): Promise<Judged> {
  const found = await team.run('judge', [json, traces, file, notes], (event) => {
    const [stage, fraction] = event as [string, number];
    onProgress({ stage, fraction });
  });
  if ('refusal' in found) throw new Refusal([{ path: '', value: undefined, message: found.refusal }]);
  return { ...found, result: { ...found.result, environment: { host: hostName() } } };
}
