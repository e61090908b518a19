import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { linkOf } from '../../src/app/link.ts';
import { judgeSchema } from '../../src/compare/judgeResult.ts';
import { textOf } from '../../src/scenario/text.ts';
import { launchBrowser } from './browser.ts';
import { openPage } from './open.ts';
import { COMMAND, type Served, serveBuiltPage } from './server.ts';
import { SMALL } from './small.ts';

let browser: Browser;
let served: Served;
let folder: string;

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-judge-page-'));
  writeFileSync(join(folder, 'small.json'), JSON.stringify(SMALL));
  const { status } = spawnSync(process.execPath, [COMMAND, 'compare', 'small.json', '--out', 'out'], { cwd: folder });
  expect(status).toBeLessThan(2);
  // A solver that writes in nanoseconds, its E half as strong as it should be.
  const own = readFileSync(join(folder, 'out/traces.csv'), 'utf8').trim().split('\n');
  const cells = own.map((line) => line.split(','));
  const rows = (component: string) => cells.filter((row) => row[1] === component);
  const [Ez, Ex] = [rows('Ez'), rows('Ex')];
  const half = Ez.map((row, n) => [Number(row[5]) * 1e9, Number(row[6]) / 2, Number(Ex[n]![6]) / 2].join(','));
  writeFileSync(join(folder, 'half.csv'), ['t [ns],Ez,Ex', ...half].join('\n'));
  [browser, served] = await Promise.all([launchBrowser(), serveBuiltPage()]);
});
afterAll(async () => {
  await browser?.close();
  served?.end();
  rmSync(folder, { recursive: true, force: true });
});

test('a file dropped anywhere stands beside the exact field, with the figures and the cause of the command line', async () => {
  const { page, troubles, requests } = await openPage(browser, served.url + (await linkOf(textOf(SMALL))));
  await page.getByLabel('Open a scenario or traces').setInputFiles(join(folder, 'half.csv'));
  const found = page.locator('main[aria-label="Judge"] .found');
  await found.locator('h1').waitFor({ timeout: 60_000 });
  await page.getByLabel('Components at their own places').check();
  await page.waitForFunction(() =>
    document.querySelector('main[aria-label="Judge"] h1')?.textContent?.startsWith('50 %'),
  );

  const args = ['judge', 'small.json', '--traces', 'half.csv', '--staggered', '--json'];
  const told = judgeSchema.parse(
    JSON.parse(spawnSync(process.execPath, [COMMAND, ...args], { cwd: folder, encoding: 'utf8' }).stdout),
  );
  const text = (await found.textContent())!;
  console.log(told.sentence, told.details[0]);
  expect(text).toContain(told.sentence);
  expect(told.details[0]).toMatch(/^Likeliest cause: E is 0\.5\d* times what it should be\./);
  for (const detail of told.details) expect(text).toContain(detail);
  // Trace and exact field, their difference, spectra.
  expect(await found.locator('svg.chart').count()).toBe(3);

  const download = page.waitForEvent('download');
  await page.getByRole('button', { name: 'Result' }).click();
  const saved = judgeSchema.parse(JSON.parse(readFileSync((await (await download).path())!, 'utf8')));
  expect(saved.observers).toEqual(told.observers);
  expect(troubles).toEqual([]);
  expect(requests.every((url) => url.startsWith(served.url) || url.startsWith('blob:'))).toBe(true);
});

test('a link reproduces what its sender saw once the file is dropped: how it is read stands in the address', async () => {
  const { page, troubles } = await openPage(browser, `${served.url}${await linkOf(textOf(SMALL))}&at=judge`);
  const place = page.locator('main[aria-label="Judge"]');
  const fields = {
    'Cell size': ['cell', '9 mm'],
    'Unit of times': ['unit', 'ns'],
    Observer: ['observer', 'A'],
    Columns: ['columns', 'time=T & t; A.Ez=Probe 1'],
  } as const;
  for (const [name, [, value]] of Object.entries(fields)) {
    await place.getByLabel(name, { exact: true }).fill(value);
    await page.keyboard.press('Tab');
  }
  await place.getByLabel('Components at their own places').check();
  await page.waitForFunction(() => location.hash.includes('positions=staggered'));
  const link = page.url();
  const held = new URLSearchParams(new URL(link).hash.slice(1));
  for (const [key, value] of Object.values(fields)) expect(held.get(key)).toBe(value);

  writeFileSync(
    join(folder, 'headers.csv'),
    readFileSync(join(folder, 'half.csv'), 'utf8').replace('t [ns],Ez,Ex', 'T & t,Probe 1,unused'),
  );
  const sentences = [];
  for (const each of [page, (await openPage(browser, link)).page]) {
    const there = each.locator('main[aria-label="Judge"]');
    await there.locator('input[type=file]').setInputFiles(join(folder, 'headers.csv'));
    await there.locator('h1').waitFor({ timeout: 60_000 });
    sentences.push(await there.locator('h1').textContent());
  }
  console.log(sentences[0]);
  expect(sentences[0]).toContain('a sound Yee grid at 9 mm');
  expect(sentences[1]).toBe(sentences[0]);
  // An address without them is another question.
  await page.goto(`${served.url}${await linkOf(textOf(SMALL))}&at=judge`);
  await expect.poll(() => place.getByLabel('Columns').inputValue()).toBe('');
  expect(troubles).toEqual([]);
});

test('what cannot be read is refused with row and column, and the page goes on', async () => {
  writeFileSync(join(folder, 'bad.csv'), 't,Ez<img src=x onerror=alert(1)>\n0,1\n1,two\n');
  const { page, troubles } = await openPage(browser, `${served.url}${await linkOf(textOf(SMALL))}`);
  await page.getByRole('button', { name: 'Judge', exact: true }).click();
  await page.getByRole('button', { name: 'Open traces…' }).waitFor();
  await page.locator('main[aria-label="Judge"] input[type=file]').setInputFiles(join(folder, 'bad.csv'));
  const said = page.getByRole('alert');
  await expect.poll(() => said.textContent()).toContain('bad.csv: no column holds a field component');
  await page.locator('main[aria-label="Judge"] input[type=file]').setInputFiles(join(folder, 'half.csv'));
  await page.locator('main[aria-label="Judge"] h1').waitFor({ timeout: 60_000 });
  expect(await page.locator('main[aria-label="Judge"] img').count()).toBe(0);
  expect(troubles).toEqual([]);
});
