import { expect, test } from 'vitest';
import type { GridRun } from '../../src/fdtd/run.ts';
import { bundle, startFollowers } from '../fdtd/bundle.mjs';
import { compareWithReference } from '../fdtd/identity.ts';
import { randomProblem, randomSchedule } from '../fdtd/problems.ts';

test('2000 random problems give the bits of the plain reference on one to four threads', async () => {
  const followers = startFollowers((await bundle({ run: 'src/fdtd/run.ts' }))('run'), 3);
  for (let seed = 10_001; seed <= 12_000; seed++) {
    const problem = randomProblem(seed);
    const { threads: dice, ...schedule } = randomSchedule(seed);
    const threads = seed % 2 ? 1 : dice + 1;
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
