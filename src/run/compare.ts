import { memoryLimit, threadsAvailable } from '#platform';
import { formatQuantity } from '../elementary/quantity.ts';
import { hasFusedMultiplyAdd } from '../fdtd/kernel.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Grid } from '../scenario/model.ts';
import { type Asked, answer, type Means } from './answers.ts';
import { type Comparison, conclude } from './conclude.ts';
import { planFreeSpace } from './freeSpace.ts';
import { jsonOf } from './given.ts';
import { placesOf } from './places.ts';
import { Team } from './pool.ts';
import type { Progress } from './progress.ts';
import { withQuantities } from './quantities.ts';
import { boxProblem, questionOf } from './question.ts';
import { Refusal } from './refusal.ts';
import { withRemedy } from './remedy.ts';

export { OutOfMemory } from '../fdtd/run.ts';
export type { Comparison } from './conclude.ts';
export { WorkerDied } from './pool.ts';
export { Refusal } from './refusal.ts';

export interface CompareOptions {
  /** worker threads; all that the machine has by default */
  readonly threads?: number;
  /** the grid's multiply-add with one rounding, where the runtime has it: faster, last bits differ; off by default */
  readonly fusedMultiplyAdd?: boolean;
  /** the grid's far field too, and its error by direction: one more grid run, and the exact field on a surface */
  readonly pattern?: boolean;
  readonly onProgress?: (progress: Progress) => void;
  /** aborting it ends all workers at once and rejects with its reason */
  readonly signal?: AbortSignal;
}

/**
 * Both solvers on one scenario: the grid in its box, the same grid without walls, the exact field of the gridded currents
 * and of the designed ones, over the same places and instants; and what their differences say.
 * @param input a scenario: the text of its file, or what JSON.parse made of it
 * @throws Refusal naming every problem of the scenario; WorkerDied; OutOfMemory; the signal's reason when aborted
 */
export async function compareSolvers(input: unknown, options: CompareOptions = {}): Promise<Comparison> {
  // Workers take as long to come up as a case to be prepared: the one passes while the other does.
  return await withTeam(options.threads ?? threadsAvailable(), options.signal, async (team) => {
    const prepared = prepareCase(jsonOf(input), options.fusedMultiplyAdd);
    const means = { team, gridThreads: team.threads, onProgress: options.onProgress ?? (() => {}) };
    const found = await withRemedy(team, prepared, await solvePrepared(prepared, means));
    return await withQuantities(prepared, means, found, options.pattern ?? false);
  });
}

/**
 * What is asked of both solvers, where they are read, and how free space is marched.
 * @param limit bytes that one run may take: with the same limit every machine marches free space the same way
 * @throws Refusal naming every problem of the scenario
 */
export function prepareCase(json: unknown, fusedMultiplyAdd = false, limit = memoryLimit()): Asked {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  if (fusedMultiplyAdd) refuseFused(loaded.scenario.grid.precision);
  const question = questionOf(loaded.scenario);
  const places = placesOf(question);
  const box = boxProblem(question, places.groups, fusedMultiplyAdd);
  refuseTooLarge(box, limit);
  return { question, json, places, box, free: planFreeSpace(box, limit), memoryLimit: limit };
}

/**
 * Answers and what they say.
 * @throws WorkerDied
 */
export async function solvePrepared(prepared: Asked, means: Means): Promise<Comparison> {
  return conclude({ ...prepared, answers: await answer(prepared, means), threads: means.gridThreads });
}

/**
 * A job with a team of its own, which ends with it.
 * @throws what the job throws; the signal's reason when aborted, after all workers were ended at once
 */
export async function withTeam<T>(
  threads: number,
  signal: AbortSignal | undefined,
  job: (team: Team) => Promise<T>,
): Promise<T> {
  signal?.throwIfAborted();
  const team = new Team(threads);
  let abort = () => {};
  const aborted = new Promise<never>((_, reject) => {
    abort = () => {
      reject(signal!.reason);
      void team.end();
    };
  });
  aborted.catch(() => {});
  signal?.addEventListener('abort', abort, { once: true });
  try {
    const done = job(team);
    // Once aborted, the workers' own ends are of no interest.
    done.catch(() => {});
    return await Promise.race([done, aborted]);
  } finally {
    signal?.removeEventListener('abort', abort);
    await team.end();
  }
}

/** The option is refused where it cannot be had, rather than quietly left out. */
function refuseFused(precision: Grid['precision']): void {
  const refuse = (path: string, value: unknown, message: string) => new Refusal([{ path, value, message }]);
  if (precision === 'double')
    throw refuse(
      'grid.precision',
      precision,
      'Fused multiply-add (--fused) is there in single precision only; grid.precision is double. Leave one of them out.',
    );
  if (!hasFusedMultiplyAdd())
    throw refuse(
      '',
      undefined,
      'Fused multiply-add (--fused) needs relaxed SIMD, which this runtime does not have (Node has it from version 22, or ' +
        'with --experimental-wasm-relaxed-simd). Leave the option out.',
    );
}

/** @throws Refusal where the grid in its box fits neither the machine nor the kernel */
export function refuseTooLarge(box: GridProblem, limit: number): void {
  const refuse = (message: string) => new Refusal([{ path: 'grid.cellSize', value: box.cellSize, message }]);
  let bytes: number;
  try {
    bytes = memoryNeeded(box).bytes;
  } catch (error) {
    if (error instanceof RangeError) throw refuse(error.message);
    throw error;
  }
  if (bytes > limit)
    throw refuse(
      `The grid needs ${formatQuantity(bytes, 'B')}; this machine has ${formatQuantity(limit, 'B')} to give. ` +
        'Raise grid.cellSize or shrink grid.box.',
    );
}
