import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { reportHtml } from '../../src/report/html.ts';
import { exampleReport } from '../report/example.ts';
import { launchBrowser } from './browser.ts';

let browser: Browser;
beforeAll(async () => {
  browser = await launchBrowser();
});
afterAll(() => browser?.close());

/** A4 within margins of 14 mm, in pixels of 1/96 inch. */
const PAPER = { width: Math.floor((182 / 25.4) * 96), height: Math.floor((269 / 25.4) * 96) };

test('the report prints: light, nothing beside the paper, no figure, row or heading torn apart', async () => {
  const page = await (await browser.newContext({ colorScheme: 'dark' })).newPage();
  await page.setViewportSize(PAPER);
  await page.emulateMedia({ media: 'print', colorScheme: 'dark' });
  await page.setContent(reportHtml(exampleReport()));
  const found = await page.evaluate(() => {
    const boxes = (selector: string) => [...document.querySelectorAll(selector)].map((e) => e.getBoundingClientRect());
    const all = (selector: string, property: 'breakInside' | 'breakAfter') =>
      [...document.querySelectorAll(selector)].map((e) => getComputedStyle(e)[property]);
    return {
      wide: boxes('table, figure, pre, p, dl, h1, h2').filter(({ right }) => right > innerWidth + 1).length,
      tall: Math.max(...boxes('figure, tr, .caution').map(({ height }) => height)),
      figures: boxes('figure').length,
      inside: [...new Set(all('figure, tr, table, .caution', 'breakInside'))],
      after: [...new Set(all('h2, h3', 'breakAfter'))],
      background: getComputedStyle(document.body).backgroundColor,
    };
  });
  expect(found.figures).toBeGreaterThan(4);
  expect(found.wide).toBe(0);
  expect(found.tall).toBeLessThan(PAPER.height / 2);
  expect(found.inside).toEqual(['avoid']);
  expect(found.after).toEqual(['avoid']);
  // #fcfcfb, whatever the theme of the screen
  expect(found.background).toBe('rgb(252, 252, 251)');
  const pdf = await page.pdf({ format: 'A4' });
  expect(pdf.subarray(0, 5).toString('latin1')).toBe('%PDF-');
  const pages = pdf.toString('latin1').match(/\/Type\s*\/Page\b/g)!.length;
  console.log(`${pages} pages for ${found.figures} charts`);
  expect(pages).toBeGreaterThanOrEqual(3);
  expect(pages).toBeLessThanOrEqual(7);
});
