import { afterAll, beforeAll, expect, test } from 'vitest';
import { Team } from '../../src/run/pool.ts';
import { questionOf } from '../../src/run/question.ts';
import { boxRegion, frameOf, planeRegion, takeSnapshots } from '../../src/run/snapshots.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Slab } from '../../src/trace/snapshots.ts';
import { SMALL } from './surveyFolder.ts';

let team: Team;
beforeAll(() => {
  team = new Team(2);
});
afterAll(() => team.end());

const loaded = loadScenario(SMALL);
if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
const { scenario } = loaded;

async function taken(marchBytes?: number): Promise<{ slabs: (Slab & { region: number })[]; stages: string[] }> {
  const question = questionOf(scenario);
  const regions = [planeRegion(scenario, { name: 'yz', normal: 0, at: 0.01 }), boxRegion(scenario, 3)];
  const slabs: (Slab & { region: number })[] = [];
  const stages: string[] = [];
  await takeSnapshots(
    team,
    question,
    SMALL,
    regions,
    frameOf(question, 6),
    (region, slab) => slabs.push({ region, ...slab, values: slab.values.slice() }),
    ({ stage, fraction }) => {
      expect(fraction).toBeGreaterThanOrEqual(0);
      expect(fraction).toBeLessThanOrEqual(1 + 1e-12);
      stages.push(stage);
    },
    marchBytes,
  );
  return { slabs, stages };
}

test('however little memory one march may take, the same values come, each cell once a side', async () => {
  const { slabs } = await taken();
  const few = await taken(20_000);
  // A plane of 14 × 14 cells in rows of one, and a box of 5 × 5 × 5.
  for (const [region, cells] of [
    [0, 14 * 14],
    [1, 5 * 5 * 5],
  ] as const)
    for (const side of ['grid', 'exact'])
      for (const { slabs: list } of [{ slabs }, few]) {
        const own = list.filter((slab) => slab.region === region && slab.side === side);
        expect(own.reduce((sum, { values }) => sum + values.length, 0)).toBe(cells * 6 * 6);
      }
  expect(few.slabs.filter(({ side }) => side === 'grid')).toEqual(slabs.filter(({ side }) => side === 'grid'));
  expect(few.slabs).toHaveLength(slabs.length);
});

test('only cells on a source have no exact field', async () => {
  const { slabs } = await taken();
  const missing = slabs.map(({ side, values }) => [side, values.filter(Number.isNaN).length] as const);
  // The dipole at (1, −2, 3) mm: Hx of the node at the origin, (0, 6, 6) mm, is no nearer than 0.3 cells.
  for (const [side, count] of missing) expect(side === 'grid' ? count : count % 36).toBe(0);
  expect(missing.reduce((sum, [, count]) => sum + count, 0)).toBeLessThanOrEqual(2 * 36);
});
