/**
 * What the page costs a person: from opening it to the first picture and to the verdict of the default scenario, what a
 * picture of three panes with three planes takes while playing and turning, and the longest task on the page's own thread
 * once it is loaded. In a Chromium without a GPU ($CHROMIUM, the system's, or the one the page's tests have unpacked).
 */
import { spawn, spawnSync } from 'node:child_process';
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { chromium } from 'playwright-core';

const root = fileURLToPath(new URL('../../', import.meta.url));

export const TARGETS = { firstPictureMs: 1000, verdictMs: 5000, pictureMs: 1000 / 60, longestTaskMs: 50 };

export const FLAGS = [
  '--headless',
  '--no-sandbox',
  '--disable-gpu',
  '--disable-software-rasterizer',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

export function browserPlace() {
  const named = process.env.CHROMIUM;
  if (named) return { executablePath: named };
  const system = ['google-chrome', 'chromium', 'chromium-browser'].find(
    (name) => spawnSync(name, ['--version'], { stdio: 'ignore' }).status === 0,
  );
  if (system)
    return { executablePath: spawnSync('sh', ['-c', `command -v ${system}`], { encoding: 'utf8' }).stdout.trim() };
  const cache = join(root, '.cache/chromium');
  if (!existsSync(join(cache, 'chromium'))) throw new Error('no browser: set $CHROMIUM, or run the page tests once');
  const env = { ...process.env, LD_LIBRARY_PATH: join(cache, 'lib'), FONTCONFIG_FILE: join(cache, 'fonts.conf') };
  return { executablePath: join(cache, 'chromium'), env };
}

export async function served() {
  const server = spawn(process.execPath, [join(root, 'dist/main.js'), 'view'], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const url = await new Promise((done) => {
    server.stdout.once('data', (data) => done(String(data).split('\n')[0]));
  });
  return { url, end: () => server.kill() };
}

const middle = (values) => values.toSorted((a, b) => a - b)[Math.floor(values.length / 2)];
const range = (values) => ({ median: middle(values), least: Math.min(...values), most: Math.max(...values) });

/** One visit: a fresh page, the default scenario, to the end of the run. */
async function visit(browser, url) {
  const context = await browser.newContext({ viewport: { width: 1280, height: 800 } });
  const page = await context.newPage();
  await page.goto(url);
  await page.waitForFunction(() => globalThis.fieldassay?.store.state.run.status === 'done', undefined, {
    timeout: 120_000,
  });
  const seen = await page.evaluate(() => ({
    first: performance.getEntriesByName('first picture')[0].startTime,
    verdict: performance.getEntriesByName('verdict')[0].startTime,
  }));
  return { page, context, ...seen };
}

/** The longest task of the page's own thread after the first picture: wall time, and the processor's alone. */
async function longestTask(browser, url) {
  const context = await browser.newContext({ viewport: { width: 1280, height: 800 } });
  const page = await context.newPage();
  await browser.startTracing(page, { categories: ['toplevel', 'blink.user_timing', '__metadata'] });
  await page.goto(url);
  await page.waitForFunction(() => globalThis.fieldassay?.store.state.run.status === 'done', undefined, {
    timeout: 120_000,
  });
  const { traceEvents } = JSON.parse(String(await browser.stopTracing()));
  await context.close();
  const first = traceEvents.filter(({ name }) => name === 'first picture').toSorted((a, b) => a.ts - b.ts)[0];
  const tasks = traceEvents.filter(
    ({ name, pid, tid, ts, tdur }) =>
      name.endsWith('RunTask') && pid === first.pid && tid === first.tid && ts > first.ts && tdur,
  );
  return {
    wallMs: Math.max(...tasks.map(({ dur }) => dur)) / 1000,
    processorMs: Math.max(...tasks.map(({ tdur }) => tdur)) / 1000,
  };
}

/** Pictures of three panes of three planes, playing and turning at once. */
async function pictures(page) {
  await page.evaluate(() =>
    fieldassay.store.edit((draft) => {
      draft.planes = ['x', 'y', 'z'].map((normal) => ({ name: normal, normal, at: '20 mm' }));
    }),
  );
  await page.waitForFunction(() => fieldassay.store.state.film.films.length === 3);
  await page.waitForFunction(() => fieldassay.store.state.run.status === 'done', undefined, { timeout: 120_000 });
  return await page.evaluate(async () => {
    const { store, panes } = fieldassay;
    store.state.playing = false;
    panes.costs.length = 0;
    for (let n = 0; n < 150; n++) {
      store.setFrame(n % store.state.film.frames);
      panes.turn(2, 0);
      await new Promise(requestAnimationFrame);
    }
    return panes.costs.slice(20);
  });
}

/** @returns {Promise<object>} medians and ranges over the visits, milliseconds */
export async function benchPage(visits = 3) {
  const { url, end } = await served();
  const browser = await chromium.launch({ ...browserPlace(), args: FLAGS });
  try {
    const seen = [];
    let costs = [];
    for (let n = 0; n < visits; n++) {
      const one = await visit(browser, url);
      if (n === visits - 1) costs = await pictures(one.page);
      await one.context.close();
      seen.push(one);
    }
    return {
      title: 'The page, default scenario, 1280 × 800, milliseconds',
      targets: TARGETS,
      visits,
      firstPicture: range(seen.map(({ first }) => first)),
      verdict: range(seen.map(({ verdict }) => verdict)),
      longestTask: await longestTask(browser, url),
      picture: { ...range(costs), pictures: costs.length },
    };
  } finally {
    await browser.close();
    end();
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) console.log(JSON.stringify(await benchPage(), null, 2));
