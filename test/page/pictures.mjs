/**
 * The pictures of the page in README.md, made by the page itself from the built command line:
 *
 *   npm run build && node test/page/pictures.mjs
 *
 * In a Chromium without a GPU ($CHROMIUM, the system's, or the one that the page's tests have unpacked).
 */
import { mkdirSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { chromium } from 'playwright-core';
import { browserPlace, FLAGS, served } from '../bench/page.mjs';

const folder = fileURLToPath(new URL('pictures/', import.meta.url));

/** Runs in the page: what each picture shows. */
const PICTURES = {
  fields: { theme: 'light', prepare: () => {} },
  trust: { theme: 'dark', prepare: () => fieldassay.store.setView({ layout: 'trust' }) },
  overlay: { theme: 'light', prepare: () => fieldassay.store.setView({ layout: 'overlay' }) },
  editing: {
    theme: 'light',
    scenario: 'centre-fed-wire',
    prepare: () => {
      const titles = [...document.querySelectorAll('#side button')];
      titles.find(({ textContent }) => textContent === 'Scenario')?.click();
      titles.find(({ textContent }) => textContent === 'Sources and waveforms')?.click();
    },
  },
};

const SIZE = { width: 1280, height: 940 };

/** Of WebP, which keeps a picture below 150 kB. */
const QUALITY = 82;

const { url, end } = await served();
const browser = await chromium.launch({ ...browserPlace(), args: FLAGS });
try {
  mkdirSync(folder, { recursive: true });
  for (const [name, { theme, scenario, prepare }] of Object.entries(PICTURES)) {
    const context = await browser.newContext({ viewport: SIZE, colorScheme: theme, reducedMotion: 'reduce' });
    const page = await context.newPage();
    await page.goto(url);
    if (scenario) await page.locator('#examples').selectOption(scenario);
    await page.waitForFunction(() => globalThis.fieldassay?.store.state.run.status === 'done', undefined, {
      timeout: 120_000,
    });
    await page.evaluate(prepare);
    await page.evaluate(() => fieldassay.store.setFrame(Math.round(0.37 * fieldassay.store.state.film.frames)));
    await page.waitForFunction(() => fieldassay.panes.settled);
    const devtools = await context.newCDPSession(page);
    const { data } = await devtools.send('Page.captureScreenshot', { format: 'webp', quality: QUALITY });
    const bytes = Buffer.from(data, 'base64');
    writeFileSync(`${folder}${name}.webp`, bytes);
    console.log(`${name}.webp: ${Math.round(bytes.length / 1000)} kB`);
    await context.close();
  }
} finally {
  await browser.close();
  end();
}
