/**
 * In which order cases run, and how: one after another with all threads, or beside each other with one thread each. A
 * case on one thread wastes nothing, but many threads cannot share the last and longest; so the longest few may go first,
 * each with all threads, and the rest beside each other. How many is chosen by counting.
 */
export interface Job {
  /** seconds on one thread, guessed */
  readonly cost: number;
  readonly bytes: number;
}

export interface Schedule {
  /** indices of jobs that run by themselves, with all threads */
  readonly alone: readonly number[];
  /** indices of jobs that run beside each other, longest first */
  readonly beside: readonly number[];
}

/** What of a second thread's time a grid that is shared is worth; some of a case is never shared (a guess). */
const EFFICIENCY = 0.8;

/** The schedule with the shortest makespan: the n longest alone, the rest beside each other, over all n. */
export function scheduleOf(jobs: readonly Job[], threads: number, memory: number): Schedule {
  const order = [...jobs.keys()].sort((a, b) => jobs[b]!.cost - jobs[a]!.cost || a - b);
  if (threads === 1) return { alone: [], beside: order };
  // Twice a job that takes more than its share of the memory keeps others from running beside it.
  const slots = (rest: readonly number[]) => {
    const largest = Math.max(0, ...rest.map((j) => jobs[j]!.bytes));
    return Math.max(1, Math.min(threads, largest > 0 ? Math.floor(memory / largest) : threads));
  };
  const speed = 1 + EFFICIENCY * (threads - 1);
  let best = { makespan: Number.POSITIVE_INFINITY, n: 0 };
  let shared = 0;
  for (let n = 0; n <= order.length; n++) {
    const rest = order.slice(n);
    const makespan =
      shared / speed +
      longest(
        rest.map((j) => jobs[j]!.cost),
        slots(rest),
      );
    if (makespan < best.makespan * (1 - 1e-9)) best = { makespan, n };
    if (n < order.length) shared += jobs[order[n]!]!.cost;
  }
  return { alone: order.slice(0, best.n), beside: order.slice(best.n) };
}

/** Makespan of jobs handed out longest first to whoever is free: R. L. Graham, SIAM J. Appl. Math. 17 (1969) 416. */
function longest(costs: readonly number[], slots: number): number {
  const busy = new Float64Array(slots);
  for (const cost of costs) busy[busy.indexOf(Math.min(...busy))]! += cost;
  return Math.max(0, ...busy);
}

/**
 * Runs jobs beside each other, in order, as many as fit into the memory and no more than `most`. A job larger than the
 * memory runs by itself.
 */
export async function runBeside(
  order: readonly number[],
  jobs: readonly Job[],
  most: number,
  memory: number,
  run: (index: number) => Promise<void>,
): Promise<void> {
  const waiting = [...order];
  const running = new Map<number, Promise<void>>();
  const held = () => [...running.keys()].reduce((sum, j) => sum + jobs[j]!.bytes, 0);
  while (waiting.length > 0 || running.size > 0) {
    const next = waiting.findIndex((j) => running.size === 0 || held() + jobs[j]!.bytes <= memory);
    if (next >= 0 && running.size < most) {
      const [index] = waiting.splice(next, 1) as [number];
      running.set(
        index,
        run(index).finally(() => running.delete(index)),
      );
    } else await Promise.race(running.values());
  }
}
