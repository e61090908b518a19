import workerpool from 'workerpool';
import { poolOptions, workerScript } from '#platform';
import { OutOfMemory } from '../fdtd/run.ts';
import type { Tasks } from './worker.ts';

type TaskName = keyof Tasks;

/** What each task is, where its worker died. */
const DOING: Readonly<Record<TaskName, string>> = {
  leadGrid: 'the grid',
  marchGrid: 'the grid',
  followGrid: 'the grid',
  leadFilm: 'the film of the grid',
  filmAlone: 'the film of the grid',
  filmExact: 'the film of the exact field',
  exactField: 'the exact field',
  griddedField: 'the exact field of the gridded currents',
  predictLattice: 'the prediction of the lattice’s error',
  searchPlan: 'the search for a plan',
  judge: 'the judgement of the traces',
};

/** A worker thread did not live to answer: nothing is wrong with what was asked, it may go well the next time. */
export class WorkerDied extends Error {
  override readonly name = 'WorkerDied';
}

/** A worker's death in words. Its own error has the machinery's over many lines. */
function died(task: TaskName, threads: number, error: Error): WorkerDied {
  const [, code] = /exitCode: `(\d+)`/.exec(error.message) ?? [];
  const [, reason] = /^Workerpool Worker error: (.*)/.exec(error.message) ?? [];
  return new WorkerDied(
    `a worker thread ended before it was done with ${DOING[task]} (${reason ?? (code ? `exit code ${code}` : 'for no reason given')}); ` +
      `mostly it is memory that runs out. Run it again with fewer threads than ${threads}, raise grid.cellSize or shrink grid.box.`,
    { cause: error },
  );
}

/**
 * A team of worker threads that outlives single tasks. Tasks run in the order they are given; up to `threads` at once.
 */
export class Team {
  readonly #pool: ReturnType<typeof workerpool.pool>;
  /** of the newest grid run of several threads: the next one takes it over where it is large enough */
  gridMemory: WebAssembly.Memory | undefined;

  constructor(readonly threads: number) {
    this.#pool = workerpool.pool(workerScript(), { ...poolOptions, minWorkers: threads, maxWorkers: threads });
  }

  /**
   * Runs one task in a worker.
   * @param onEvent receives what the task emits meanwhile (progress)
   * @throws WorkerDied; else what the task threw, as an Error
   */
  async run<T extends TaskName>(
    task: T,
    args: Parameters<Tasks[T]>,
    onEvent?: (event: unknown) => void,
  ): Promise<Awaited<ReturnType<Tasks[T]>>> {
    try {
      return await this.#pool.exec(task, args as unknown[], onEvent ? { on: onEvent } : {});
    } catch (error) {
      if (error instanceof workerpool.TerminateError) throw died(task, this.threads, error);
      // Its class was lost on the way from the worker.
      throw (error as Error).name === 'OutOfMemory' ? new OutOfMemory((error as Error).message) : error;
    }
  }

  /** Ends all workers at once, whatever they are doing. */
  async end(): Promise<void> {
    await this.#pool.terminate(true);
  }
}
