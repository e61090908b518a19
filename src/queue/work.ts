import { memoryLimit, threadsAvailable } from '#platform';
import { formatQuantity } from '../elementary/quantity.ts';
import { withTeam } from '../run/compare.ts';
import type { Team } from '../run/pool.ts';
import { Refusal } from '../run/refusal.ts';
import { Recent } from '../run/share.ts';
import { runCase } from '../run/surveyCase.ts';
import { asWritten, shareKey } from '../run/surveyCases.ts';
import { SHARED } from '../run/surveyPool.ts';
import type { Address } from './address.ts';
import { CaseQueue, CHANNELS, type Taken } from './cases.ts';
import { Bell, Connection, later } from './connection.ts';
import { ownRelease, releaseText } from './release.ts';

/** Looking for cases while there are none and none is announced, milliseconds. */
const LOOK_EVERY = 500;
const UPKEEP_EVERY = 2000;

export interface WorkOptions {
  readonly threads?: number;
  /** aborted: no more cases are taken, and it ends when those that run are done */
  readonly stop: AbortSignal;
  /** aborted: cases that run are given back, and it ends at once */
  readonly leave: AbortSignal;
  readonly say: (text: string) => void;
}

/**
 * Takes cases from the queue at an address until stopped: as many beside each other as there are threads, or one with all
 * threads where no other waits.
 * @returns how many cases came to an end here
 * @throws Refusal where surveys wait for another version; ServerError where the server refuses, or stays away
 */
export async function work(address: Address, options: WorkOptions): Promise<number> {
  const { say, leave } = options;
  const connection = await Connection.open(address, 'fieldassay work', { say, waitsForRoom: true });
  try {
    const queue = await CaseQueue.open(connection, await ownRelease());
    try {
      return await new Worker(queue, options).run();
    } finally {
      await queue.close();
    }
  } finally {
    await connection.close();
    leave.throwIfAborted();
  }
}

class Worker {
  readonly #running = new Map<string, { readonly taken: Taken; readonly end: Promise<void> }>();
  /** taken, and nothing told of yet: what is given back where it comes to that */
  readonly #held = new Map<string, Taken>();
  readonly #threads: number;
  readonly #memory = memoryLimit();
  readonly #recent: Recent;
  #alone = false;
  #finished = 0;
  /** aborted when nothing more is to be done here, with the reason where that is an error */
  readonly #over = new AbortController();
  #saidTooLarge = false;
  #announced = new Bell();

  constructor(
    readonly queue: CaseQueue,
    readonly options: WorkOptions,
  ) {
    this.#threads = options.threads ?? threadsAvailable();
    // Every thread may be at another grid.
    this.#recent = new Recent(SHARED.length * this.#threads);
  }

  async run(): Promise<number> {
    const { queue, options } = this;
    const { stop, leave, say } = options;
    const over = this.#over.signal;
    await this.#refuseOthers();
    await queue.appear({ role: 'worker', threads: this.#threads });
    this.#announced = await queue.connection.listen(CHANNELS.cases);
    queue.connection.patient = true;
    const { address } = queue.connection;
    say(
      `${releaseText(queue.release)}, ${this.#threads} thread${this.#threads === 1 ? '' : 's'}, takes cases from ` +
        `${address.name}; Ctrl-C ends it when what runs is done, twice gives that back`,
    );
    const housekeeping = this.#housekeep();
    try {
      await withTeam(this.#threads, leave, async (team) => {
        while (!stop.aborted && !over.aborted) if (!(await this.#takeOne(team))) await this.#pause();
        over.throwIfAborted();
        if (this.#running.size > 0 && stop.aborted) say(`finishing ${this.#running.size} of them`);
        while (this.#running.size > 0) await this.#oneEnds();
      });
    } catch (error) {
      if (!leave.aborted) throw error;
      for (const taken of this.#held.values()) await queue.giveBack(taken);
      say(`${this.#held.size} given back`);
    } finally {
      this.#over.abort();
      await housekeeping;
    }
    return this.#finished;
  }

  /** Starts one more case where there is a thread, memory and a case for it. */
  async #takeOne(team: Team): Promise<boolean> {
    const { queue } = this;
    if (this.#alone || this.#running.size >= this.#threads) return false;
    const held = [...this.#running.values()].reduce((sum, { taken }) => sum + taken.bytes, 0);
    const taken = await queue.take(this.#memory - held);
    if (!taken) {
      if (this.#running.size === 0) await this.#wonder();
      return false;
    }
    this.#held.set(taken.attempt, taken);
    this.#alone = this.#threads > 1 && this.#running.size === 0 && (await queue.waiting()) === 0;
    const end = this.#run(taken, team, this.#alone ? this.#threads : 1).finally(() => {
      this.#running.delete(taken.attempt);
      this.#alone = false;
    });
    this.#running.set(taken.attempt, { taken, end });
    return true;
  }

  async #run(taken: Taken, team: Team, gridThreads: number): Promise<void> {
    const { queue, options } = this;
    const { scenario, reflections, hash, settings, memoryLimit } = taken;
    const started = performance.now();
    const key = shareKey(scenario);
    const about = Object.entries(settings)
      .map(([name, value]) => `${name} ${typeof value === 'string' ? value : JSON.stringify(value)}`)
      .join(', ');
    try {
      const told = await runCase(
        scenario,
        {
          team,
          gridThreads,
          share: (work, make) => this.#recent.take(`${work} ${key}`, make),
          onProgress: () => {},
        },
        reflections,
        memoryLimit,
      ).then(
        (outcome) => ({ status: 'done', outcome: asWritten(outcome) }) as const,
        (error) => {
          if (error instanceof Refusal) return { status: 'refused', reason: error.message } as const;
          throw error;
        },
      );
      if (options.leave.aborted) return;
      await queue.finish(taken, told);
      this.#held.delete(taken.attempt);
      this.#finished++;
      options.say(`${told.status} in ${((performance.now() - started) / 1000).toFixed(1)} s: ${about}`);
    } catch (error) {
      if (options.leave.aborted) return;
      const reason = error instanceof Error ? error.message : String(error);
      options.say(`failed: ${about} (case ${hash}): ${reason}`);
      await queue.fail(taken, reason).then(
        () => this.#held.delete(taken.attempt),
        (lost) => this.#over.abort(lost),
      );
    }
  }

  /** Nothing to do: is that how it should be? */
  async #wonder(): Promise<void> {
    await this.#refuseOthers();
    if (this.#saidTooLarge) return;
    const larger = await this.queue.waiting(this.#memory);
    if (larger === 0) return;
    this.#saidTooLarge = true;
    const cases = larger === 1 ? 'a case waits that needs' : `${larger} cases wait that need`;
    this.options.say(`${cases} more than the ${formatQuantity(this.#memory, 'B')} that this machine has to give`);
  }

  async #oneEnds(): Promise<void> {
    await Promise.race([...this.#running.values()].map(({ end }) => end));
  }

  async #pause(): Promise<void> {
    const { stop } = this.options;
    const announced = this.#announced.wait(LOOK_EVERY, stop).catch(() => {});
    await Promise.race([announced, ...(this.#running.size > 0 ? [this.#oneEnds()] : [])]);
  }

  async #housekeep(): Promise<void> {
    const over = this.#over.signal;
    try {
      for (;;) {
        await later(UPKEEP_EVERY, over);
        await this.queue.upkeep(new Set(this.#held.keys()));
      }
    } catch (error) {
      if (!over.aborted) this.#over.abort(error);
    }
  }

  /** @throws Refusal where all surveys that are being collected were handed over by another version */
  async #refuseOthers(): Promise<void> {
    const { release, connection } = this.queue;
    const rows = await connection.query<{ title: string; version: string; result_schema: string }>(
      `select survey.title, survey.version, survey.result_schema
       from fieldassay.present join fieldassay.survey on survey.id = present.survey
       where present.role = 'collector'`,
    );
    const others = rows.map(({ title, version, result_schema: resultSchema }) => ({ title, version, resultSchema }));
    const same = others.filter((o) => o.version === release.version && o.resultSchema === release.resultSchema);
    const [other] = others;
    if (!other || same.length > 0) return;
    throw new Refusal([
      {
        path: '',
        value: release.version,
        message:
          `This worker is ${releaseText(release)}; the survey “${other.title}” in ${connection.address.name} was handed over ` +
          `by ${releaseText(other)}. Their results would not go together: install the same version on both sides.`,
      },
    ]);
  }
}
