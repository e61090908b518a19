import { expect, test } from 'vitest';
import type { GridRun } from '../../src/fdtd/run.ts';
import { bundle, startFollowers } from './bundle.mjs';
import { compareWithReference } from './identity.ts';
import { randomProblem, randomSchedule } from './problems.ts';

test('two and three threads give the bits of the plain reference', async () => {
  const followers = startFollowers((await bundle({ run: 'src/fdtd/run.ts' }))('run'), 2);
  for (let seed = 1001; seed <= 1100; seed++) {
    const problem = randomProblem(seed);
    const { threads: dice, ...schedule } = randomSchedule(seed);
    const threads = 2 + (dice % 2);
    let left: Promise<unknown> = Promise.resolve();
    const help = (run: GridRun) => {
      left = followers.follow(run.setup);
    };
    const { difference } = compareWithReference(problem, { threads, schedule }, seed, help);
    await left;
    expect(difference, `seed ${seed}, ${threads} threads, ${JSON.stringify(schedule)}`).toBeUndefined();
  }
  await followers.stop();
});
