/** Films of several walls around the same sources, and of the exact field that they share, off the page's own thread. */
import { z } from 'zod';
import { threadsAvailable } from '#platform';
import type { GridFrames } from '../../run/planes.ts';
import { filmExact, filmGrid, filmOf } from '../../run/planes.ts';
import { Team } from '../../run/pool.ts';
import { questionOf } from '../../run/question.ts';
import { loadScenario } from '../../scenario/load.ts';
import type { Scenario } from '../../scenario/model.ts';
import type { ExactCells, FilmOf } from '../../scene/film.ts';
import { planesShown, shownSlice } from '../../scene/slices.ts';
import { heed } from '../heed.ts';

const requestSchema = z.object({
  /** that differ by their walls alone */
  scenarios: z.array(z.unknown()).min(1).readonly(),
});
export type FilmRequest = z.infer<typeof requestSchema>;

export type FilmReport =
  | ({ readonly kind: 'film' } & FilmOf)
  | ({ readonly kind: 'grid'; readonly wall: number } & GridFrames)
  | ({ readonly kind: 'exact' } & ExactCells)
  | { readonly kind: 'progress'; readonly stage: string; readonly fraction: number }
  | { readonly kind: 'done' }
  | { readonly kind: 'failed'; readonly message: string };

const tell = (report: FilmReport, transfer: Transferable[] = []) => postMessage(report, { transfer });

heed(
  requestSchema,
  ({ scenarios }) => film(scenarios),
  ({ message }) => tell({ kind: 'failed', message }),
);

function scenarioOf(json: unknown): Scenario {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
  return loaded.scenario;
}

async function film(jsons: readonly unknown[]): Promise<void> {
  const scenarios = jsons.map(scenarioOf);
  const first = scenarios[0]!;
  const team = new Team(threadsAvailable());
  const { every, instants } = filmOf(questionOf(first));
  const slices = [shownSlice(first, planesShown(first)[0]!)];
  const [slice] = slices;
  tell({ kind: 'film', slices, instants, every });
  for (const [wall, scenario] of scenarios.entries())
    await filmGrid(team, questionOf(scenario), slices, new Int32Array(0), (frames) => {
      tell({
        kind: 'progress',
        stage: `the grid with walls ${wall + 1} of ${scenarios.length}`,
        fraction: (0.6 * wall) / scenarios.length,
      });
      tell(
        { kind: 'grid', wall, ...frames },
        frames.slices.map((data) => data.buffer as ArrayBuffer),
      );
    });
  const all = Array.from({ length: slice!.nu * slice!.nv }, (_, p) => p);
  let done = 0;
  await filmExact(team, jsons[0], slice!, instants, all, 'designed', (cells, data) => {
    done += cells.length;
    tell({ kind: 'progress', stage: 'the exact field', fraction: 0.6 + (0.4 * done) / all.length });
    tell({ kind: 'exact', slice: 0, cells, coarse: 1, data }, [data.buffer as ArrayBuffer]);
  });
  tell({ kind: 'done' });
}
