import type { Browser, BrowserContextOptions, Page } from 'playwright-core';
import type { Panes } from '../../src/app/panes.ts';
import type { Places } from '../../src/app/places.ts';
import type { Store } from '../../src/app/store.ts';

/** What the page offers to scripts: src/app/main.ts. */
declare global {
  var fieldassay: { readonly store: Store; readonly panes: Panes; readonly places: Places };
}

export interface Opened {
  readonly page: Page;
  /** errors and warnings of the console, uncaught exceptions, failed requests */
  readonly troubles: string[];
  /** addresses asked for */
  readonly requests: string[];
}

/**
 * Opens the page and writes down everything that goes wrong in it.
 * @param script run before the page's own
 */
export async function openPage(
  browser: Browser,
  url: string,
  options: BrowserContextOptions = {},
  script?: string,
): Promise<Opened> {
  const context = await browser.newContext({
    viewport: { width: 1280, height: 800 },
    acceptDownloads: true,
    ...options,
  });
  const page = await context.newPage();
  // Comes through the debugger: the page's own policy lets no foreign script in.
  if (script) await page.addInitScript(script);
  const troubles: string[] = [];
  const requests: string[] = [];
  page.on('console', (message) => {
    if (message.type() === 'error' || message.type() === 'warning')
      troubles.push(`${message.type()}: ${message.text()}`);
  });
  page.on('pageerror', (error) => troubles.push(`exception: ${error.message}`));
  page.on('requestfailed', (request) => {
    const reason = request.failure()?.errorText;
    // The page's own doing: a worker that is not wanted any more is ended before its script is there.
    if (reason !== 'net::ERR_ABORTED') troubles.push(`failed: ${request.url()} ${reason}`);
  });
  page.on('request', (request) => requests.push(request.url()));
  await page.goto(url);
  await page.waitForFunction(() => 'fieldassay' in globalThis);
  return { page, troubles, requests };
}

/** Waits until the run has come to its end. */
export async function finished(page: Page): Promise<void> {
  await page.waitForFunction(
    () => globalThis.fieldassay && !['idle', 'running'].includes(fieldassay.store.state.run.status),
    undefined,
    { timeout: 90_000 },
  );
}

/** Waits until the panes show the present state, and stand where they stay. */
export async function settled(page: Page): Promise<void> {
  await page.waitForFunction(
    () =>
      new Promise((resolve) => {
        const { top, height } = document.querySelector('#panes')!.getBoundingClientRect();
        requestAnimationFrame(() =>
          requestAnimationFrame(() => {
            const now = document.querySelector('#panes')!.getBoundingClientRect();
            resolve(fieldassay.panes.settled && now.top === top && now.height === height);
          }),
        );
      }),
  );
}

/** Waits for the verdict alone. */
export async function judged(page: Page): Promise<void> {
  await page.waitForFunction(() => globalThis.fieldassay?.store.state.result, undefined, { timeout: 90_000 });
}

/** Waits until a plan has been made of what the page asks now. */
export async function planned(page: Page): Promise<void> {
  await page.waitForFunction(
    () =>
      document.querySelector('.place .bar .muted')?.textContent === '' &&
      document.querySelector('.place h1')?.textContent?.includes('predicted'),
    undefined,
    { timeout: 60_000 },
  );
}

/** Drops a file anywhere on the page. */
export async function dropOn(page: Page, name: string, content: string): Promise<void> {
  await page.evaluate(
    ([file, text]) => {
      const data = new DataTransfer();
      data.items.add(new File([text!], file!, { type: 'application/json' }));
      document.body.dispatchEvent(new DragEvent('drop', { dataTransfer: data, bubbles: true, cancelable: true }));
    },
    [name, content],
  );
}

export const textOfPage = async (page: Page, selector: string): Promise<string> =>
  (await page.locator(selector).first().textContent()) ?? '';
