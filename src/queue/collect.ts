import { memoryLimit } from '#platform';
import type { Engine, SurveyRun } from '../run/survey.ts';
import { type Entry, hashOf, keptOutcome, wholeSurvey } from '../run/surveyCases.ts';
import type { Address } from './address.ts';
import { CaseQueue, CHANNELS, type SentCase } from './cases.ts';
import { Connection, later } from './connection.ts';
import { ownRelease } from './release.ts';

/** Cases are sent while others are still planned, milliseconds. */
const SEND_EVERY = 500;
const LOOK_EVERY = 300;
const UPKEEP_EVERY = 2000;

/** Texts of outcomes that are in memory at a time. */
const OUTCOMES_AT_ONCE = 16;
const ROWS_AT_ONCE = 1000;

/** The rate is told over the last of so many seconds. */
const RATE_SECONDS = 60;

/**
 * Cases by workers elsewhere: hands them to the queue at an address, and collects what they come to. What was handed over
 * stays there when this process ends; the same survey again goes on collecting.
 * @param say hears what becomes of the connection
 */
export const queueAt =
  (address: Address, say: (text: string) => void): Engine =>
  async (run) => {
    const connection = await Connection.open(address, 'fieldassay survey', {
      say,
      ...(run.signal ? { signal: run.signal } : {}),
    });
    const queue = await CaseQueue.open(connection, await ownRelease()).catch(async (error) => {
      await connection.close();
      throw error;
    });
    try {
      await new Collection(run, queue).run();
    } finally {
      await queue.close();
    }
  };

/** One survey on its way through a queue. */
class Collection {
  readonly #waiting: Map<string, Entry>;
  /** place of a case in the meter */
  readonly #places = new Map<string, number>();
  readonly #finished: number[] = [];
  #id = '';
  #known = 0;
  #upkept = Number.NEGATIVE_INFINITY;

  constructor(
    readonly survey: SurveyRun,
    readonly queue: CaseQueue,
  ) {
    this.#waiting = new Map(survey.waiting().map((entry) => [entry.hash, entry]));
  }

  async run(): Promise<void> {
    const { survey, queue } = this;
    await this.#register();
    await queue.appear({ role: 'collector', survey: this.#id });
    queue.connection.patient = true;
    await queue.upkeep(new Set());
    await this.#forgetFailures();
    await this.#contribute();
    await this.#collect();
    survey.meter.report();
    await this.#send();
    const announced = await queue.connection.listen(CHANNELS.results);
    while (this.#waiting.size > 0) {
      await this.#look();
      // Looking costs more than a result that is announced is worth, save towards the end.
      if (this.#waiting.size > OUTCOMES_AT_ONCE) await later(LOOK_EVERY, survey.signal);
      else if (this.#waiting.size > 0) await announced.wait(LOOK_EVERY, survey.signal);
    }
  }

  /** Writes the survey and its cases down, for workers to be found by and for whoever asks the tables. */
  async #register(): Promise<void> {
    const { survey, queue } = this;
    const { title } = survey.survey;
    const { version, resultSchema } = queue.release;
    const entries = survey.cases.entries;
    const whole = wholeSurvey(survey.survey);
    this.#id = await hashOf({ version, resultSchema, title, whole, cases: entries.map(({ hash }) => hash) });
    await queue.connection.transaction(async (db) => {
      await db.query(
        `insert into fieldassay.survey (id, title, version, result_schema, survey) values ($1, $2, $3, $4, $5)
         on conflict (id) do nothing`,
        [this.#id, title, version, resultSchema, JSON.stringify(whole)],
      );
      for (let first = 0; first < entries.length; first += ROWS_AT_ONCE)
        await db.query(
          `insert into fieldassay.survey_case (survey, number, hash, settings)
           select $1, number, hash, settings
           from json_to_recordset($2) as given (number integer, hash text, settings json)
           on conflict do nothing`,
          [
            this.#id,
            JSON.stringify(
              entries
                .slice(first, first + ROWS_AT_ONCE)
                .map(({ hash, settings }, n) => ({ number: first + n, hash, settings })),
            ),
          ],
        );
    });
  }

  /** A case that had failed is tried anew when its survey is started again, as it would be here. */
  async #forgetFailures(): Promise<void> {
    await this.queue.connection.query(
      `delete from fieldassay.result where status = 'failed' and hash in
         (select hash from fieldassay.survey_case where survey = $1)`,
      [this.#id],
    );
  }

  /** Adds to the tables what was known here beforehand. */
  async #contribute(): Promise<void> {
    const { survey, queue } = this;
    const rows = await queue.connection.query<{ hash: string }>(
      `select distinct hash from fieldassay.survey_case where survey = $1
         and not exists (select from fieldassay.result where result.hash = survey_case.hash)`,
      [this.#id],
    );
    const missing = new Set(rows.map(({ hash }) => hash));
    for (const entry of survey.unique) if (missing.has(entry.hash)) await this.#tell(entry);
  }

  async #tell({ status, hash, reason }: Entry): Promise<void> {
    const outcome = status === 'done' ? keptOutcome(this.survey.store.load(hash), hash) : null;
    if (outcome || status === 'refused')
      await this.queue.connection.query(
        `insert into fieldassay.result (hash, status, reason, outcome) values ($1, $2, $3, $4)
         on conflict (hash) do nothing`,
        [hash, status, reason, outcome && JSON.stringify(outcome)],
      );
  }

  /** Plans cases and sends them on the way; those that are refused here are told of. */
  async #send(): Promise<void> {
    const { survey, queue } = this;
    const limit = memoryLimit();
    let batch: SentCase[] = [];
    let sent = performance.now();
    for (const entry of [...this.#waiting.values()]) {
      const { cost, bytes } = await survey.plan(entry);
      this.#places.set(entry.hash, survey.meter.add(cost));
      if (entry.status === 'waiting') {
        const { hash, json, settings } = entry;
        const title = survey.survey.title;
        const { reflections } = survey;
        batch.push({ hash, scenario: json, reflections, memoryLimit: limit, title, settings, cost, bytes });
      } else {
        await this.#tell(entry);
        this.#done(entry.hash);
      }
      if (performance.now() - sent > SEND_EVERY) {
        await queue.send(batch);
        batch = [];
        await this.#look();
        sent = performance.now();
      }
    }
    await queue.send(batch);
  }

  async #look(): Promise<void> {
    const now = performance.now();
    if (now - this.#upkept > UPKEEP_EVERY) {
      await this.queue.upkeep(new Set());
      this.#upkept = now;
    }
    await this.#collect();
    await this.#remark();
    this.survey.meter.report();
  }

  /** Fetches what is new. A few outcomes at a time: a survey's are not held together before all are there. */
  async #collect(): Promise<void> {
    const { connection } = this.queue;
    const of = `from fieldassay.result where hash in (select hash from fieldassay.survey_case where survey = $1)`;
    const [{ count }] = (await connection.query(`select count(*)::int as count ${of}`, [this.#id])) as [
      { count: number },
    ];
    if (count === this.#known) return;
    const rows = await connection.query<{ hash: string; status: string; reason: string | null }>(
      `select hash, status, reason ${of}`,
      [this.#id],
    );
    this.#known = rows.length;
    const fresh = rows.filter(({ hash }) => this.#waiting.has(hash));
    for (const { hash, status, reason } of fresh)
      if (status !== 'done') {
        const entry = this.#waiting.get(hash)!;
        entry.status = status as 'refused' | 'failed';
        entry.reason = reason;
        this.#done(hash);
      }
    const done = fresh.filter(({ status }) => status === 'done').map(({ hash }) => hash);
    for (let first = 0; first < done.length; first += OUTCOMES_AT_ONCE) {
      this.survey.signal?.throwIfAborted();
      const outcomes = await connection.query<{ hash: string; outcome: string }>(
        'select hash, outcome::text as outcome from fieldassay.result where hash = any($1)',
        [done.slice(first, first + OUTCOMES_AT_ONCE)],
      );
      for (const { hash, outcome } of outcomes) this.#keep(this.#waiting.get(hash)!, outcome);
    }
  }

  #keep(entry: Entry, outcome: string): void {
    this.survey.keep(entry, JSON.parse(outcome));
    this.#done(entry.hash);
  }

  #done(hash: string): void {
    this.#waiting.delete(hash);
    this.#finished.push(performance.now());
    const place = this.#places.get(hash) ?? this.survey.meter.add(0);
    this.survey.meter.done(place);
  }

  /** How many work, and how fast. */
  async #remark(): Promise<void> {
    const { version, resultSchema } = this.queue.release;
    const [{ workers }] = (await this.queue.connection.query(
      `select count(*)::int as workers from fieldassay.present where role = 'worker' and version = $1 and result_schema = $2`,
      [version, resultSchema],
    )) as [{ workers: number }];
    const last = this.#finished.at(-1) ?? 0;
    while (this.#finished.length > 0 && last - this.#finished[0]! > 1000 * RATE_SECONDS) this.#finished.shift();
    const minutes = (last - (this.#finished[0] ?? last)) / 60_000;
    const rate = minutes > 0.05 ? Math.round((this.#finished.length - 1) / minutes) : 0;
    this.survey.meter.remark(
      workers === 0
        ? ', no worker is there: start some with `fieldassay work`'
        : `, ${workers} worker${workers === 1 ? '' : 's'}${rate > 0 ? `, ${rate} a minute` : ''}`,
    );
  }
}
