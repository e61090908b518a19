import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { Picture } from '../draw/picture.ts';
import { animatedPng, png } from '../draw/png.ts';
import { cameraFor, type Rectangle } from '../draw/projection.ts';
import { FONT_FILES, TextPainter } from '../draw/text.ts';
import { formatQuantity } from '../elementary/quantity.ts';
import { Refusal } from '../run/compare.ts';
import { filmExact, filmGrid, filmOf } from '../run/planes.ts';
import type { Team } from '../run/pool.ts';
import type { Progress } from '../run/progress.ts';
import { questionOf } from '../run/question.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Scenario } from '../scenario/model.ts';
import { Film } from '../scene/film.ts';
import { strongestComponent } from '../scene/quantity.ts';
import { Scenery, VIEW } from '../scene/scenery.ts';
import { planesShown, shownSlice } from '../scene/slices.ts';

/** Pixels of a picture: three panes of equal width. */
const WIDTH = 1280;
const HEIGHT = 470;

/** Pictures, evenly over the run, and how many of them the animation shows a second. */
const PICTURES = 24;
const A_SECOND = 6;

/** Of a pane's height what is no view: the title's strip and the colour bar's. */
const AROUND_VIEW = 74;

/**
 * Grid field, exact field and difference on the scenario's first plane, as the page draws them: `frame-01.png` and on, and
 * all of them as one animated PNG, `film.png`. Shown is the strongest component of E.
 * @param json a scenario, as JSON.parse gives it
 * @returns the files by their names
 * @throws Refusal naming every problem of the scenario
 */
export async function frameFiles(
  team: Team,
  json: unknown,
  onProgress: (progress: Progress) => void,
): Promise<Record<string, Uint8Array>> {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const { scenario } = loaded;
  const film = await filmed(team, json, scenario, onProgress);
  const draw = painter(scenario, film);
  const count = Math.min(PICTURES, film.frames);
  const files: Record<string, Uint8Array> = {};
  for (let n = 0; n < count; n++) {
    onProgress({ stage: 'the pictures', fraction: 0.8 + (0.2 * n) / count });
    files[`frame-${String(n + 1).padStart(2, '0')}.png`] = draw(Math.floor(((n + 1) * film.frames) / count) - 1);
  }
  return { ...files, 'film.png': animatedPng(Object.values(files), A_SECOND) };
}

/** Both fields at every cell of the first plane. */
async function filmed(
  team: Team,
  json: unknown,
  scenario: Scenario,
  onProgress: (progress: Progress) => void,
): Promise<Film> {
  const question = questionOf(scenario);
  const slice = shownSlice(scenario, planesShown(scenario)[0]!);
  const film = new Film({ slices: [slice], ...filmOf(question) });
  const { instants } = film;
  await filmGrid(team, question, [slice], new Int32Array(0), (frames) => {
    film.addGrid(frames);
    onProgress({ stage: 'the grid, for the pictures', fraction: (0.3 * film.gridFrames) / film.frames });
  });
  const cells = Array.from({ length: slice.nu * slice.nv }, (_, p) => p);
  let done = 0;
  await filmExact(team, json, slice, instants, cells, 'designed', (part, data) => {
    film.addExact({ slice: 0, cells: part, coarse: 1, data });
    done += part.length;
    onProgress({ stage: 'the exact field on the plane', fraction: 0.3 + (0.5 * done) / cells.length });
  });
  film.exactKnown = true;
  return film;
}

/** Draws the picture of an instant into a PNG file. */
function painter(scenario: Scenario, film: Film): (frame: number) => Uint8Array {
  const shown = {
    scenario: { ...scenario, planes: planesShown(scenario).slice(0, 1) },
    view: { ...VIEW, quantity: strongestComponent(film, scenario.grid.mask) },
    theme: 'light' as const,
    film,
    frame: 0,
    result: null,
  };
  const scenery = new Scenery({ state: shown }, () => {});
  const areas = [0, 1, 2].map((n): Rectangle => {
    const [from, to] = [Math.round((WIDTH * n) / 3), Math.round((WIDTH * (n + 1)) / 3)];
    return { x: from, y: 0, width: to - from - 1, height: HEIGHT };
  });
  const camera = cameraFor(scenario.grid.box, 'perspective', areas[0]!.width / (HEIGHT - AROUND_VIEW));
  const picture = new Picture(WIDTH, HEIGHT);
  const text = new TextPainter(fonts());
  return (frame) => {
    shown.frame = frame;
    let panes = scenery.panes(camera, areas);
    while (scenery.settling) panes = scenery.panes(camera, areas);
    const at = formatQuantity(film.instants.E[frame]!, 's');
    const titled = panes.map((pane) => ({ ...pane, title: `${pane.title}, ${at}` }));
    const labels = picture.draw({ theme: shown.theme, pixelRatio: 1, panes: titled });
    text.draw(picture.surface, labels, shown.theme, 1);
    return png(picture.surface);
  };
}

/** The font's files, from the package beside the built command line. */
function fonts(): ArrayBuffer[] {
  const { resolve } = createRequire(import.meta.url);
  return FONT_FILES.map((name) => Uint8Array.from(readFileSync(resolve(name))).buffer);
}
