/**
 * What the page costs a person: from opening it to the first picture and to the verdict of the default scenario, what a
 * picture of three panes with three planes takes while playing and turning, the longest task on the page's own thread
 * once it is loaded, and how fast the grid marches in the browser beside Node. In a Chromium without a GPU ($CHROMIUM, the
 * system's, or the one the page's tests have unpacked).
 */
import { spawn, spawnSync } from 'node:child_process';
import { existsSync, readFileSync } from 'node:fs';
import { createServer } from 'node:http';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import { chromium } from 'playwright-core';
import { bundle, startFollowers } from '../fdtd/bundle.mjs';

const root = fileURLToPath(new URL('../../', import.meta.url));

export const TARGETS = {
  firstPictureMs: 1000,
  verdictMs: 5000,
  pictureMs: 1000 / 60,
  longestTaskMs: 50,
  marchOfNode: 0.9,
};

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

/** Runs in the page: puts a film of three planes of so many samples a side in the place of the run's own. */
function showFilmOf(samples) {
  const { state } = fieldassay.store;
  const { film, scenario } = state;
  const frames = 8;
  const channels = 6;
  const { box, cellSize } = scenario.grid;
  const width = box.to.map((x, a) => x - box.from[a]);
  const slices = film.films.map(({ slice }) => ({
    ...slice,
    nu: samples,
    nv: samples,
    stride: width[0] / cellSize[0] / samples,
    hole: new Uint8Array(samples * samples),
    distance: Float32Array.from({ length: samples * samples }, (_, p) =>
      Math.hypot((p % samples) / samples - 0.5, Math.floor(p / samples) / samples - 0.5),
    ),
  }));
  const shown = new film.constructor({ slices, every: film.every, instants: { ...film.instants, count: frames } });
  const rings = new Float32Array(frames * channels * samples * samples);
  for (let line = 0; line < frames * channels; line++)
    for (let p = 0; p < samples * samples; p++) {
      const r = slices[0].distance[p];
      rings[line * samples * samples + p] = Math.sin(60 * r - line) / (0.1 + r);
    }
  shown.addGrid({ first: 0, count: frames, slices: slices.map(() => rings) });
  for (const one of shown.films) {
    one.exact.set(rings.map((value) => 0.99 * value));
    one.known.fill(2);
  }
  shown.exactKnown = true;
  state.playing = false;
  state.film = shown;
  fieldassay.store.tell('film');
}

/** Pictures of three panes of three planes of 256² samples: turning, and with all planes new for every picture as well. */
async function pictures(page) {
  await page.evaluate(() =>
    fieldassay.store.edit((draft) => {
      draft.planes = ['x', 'y', 'z'].map((normal) => ({ name: normal, normal, at: '20 mm' }));
    }),
  );
  await page.waitForFunction(() => fieldassay.store.state.film.films.length === 3);
  await page.waitForFunction(() => fieldassay.store.state.run.status === 'done', undefined, { timeout: 120_000 });
  await page.evaluate(showFilmOf, 256);
  const costs = (playing) =>
    page.evaluate(async (plays) => {
      const { store, panes } = fieldassay;
      for (let n = 0; n < 170; n++) {
        if (n === 20) panes.costs.length = 0;
        if (plays) store.setFrame(n % store.state.film.frames);
        panes.turn(2, 0);
        await new Promise(requestAnimationFrame);
      }
      return [...panes.costs];
    }, playing);
  return { turning: await costs(false), 'playing and turning': await costs(true) };
}

const TYPES = { js: 'text/javascript', html: 'text/html' };

/** Leads runs in a worker, as the page's own solver does; the page hands its setups to another worker, which follows. */
const LEADER = `import { bare, asUsed, measure } from './marching.js';
const follow = (setup) => {
  postMessage({ setup });
  return new Promise((resolve) => { onmessage = () => { onmessage = begin; resolve(); }; });
};
const begin = async ({ data: { use, size, steps } }) => {
  gc();
  const problem = use === 'as used' ? asUsed(size, steps) : bare(size, steps);
  const { rate, checksum } = await measure(problem, { threads: 2, random: use !== 'as used' }, follow);
  postMessage({ found: { rate, checksum } });
};
onmessage = begin;
postMessage('ready');`;

const FOLLOWER = `import { follow } from './marching.js';
onmessage = ({ data }) => { follow(data); postMessage('left'); };
postMessage('ready');`;

/** Runs in the page: starts both workers. */
async function startWorkers() {
  const heard = (worker) =>
    new Promise((resolve, reject) => {
      worker.onmessage = resolve;
      worker.onerror = ({ message }) => reject(new Error(message));
    });
  const [leader, follower] = ['./leader.js', './follower.js'].map((name) => new Worker(name, { type: 'module' }));
  await Promise.all([heard(leader), heard(follower)]);
  globalThis.march = (job) =>
    new Promise((resolve, reject) => {
      leader.onerror = ({ message }) => reject(new Error(message));
      leader.onmessage = ({ data }) => {
        if (data.found) resolve(data.found);
        else follower.postMessage(data.setup);
      };
      follower.onmessage = () => leader.postMessage('left');
      leader.postMessage(job);
    });
}

/** Serves the bundle of the grid solver to an isolated page. */
async function servedMarch(folder) {
  const own = { '/': '<!doctype html><title>March</title>', '/leader.js': LEADER, '/follower.js': FOLLOWER };
  const server = createServer((request, response) => {
    const name = request.url === '/' ? 'page.html' : request.url.slice(1);
    response.setHeader('Cross-Origin-Opener-Policy', 'same-origin');
    response.setHeader('Cross-Origin-Embedder-Policy', 'require-corp');
    response.setHeader('Content-Type', TYPES[name.split('.').at(-1)] ?? 'text/plain');
    const text = own[request.url] ?? (existsSync(join(folder, name)) ? readFileSync(join(folder, name)) : undefined);
    response.writeHead(text === undefined ? 404 : 200).end(text);
  });
  await new Promise((done) => server.listen(0, '127.0.0.1', done));
  return { url: `http://127.0.0.1:${server.address().port}/`, end: () => server.close() };
}

/** Cases of the march: an empty cube, and one as a user runs it. Steps that take about a third of a second. */
const MARCHES = [
  { use: 'empty', size: 128, steps: 64 },
  { use: 'as used', size: 128, steps: 64 },
  { use: 'empty', size: 200, steps: 16 },
  { use: 'as used', size: 200, steps: 16 },
];

/** The grid's march on two threads, one bundle in Node and in an isolated page, in turns: million cell updates a second. */
export async function benchMarches(rounds = 7) {
  const entry = (await bundle({ marching: 'test/bench/marching.ts' }))('marching');
  const { measure, bare, asUsed } = await import(entry);
  setFlagsFromString('--expose-gc');
  const collect = runInNewContext('gc');
  const followers = startFollowers(entry, 1);
  const site = await servedMarch(dirname(fileURLToPath(entry)));
  const browser = await chromium.launch({ ...browserPlace(), args: [...FLAGS, '--js-flags=--expose-gc'] });
  try {
    const page = await browser.newPage();
    await page.goto(site.url);
    await page.evaluate(startWorkers);
    const inPage = (job) => page.evaluate((asked) => march(asked), job);
    const inNode = async ({ use, size, steps }) => {
      collect();
      const problem = use === 'as used' ? asUsed(size, steps) : bare(size, steps);
      return measure(problem, { threads: 2, random: use !== 'as used' }, followers.follow);
    };
    const found = [];
    for (const job of MARCHES) {
      const taken = { node: [], page: [] };
      // the first of each compiles the kernel
      const [first, other] = [await inNode(job), await inPage(job)];
      if (first.checksum !== other.checksum) throw new Error('Node and the page marched to different fields');
      for (let round = 0; round < rounds; round++) {
        taken.node.push((await inNode(job)).rate);
        taken.page.push((await inPage(job)).rate);
      }
      found.push({
        ...job,
        node: range(taken.node),
        page: range(taken.page),
        ofNode: middle(taken.page.map((rate, n) => rate / taken.node[n])),
      });
    }
    return found;
  } finally {
    await browser.close();
    await followers.stop();
    site.end();
  }
}

/** @returns {Promise<object>} medians and ranges over the visits, milliseconds; of the march, million cell updates a second */
export async function benchPage(visits = 3, rounds = 7) {
  const { url, end } = await served();
  const browser = await chromium.launch({ ...browserPlace(), args: FLAGS });
  try {
    const seen = [];
    let costs = {};
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
      pictures: Object.entries(costs).map(([use, taken]) => ({
        use: `three panes of three planes of 256² samples, ${use}`,
        ...range(taken),
        pictures: taken.length,
      })),
      marches: await benchMarches(rounds),
    };
  } finally {
    await browser.close();
    end();
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) console.log(JSON.stringify(await benchPage(), null, 2));
