import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { linkOf } from '../../src/app/link.ts';
import type { SurveyResult } from '../../src/compare/surveyResult.ts';
import { reportHtml } from '../../src/report/html.ts';
import { surveyHtml } from '../../src/report/surveyHtml.ts';
import { printable, textOf } from '../../src/scenario/text.ts';
import { HOSTILE, SHOWING, UNSEEN_CHARACTER } from '../hostile/strings.ts';
import { exampleReport } from '../report/example.ts';
import { launchBrowser } from './browser.ts';
import { finished, openPage } from './open.ts';
import { type Served, serveBuiltPage } from './server.ts';
import { SMALL } from './small.ts';

const ALL = HOSTILE.join(' ');

let browser: Browser;
let served: Served;
let folder = '';
/** What would hear of it if anything were asked of another place. */
let listener: Server;
let elsewhere = '';
let heard: string[] = [];

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-hostile-'));
  writeFileSync(
    join(folder, 'report.html'),
    reportHtml({ ...exampleReport({ title: ALL, observer: ALL }), command: ALL }),
  );
  const survey = {
    title: ALL,
    version: '0',
    survey: { [ALL]: ALL },
    vary: [ALL],
    cases: [{ settings: { [ALL]: ALL }, status: 'refused', reason: ALL, hash: '0' }],
    ladders: [],
    boundaries: [],
    environment: { node: ALL, platform: ALL, processors: 1 },
  } as unknown as SurveyResult;
  writeFileSync(join(folder, 'survey.html'), surveyHtml(survey, ALL));
  listener = createServer((request, response) => {
    heard.push(request.url ?? '');
    response.end();
  });
  await new Promise<void>((done) => listener.listen(0, '127.0.0.1', done));
  elsewhere = `http://127.0.0.1:${(listener.address() as AddressInfo).port}`;
  [browser, served] = await Promise.all([launchBrowser(), serveBuiltPage(folder)]);
});
afterAll(async () => {
  await browser?.close();
  served?.end();
  listener?.close();
  rmSync(folder, { recursive: true, force: true });
});

/** Whether any of the scripts that were handed in has run. */
const ran = (page: Page) => page.evaluate(() => (globalThis as { ran?: number }).ran);

/** Tries, as a script that has got in would, to tell another place something. Resolves when all ways were tried. */
const tryToTell = (page: Page, to: string) =>
  page.evaluate(async (address) => {
    const settled = (act: () => Promise<unknown>) => act().catch(() => {});
    const loading = (tag: 'img' | 'script' | 'iframe' | 'link' | 'audio') =>
      new Promise((done) => {
        const element = document.createElement(tag);
        element.addEventListener('load', done);
        element.addEventListener('error', done);
        if (element instanceof HTMLLinkElement) Object.assign(element, { rel: 'stylesheet', href: `${address}/link` });
        else element.src = `${address}/${tag}`;
        document.body.append(element);
        setTimeout(done, 300);
      });
    await settled(() => fetch(`${address}/fetch`, { mode: 'no-cors' }));
    navigator.sendBeacon(`${address}/beacon`);
    for (const tag of ['img', 'script', 'iframe', 'link', 'audio'] as const) await loading(tag);
    try {
      new WebSocket(`${address.replace('http', 'ws')}/socket`);
      new EventSource(`${address}/events`);
    } catch {
      // Some are refused at once.
    }
    const form = document.createElement('form');
    form.action = `${address}/form`;
    document.body.append(form);
    form.submit();
    document.body.style.background = `url(${address}/style)`;
    await new Promise((done) => setTimeout(done, 300));
  }, to);

test.each([
  ['report.html', 'served'],
  ['report.html', 'opened as a file'],
  ['survey.html', 'opened as a file'],
])('%s, %s: shows hostile texts, runs none of them, and nothing gets out of it', async (name, how) => {
  heard = [];
  const url = how === 'served' ? `${served.url}${name}` : pathToFileURL(join(folder, name)).href;
  const context = await browser.newContext();
  const page = await context.newPage();
  const requests: string[] = [];
  page.on('request', (request) => requests.push(request.url()));
  await page.goto(url);
  expect(await ran(page)).toBeUndefined();
  expect(await page.locator('script, iframe, img, object, embed, form, foreignObject, link, base').count()).toBe(0);
  const attributes = await page.evaluate(() =>
    [...document.querySelectorAll('*')].flatMap((element) => element.getAttributeNames()),
  );
  expect(attributes.filter((attribute) => /^(on|href$|src|style$|xlink)/.test(attribute))).toEqual([]);
  const shown = ALL.split('\n').map(printable).join('\n');
  expect((await page.locator('bdi').first().textContent())!.trim()).toBe(shown);
  expect(requests).toEqual([url]);
  await tryToTell(page, elsewhere);
  expect(heard).toEqual([]);
  await context.close();
});

test('a report is whole without scripts', async () => {
  const context = await browser.newContext({ javaScriptEnabled: false });
  const page = await context.newPage();
  await page.goto(`${served.url}report.html`);
  expect(await page.locator('h1').textContent()).toMatch(/^Within 5 %/);
  expect(await page.locator('svg.chart').count()).toBeGreaterThan(10);
  await page.locator('svg.chart').first().scrollIntoViewIfNeeded();
  await context.close();
});

test('all four places show hostile titles, names and files, and ask nobody but the server', async () => {
  heard = [];
  const names = SHOWING.filter((name) => name.length <= 100);
  const scenario = {
    ...SMALL,
    title: SHOWING.join(' ').slice(0, 1000),
    observers: names.slice(0, 24).map((name, n) => ({ name, at: [`${-30 + 2 * n} mm`, '-20 mm', '10 mm'] })),
    planes: [{ name: names[0], normal: 'y', at: '0 mm' }],
  };
  const watch = `globalThis.violations = [];
    document.addEventListener('securitypolicyviolation', (event) => violations.push(event.violatedDirective + ' ' + event.blockedURI));`;
  const { page, requests, troubles } = await openPage(
    browser,
    served.url + (await linkOf(textOf(scenario))),
    {},
    watch,
  );
  await finished(page);
  expect(await page.evaluate(() => fieldassay.store.state.result?.title)).toBe(scenario.title);
  await page.evaluate((name) => fieldassay.store.setView({ observer: name }), names[2]!);
  for (const place of ['ladders', 'plan', 'judge'] as const) {
    await page.evaluate((key) => fieldassay.places.go(key), place);
    await page.waitForFunction((key) => fieldassay.places.current === key, place);
    await page.waitForTimeout(400);
  }
  // Files by hostile names and with hostile contents: traces, JSON that is none, and a survey's result.
  for (const [name, content] of [
    [`${names[0]!}.csv`, `t,${JSON.stringify(names[2])}.Ez\n0,${names[0]}\n`],
    [`${names[2]!}\u202e.json`, `{"${'<img src=x onerror=globalThis.ran=1>'}":`],
    ['x.json', JSON.stringify({ sources: names[0], grid: names[2], title: 'a\u001b[2J' })],
    ['survey-result.json', JSON.stringify({ title: names[0], cases: [names[1]], vary: names })],
  ] as const)
    await page.evaluate(
      ([file, text]) => {
        const data = new DataTransfer();
        data.items.add(new File([text!], file!));
        window.dispatchEvent(new DragEvent('drop', { dataTransfer: data, cancelable: true }));
      },
      [name, content],
    );
  await page.waitForFunction(() => document.querySelectorAll('.notice.bad').length > 0);
  await page.waitForTimeout(400);
  expect(await ran(page)).toBeUndefined();
  expect(await page.locator('body script, body iframe, body img, body object, foreignObject').count()).toBe(0);
  const handlers = await page.evaluate(() =>
    [...document.querySelectorAll('*')].flatMap((e) => e.getAttributeNames().filter((name) => name.startsWith('on'))),
  );
  expect(handlers).toEqual([]);
  for (const text of await page.locator('.notice').allTextContents()) expect(text).not.toMatch(UNSEEN_CHARACTER);
  expect(await page.evaluate(() => (globalThis as unknown as { violations: string[] }).violations)).toEqual([]);
  expect(troubles).toEqual([]);
  const own = (url: string) => ['data:', 'blob:', served.url].some((start) => url.startsWith(start));
  expect(requests.filter((url) => !own(url))).toEqual([]);
  await tryToTell(page, elsewhere);
  expect(heard).toEqual([]);
  await page.context().close();
});
