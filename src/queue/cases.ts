import { hostname } from 'node:os';
import PgBoss from 'pg-boss';
import type { Connection, Statements } from './connection.ts';
import type { Release } from './release.ts';
import { install, LOCK } from './tables.ts';

/** Where the queue's library keeps its own. */
const QUEUE_SCHEMA = 'fieldassay_queue';

/** So often a case is tried before it is given up. */
const TRIES = 3;

/** Channels on which those that wait for cases, or for what they come to, are woken. */
export const CHANNELS = { cases: 'fieldassay_cases', results: 'fieldassay_results' } as const;

/** Far beyond any case: a worker that is there but does nothing any more loses its case after this. */
const EXPIRE_SECONDS = 30 * 86_400;

/** Cases wait as long as it takes. */
const KEEP_YEARS = 10;

/** For so long a worker must be gone, and the server be up, before its case goes to another, seconds. */
const GONE_SECONDS = 4;
const AFTER_START_SECONDS = 12;

/** What is sent of a case. */
export interface CaseData {
  readonly hash: string;
  readonly scenario: Record<string, unknown>;
  readonly reflections: boolean;
  /** bytes that a run was planned to stay below, where it was planned */
  readonly memoryLimit: number;
  readonly title: string;
  readonly settings: Readonly<Record<string, unknown>>;
}

export interface SentCase extends CaseData {
  /** seconds on one thread, guessed: longest first */
  readonly cost: number;
  readonly bytes: number;
}

/** A case that this process has taken and nobody else has. */
export interface Taken extends CaseData {
  readonly attempt: string;
  readonly job: PgBoss.JobWithMetadata<CaseData>;
  readonly bytes: number;
}

/** What a case came to. */
export type Came =
  | { readonly status: 'done'; readonly outcome: unknown }
  | { readonly status: 'refused'; readonly reason: string };

/** A process that others can see. */
export interface Role {
  readonly role: 'worker' | 'collector';
  readonly threads?: number;
  readonly survey?: string;
}

/** Bytes of the smallest class of cases. */
const SMALLEST = 2 ** 26;

/** Cases are queued by the power of two of memory that they fit into, so that a worker takes none that it cannot hold. */
const classOf = (bytes: number): number => Math.max(0, Math.ceil(Math.log2(bytes / SMALLEST)));

/** The case's hash as the number of its job: handed over twice, it is there once. */
const jobOf = (hash: string): string => hash.replace(/^(.{8})(.{4})(.{4})(.{4})(.{12})$/, '$1-$2-$3-$4-$5');

/**
 * Cases in a queue of pg-boss, and beside it tables of ours with what they came to. What belongs together (a result and
 * the end of its job, say) is one transaction. One release of Fieldassay has queues of its own: no other takes from them.
 */
export class CaseQueue {
  readonly #boss: PgBoss;
  readonly #prefix: string;
  #process = 0;
  #queues: readonly { readonly name: string; readonly limit: number }[] = [];
  /** attempts whose worker was missed, and since when */
  readonly #missed = new Map<string, number>();

  private constructor(
    readonly connection: Connection,
    readonly release: Release,
  ) {
    const db = adapter(connection);
    this.#boss = new PgBoss({ db, schema: QUEUE_SCHEMA, schedule: false, supervise: true });
    // Errors come where something is asked; housekeeping is tried again by itself.
    this.#boss.on('error', () => {});
    this.#prefix = `cases-${release.version}-${release.resultSchema}`;
  }

  /**
   * Makes what is missing on the server.
   * @throws Refusal where a later version made it; ServerError
   */
  static async open(connection: Connection, release: Release): Promise<CaseQueue> {
    const queue = new CaseQueue(connection, release);
    await install(connection, async () => {
      await queue.#boss.start();
      await queue.#boss.createQueue(queue.#dead, { name: queue.#dead, policy: 'standard' });
    });
    return queue;
  }

  get #dead(): string {
    return `${this.#prefix}-dead`;
  }

  /** Lets others see that this process is there, for as long as its connection lasts. */
  async appear({ role, threads, survey }: Role): Promise<void> {
    const { version, resultSchema } = this.release;
    const [row] = await this.connection.query<{ id: number }>(
      `insert into fieldassay.process (role, host, pid, version, result_schema, threads, survey)
       values ($1, $2, $3, $4, $5, $6, $7) returning id`,
      [role, hostname(), process.pid, version, resultSchema, threads ?? null, survey ?? null],
    );
    this.#process = row!.id;
    await this.connection.greet(async (db) => {
      // A connection that broke may still be held for alive by the server.
      await db.query(
        `select pg_terminate_backend(pid) from pg_locks
         where locktype = 'advisory' and classid::bigint = $1 and objid::bigint = $2 and objsubid = 2
           and database = (select oid from pg_database where datname = current_database())
           and pid <> pg_backend_pid()`,
        [LOCK, this.#process],
      );
      await db.query('select pg_advisory_lock($1::int, $2::int)', [LOCK, this.#process]);
    });
  }

  /** Sends cases; those that wait or run already are left as they are. */
  async send(cases: readonly SentCase[]): Promise<void> {
    for (const power of new Set(cases.map(({ bytes }) => classOf(bytes)))) {
      const group = cases.filter(({ bytes }) => classOf(bytes) === power);
      const name = `${this.#prefix}-${power}`;
      if (!this.#queues.some((queue) => queue.name === name)) {
        await this.#boss.createQueue(name, { name, policy: 'standard', deadLetter: this.#dead, retryLimit: TRIES - 1 });
        await this.#findQueues();
      }
      const jobs = group.map((each) => newJob(name, each));
      await this.connection.transaction(async (db) => {
        // Jobs that ended without a result that still stands are no longer of use.
        const ended = await db.query<{ id: string }>(
          `select id from ${QUEUE_SCHEMA}.job where name = $1 and id = any($2::uuid[]) and state > 'active'`,
          [name, jobs.map(({ id }) => id)],
        );
        if (ended.length > 0)
          await this.#boss.deleteJob(
            name,
            ended.map(({ id }) => id),
            { db: adapter(db) },
          );
        await this.#boss.insert(jobs, { db: adapter(db) });
        await db.query(`notify ${CHANNELS.cases}`);
      });
    }
  }

  /**
   * The longest of the waiting cases that fits.
   * @param bytes what a case may take
   */
  async take(bytes: number): Promise<Taken | null> {
    for (const { name, limit } of this.#queues) {
      if (limit > bytes) continue;
      const taken = await this.#takeFrom(name, limit);
      if (taken) return taken;
    }
    await this.#findQueues();
    return null;
  }

  async #takeFrom(name: string, bytes: number): Promise<Taken | null> {
    return await this.connection.transaction(async (db) => {
      for (;;) {
        const [job] = await this.#boss.fetch<CaseData>(name, { includeMetadata: true, db: adapter(db) });
        if (!job) return null;
        const { hash } = job.data;
        const known = await db.query('select from fieldassay.result where hash = $1', [hash]);
        if (known.length > 0) {
          await this.#boss.complete(name, job.id, {}, { db: adapter(db) });
          continue;
        }
        const [row] = await db.query<{ id: string }>(
          'insert into fieldassay.attempt (hash, queue, job, process) values ($1, $2, $3, $4) returning id',
          [hash, name, job.id, this.#process],
        );
        return { ...job.data, attempt: row!.id, job, bytes };
      }
    });
  }

  /** How many cases wait that need more than some bytes. */
  async waiting(bytes = 0): Promise<number> {
    const larger = this.#queues.filter(({ limit }) => limit > bytes);
    const sizes = await Promise.all(larger.map(({ name }) => this.#boss.getQueueSize(name)));
    return sizes.reduce((sum, size) => sum + size, 0);
  }

  /** Keeps what a case came to, and ends its job. A case that another worker has told of meanwhile stays as it is. */
  async finish({ attempt, job, hash }: Taken, came: Came): Promise<void> {
    await this.connection.transaction(async (db) => {
      await db.query(
        `insert into fieldassay.result (hash, status, reason, outcome, process) values ($1, $2, $3, $4, $5)
         on conflict (hash) do nothing`,
        [
          hash,
          came.status,
          came.status === 'refused' ? came.reason : null,
          came.status === 'done' ? JSON.stringify(came.outcome) : null,
          this.#process,
        ],
      );
      if (await end(db, attempt, null)) await this.#boss.complete(job.name, job.id, {}, { db: adapter(db) });
      await db.query(`notify ${CHANNELS.results}`);
    });
  }

  /** Tells that a case failed: it is tried again, or given up. */
  async fail({ attempt, job }: Pick<Taken, 'attempt' | 'job'>, reason: string): Promise<void> {
    await this.connection.transaction(async (db) => await this.#failIn(db, attempt, job.name, job.id, reason));
  }

  async #failIn(db: Statements, attempt: string, name: string, job: string, reason: string): Promise<void> {
    if (await end(db, attempt, reason)) await this.#boss.fail(name, job, { message: reason }, { db: adapter(db) });
  }

  /** Puts a case back as if it had not been taken. */
  async giveBack({ attempt, job }: Taken): Promise<void> {
    await this.connection.transaction(async (db) => {
      if (!(await end(db, attempt, null))) return;
      await this.#boss.deleteJob(job.name, job.id, { db: adapter(db) });
      const { id, name, data, priority, retryLimit, retryCount, deadLetter } = job;
      const left = { retryLimit: retryLimit - retryCount, keepUntil: new Date(job.keepUntil).toISOString() };
      await this.#boss.insert([{ id, name, data, priority, deadLetter, expireInSeconds: EXPIRE_SECONDS, ...left }], {
        db: adapter(db),
      });
    });
  }

  /**
   * What anybody does now and then for all: cases of workers that are gone go to others, and cases that were given up are
   * told of.
   * @param mine attempts that this process knows to be its own; others that bear its number were never heard of
   */
  async upkeep(mine: ReadonlySet<string>): Promise<void> {
    const open = await this.connection.query<Orphan>(
      `select attempt.id, attempt.queue, attempt.job, process.host, process.pid, process.id as process
       from fieldassay.attempt join fieldassay.process on process.id = attempt.process
       where attempt.ended is null
         and (process.id = $1 or not exists (select from fieldassay.present where present.id = process.id))
         and now() - pg_postmaster_start_time() > $2 * interval '1 second'`,
      [this.#process, AFTER_START_SECONDS],
    );
    const now = performance.now();
    const orphans = open.filter(({ id, process }) => process !== this.#process || !mine.has(id));
    for (const id of this.#missed.keys()) if (!orphans.some((each) => each.id === id)) this.#missed.delete(id);
    for (const { id, queue, job, host, pid } of orphans) {
      const since = this.#missed.get(id) ?? now;
      this.#missed.set(id, since);
      if (now - since < 1000 * GONE_SECONDS) continue;
      const reason = `its worker, process ${pid} on ${host}, was lost`;
      await this.connection.transaction(async (db) => await this.#failIn(db, id, queue, job, reason));
    }
    while (await this.#bury());
  }

  /** Tells of one case that was given up; whether there was one. */
  async #bury(): Promise<boolean> {
    return await this.connection.transaction(async (db) => {
      const [job] = await this.#boss.fetch<CaseData>(this.#dead, { includeMetadata: true, db: adapter(db) });
      if (!job) return false;
      const { hash } = job.data;
      const failures = await db.query<{ failure: string }>(
        `select failure from fieldassay.attempt where hash = $1 and failure is not null order by id desc limit ${TRIES}`,
        [hash],
      );
      // Expired by the queue itself, it has no failure of its own.
      const reasons = [...new Set(failures.map(({ failure }) => failure).reverse())];
      const reason = reasons.join('; ') || 'no worker came to an end with it';
      await db.query(
        `insert into fieldassay.result (hash, status, reason) values ($1, 'failed', $2) on conflict (hash) do nothing`,
        [hash, reason],
      );
      await this.#boss.complete(this.#dead, job.id, {}, { db: adapter(db) });
      return true;
    });
  }

  async #findQueues(): Promise<void> {
    const found = await this.#boss.getQueues();
    this.#queues = found
      .flatMap(({ name }) => {
        const power = name.startsWith(`${this.#prefix}-`) ? name.slice(this.#prefix.length + 1) : '';
        return /^\d+$/.test(power) ? [{ name, limit: SMALLEST * 2 ** Number(power) }] : [];
      })
      .sort((a, b) => b.limit - a.limit);
  }

  /** Ends housekeeping and the connection. */
  async close(): Promise<void> {
    await this.#boss.stop({ graceful: false, close: false }).catch(() => {});
    await this.connection.close();
  }
}

interface Orphan {
  readonly id: string;
  readonly queue: string;
  readonly job: string;
  readonly host: string;
  readonly pid: number;
  readonly process: number;
}

function newJob(name: string, { cost, bytes: _, ...data }: SentCase): PgBoss.JobInsert<CaseData> {
  const keepUntil = new Date(Date.now() + KEEP_YEARS * 365 * 86_400_000).toISOString();
  // Milliseconds, as far as an integer goes: longest first.
  const priority = Math.min(2 ** 31 - 1, Math.round(1000 * cost));
  return { id: jobOf(data.hash), name, data, priority, keepUntil, expireInSeconds: EXPIRE_SECONDS };
}

/** Ends an attempt; whether it was still open. */
async function end(db: Statements, attempt: string, failure: string | null): Promise<boolean> {
  const rows = await db.query(
    'update fieldassay.attempt set ended = now(), failure = $2 where id = $1 and ended is null returning id',
    [attempt, failure],
  );
  return rows.length > 0;
}

/** What pg-boss runs its statements with. */
const adapter = (db: Statements): PgBoss.Db => ({
  executeSql: async (text, values) => ({ rows: await db.query(text, values) }),
});
