import { spawnSync } from 'node:child_process';
import type { PostgresServer } from './postgres.ts';
import type { Running } from './processes.ts';

/** Bytes of memory that a process holds. */
export const residentBytes = ({ child }: Running): number =>
  1024 * Number(spawnSync('ps', ['-o', 'rss=', '-p', String(child.pid)], { encoding: 'utf8' }).stdout);

/**
 * Answers cases that wait in a database with the outcome of one that a worker has run there, so many at a time.
 * @returns how many are answered by now
 */
async function answerSome(postgres: PostgresServer, database: string, count: number): Promise<number> {
  await postgres.sql(
    `insert into fieldassay.result (hash, status, outcome)
     select waiting.hash, 'done', (select outcome from fieldassay.result where status = 'done' limit 1)
     from (select hash from fieldassay.survey_case except select hash from fieldassay.result limit ${count}) as waiting`,
    database,
  );
  const [row] = await postgres.sql<{ count: number }>('select count(*)::int as count from fieldassay.result', database);
  return row!.count;
}

/**
 * What a collector holds while a survey of many cases comes in: bytes after each tenth of it.
 */
export async function collectorMemory(
  postgres: PostgresServer,
  database: string,
  collector: Running,
  cases: number,
): Promise<number[]> {
  const tenth = Math.ceil(cases / 10);
  const held: number[] = [];
  let answered = 0;
  while (answered < cases) {
    answered = await answerSome(postgres, database, Math.min(tenth, 200));
    await collector.saying(new RegExp(`^${answered} of ${cases} cases`, 'm'));
    if (Math.floor(answered / tenth) > held.length) held.push(residentBytes(collector));
  }
  return held;
}
