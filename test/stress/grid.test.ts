import { Worker } from 'node:worker_threads';
import { expect, test } from 'vitest';
import type { GridRun } from '../../src/fdtd/run.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { bundle, startFollowers } from '../fdtd/bundle.mjs';
import { compareWithReference } from '../fdtd/identity.ts';
import { cpml, edgesOf, everyFace, MUR, PULSE, plainProblem, randomProblem, randomSchedule } from '../fdtd/problems.ts';

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

test('1000 runs of four threads end, with the bits of the plain reference, while the machine is busy with other things', async () => {
  // Threads that wait for each other must not need a processor each: a loop that never rests takes some of their time.
  const busy = new Worker('for (;;);', { eval: true });
  const followers = startFollowers((await bundle({ run: 'src/fdtd/run.ts' }))('run'), 3);
  let longest = 0;
  try {
    for (let seed = 20_001; seed <= 21_000; seed++) {
      const { threads: _, ...schedule } = randomSchedule(seed);
      let left: Promise<unknown> = Promise.resolve();
      const started = performance.now();
      const { difference, result } = compareWithReference(
        randomProblem(seed),
        { threads: 4, schedule },
        seed,
        (run) => {
          left = followers.follow(run.setup);
        },
        // Some ten thousand times what such a run takes when nothing else runs.
        () => performance.now() - started > 60_000,
      );
      expect(result.outcome, `seed ${seed}, ${JSON.stringify(schedule)}`).toBe('done');
      await left;
      longest = Math.max(longest, performance.now() - started);
      expect(difference, `seed ${seed}, ${JSON.stringify(schedule)}`).toBeUndefined();
    }
    console.log(`1000 runs of four threads beside a busy loop, the longest took ${longest.toFixed(0)} ms`);
  } finally {
    await Promise.all([followers.stop(), busy.terminate()]);
  }
});

test.each([
  ['single', 440],
  ['double', 320],
] as const)('the last cells of the largest lattices march like those of a small one (%s, %i³)', (precision, size) => {
  // Information moves one cell a step, so within 14 steps a source near the high corner sees the same surroundings.
  const steps = 14;
  const far = (cells: number, boundary: typeof MUR, layers: number) => {
    const node = [cells - 5, cells - 4, cells - 6];
    const cell = [cells - 1, cells - 2, cells - 1, cells - 4, cells - 1, cells - 9];
    const problem = plainProblem([cells, cells, cells], {
      precision,
      steps,
      boundary: everyFace(boundary),
      pad: everyFace(layers),
      currents: edgesOf([{ axis: 1, node, delay: -0.8e-9 }], PULSE),
      samples: [{ cell: Int32Array.from(cell), every: 1 }],
    });
    return marchAlone(problem).samples;
  };
  const layered = far(size, cpml(10), 10);
  expect(Math.max(...layered[0]!)).toBeGreaterThan(1e-3);
  expect(layered).toEqual(far(40, cpml(10), 10));
  expect(far(size, MUR, 0)).toEqual(far(40, MUR, 0));
});
