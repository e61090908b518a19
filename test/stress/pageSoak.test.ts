import type { Browser, CDPSession, Page } from 'playwright-core';
import { expect, onTestFinished, test } from 'vitest';
import { linkOf } from '../../src/app/link.ts';
import { textOf } from '../../src/scenario/text.ts';
import { launchBrowser } from '../page/browser.ts';
import { finished, openPage, settled } from '../page/open.ts';
import { serveBuiltPage } from '../page/server.ts';
import { SMALL } from '../page/small.ts';
import { growthOf } from './steadiness.ts';

/** Changes of the scenario, each run to its end; so many of them before anything is measured. */
const ROUNDS = 50;
const WARM = 10;
/** The least of so many in a row is what is held. */
const ROW = 5;

/**
 * What a round may leave behind, at most. A film's pictures and its result are some megabytes, a worker's heap as much: a
 * tenth of one tells a leak from none. Of the document nothing may grow but by what is shown at the moment.
 */
const MOST = {
  /** bytes of the page's own heap, by the debugger */
  JSHeapUsedSize: 100e3,
  /** bytes of the page and all of its workers, as it can measure itself */
  memory: 300e3,
  /** the least that is made anew a round is a chart, of some tens of nodes */
  Nodes: 5,
  JSEventListeners: 1,
} as const;

type Taken = Record<keyof typeof MOST | 'workers', number>;

async function taken(page: Page, debug: CDPSession): Promise<Taken> {
  await settled(page);
  await debug.send('HeapProfiler.collectGarbage');
  const memory = await page.evaluate(async () => {
    const { bytes } = await (
      performance as unknown as { measureUserAgentSpecificMemory(): Promise<{ bytes: number }> }
    ).measureUserAgentSpecificMemory();
    return bytes;
  });
  const { metrics } = await debug.send('Performance.getMetrics');
  const of = (name: string) => metrics.find((metric) => metric.name === name)!.value;
  return {
    JSHeapUsedSize: of('JSHeapUsedSize'),
    memory,
    Nodes: of('Nodes'),
    JSEventListeners: of('JSEventListeners'),
    workers: page.workers().length,
  };
}

async function changed(page: Page, n: number): Promise<void> {
  const scenario = { ...SMALL, duration: `${2.5 + 0.002 * (n % 7)} ns` };
  await page.evaluate((text) => fieldassay.store.setText(text), JSON.stringify(scenario, null, 2));
  await page.waitForFunction(() => fieldassay.store.state.run.status === 'running');
}

test('the page holds no more after fifty runs than after ten', async () => {
  const served = await serveBuiltPage();
  onTestFinished(() => served.end());
  // Else the browser measures when it likes to, up to half a minute later.
  const browser: Browser = await launchBrowser('--enable-blink-features=ForceEagerMeasureMemory');
  onTestFinished(() => browser.close());
  const { page, troubles } = await openPage(browser, served.url + (await linkOf(textOf(SMALL))));
  await finished(page);
  const debug = await page.context().newCDPSession(page);
  await debug.send('Performance.enable');
  const rounds: Taken[] = [];
  for (let n = 0; n < ROUNDS; n++) {
    // Every other run is broken off by the next change.
    await changed(page, 2 * n);
    await changed(page, 2 * n + 1);
    await finished(page);
    expect(await page.evaluate(() => fieldassay.store.state.run.status)).toBe('done');
    rounds.push(await taken(page, debug));
  }
  const growths = growthOf(rounds.slice(WARM), Object.keys(MOST) as (keyof typeof MOST)[], ROW);
  for (const { key, floors, rise, error } of growths)
    console.log(
      `${key}: ${floors.join(' ')}, ${ROW} rounds each; ` +
        `${rise.toFixed(2)} ± ${error.toFixed(2)} a round, at most ${MOST[key]}`,
    );
  for (const { key, rise, error } of growths) expect(rise + 2 * error, key).toBeLessThan(MOST[key]);
  const workers = rounds.map((each) => each.workers);
  console.log(`workers: ${workers.join(' ')}`);
  expect(Math.max(...workers)).toBe(workers[0]);
  expect(troubles).toEqual([]);
});
