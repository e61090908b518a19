import { spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { linkOf } from '../../src/app/link.ts';
import type { Plan } from '../../src/compare/planResult.ts';
import { type SurveyResult, surveyResultSchema } from '../../src/compare/surveyResult.ts';
import { textOf } from '../../src/scenario/text.ts';
import { launchBrowser } from './browser.ts';
import { dropOn, finished, openPage, planned, textOfPage } from './open.ts';
import { COMMAND, type Served, serveBuiltPage } from './server.ts';
import { SMALL, SURVEY } from './small.ts';

let browser: Browser;
let served: Served;
let small: string;
let folder: string;

beforeAll(async () => {
  [browser, served] = await Promise.all([launchBrowser(), serveBuiltPage()]);
  small = served.url + (await linkOf(textOf(SMALL)));
  folder = mkdtempSync(join(tmpdir(), 'survey-'));
  writeFileSync(join(folder, 'given.json'), JSON.stringify(SURVEY));
});
afterAll(async () => {
  await browser?.close();
  served?.end();
  rmSync(folder, { recursive: true, force: true });
});

/** A survey’s result, checked against its published form. */
const surveyOf = (text: string) => surveyResultSchema.parse(JSON.parse(text)) as unknown as SurveyResult;

const saved = async (page: Page, name: string): Promise<string> => {
  const [download] = await Promise.all([
    page.waitForEvent('download'),
    page.locator('.place:not([hidden]) .bar').getByRole('button', { name, exact: true }).first().click(),
  ]);
  return readFileSync((await download.path())!, 'utf8');
};

const violations = async (page: Page): Promise<string[]> =>
  await page.evaluate(async () => {
    const { violations: found } = await (
      globalThis as unknown as { axe: { run(): Promise<{ violations: { id: string; nodes: { html: string }[] }[] }> } }
    ).axe.run();
    return found.flatMap(({ id, nodes }) => nodes.map(({ html }) => `${id}: ${html}`));
  });

test('a survey on the page is the command’s; it is cancelled, goes on, and a point of it is a case for Compare', async () => {
  const command = spawnSync(
    process.execPath,
    [COMMAND, 'survey', join(folder, 'given.json'), '--out', join(folder, 'out'), '--json'],
    { encoding: 'utf8' },
  );
  const expected = surveyOf(command.stdout);
  const axe = readFileSync(resolve('node_modules/axe-core/axe.min.js'), 'utf8');
  const { page, troubles } = await openPage(browser, `${small}&at=ladders`, { colorScheme: 'dark' }, axe);
  const bar = page.locator('.place .bar').first();
  await dropOn(page, 'survey.json', JSON.stringify(SURVEY));
  await page.getByText('4 cases', { exact: true }).waitFor();
  expect(await violations(page)).toEqual([]);

  await bar.getByRole('button', { name: 'Run survey' }).click();
  await page.locator('.tables table').last().locator('tbody tr').first().waitFor();
  await bar.getByRole('button', { name: 'Cancel' }).evaluate((button) => (button as HTMLButtonElement).click());
  await page.getByText(/Cancelled/).waitFor();
  // what was done by then is shown, and not run again
  expect(await page.locator('.tables table').last().locator('tbody tr').count()).toBeGreaterThan(0);
  await bar.getByRole('button', { name: 'Go on' }).click();
  await page.locator('.tables table').last().locator('tbody tr').nth(3).waitFor();
  await bar.getByRole('button', { name: 'Run survey' }).waitFor({ timeout: 60_000 });

  const own = surveyOf(await saved(page, 'Result'));
  expect(own.cases.map(({ settings, hash }) => ({ settings, hash }))).toEqual(
    expected.cases.map(({ settings, hash }) => ({ settings, hash })),
  );
  const figures = ({ cases, ladders, boundaries }: SurveyResult) => ({
    budgets: cases.map((each) => each.budget),
    norms: cases.map((each) => each.norms),
    ladders,
    boundaries,
  });
  expect(figures(own)).toEqual(figures(expected));
  expect(await saved(page, 'Table')).toContain('mur1');
  expect(JSON.parse(await saved(page, 'Survey'))).toMatchObject({ scenario: SMALL, vary: SURVEY.vary });
  expect(await violations(page)).toEqual([]);

  // walls beside the exact field, moving
  await page.getByRole('button', { name: 'Show their fields' }).click();
  await page.waitForFunction(() => document.querySelector('.walls .bar .muted')?.textContent === '', undefined, {
    timeout: 60_000,
  });
  const before = await page.evaluate(() => document.querySelector<HTMLCanvasElement>('.walls canvas')!.toDataURL());
  await page.evaluate(() => {
    const slider = document.querySelector<HTMLInputElement>('.walls input[type=range]')!;
    slider.value = '40';
    slider.dispatchEvent(new Event('input'));
  });
  await page.waitForTimeout(300);
  expect(await page.evaluate(() => document.querySelector<HTMLCanvasElement>('.walls canvas')!.toDataURL())).not.toBe(
    before,
  );
  expect(await page.locator('.walls .cursor').first().getAttribute('visibility')).toBe('visible');

  // the first point of the ladder is its first case
  const dot = page.locator('.results .charts [data-key="0"]').first();
  await dot.scrollIntoViewIfNeeded();
  await dot.click();
  await page.waitForFunction(() => fieldassay.places.current === 'compare');
  await finished(page);
  const total = await page.evaluate(() => fieldassay.store.state.result!.budget.total.relativeL2);
  expect(total).toBe(own.cases[0]!.budget!.total.relativeL2);
  expect(troubles).toEqual([]);
  await page.context().close();
});

test('a survey that runs elsewhere is followed in its folder: first some cases, then all, then its result', async () => {
  const out = join(folder, 'out');
  const [cases, aside] = [join(out, 'cases'), join(folder, 'aside')];
  mkdirSync(aside);
  const names = readdirSync(cases).sort();
  for (const name of names.slice(1)) renameSync(join(cases, name), join(aside, name));
  renameSync(join(out, 'survey-result.json'), join(aside, 'survey-result.json'));
  const own = await serveBuiltPage(out);
  try {
    const { page, troubles } = await openPage(browser, own.url);
    await page.getByText('1 of 4 cases').waitFor();
    for (const name of names.slice(1)) renameSync(join(aside, name), join(cases, name));
    await page.getByText('4 of 4 cases').waitFor();
    renameSync(join(aside, 'survey-result.json'), join(out, 'survey-result.json'));
    await page.getByText('read only').waitFor();
    expect(await textOfPage(page, '.place h1')).toMatch(/^Within 5 %/);
    expect(troubles).toEqual([]);
    await page.context().close();
  } finally {
    own.end();
  }
});

test('a plan answers its slider, is the command’s, and is run in Compare', async () => {
  const { page, troubles } = await openPage(
    browser,
    `${small}&at=plan`,
    {},
    readFileSync(resolve('node_modules/axe-core/axe.min.js'), 'utf8'),
  );
  await planned(page);
  const file = join(folder, 'small.json');
  writeFileSync(file, JSON.stringify(SMALL));
  const command = spawnSync(process.execPath, [COMMAND, 'plan', file, '--no-run', '--json'], { encoding: 'utf8' });
  const expected: Plan = JSON.parse(command.stdout);
  const own: Plan = JSON.parse(await saved(page, 'Plan'));
  expect(own.chosen).toEqual(expected.chosen);
  expect(own.places).toEqual(expected.places);

  for (const at of ['120', '150']) {
    await page.getByRole('slider', { name: 'Tolerance' }).fill(at);
    const tolerance = await page.locator('.place .slide input[type=text]').first().inputValue();
    await page.getByRole('heading', { name: `Within ${tolerance}` }).waitFor();
  }
  await planned(page);
  expect(await violations(page)).toEqual([]);

  await page.getByRole('button', { name: 'Apply and run in Compare' }).click();
  await page.waitForFunction(() => fieldassay.places.current === 'compare');
  await finished(page);
  await page
    .getByText(/measured/)
    .first()
    .waitFor();
  const line = await textOfPage(page, '#predicted');
  console.log(line);
  expect(line).toMatch(/^Predicted [\d.]+ % ✓ at A.* · measured [\d.]+ %/);
  // the plan tells it, too; and the browser's history goes back to the plan
  await page.getByRole('button', { name: 'Plan', exact: true }).click();
  await page.getByText(/^Run in Compare: predicted/).waitFor();
  await page.goBack();
  await page.waitForFunction(() => fieldassay.places.current === 'compare');
  await page.goBack();
  await page.waitForFunction(() => fieldassay.places.current === 'plan');
  expect(troubles).toEqual([]);
  await page.context().close();
});

test('the error is predicted while one types, before any run ends', async () => {
  const { page, troubles } = await openPage(browser, small);
  await finished(page);
  await page.waitForFunction(() => document.querySelector('#predicted')?.textContent?.startsWith('Predicted'));
  const before = await textOfPage(page, '#predicted');
  await page.evaluate(() => {
    fieldassay.store.edit((draft) => {
      draft.grid.cellSize = '7.5 mm';
    });
  });
  await page.waitForFunction((old) => {
    const text = document.querySelector('#predicted')!.textContent!;
    return text.startsWith('Predicted') && text.split(' at ')[0] !== old.split(' at ')[0];
  }, before);
  // no verdict but the first
  expect(await page.evaluate(() => performance.getEntriesByName('verdict').length)).toBe(1);
  expect(troubles).toEqual([]);
  await page.context().close();
});

test('places are reached by keyboard, kept in the address, and fit into a small window', async () => {
  const { page, troubles } = await openPage(browser, small, { viewport: { width: 1024, height: 700 } });
  await page.keyboard.press('g');
  await page.waitForFunction(() => fieldassay.places.current === 'ladders');
  await page.keyboard.press('g');
  await page.waitForFunction(() => location.hash.includes('at=plan'));
  await page.getByRole('heading', { name: /predicted/ }).waitFor();
  await page.reload();
  await page.waitForFunction(() => globalThis.fieldassay?.places.current === 'plan');
  // the address is unpacked meanwhile
  await page.waitForFunction(() => fieldassay.store.state.json !== undefined);
  expect(await page.evaluate(() => fieldassay.store.state.json)).toEqual(SMALL);
  // Compare is not run where nobody sees it
  expect(await page.evaluate(() => fieldassay.store.state.run.status)).toBe('idle');
  for (const place of ['plan', 'ladders', 'compare']) {
    await page.evaluate((key) => fieldassay.places.go(key), place);
    const wide = await page.evaluate(() => document.documentElement.scrollWidth - innerWidth);
    expect(wide, place).toBeLessThanOrEqual(0);
  }
  await finished(page);
  expect(troubles).toEqual([]);
  await page.context().close();
});
