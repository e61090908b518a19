import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, onTestFinished, test } from 'vitest';
import { marchAlone } from '../../src/fdtd/run.ts';
import { prepareCase } from '../../src/run/compare.ts';
import { runGrid } from '../../src/run/gridRun.ts';
import { Team, WorkerDied } from '../../src/run/pool.ts';
import { SMALL } from './surveyFolder.ts';

/** Words of the memory that a leader and its followers talk by (src/fdtd/run.ts): only they add to them. */
const WORDS = { leader: 512, follower: 528 } as const;

test.each(['leader', 'follower'] as const)(
  'a %s that is lost in the middle of a run leaves none waiting: the next run of the same team is whole',
  async (who) => {
    const folder = mkdtempSync(join(tmpdir(), 'fieldassay-lost-'));
    onTestFinished(() => rmSync(folder, { recursive: true, force: true }));
    const first = join(folder, 'first.cjs');
    // The first to come to its third turn ends there; who comes after it finds the file.
    writeFileSync(
      first,
      `const { add } = Atomics;
      let turns = 0;
      Atomics.add = (words, index, value) => {
        if (index === ${WORDS[who]} && ++turns === 3)
          try {
            require('node:fs').writeFileSync(${JSON.stringify(join(folder, 'once'))}, '', { flag: 'wx' });
            process.exit(7);
          } catch (error) {
            if (error.code !== 'EEXIST') throw error;
          }
        return add(words, index, value);
      };`,
    );
    const { NODE_OPTIONS = '' } = process.env;
    process.env.NODE_OPTIONS = `${NODE_OPTIONS} --require=${first}`;
    const team = new Team(3);
    process.env.NODE_OPTIONS = NODE_OPTIONS;
    onTestFinished(() => team.end());

    const { box } = prepareCase(SMALL);
    await expect(runGrid(team, box, null, () => {})).rejects.toThrow(WorkerDied);
    const { samples } = await runGrid(team, box, null, () => {});
    expect(samples.map((values) => Array.from(values))).toEqual(
      marchAlone(box).samples.map((values) => Array.from(values)),
    );
  },
);
