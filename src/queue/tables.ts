import { Refusal } from '../run/refusal.ts';
import { VERSION } from '../run/version.ts';
import type { Connection } from './connection.ts';

/** The first half of every advisory lock of ours; the second is the number of a process, or 0 for installing. */
export const LOCK = 0x0f1e_1da5;

/**
 * The tables, one step after another: a step that was released is never edited, only followed. `outcome` is json, not
 * jsonb: it comes back letter for letter.
 */
const STEPS: readonly string[] = [
  `
  create table fieldassay.survey (
    id text primary key,
    title text not null,
    version text not null,
    result_schema text not null,
    survey json not null,
    handed_over timestamptz not null default now()
  );
  comment on table fieldassay.survey is 'Surveys that were handed over to workers.';

  create table fieldassay.process (
    id integer generated always as identity primary key,
    role text not null check (role in ('worker', 'collector')),
    host text not null,
    pid integer not null,
    version text not null,
    result_schema text not null,
    threads integer,
    survey text references fieldassay.survey on delete cascade,
    started timestamptz not null default now()
  );
  comment on table fieldassay.process is 'Who ever took or collected cases; those who are there now: fieldassay.present.';

  create table fieldassay.survey_case (
    survey text not null references fieldassay.survey on delete cascade,
    number integer not null,
    hash text not null,
    settings json not null,
    primary key (survey, number)
  );
  create index on fieldassay.survey_case (hash);
  comment on table fieldassay.survey_case is 'Cases of surveys in order; what they came to is in fieldassay.result under their hash.';

  create table fieldassay.attempt (
    id bigint generated always as identity primary key,
    hash text not null,
    queue text not null,
    job uuid not null,
    process integer not null references fieldassay.process,
    started timestamptz not null default now(),
    ended timestamptz,
    failure text
  );
  create index on fieldassay.attempt (hash);
  create index on fieldassay.attempt (process) where ended is null;
  comment on table fieldassay.attempt is 'Each time that a worker took a case; without failure where it was done or given back.';

  create table fieldassay.result (
    hash text primary key,
    status text not null check (status in ('done', 'refused', 'failed')),
    reason text,
    outcome json,
    process integer references fieldassay.process,
    finished timestamptz not null default now(),
    check ((status = 'done') = (outcome is not null))
  );
  comment on table fieldassay.result is 'What cases came to, each once; the outcome as in survey-result.json.';

  create view fieldassay.present as
    select process.* from fieldassay.process process
    where exists (
      select from pg_locks lock
      where lock.locktype = 'advisory' and lock.granted and lock.objsubid = 2
        and lock.classid::bigint = ${LOCK} and lock.objid::bigint = process.id
        and lock.database = (select oid from pg_database where datname = current_database()));
  comment on view fieldassay.present is 'Workers and collectors that are connected now.';

  create view fieldassay.case_table as
    select
      survey.title, survey_case.survey, survey_case.number, survey_case.settings,
      coalesce(result.status, 'waiting') as status,
      result.reason,
      (result.outcome #>> '{cellSize,0}')::float8 as dx,
      (result.outcome #>> '{budget,total,relativeL2}')::float8 as total_error,
      (result.outcome #>> '{budget,boundary,relativeL2}')::float8 as boundary_error,
      (result.outcome #>> '{budget,lattice,relativeL2}')::float8 as lattice_error,
      (result.outcome #>> '{budget,gridding,relativeL2}')::float8 as gridding_error,
      (result.outcome #>> '{cost,cellUpdates}')::float8 as cell_updates,
      (result.outcome #>> '{cost,memoryBytes}')::float8 as memory_bytes,
      result.outcome #>> '{verdict}' as verdict,
      process.host, result.finished, survey_case.hash
    from fieldassay.survey_case
      join fieldassay.survey on survey.id = survey_case.survey
      left join fieldassay.result on result.hash = survey_case.hash
      left join fieldassay.process on process.id = result.process;
  comment on view fieldassay.case_table is 'Every case of every survey, a line each; errors relative, in SI units.';
  `,
];

/**
 * Makes the tables, or brings them up to date, while nobody else does.
 * @param also what else is to be made meanwhile
 * @throws Refusal where a later version of Fieldassay made them; ServerError where a right is lacking
 */
export async function install(connection: Connection, also: () => Promise<void>): Promise<void> {
  await connection.query('select pg_advisory_lock($1::int, 0)', [LOCK]);
  try {
    const [{ made }] = (await connection.query(`select to_regclass('fieldassay.step') is not null as made`)) as [
      { made: boolean },
    ];
    if (!made)
      await connection.transaction(async (db) => {
        // A schema that an administrator prepared needs no right to make schemas.
        const [{ there }] = (await db.query(`select to_regnamespace('fieldassay') is not null as there`)) as [
          { there: boolean },
        ];
        if (!there) await db.query('create schema fieldassay');
        await db.query('create table fieldassay.step (number integer primary key, made timestamptz default now())');
      });
    const [{ count }] = (await connection.query('select count(*)::int as count from fieldassay.step')) as [
      { count: number },
    ];
    if (count > STEPS.length)
      throw new Refusal([
        {
          path: '',
          value: count,
          message:
            `The tables in ${connection.address.name} have had ${count} steps, made by a later Fieldassay; ` +
            `this is ${VERSION}, which knows ${STEPS.length}. Update it.`,
        },
      ]);
    for (const [n, step] of STEPS.entries())
      if (n >= count)
        await connection.transaction(async (db) => {
          await db.query(step);
          await db.query('insert into fieldassay.step (number) values ($1)', [n + 1]);
        });
    await also();
  } finally {
    await connection.query('select pg_advisory_unlock($1::int, 0)', [LOCK]).catch(() => {});
  }
}
