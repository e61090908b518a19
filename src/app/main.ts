import './page.css';
import { canShareMemory } from '#platform';
import { formatNumber, formatQuantity } from '../elementary/quantity.ts';
import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { Charts } from './charts.ts';
import { byId, h } from './dom.ts';
import { linkOf, scenarioOfLink } from './link.ts';
import { notify } from './notice.ts';
import { Panes, type Reading } from './panes.ts';
import { Runner } from './runner.ts';
import { Store, textOf } from './store.ts';
import { firstTheme, followTheme } from './theme.ts';
import { Timeline } from './timeline.ts';
import { buildToolbar } from './toolbar.ts';
import { showVerdict } from './verdict.ts';

const store = new Store(firstTheme());
followTheme(store);
const runner = new Runner(store);
showVerdict(store, runner);
const panes = new Panes(store, runner, showReading, () => {});
buildToolbar(store, panes);
const timeline = new Timeline(store);
new Charts(store);

function showReading(reading: Reading | undefined): void {
  const line = byId('reading');
  if (!reading) {
    line.textContent = 'Point at a plane to read both fields there.';
    return;
  }
  const { hit, unit, label, grid, exact } = reading;
  const place = hit.point.map((x, a) => `${'xyz'[a]} ${formatQuantity(x, 'm')}`).join(', ');
  line.textContent = `${label} at ${place}: grid ${formatQuantity(grid, unit)}, exact ${formatQuantity(exact, unit)}, difference ${formatQuantity(grid - exact, unit)} (${formatNumber((100 * (grid - exact)) / exact)} % of exact)`;
}

const refresh = (now: number) => {
  timeline.tick(now);
  requestAnimationFrame(refresh);
};
requestAnimationFrame(refresh);

let pending = 0;
store.on(['scenario'], () => {
  clearTimeout(pending);
  if (store.state.problems.length > 0) return;
  void linkOf(store.state.text).then((hash) => history.replaceState(null, '', hash));
  pending = setTimeout(() => runner.update(), store.state.run.status === 'idle' ? 0 : 400) as unknown as number;
});

async function open(): Promise<void> {
  const fallback = textOf(EXAMPLES['bench-cable-pulse']);
  try {
    store.setText((await scenarioOfLink(location.hash)) ?? fallback);
  } catch (error) {
    notify((error as Error).message, 'bad');
    store.setText(fallback);
  }
}
addEventListener('hashchange', () => void open());

const examples = byId<HTMLSelectElement>('examples');
for (const [name, { title }] of Object.entries(EXAMPLES)) examples.append(h('option', { value: name }, title));
examples.addEventListener('change', () => store.setText(textOf(EXAMPLES[examples.value as ExampleName])));

showReading(undefined);
if (!canShareMemory())
  notify(
    'This page is not cross-origin isolated, so its workers cannot share memory: everything runs on one thread, and takes longer. `fieldassay view` serves it isolated.',
  );
void open();
