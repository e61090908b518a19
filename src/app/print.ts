import { PALETTE } from '../report/palette.ts';
import { byId, h } from './dom.ts';
import type { Store } from './store.ts';
import { written } from './written.ts';

const LIGHT = Object.entries(PALETTE).map(([name, { light }]) => `--${name}:${light}`);

/** Of the printed page alone: always light, whatever the screen shows. */
const SHEET = `:host{color-scheme:light;${LIGHT.join(';')}}`;

/**
 * What is printed is the report, not the page. It is written when there is a verdict, so that it is at hand at once, and laid out
 * when it is asked for, in a tree of its own that the page's style does not reach.
 */
export function printReport(store: Store): void {
  const root = byId('report').attachShadow({ mode: 'open' });
  let report: string | undefined;
  store.on(['result'], () => {
    const { result } = store.state;
    report = undefined;
    if (!result) return;
    written(store, 'report.html').then(
      (text) => {
        if (store.state.result === result) report = text;
      },
      () => {
        // Printing then says that there is none; saving it says why.
      },
    );
  });
  window.addEventListener('beforeprint', () => {
    const { body, styles } = report === undefined ? nothing(store) : partsOf(report);
    const sheets = [...styles, SHEET].map((text) => {
      const sheet = new CSSStyleSheet();
      sheet.replaceSync(text);
      return sheet;
    });
    root.adoptedStyleSheets = sheets;
    root.replaceChildren(body);
  });
  window.addEventListener('afterprint', () => root.replaceChildren());
}

function partsOf(report: string): { readonly body: HTMLElement; readonly styles: readonly string[] } {
  // The page's policy lets no style element in, not even into a document that is never shown.
  const styles: string[] = [];
  const bare = report.replace(/<style>([^<]*)<\/style>/g, (_, style: string) => {
    styles.push(style);
    return '';
  });
  const file = new DOMParser().parseFromString(bare, 'text/html');
  return { body: document.importNode(file.body, true), styles };
}

function nothing({ state: { run } }: Store): ReturnType<typeof partsOf> {
  const why =
    run.status === 'running'
      ? 'Both solvers are still at work: print again when there is a verdict.'
      : 'There is no verdict to report: run the scenario first.';
  return { body: h('body', {}, h('p', {}, why)), styles: [] };
}
