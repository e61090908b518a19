import { memoryLimit, threadsAvailable } from '#platform';
import { formatQuantity } from '../elementary/quantity.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import { loadScenario } from '../scenario/load.ts';
import { answer } from './answers.ts';
import { type Comparison, conclude } from './conclude.ts';
import { planFreeSpace } from './freeSpace.ts';
import { placesOf } from './places.ts';
import { Team } from './pool.ts';
import type { Progress } from './progress.ts';
import { boxProblem, questionOf } from './question.ts';
import { Refusal } from './refusal.ts';

export type { Comparison } from './conclude.ts';
export { Refusal } from './refusal.ts';

export interface CompareOptions {
  /** worker threads; all that the machine has by default */
  readonly threads?: number;
  readonly onProgress?: (progress: Progress) => void;
  /** aborting it ends all workers at once and rejects with its reason */
  readonly signal?: AbortSignal;
}

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
    const asked = answer(team, question, json, places, box, free, options.onProgress ?? (() => {}));
    // Once aborted, the workers' own ends are of no interest.
    asked.catch(() => {});
    const answers = await Promise.race([asked, aborted]);
    return conclude({ question, json, places, box, free, answers, threads: team.threads });
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
