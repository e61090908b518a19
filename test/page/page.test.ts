import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import sirv from 'sirv';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { linkOf } from '../../src/app/link.ts';
import { type Result, resultSchema } from '../../src/compare/result.ts';
import { NEUTRALS, type Scale, type Theme, valueAt } from '../../src/draw/colour.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { readTraces } from '../../src/files/traces.ts';
import { budgetRows } from '../../src/report/budgetRows.ts';
import { fieldAt } from '../../src/retarded/field.ts';
import { boxProblem, questionOf } from '../../src/run/question.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { textOf } from '../../src/scenario/text.ts';
import { COMPONENTS, samplePoints } from '../../src/trace/trace.ts';
import { readHdf5 } from '../files/hdf5Reader.ts';
import { unzipped } from '../files/unzipped.ts';
import { readImage } from '../files/vtiReader.ts';
import { launchBrowser } from './browser.ts';
import { dropOn, finished, judged, type Opened, openPage, settled, textOfPage } from './open.ts';
import { COMMAND, type Served, serveBuiltPage } from './server.ts';
import { SMALL } from './small.ts';

let browser: Browser;
let served: Served;
/** the address of the page with the small scenario */
let small: string;

beforeAll(async () => {
  [browser, served] = await Promise.all([launchBrowser(), serveBuiltPage()]);
  small = served.url + (await linkOf(textOf(SMALL)));
});
afterAll(async () => {
  await browser?.close();
  served?.end();
});

/** Chooses an entry of what can be saved. */
async function savedAs(page: Page, name: string): Promise<void> {
  await page.getByRole('button', { name: 'Save ▾' }).click();
  await page.getByRole('menuitem', { name }).first().click();
}

async function enter(page: Page, scenario: unknown): Promise<void> {
  await page.evaluate((text) => fieldassay.store.setText(text), JSON.stringify(scenario, null, 2));
}

describe('the page with its own scenario', () => {
  let opened: Opened;
  beforeAll(async () => {
    opened = await openPage(browser, served.url);
  });
  afterAll(() => opened?.page.context().close());

  test('says what the command line says, to every printed digit, with no GPU and no complaint', async () => {
    const { page, troubles, requests } = opened;
    const promise = await page.evaluate(() => ({
      isolated: crossOriginIsolated,
      webgl2: document.createElement('canvas').getContext('webgl2'),
      webgl: document.createElement('canvas').getContext('webgl'),
    }));
    expect(promise).toEqual({ isolated: true, webgl2: null, webgl: null });
    const places = () =>
      page.evaluate(() =>
        ['#panes', '#timeline', '#side', '#budget', '#run'].map((selector) => {
          const { x, y, height } = document.querySelector(selector)!.getBoundingClientRect();
          return selector === '#budget' ? [y] : selector === '#run' ? [y, height] : [x, y, height];
        }),
      );
    await page.waitForFunction(() => (fieldassay.store.state.film?.gridFrames ?? 0) > 0);
    const running = await places();
    await finished(page);
    // nothing moves when the verdict comes and the progress bar goes
    expect(await places()).toEqual(running);
    const command = spawnSync(process.execPath, [COMMAND, 'compare', '--json'], { encoding: 'utf8' });
    const result: Result = JSON.parse(command.stdout);
    expect(await textOfPage(page, '#sentence')).toBe(result.verdict.sentence);
    const details = await page.locator('#details').textContent();
    for (const line of result.verdict.details) expect(details).toContain(line);
    expect(result.checks.length).toBeGreaterThan(0);
    const checks = await page.locator('#checks').textContent();
    for (const { sentence } of result.checks) expect(checks).toContain(sentence);
    const rows = await page.locator('#budget tbody tr').allInnerTexts();
    const cells = rows.map((row) => row.split('\t').map((cell) => cell.trim()));
    const printed = budgetRows(result.budget);
    expect(cells[0]!.slice(1)).toEqual(printed.map(({ error }) => error));
    expect(cells[1]!.slice(1)).toEqual(printed.map(({ name, shareText }) => (name === 'total' ? '' : shareText)));
    expect(cells[2]!.slice(1)).toEqual(printed.map(({ floor }) => floor));
    // and not to printed digits alone: one source, one arithmetic
    const own = await page.evaluate(() => fieldassay.store.state.result);
    expect(own!.verdict).toEqual(result.verdict);
    expect(own!.budget).toEqual(result.budget);
    expect(own!.norms).toEqual(result.norms);
    expect(own!.observers).toEqual(result.observers);
    const [download] = await Promise.all([page.waitForEvent('download'), savedAs(page, 'Result')]);
    const saved = JSON.parse(readFileSync(await download.path(), 'utf8'));
    // what took how long, and where
    const ofNoHost = ({ timings: _, environment: __, ...rest }: Result) => rest;
    expect(ofNoHost(saved)).toEqual(ofNoHost(result));

    expect(requests.filter((url) => !url.startsWith(served.url) && !url.startsWith('data:'))).toEqual([]);
    expect(troubles).toEqual([]);
  });

  test('colours are the fields: grid by a run of its own, exact by the integral, difference by both', async () => {
    const { page } = opened;
    await page.setViewportSize({ width: 1440, height: 1000 });
    await finished(page);
    await page.evaluate(() => {
      fieldassay.store.state.playing = false;
      fieldassay.store.setFrame(40);
    });
    await settled(page);
    const theme = (await page.evaluate(() => fieldassay.store.state.theme)) as Theme;
    const pixels = await page.evaluate(() => {
      const { panes, store } = fieldassay;
      const canvas = document.querySelector<HTMLCanvasElement>('#panes-image')!;
      const context = canvas.getContext('2d')!;
      const found = [];
      for (let x = 7; x < canvas.width; x += 9)
        for (let y = 9; y < canvas.height; y += 11) {
          const reading = panes.readingAt(x + 0.5, y + 0.5);
          if (!reading) continue;
          const { hit } = reading;
          // the wire carries its current in colours of the same map
          if (Math.abs(hit.point[0]) < 0.008 && Math.abs(hit.point[2]) < 0.058) continue;
          const [r, g, b, a] = context.getImageData(x, y, 1, 1).data;
          const scale = panes.scene!.panes[hit.pane]!.scale!;
          found.push({
            pane: hit.pane,
            i: hit.i,
            j: hit.j,
            colour: ((a! << 24) | (b! << 16) | (g! << 8) | r!) >>> 0,
            scale,
          });
        }
      const { slice } = store.state.film!.films[0]!;
      const { E } = store.state.film!.instants;
      return { found, layer: slice.layer, nu: slice.nu, time: E[store.state.frame]! };
    });

    const loaded = loadScenario(EXAMPLES['bench-cable-pulse']);
    if (!('scenario' in loaded)) throw new Error('the built-in scenario does not load');
    const { scenario } = loaded;
    const question = questionOf(scenario);
    const step = Math.round(pixels.time / question.timeStep) - 1;
    const component = COMPONENTS.indexOf('Ez');
    // lines, labels and what is nearer than a few cells to the wire lie over some; the planes' own colours are kept
    const shown = pixels.found.flatMap(({ pane, i, j, colour, scale }) => {
      const value = valueAt(colour, scale as Scale, theme);
      return value === undefined || colour === NEUTRALS[theme].background
        ? []
        : [{ pane, i, j, value, scale: scale as Extract<Scale, { kind: 'signed' }> }];
    });
    const cells = Int32Array.from(shown.flatMap(({ i, j }) => [i, pixels.layer, j]));
    const { position } = samplePoints(cells, scenario.grid.box.from, scenario.grid.cellSize);
    const run = marchAlone({ ...boxProblem(question, [{ cell: cells, every: 1 }]), steps: step + 1 });
    const count = step + 1;
    const tally = [0, 0, 0];
    const worst = [0, 0, 0];
    shown.forEach(({ pane, value, scale }, p) => {
      const site = (p * 6 + component) * 3;
      const exact = fieldAt(
        scenario.sources,
        scenario.medium,
        [position[site]!, position[site + 1]!, position[site + 2]!],
        pixels.time,
        { potentials: false },
      ).E[2];
      const grid = run.samples[0]![(p * 6 + component) * count + step]!;
      const expected = [grid, exact, grid - exact][pane]!;
      // the map has 255 colours; values beyond its ends take the ends; the grid's own rounding is far below
      const within = Math.min(scale.limit, Math.max(-scale.limit, expected));
      const error = Math.abs(value - within) / (scale.limit / 127);
      tally[pane]!++;
      worst[pane] = Math.max(worst[pane]!, error);
    });
    console.log(
      `pixels compared in each pane: ${tally.join(', ')}; worst, in steps of the colour map: ${worst.map((w) => w.toFixed(3)).join(', ')}`,
    );
    for (const n of [0, 1, 2]) {
      expect(tally[n]).toBeGreaterThan(30);
      expect(worst[n]).toBeLessThan(0.51);
    }
  }, 240_000);
});

describe('the page, used', () => {
  test('scrubs, plays, steps and seeks by keyboard and pointer', async () => {
    const { page, troubles } = await openPage(browser, small);
    await finished(page);
    await page.keyboard.press('Home');
    expect(await page.evaluate(() => fieldassay.store.state.frame)).toBe(0);
    const before = await textOfPage(page, '#timeline output');
    await page.locator('#timeline input[type=range]').fill('60');
    expect(await page.evaluate(() => fieldassay.store.state.frame)).toBe(60);
    expect(await textOfPage(page, '#timeline output')).not.toBe(before);
    await page.keyboard.press('ArrowRight');
    expect(await page.evaluate(() => fieldassay.store.state.frame)).toBe(61);
    await page.keyboard.press(' ');
    expect(await page.evaluate(() => fieldassay.store.state.playing)).toBe(true);
    await page.waitForFunction(() => fieldassay.store.state.frame !== 61);
    await page.keyboard.press(' ');
    await page.keyboard.press('?');
    await page.getByRole('dialog').waitFor();
    expect(await page.getByRole('dialog').textContent()).toContain('play or pause');
    await page.keyboard.press('Escape');
    for (const key of ['2', '3', '1', 'd', 'c', 'o', 'x', '0', 'q', 't', 'n', ']', 'Shift+ArrowLeft', '+'])
      await page.keyboard.press(key);
    await settled(page);
    expect(troubles).toEqual([]);
    await page.context().close();
  });

  test('cancels, keeps what is known, and begins anew when the scenario changes', async () => {
    const { page, troubles } = await openPage(browser, served.url);
    await page.waitForFunction(() => (globalThis.fieldassay?.store.state.film?.gridFrames ?? 0) > 0);
    await page.getByRole('button', { name: 'Cancel' }).click();
    await page.waitForFunction(() => fieldassay.store.state.run.status !== 'running');
    expect(await textOfPage(page, '#sentence')).toContain('cancelled');
    expect(await page.evaluate(() => fieldassay.store.state.film!.gridFrames)).toBeGreaterThan(0);

    await enter(page, SMALL);
    await page.waitForFunction(() => fieldassay.store.state.run.status === 'running');
    await enter(page, { ...SMALL, duration: '2.5 ns' });
    await finished(page);
    const { duration, run } = await page.evaluate(() => ({
      duration: (fieldassay.store.state.result!.scenario as { duration: string }).duration,
      run: fieldassay.store.state.run.status,
    }));
    expect([duration, run]).toEqual(['2.5 ns', 'done']);
    expect(troubles).toEqual([]);
    await page.context().close();
  });

  test('a link, a saved scenario and a saved result all bring the scenario back', async () => {
    const { page, troubles } = await openPage(browser, served.url);
    await enter(page, SMALL);
    await page.waitForFunction(() => location.hash.startsWith('#scenario='));
    await page.waitForFunction(() => fieldassay.store.state.result?.title === 'Small', undefined, { timeout: 60_000 });
    await finished(page);
    const sentence = await textOfPage(page, '#sentence');
    const text = await page.evaluate(() => fieldassay.store.state.text);

    const linked = await openPage(browser, page.url());
    await judged(linked.page);
    expect(await linked.page.evaluate(() => fieldassay.store.state.text)).toBe(text);
    expect(await textOfPage(linked.page, '#sentence')).toBe(sentence);

    const folder = mkdtempSync(join(tmpdir(), 'page-'));
    try {
      const save = async (name: string) => {
        const [download] = await Promise.all([page.waitForEvent('download'), savedAs(page, name)]);
        const path = join(folder, download.suggestedFilename());
        await download.saveAs(path);
        return path;
      };
      const scenario = await save('Scenario');
      expect(readFileSync(scenario, 'utf8')).toBe(text);
      const resultFile = await save('Result');
      const result = resultSchema.parse(JSON.parse(readFileSync(resultFile, 'utf8')));
      expect(result.verdict.sentence).toBe(sentence);
      const traces = readTraces(readFileSync(await save('Traces'), 'utf8'));
      expect(traces.map(({ component }) => component)).toEqual([...COMPONENTS]);
      const report = readFileSync(await save('Report'), 'utf8');
      expect(report).toContain(sentence);
      // For other programs: what the command line writes, read back by readers of others' making.
      const arrays = await unzipped(readFileSync(await save('Traces for NumPy')));
      expect([...arrays.keys()]).toContain('grid.npy');
      const svgs = await unzipped(readFileSync(await save('Charts as SVG')));
      expect([...svgs.keys()]).toContain('A-E-trace.svg');
      const shown = await page.evaluate(() => {
        const { films, instants } = fieldassay.store.state.film!;
        const { slice, grid } = films[0]!;
        const cells = slice.nu * slice.nv;
        const last = instants.count - 1;
        return {
          axes: slice.axes,
          shape: [slice.nu, slice.nv],
          time: instants.E[last]!,
          count: instants.count,
          planes: films.map(({ slice: { name } }) => name),
          Ez: [...grid.subarray((last * 9 + 2) * cells, (last * 9 + 3) * cells)],
        };
      });
      const vti = await unzipped(readFileSync(await save('Fields as VTK images')));
      expect(vti.size).toBe(shown.planes.length * (shown.count + 1));
      const number = String(shown.count).padStart(4, '0');
      const image = readImage(vti.get(`${shown.planes[0]}-${number}.vti`)!);
      expect(shown.axes.map((a) => image.extent[2 * a + 1]! + 1)).toEqual(shown.shape);
      expect(image.fieldData.get('TimeValue')).toEqual([shown.time]);
      const Ez = [...image.pointData.get('E grid (V/m)')!.values].filter((_, n) => n % 3 === 2);
      expect(Ez).toEqual(shown.Ez);
      const file = readHdf5(readFileSync(await save('Fields as HDF5')));
      const { value, shape } = file.get(`${shown.planes[0]}/grid/Ez`);
      expect(shape.reduce((product, n) => product * n, 1)).toBe(shown.count * shown.Ez.length);
      expect([...value].slice(-shown.Ez.length)).toEqual(shown.Ez);
      const png = readFileSync(await save('Picture of the panes'));
      expect([...png.subarray(0, 8)]).toEqual([137, 80, 78, 71, 13, 10, 26, 10]);
      const charts = readFileSync(await save('Pictures of the charts'));
      expect(charts.length).toBeGreaterThan(5000);

      for (const file of [scenario, resultFile]) {
        await linked.page.evaluate(() => fieldassay.store.setText('{}'));
        await linked.page.locator('input[type=file]').setInputFiles(file);
        await linked.page.waitForFunction(() => fieldassay.store.state.problems.length === 0);
        expect(await linked.page.evaluate(() => fieldassay.store.state.json)).toEqual(SMALL);
      }
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
    expect([...troubles, ...linked.troubles]).toEqual([]);
    await page.context().close();
    await linked.page.context().close();
  });

  test('is printed as the report, in light colours; a cancelled run’s verdict can still be saved', async () => {
    const { page, troubles } = await openPage(browser, small, { colorScheme: 'dark' });
    const print = async () => {
      await page.evaluate(() => window.dispatchEvent(new Event('beforeprint')));
      await page.emulateMedia({ media: 'print' });
      const seen = await page.evaluate(() => {
        const root = document.querySelector('#report')!.shadowRoot!;
        const heading = root.querySelector('h1');
        return {
          text: root.querySelector('body')!.textContent,
          heading: heading?.textContent,
          ink: heading && getComputedStyle(heading).color,
          charts: root.querySelectorAll('svg.chart').length,
          page: document.querySelector('#compare')!.getBoundingClientRect().height,
        };
      });
      await page.emulateMedia({ media: 'screen' });
      await page.evaluate(() => window.dispatchEvent(new Event('afterprint')));
      return seen;
    };
    await page.waitForFunction(() => fieldassay.store.state.run.status === 'running');
    const early = await print();
    expect(early.page).toBe(0);
    expect(early.text).toContain('print again when there is a verdict');
    await judged(page);
    await page.keyboard.press('Escape');
    expect(await page.evaluate(() => fieldassay.store.state.run.status)).toBe('cancelled');
    await expect
      .poll(async () => (await print()).heading, { timeout: 30_000 })
      .toBe(await textOfPage(page, '#sentence'));
    const report = await print();
    expect(report.page).toBe(0);
    expect(report.ink).toBe('rgb(27, 29, 33)');
    expect(report.charts).toBeGreaterThan(4);
    expect(report.text).toContain('What the figures are');
    const [download] = await Promise.all([page.waitForEvent('download'), savedAs(page, 'Traces')]);
    expect(readTraces(readFileSync(await download.path(), 'utf8')).length).toBe(COMPONENTS.length);
    expect(troubles).toEqual([]);
    await page.context().close();
  });

  test('does by keyboard what the pointer does', async () => {
    const { page, troubles } = await openPage(browser, small);
    await finished(page);
    const state = () =>
      page.evaluate(() => ({
        plane: fieldassay.store.state.scenario!.planes[0]!.at,
        layer: fieldassay.store.state.film!.films[0]!.slice.layer,
        place: fieldassay.panes.scene!.panes[0]!.camera.position.toArray(),
        speed: fieldassay.store.state.view.speed,
      }));
    const before = await state();
    for (const key of ['h', 'k', '.']) await page.keyboard.press(key);
    await settled(page);
    const shifted = await state();
    expect(shifted.place).not.toEqual(before.place);
    expect(shifted.speed).toBeGreaterThan(before.speed);
    for (const key of ['l', 'j', ',']) await page.keyboard.press(key);
    await settled(page);
    const back = await state();
    back.place.forEach((x, a) => {
      expect(x).toBeCloseTo(before.place[a]!, 9);
    });
    await page.keyboard.press('>');
    await page.waitForFunction((at) => fieldassay.store.state.scenario!.planes[0]!.at !== at, before.plane);
    // of nodes 10 mm apart from −100 mm on, the next one
    expect((await state()).plane).toBeCloseTo(-0.1 + 0.01 * (before.layer + 1), 9);
    await page.keyboard.press('s');
    await page.getByRole('menu').waitFor();
    await page.keyboard.press('Escape');
    await page.keyboard.press('a');
    await page.getByLabel('Name of the new observer').waitFor();
    await page.keyboard.press('Enter');
    expect(await page.evaluate(() => fieldassay.store.state.scenario!.observers.length)).toBe(2);
    expect(troubles).toEqual([]);
    await page.context().close();
  });

  test('films are saved as WebM and as animated PNG', async () => {
    const { page, troubles } = await openPage(browser, small, {
      viewport: { width: 1024, height: 700 },
    });
    await finished(page);
    await page.evaluate(() => fieldassay.store.setView({ speed: 80 }));
    const folder = mkdtempSync(join(tmpdir(), 'page-'));
    try {
      for (const [item, start] of [
        ['Film, WebM', [0x1a, 0x45, 0xdf, 0xa3]],
        ['Film, animated PNG', [137, 80, 78, 71]],
      ] as const) {
        await page.getByRole('button', { name: 'Save ▾' }).click();
        const [download] = await Promise.all([
          page.waitForEvent('download', { timeout: 110_000 }),
          page.getByRole('menuitem', { name: item }).click(),
        ]);
        const path = join(folder, download.suggestedFilename());
        await download.saveAs(path);
        const bytes = readFileSync(path);
        expect([...bytes.subarray(0, 4)]).toEqual([...start]);
        expect(bytes.length).toBeGreaterThan(10_000);
        if (item === 'Film, animated PNG') expect(bytes.includes('acTL')).toBe(true);
      }
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
    expect(troubles).toEqual([]);
    await page.context().close();
  }, 240_000);

  test('a click adds and names an observer, whose traces are then shown', async () => {
    const { page, troubles } = await openPage(browser, small);
    await finished(page);
    await settled(page);
    const place = await page.evaluate(() => {
      const canvas = document.querySelector<HTMLCanvasElement>('#panes-image')!;
      for (let x = 60; x < canvas.width / 3; x += 7)
        for (let y = 60; y < canvas.height - 60; y += 7) {
          // a pointer stands on whole CSS pixels
          const bounds = canvas.getBoundingClientRect();
          const ratio = canvas.width / bounds.width;
          const [clientX, clientY] = [Math.round(bounds.left + x / ratio), Math.round(bounds.top + y / ratio)];
          const hit = fieldassay.panes.readingAt((clientX - bounds.left) * ratio, (clientY - bounds.top) * ratio)?.hit;
          if (hit && Math.abs(hit.point[0] + 0.05) < 0.01 && Math.abs(hit.point[2]) < 0.02)
            return { x: clientX, y: clientY, point: [...hit.point] };
        }
      throw new Error('no plane was found under the pane');
    });
    await page.mouse.click(place.x, place.y);
    await page.getByLabel('Name of the new observer').fill('probe');
    await page.getByRole('button', { name: 'Add observer' }).click();
    await page.waitForFunction(
      () => fieldassay.store.state.result?.observers.some(({ name }) => name === 'probe'),
      undefined,
      { timeout: 60_000 },
    );
    const { at, shown } = await page.evaluate(() => ({
      at: fieldassay.store.state.scenario!.observers.find(({ name }) => name === 'probe')!.at,
      shown: fieldassay.store.state.view.observer,
    }));
    expect(shown).toBe('probe');
    place.point.forEach((x, a) => {
      // what is written has four digits of a millimetre
      expect(Math.abs(at[a]! - x)).toBeLessThan(1e-5);
    });
    await page.waitForFunction(() => document.querySelector('#charts')?.textContent?.includes('observer probe'));
    expect(troubles).toEqual([]);
    await page.context().close();
  });
});

describe('what is wrong', () => {
  let opened: Opened;
  beforeAll(async () => {
    opened = await openPage(browser, small);
    await judged(opened.page);
  });
  afterAll(() => opened?.page.context().close());

  test('is said at the field, with the way back as a button', async () => {
    const { page, troubles } = opened;
    const sentence = await textOfPage(page, '#sentence');
    const courant = page.locator('.lil-controller', { hasText: 'Courant number' }).locator('input');
    await page.evaluate(() =>
      fieldassay.store.edit((draft) => {
        draft.grid.courant = 1.5;
      }),
    );
    const problem = page.locator('.problem');
    await problem.waitFor();
    expect(await problem.textContent()).toMatch(/courant.*1\.5/i);
    expect(await courant.inputValue()).toBe('1.5');
    expect(await textOfPage(page, '#run')).toContain('Not run');
    expect(await textOfPage(page, '#sentence')).toBe(sentence);
    await problem.getByRole('button').click();
    await page.waitForFunction(() => fieldassay.store.state.problems.length === 0);
    expect(await problem.count()).toBe(0);
    expect(await page.evaluate(() => fieldassay.store.state.json)).toEqual(SMALL);
    expect(troubles).toEqual([]);
  });

  test('a bad file is refused in words and changes nothing; an unsound one is shown with its lines', async () => {
    const { page, troubles } = opened;
    const before = await page.evaluate(() => fieldassay.store.state.text);
    await dropOn(page, 'broken.json', '{ "sources": [ }');
    await page.getByRole('alert').waitFor();
    expect(await page.getByRole('alert').textContent()).toMatch(/broken\.json was not opened.*line 1/s);
    expect(await page.evaluate(() => fieldassay.store.state.text)).toBe(before);
    await dropOn(page, 'list.json', '[1, 2]');
    await page.getByRole('alert').nth(1).waitFor();
    expect(await page.evaluate(() => fieldassay.store.state.text)).toBe(before);

    const unsound = JSON.stringify({ ...SMALL, duration: 'long' }, null, 2);
    await dropOn(page, 'unsound.json', unsound);
    await page.locator('.problems button').first().waitFor();
    const line = unsound.split('\n').findIndex((text) => text.includes('"duration"')) + 1;
    expect(await textOfPage(page, '.problems')).toContain(`Line ${line}:`);
    await page.keyboard.press('Control+z');
    await page.locator('#sentence').click();
    await page.keyboard.press('Control+z');
    expect(await page.evaluate(() => fieldassay.store.state.text)).toBe(before);
    expect(troubles).toEqual([]);
  });
});

describe('planes', () => {
  /** Where a pane shows a point, CSS pixels of the window: by the camera's own matrices. */
  const placeOf = (page: Page, pane: number, marker: string) =>
    page.evaluate(
      ([n, name]) => {
        const { area, markers, camera } = fieldassay.panes.scene!.panes[n as number]!;
        const { at } = markers.find(({ name: each }) => each.startsWith(name as string))!;
        const canvas = document.querySelector<HTMLCanvasElement>('#panes-image')!;
        const bounds = canvas.getBoundingClientRect();
        const ratio = canvas.width / bounds.width;
        const height = area.height - 74 * ratio;
        const seen = camera.position
          .clone()
          .set(...(at as [number, number, number]))
          .project(camera);
        const aspect = 'aspect' in camera ? camera.aspect : 1;
        const x = area.x + area.width / 2 + (seen.x * aspect * height) / 2;
        const y = area.y + 30 * ratio + ((1 - seen.y) * height) / 2;
        return { x: bounds.left + x / ratio, y: bounds.top + y / ratio };
      },
      [pane, marker] as const,
    );

  test('are dragged by their corner: the films follow, the verdict stands; undo brings them back', async () => {
    const { page, troubles } = await openPage(browser, small);
    await finished(page);
    await settled(page);
    const before = await page.evaluate(() => ({
      layer: fieldassay.store.state.film!.films[0]!.slice.layer,
      seconds: fieldassay.store.state.result!.timings.box.seconds,
    }));
    const grip = await placeOf(page, 1, '↔');
    await page.mouse.move(grip.x, grip.y);
    await page.mouse.down();
    await page.mouse.move(grip.x - 10, grip.y + 6, { steps: 4 });
    await page.mouse.move(grip.x - 24, grip.y + 14, { steps: 4 });
    await page.mouse.up();
    await page.waitForFunction(
      (layer) =>
        fieldassay.store.state.film!.films[0]!.slice.layer !== layer && fieldassay.store.state.film!.exactKnown,
      before.layer,
    );
    await finished(page);
    const after = await page.evaluate(() => ({
      at: fieldassay.store.state.scenario!.planes[0]!.at,
      layer: fieldassay.store.state.film!.films[0]!.slice.layer,
      seconds: fieldassay.store.state.result!.timings.box.seconds,
    }));
    expect(after.seconds).toBe(before.seconds);
    expect(after.layer).toBe(Math.round((after.at + 0.1) / 0.01));
    await page.locator('#sentence').click();
    await page.keyboard.press('Control+z');
    await page.waitForFunction((layer) => fieldassay.store.state.film!.films[0]!.slice.layer === layer, before.layer);
    expect(troubles).toEqual([]);
    await page.context().close();
  });

  test('the trust map agrees with the errors that the comparison found at an observer', async () => {
    const { page } = await openPage(
      browser,
      served.url + (await linkOf(textOf({ ...SMALL, planes: [{ name: 'through A', normal: 'y', at: '-20 mm' }] }))),
    );
    await finished(page);
    const { E, H, largest, result } = await page.evaluate(() => {
      const { film, result: found } = fieldassay.store.state;
      const { trust, slice } = film!.films[0]!;
      // node (7, 8, 11) of the box, 10 mm apart from −100 mm
      const p = 11 * slice.nu + 7;
      return { E: trust!.E[p]!, H: trust!.H[p]!, largest: trust!.largest[p]!, result: found! };
    });
    const [observer] = result.observers;
    console.log(`E: map ${E}, observer ${observer!.E!.relativeL2}; H: map ${H}, observer ${observer!.H!.relativeL2}`);
    // the film keeps every second instant, at a sixth of the pulse's shortest period: its sums differ by far less than this
    expect(E / observer!.E!.relativeL2!).toBeCloseTo(1, 3);
    expect(H / observer!.H!.relativeL2!).toBeCloseTo(1, 3);
    const parts = ['boundary', 'lattice', 'gridding'] as const;
    const shares = parts.map((part) => observer!.budget![part]!.share!);
    expect(parts[largest]).toBe(parts[shares.indexOf(Math.max(...shares))]);
    await page.context().close();
  });
});

describe('the page on poorer hosts', () => {
  test('without WebAssembly SIMD it says what is missing and what to do', async () => {
    const context = await browser.newContext();
    const page = await context.newPage();
    await page.addInitScript(() => {
      WebAssembly.validate = () => false;
    });
    await page.goto(served.url);
    await page.waitForFunction(() => document.querySelector('#sentence')!.textContent!.includes('SIMD'));
    expect(await textOfPage(page, '#details')).toContain('npx fieldassay compare');
    await context.close();
  });

  test('where it is not cross-origin isolated it says so, and one thread gives the same verdict', async () => {
    const files = sirv(resolve('dist/page'), { dev: true });
    const server = createServer((request, response) => files(request, response));
    await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
    const url = `http://127.0.0.1:${(server.address() as AddressInfo).port}/${new URL(small).hash}`;
    const [alone, isolated] = await Promise.all([openPage(browser, url), openPage(browser, small)]);
    expect(await alone.page.evaluate(() => crossOriginIsolated)).toBe(false);
    await alone.page.waitForFunction(() => document.querySelector('#notices')?.textContent?.includes('one thread'));
    await Promise.all([judged(alone.page), judged(isolated.page)]);
    expect(await textOfPage(alone.page, '#sentence')).toBe(await textOfPage(isolated.page, '#sentence'));
    expect(await alone.page.evaluate(() => fieldassay.store.state.result!.environment.threads)).toBe(1);
    expect(alone.troubles).toEqual([]);
    await alone.page.context().close();
    await isolated.page.context().close();
    server.close();
  });

  test('reduced motion: nothing plays by itself', async () => {
    const { page } = await openPage(browser, small, { reducedMotion: 'reduce' });
    await judged(page);
    const { playing, frame, frames } = await page.evaluate(() => {
      const { playing, frame, film } = fieldassay.store.state;
      return { playing, frame, frames: film!.frames };
    });
    expect(playing).toBe(false);
    // a picture with something in it
    expect(frame).toBe(Math.floor(frames / 2));
    await page.context().close();
  });
});

/** What of axe-core is used. */
interface Scanner {
  run(): Promise<{ violations: { id: string; nodes: { html: string; failureSummary: string }[] }[] }>;
}

describe('the page for everybody', () => {
  test.each([
    { width: 1024, height: 700, colorScheme: 'dark' },
    { width: 1280, height: 800, colorScheme: 'light' },
    { width: 3840, height: 2160, colorScheme: 'light' },
  ] as const)(
    'at $width × $height, $colorScheme, nothing is cut off, and an accessibility scan finds nothing',
    async ({ width, height, colorScheme }) => {
      const axe = readFileSync(resolve('node_modules/axe-core/axe.min.js'), 'utf8');
      const { page } = await openPage(browser, small, { viewport: { width, height }, colorScheme }, axe);
      await finished(page);
      const wide = await page.evaluate(() => document.documentElement.scrollWidth - innerWidth);
      expect(wide).toBeLessThanOrEqual(0);
      const { panes, timeline } = await page.evaluate(() => ({
        panes: document.querySelector('#panes')!.getBoundingClientRect().height,
        timeline: document.querySelector('#timeline')!.getBoundingClientRect().bottom,
      }));
      expect(panes).toBeGreaterThanOrEqual(240);
      expect(timeline).toBeLessThanOrEqual(height);
      for (const state of ['panels', 'text', 'menu']) {
        if (state === 'text') await page.getByRole('button', { name: 'Text', exact: true }).click();
        if (state === 'menu') await page.getByRole('button', { name: 'Save ▾' }).click();
        const violations = await page.evaluate(async () => {
          const { violations: found } = await (globalThis as unknown as { axe: Scanner }).axe.run();
          return found.flatMap(({ id, nodes }) =>
            nodes.map(({ html, failureSummary }) => `${id}: ${html} ${failureSummary}`),
          );
        });
        expect(violations, state).toEqual([]);
      }
      await page.context().close();
    },
  );
});

test('the bundle holds no WebGL renderer', () => {
  const folder = resolve('dist/page/assets');
  const scripts = readdirSync(folder).filter((name) => name.endsWith('.js'));
  expect(scripts.length).toBeGreaterThan(3);
  for (const name of scripts) {
    const text = readFileSync(join(folder, name), 'utf8');
    expect(text.includes('WebGLRenderer'), name).toBe(false);
    expect(/getContext\(["'`]webgl/.test(text), name).toBe(false);
  }
});

describe('what is served', () => {
  test('only the page and the result folder, to the loopback host alone, with a strict policy', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'results-'));
    writeFileSync(join(folder, 'report.html'), '<!doctype html><title>r</title>');
    writeFileSync(join(folder, '.secret'), 'no');
    writeFileSync(join(folder, 'result.json'), JSON.stringify({ scenario: SMALL }));
    const own = await serveBuiltPage(folder);
    try {
      expect(own.url.endsWith('/#results')).toBe(true);
      const origin = own.url.replace('#results', '');
      const at = (path: string, init?: RequestInit) => fetch(`${origin}${path}`, init);
      const page = await at('');
      expect(page.status).toBe(200);
      const policy = page.headers.get('content-security-policy')!;
      expect(policy).toContain("default-src 'none'");
      expect(policy).toContain("script-src 'self' 'wasm-unsafe-eval'");
      expect(policy).not.toContain('unsafe-inline');
      expect(policy).not.toMatch(/'unsafe-eval'/);
      expect(page.headers.get('cross-origin-opener-policy')).toBe('same-origin');
      expect(page.headers.get('cross-origin-embedder-policy')).toBe('require-corp');
      expect((await at('report.html')).status).toBe(200);
      expect((await at('results/report.html')).status).toBe(200);
      for (const path of [
        'results/.secret',
        'results/../package.json',
        'results/%2e%2e/%2e%2e/etc/passwd',
        '..%2f..%2fpackage.json',
        'worker.js',
      ])
        expect((await at(path)).status, path).toBe(404);
      expect((await at('', { method: 'POST' })).status).toBe(405);
      const strange = spawnSync(
        process.execPath,
        [
          '-e',
          `require('node:http').get(${JSON.stringify(own.url)}, { headers: { host: 'elsewhere.example' } }, (r) => console.log(r.statusCode))`,
        ],
        { encoding: 'utf8' },
      );
      expect(strange.stdout.trim()).toBe('421');

      const { page: opened, troubles } = await openPage(browser, own.url);
      await judged(opened);
      expect(await opened.evaluate(() => fieldassay.store.state.json)).toEqual(SMALL);
      expect(troubles).toEqual([]);
      await opened.context().close();
    } finally {
      own.end();
      rmSync(folder, { recursive: true, force: true });
    }
  });
});
