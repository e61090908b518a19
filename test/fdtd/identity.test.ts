import { expect, test } from 'vitest';
import { compareWithReference } from './identity.ts';
import { randomProblem, randomSchedule } from './problems.ts';

test('the kernel gives the bits of the plain reference, for any problem and any schedule', () => {
  for (let seed = 1; seed <= 200; seed++) {
    const problem = randomProblem(seed);
    const { threads: _, ...schedule } = randomSchedule(seed);
    const { difference } = compareWithReference(problem, { schedule }, seed);
    expect(
      difference,
      `seed ${seed}: ${JSON.stringify({ ...problem, currents: problem.currents.count, samples: 0, schedule })}`,
    ).toBeUndefined();
  }
});
