import workerpool from 'workerpool';
import { poolOptions, workerScript } from '#platform';
import type { Tasks } from './worker.ts';

type TaskName = keyof Tasks;

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
   * @throws Error what the task threw, or that the worker died
   */
  async run<T extends TaskName>(
    task: T,
    args: Parameters<Tasks[T]>,
    onEvent?: (event: unknown) => void,
  ): Promise<Awaited<ReturnType<Tasks[T]>>> {
    return await this.#pool.exec(task, args as unknown[], onEvent ? { on: onEvent } : {});
  }

  /** Ends all workers at once, whatever they are doing. */
  async end(): Promise<void> {
    await this.#pool.terminate(true);
  }
}
