import { uniformInt } from 'pure-rand/distribution/uniformInt';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { expect, test } from 'vitest';
import { type Running, until } from '../queue/processes.ts';
import { queueStage } from '../queue/stage.ts';
import { collectorMemory } from '../queue/standIn.ts';
import { KILLED, SMALL, timeless } from '../run/surveyFolder.ts';

const stage = queueStage();

const work = (database: string) =>
  stage.processes.start(['work', '--queue', stage.postgres.url(database), '--threads', '1']);
const collect = (survey: string, out: string, database: string) =>
  stage.processes.start(['survey', survey, '--out', out, '--queue', stage.postgres.url(database)]);
const wait = (milliseconds: number) => new Promise((next) => setTimeout(next, milliseconds));

test('workers killed, the server restarted and the collector killed, at moments drawn by a seed: the same table', async () => {
  const survey = stage.folder.write('killed.json', KILLED);
  stage.folder.run(survey, '--out', 'whole', '--threads', '2');
  const whole = JSON.stringify(timeless(stage.folder.read('whole/survey-result.json')));
  const random = xoroshiro128plus(20_250_917);
  for (let round = 0; round < 12; round++) {
    const database = `round_${round}`;
    await stage.postgres.newDatabase(database);
    let collector = collect(survey, database, database);
    let workers = [work(database), work(database)];
    for (let blow = 0; blow < 2; blow++) {
      await wait(uniformInt(random, 300, 2500));
      switch (uniformInt(random, 0, 2)) {
        case 0:
          await workers[0]!.kill();
          workers = [workers[1]!, work(database)];
          break;
        case 1:
          await stage.postgres.stop();
          await wait(uniformInt(random, 0, 1500));
          await stage.postgres.run();
          break;
        default:
          await collector.kill();
          collector = collect(survey, database, database);
      }
    }
    // A blow in a command's first second is an error at once, which starting it again mends.
    const live = async (running: Running, again: () => Running) => {
      await wait(500);
      return running.child.exitCode === null ? running : again();
    };
    workers = await Promise.all(workers.map((worker) => live(worker, () => work(database))));
    collector = await live(collector, () => collect(survey, database, database));
    expect(await collector.ended, collector.said).toBe(0);
    expect(JSON.stringify(timeless(stage.folder.read(`${database}/survey-result.json`)))).toBe(whole);
    const rows = await stage.postgres.sql('select hash from fieldassay.result', database);
    expect(rows).toHaveLength(6);
    for (const worker of workers) await worker.kill('SIGINT');
  }
}, 1_800_000);

test('a case that takes its worker with it is told of after three of them, and the others are done', async () => {
  const survey = stage.folder.write('deadly.json', {
    scenario: { ...SMALL, duration: '2.2 ns', grid: { ...SMALL.grid, cellSize: '14 mm' } },
    // The first takes seconds, the others tenths of them.
    vary: { 'grid.cellSize': ['5 mm', '13 mm', '14 mm'] },
  });
  await stage.postgres.newDatabase('deadly');
  const collector = collect(survey, 'deadly', 'deadly');
  const deadly = async () => {
    const open = await stage.postgres
      .sql<{ number: number }>(
        `select number from fieldassay.attempt join fieldassay.survey_case using (hash) where ended is null`,
        'deadly',
      )
      .catch(() => []);
    return open.some(({ number }) => number === 0);
  };
  for (let lives = 0; lives < 3; lives++) {
    const victim = work('deadly');
    await until('the case to be taken', deadly);
    await victim.kill();
    await until('the loss to be noticed', async () => !(await deadly()));
  }
  const last = work('deadly');
  expect(await collector.ended, collector.said).toBe(3);
  await last.kill('SIGINT');
  const { cases } = timeless(stage.folder.read('deadly/survey-result.json'));
  expect(cases.map(({ status }) => status)).toEqual(['failed', 'done', 'done']);
  expect(cases[0]!.reason).toMatch(/^its worker, process \d+ on \S+, was lost; its worker, .*; its worker, /);
}, 300_000);

test('10 000 cases: the collector holds no more at the end than at the beginning', async () => {
  const cases = 10_000;
  const survey = stage.folder.write('many.json', {
    title: 'Many',
    scenario: { ...SMALL, duration: '2.2 ns', grid: { ...SMALL.grid, cellSize: '14 mm' } },
    vary: { 'grid.courant': Array.from({ length: cases }, (_, n) => 0.5 + n / (3 * cases)) },
  });
  await stage.postgres.newDatabase('many');
  const collector = collect(survey, 'many', 'many');
  const worker = work('many');
  await worker.saying(/^done/m);
  await worker.kill('SIGKILL');
  await until(
    'all to be sent',
    async () => {
      const [row] = await stage.postgres.sql<{ count: number }>(
        'select count(*)::int as count from fieldassay_queue.job',
        'many',
      );
      return row!.count >= cases;
    },
    600,
  );
  const held = await collectorMemory(stage.postgres, 'many', collector, cases);
  console.log(`collector: ${held.map((bytes) => Math.round(bytes / 1e6)).join(', ')} MB`);
  // What comes in is 110 MB; a young generation of garbage is some tens.
  expect(Math.max(...held) - held[0]!).toBeLessThan(60e6);
  expect(await collector.ended).toBe(0);
}, 3_600_000);
