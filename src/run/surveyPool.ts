import { memoryLimit } from '#platform';
import type { Means } from './answers.ts';
import { withTeam } from './compare.ts';
import { type Job, runBeside, scheduleOf } from './schedule.ts';
import { Shared } from './share.ts';
import type { Engine } from './survey.ts';
import { runCase } from './surveyCase.ts';
import { shareKey } from './surveyCases.ts';

/** Work that cases which differ by their walls alone have in common. */
export const SHARED = ['free', 'reflectionFree', 'guide', 'integrals', 'lattice'] as const;

/** Cases on the threads of this process. */
export const pool: Engine = async (run) => {
  const { signal, threads, reflections } = run;
  const waiting = run.waiting();
  const shared = new Shared();
  const jobs: Job[] = [];
  for (const entry of waiting) jobs.push(await run.plan(entry));
  const keyOf = (work: string, json: Record<string, unknown>) => `${work} ${shareKey(json)}`;
  for (const { json, status } of waiting)
    if (status === 'waiting') for (const work of SHARED) shared.expect(keyOf(work, json));
  for (const { cost } of jobs) run.meter.add(cost);

  const act = async (index: number, means: Pick<Means, 'team' | 'gridThreads'>) => {
    const entry = waiting[index]!;
    await run.breathe();
    if (entry.status === 'waiting')
      try {
        const outcome = await runCase(
          entry.json,
          {
            ...means,
            share: (work, make) => shared.take(keyOf(work, entry.json), make),
            onProgress: ({ fraction }) => run.meter.at(index, fraction),
          },
          reflections,
        );
        run.keep(entry, outcome);
      } catch (error) {
        if (signal?.aborted) throw error;
        run.fail(entry, error);
      }
    run.meter.done(index);
  };
  const memory = memoryLimit();
  const schedule = scheduleOf(jobs, threads, memory);
  run.meter.report();
  if (waiting.length > 0)
    await withTeam(threads, signal, async (team) => {
      for (const index of schedule.alone) await act(index, { team, gridThreads: threads });
      // One more than threads: while one is concluded, no thread is idle.
      await runBeside(schedule.beside, jobs, threads + 1, memory, (index) => act(index, { team, gridThreads: 1 }));
    });
};
