import { execFileSync, spawnSync } from 'node:child_process';
import {
  cpSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { launchBrowser } from '../page/browser.ts';
import { SMALL } from '../run/surveyFolder.ts';
import { serveFolder } from './serveFolder.ts';

/**
 * The package as a user gets it: packed in a copy of the project, unpacked into an empty one. What it needs is linked from
 * here, so that the test asks no registry.
 */
const project = resolve('.');
let folder = '';
let user = '';
let files: string[] = [];
let manifest: Record<string, unknown>;

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-package-'));
  const copy = join(folder, 'project');
  const skipped = ['node_modules', '.git', '.cache', 'out', 'coverage'];
  for (const name of readdirSync(project))
    if (!skipped.includes(name)) cpSync(join(project, name), join(copy, name), { recursive: true });
  symlinkSync(join(project, 'node_modules'), join(copy, 'node_modules'));
  const before = readFileSync(join(copy, 'package.json'), 'utf8');
  const packed = JSON.parse(execFileSync('npm', ['pack', '--json'], { cwd: copy, encoding: 'utf8' }));
  files = packed[0].files.map(({ path }: { path: string }) => path);
  // Packing leaves the project as it was.
  expect(readFileSync(join(copy, 'package.json'), 'utf8')).toBe(before);
  expect(existsSync(join(copy, 'package.json.own'))).toBe(false);

  user = join(folder, 'user');
  const modules = join(user, 'node_modules');
  mkdirSync(join(modules, 'fieldassay'), { recursive: true });
  execFileSync('tar', [
    'xzf',
    join(copy, packed[0].filename),
    '-C',
    join(modules, 'fieldassay'),
    '--strip-components',
    '1',
  ]);
  manifest = JSON.parse(readFileSync(join(modules, 'fieldassay/package.json'), 'utf8'));
  for (const name of Object.keys(manifest.dependencies as object)) {
    mkdirSync(join(modules, name, '..'), { recursive: true });
    symlinkSync(join(project, 'node_modules', name), join(modules, name));
  }
  writeFileSync(join(user, 'package.json'), '{ "type": "module", "private": true }');
}, 300_000);
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const node = (...args: string[]) => spawnSync(process.execPath, args, { cwd: user, encoding: 'utf8' });

describe('the package', () => {
  test('holds bundles and declarations, no sources, tests or build tools, and asks for two packages', () => {
    expect(files.filter((path) => !path.startsWith('dist/')).sort()).toEqual(['LICENSE', 'README.md', 'package.json']);
    expect(files.filter((path) => /\.ts$/.test(path) && !/\.d\.ts$/.test(path))).toEqual([]);
    expect(files.filter((path) => /stamp|test|kernels|assembly/.test(path))).toEqual([]);
    expect(Object.keys(manifest.dependencies as object)).toEqual(['@fontsource/inter', 'zod']);
    expect(manifest).not.toHaveProperty('devDependencies');
    for (const path of ['dist/main.js', 'dist/index.js', 'dist/library/index.js', 'dist/types/index.d.ts'])
      expect(files).toContain(path);
    expect(manifest.engines).toEqual({ node: '>=20.19' });
  });

  test('ships the notices of every package that its bundles hold', () => {
    const shipped = files.filter((path) => /NOTICES[^/]*\.md$/.test(path)).sort();
    expect(shipped).toEqual([
      'dist/NOTICES.md',
      'dist/library/NOTICES-worker.md',
      'dist/library/NOTICES.md',
      'dist/page/NOTICES.md',
    ]);
    const text = shipped.map((path) => readFileSync(join(user, 'node_modules/fieldassay', path), 'utf8')).join('\n');
    const imported = new Set<string>();
    for (const name of readdirSync('src', { recursive: true, encoding: 'utf8' })) {
      if (!name.endsWith('.ts') || name.endsWith('.d.ts') || /^kernels|config\.ts$/.test(name)) continue;
      const source = readFileSync(join('src', name), 'utf8');
      for (const [, specifier] of source.matchAll(/^import (?!type )(?:[^;]*? from )?'([^'.#][^']*)'/gm))
        if (!specifier!.startsWith('node:')) imported.add(/^(@[^/]+\/)?[^/]+/.exec(specifier!)![0]);
    }
    expect(imported.size).toBeGreaterThan(10);
    const named = new Set([...text.matchAll(/^## (\S+) - /gm)].map(([, name]) => name!));
    // What is not bundled comes as a package of its own, with its own notice.
    const own = Object.keys(manifest.dependencies as object);
    expect([...imported].filter((name) => !named.has(name) && !own.includes(name))).toEqual([]);
  });

  test.each(readdirSync('test/library/examples').sort())('example %s runs', (name) => {
    cpSync(join(project, 'test/library/examples', name), join(user, name));
    const { status, stdout, stderr } = node(name, 'written');
    expect(status, stderr).toBe(0);
    console.log(stdout);
    if (name === 'verdict.mjs')
      expect(stdout).toMatch(/Within 5 %: .*\n[\s\S]*The lattice makes .* % of E\.\nduration: .*mm/);
    if (name === 'exact.mjs') expect(stdout.match(/x = .* m: Ez = -?[\d.]+ V\/m, right to/g)).toHaveLength(3);
    if (name === 'order.mjs') {
      const orders = [...stdout.matchAll(/order ([\d.]+)/g)].map(([, order]) => Number(order));
      expect(orders).toHaveLength(2);
      for (const order of orders) {
        expect(order).toBeGreaterThan(1.5);
        expect(order).toBeLessThan(2.6);
      }
    }
    if (name === 'judge.mjs') {
      expect(stdout).toContain('\nLikeliest: amplitude\n');
      expect(stdout).toContain('1 trace of probe.csv: ');
      expect(stdout).toMatch(/\ntraces\.0\.time: number 1 is .* s, after .* s; instants must ascend\n$/);
    }
    if (name === 'files.mjs')
      expect(readdirSync(join(user, 'written')).sort()).toEqual([
        'report.html',
        'result.json',
        'traces.csv',
        'traces.npz',
      ]);
  });

  test('a program from the command line or in CommonJS runs too: flags of Node are not its workers’', () => {
    const small = JSON.stringify(SMALL);
    const asModule = `import { compare } from 'fieldassay';
      console.log((await compare(${small}, { threads: 2 })).result.verdict.sentence);`;
    const asScript = `require('fieldassay').compare(${small}, { threads: 2 }).then(({ result }) => console.log(result.verdict.sentence));`;
    for (const args of [
      ['--input-type=module', '-e', asModule],
      ['--input-type=commonjs', '-e', asScript],
    ]) {
      const { status, stdout, stderr } = node(...args);
      expect(status, stderr).toBe(0);
      expect(stdout).toMatch(/^Within 5 %: /);
    }
  });

  test('what fails is told apart by its class; an abort ends workers at once', () => {
    writeFileSync(
      join(user, 'fails.mjs'),
      `import { compare, EXAMPLES, OutOfMemory, Refusal, WorkerDied } from 'fieldassay';
const kind = async (scenario, options) => {
  try {
    await compare(scenario, options);
    return 'done';
  } catch (error) {
    const known = [Refusal, OutOfMemory, WorkerDied].find((type) => error instanceof type);
    return known ? known.name + ' ' + (error.name === known.name) : error;
  }
};
const scenario = ${JSON.stringify({ ...SMALL, grid: { ...SMALL.grid, cellSize: '2 mm' } })};
const stop = new AbortController();
const seen = [];
const onProgress = ({ stage, fraction }) => {
  seen.push(fraction);
  if (fraction > 0.2) stop.abort('enough');
};
console.log(await kind({}), await kind(scenario, { threads: 2, signal: stop.signal, onProgress }));
console.log(await kind(scenario, { signal: stop.signal }), seen.every((x, n) => n === 0 || x >= seen[n - 1]));
const { Memory } = WebAssembly;
WebAssembly.Memory = class { constructor() { throw new RangeError('could not allocate memory'); } };
console.log(await kind(scenario, { threads: 2 }));
WebAssembly.Memory = Memory;
process.env.NODE_OPTIONS = '--require=./dies.cjs';
console.log(await kind(scenario, { threads: 2 }));
`,
    );
    writeFileSync(
      join(user, 'dies.cjs'),
      `const { isMainThread, parentPort } = require('node:worker_threads');
      if (!isMainThread) parentPort.once('message', () => process.exit(7));`,
    );
    const { status, stdout, stderr } = node('fails.mjs');
    expect([status, stderr]).toEqual([0, '']);
    expect(stdout).toBe('Refusal true enough\nenough true\nOutOfMemory true\nWorkerDied true\n');
  });

  test('the command runs, with its worker and its pictures', () => {
    const main = join('node_modules/fieldassay', (manifest.bin as Record<string, string>).fieldassay!);
    writeFileSync(join(user, 'small.json'), JSON.stringify(SMALL));
    const { status, stderr } = node(
      main,
      'compare',
      'small.json',
      '--out',
      'out',
      '--frames',
      'frames',
      '--snapshots',
      'hdf5',
      '--instants',
      '2',
    );
    expect(status, stderr).toBeLessThan(2);
    expect(readdirSync(join(user, 'frames'))).toContain('film.png');
    expect(readdirSync(join(user, 'out'))).toContain('fields.h5');
  });

  test('its declarations are enough for a strict compiler, and say what is wrong', () => {
    const examples = readdirSync('test/library/examples');
    for (const name of examples) cpSync(join(project, 'test/library/examples', name), join(user, name));
    const types = join(user, 'node_modules/@types');
    mkdirSync(types, { recursive: true });
    if (!existsSync(join(types, 'node'))) symlinkSync(join(project, 'node_modules/@types/node'), join(types, 'node'));
    writeFileSync(
      join(user, 'uses.ts'),
      `import { compare, type Result, tracesOf } from 'fieldassay';
const comparison = await compare({}, { threads: 2, onProgress: ({ fraction }) => console.log(fraction.toFixed(2)) });
const result: Result = comparison.result;
export const error: number | null | undefined = result.budget.lattice?.relativeL2;
export const traces = tracesOf(comparison).map(({ signals }) => signals.exact);
// @ts-expect-error threads is a number
await compare({}, { threads: '2' });
`,
    );
    for (const resolution of [
      ['--module', 'esnext', '--moduleResolution', 'bundler'],
      ['--module', 'nodenext', '--moduleResolution', 'nodenext'],
    ]) {
      const tsc = join(project, 'node_modules/typescript/bin/tsc');
      const asked = [
        tsc,
        'uses.ts',
        ...examples,
        '--ignoreConfig',
        '--noEmit',
        '--strict',
        '--allowJs',
        '--checkJs',
        '--target',
        'es2022',
        '--lib',
        'es2023,dom',
        '--types',
        'node',
      ];
      const { status, stdout } = node(...asked, ...resolution);
      expect([status, stdout]).toEqual([0, '']);
    }
  });
});

describe('in a page, through a bundler', () => {
  let browser: Browser;
  beforeAll(async () => {
    browser = await launchBrowser();
  });
  afterAll(() => browser?.close());

  test('the same numbers as in Node, with threads where memory can be shared and without', async () => {
    const page = join(user, 'page');
    mkdirSync(page, { recursive: true });
    writeFileSync(
      join(page, 'index.html'),
      '<!doctype html><meta charset="utf-8"><title>library</title><p id="said"></p><script type="module" src="./main.js"></script>',
    );
    writeFileSync(
      join(page, 'main.js'),
      `import { compare } from 'fieldassay';
const { result } = await compare(${JSON.stringify(SMALL)});
document.querySelector('#said').textContent = JSON.stringify(result);
`,
    );
    const vite = join(project, 'node_modules/vite/bin/vite.js');
    const built = node(vite, 'build', 'page', '--base', './', '--logLevel', 'warn');
    expect(built.status, built.stderr).toBe(0);
    writeFileSync(join(user, 'small.json'), JSON.stringify(SMALL));
    const main = join('node_modules/fieldassay', (manifest.bin as Record<string, string>).fieldassay!);
    const plain = timeless(node(main, 'compare', 'small.json', '--json').stdout);
    for (const isolated of [true, false]) {
      const served = await serveFolder(join(page, 'dist'), isolated);
      const tab = await browser.newPage();
      try {
        const troubles: string[] = [];
        tab.on('pageerror', ({ message }) => troubles.push(message));
        await tab.goto(served.url);
        await tab.waitForFunction(() => document.querySelector('#said')!.textContent !== '', undefined, {
          timeout: 90_000,
        });
        const text = (await tab.textContent('#said'))!;
        expect(JSON.parse(text).environment.threads).toBe(
          isolated ? await tab.evaluate(() => navigator.hardwareConcurrency) : 1,
        );
        expect(timeless(text)).toEqual(plain);
        expect(troubles).toEqual([]);
      } finally {
        await tab.close();
        served.end();
      }
    }
  }, 200_000);
});

/** A result without what depends on the run. */
const timeless = (text: string) =>
  JSON.parse(text, (key, value) => (key === 'timings' || key === 'environment' ? undefined : value));
