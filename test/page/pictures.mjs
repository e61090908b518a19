/**
 * The pictures of the page in README.md, made by the page itself from the built command line:
 *
 *   npm run build && node test/page/pictures.mjs [NAME …]
 *
 * In a Chromium without a GPU ($CHROMIUM, the system's, or the one that the page's tests have unpacked).
 */
import { mkdirSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { deflateRawSync } from 'node:zlib';
import { chromium } from 'playwright-core';
import { browserPlace, FLAGS, served } from '../bench/page.mjs';

const folder = fileURLToPath(new URL('pictures/', import.meta.url));

/** Four walls on three grids. */
const SURVEY = {
  vary: {
    'grid.boundary': [{ type: 'mur1' }, { type: 'liao' }, { type: 'cpml', layers: 4 }, { type: 'cpml', layers: 8 }],
    'grid.cellSize': ['10 mm', '7.5 mm', '5 mm'],
  },
  combine: 'all',
};

/**
 * What each picture shows: where on the page (`at`, as its address has it; Compare where it is missing), and what is done
 * there once the run is done.
 */
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
  ladders: {
    theme: 'light',
    at: `ladders&survey=${deflateRawSync(JSON.stringify(SURVEY)).toString('base64url')}`,
    steps: async (page) => {
      await page.getByRole('button', { name: 'Run survey' }).click();
      const bar = page.locator('.place:not([hidden]) .bar progress').first();
      await bar.waitFor();
      await bar.waitFor({ state: 'hidden', timeout: 120_000 });
    },
  },
  plan: {
    theme: 'light',
    at: 'plan&tolerance=0.02',
    steps: async (page) => {
      await page.locator('.place:not([hidden]) h1', { hasText: 'Within' }).waitFor({ timeout: 120_000 });
      await page.waitForTimeout(3000);
    },
  },
};

const SIZE = { width: 1280, height: 940 };

/** Of WebP, which keeps a picture below 150 kB. */
const QUALITY = 82;

/** All, or those that the command line names. */
const names = process.argv.slice(2);
const chosen = Object.entries(PICTURES).filter(([name]) => names.length === 0 || names.includes(name));

const { url, end } = await served();
const browser = await chromium.launch({ ...browserPlace(), args: FLAGS });
try {
  mkdirSync(folder, { recursive: true });
  for (const [name, { theme, scenario, prepare, at, steps }] of chosen) {
    const context = await browser.newContext({ viewport: SIZE, colorScheme: theme, reducedMotion: 'reduce' });
    const page = await context.newPage();
    if (at) {
      await page.goto(`${url}#example=bench-cable-pulse&at=${at}`);
      await steps(page);
    } else {
      await page.goto(url);
      if (scenario) await page.locator('#examples').selectOption(scenario);
      await page.waitForFunction(() => globalThis.fieldassay?.store.state.run.status === 'done', undefined, {
        timeout: 120_000,
      });
      await page.evaluate(prepare);
      await page.evaluate(() => fieldassay.store.setFrame(Math.round(0.37 * fieldassay.store.state.film.frames)));
      await page.waitForFunction(() => fieldassay.panes.settled);
    }
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
