import { canShareMemory } from '#platform';
import { formatNumber, formatPercent, formatQuantity } from '../elementary/quantity.ts';
import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { textOf } from '../scenario/text.ts';
import { type Reading, Scenery } from '../scene/scenery.ts';
import { Charts } from './charts.ts';
import { byId, h } from './dom.ts';
import { acceptFiles } from './files.ts';
import { listenToKeys } from './keys.ts';
import { fieldsOf, linkOf, scenarioOfLink, withFields } from './link.ts';
import { nameObserver } from './naming.ts';
import { notify } from './notice.ts';
import { Panes } from './panes.ts';
import { type Place, Places } from './places.ts';
import { Prediction } from './prediction.ts';
import { printReport } from './print.ts';
import { Runner } from './runner.ts';
import { Saving } from './save.ts';
import { Side } from './side.ts';
import { Store } from './store.ts';
import { firstTheme, followTheme, switchTheme } from './theme.ts';
import { Timeline } from './timeline.ts';
import { buildToolbar } from './toolbar.ts';
import { showVerdict } from './verdict.ts';

/** An edit of a scenario that runs is let settle so long before the run begins anew. */
const SETTLE = 250;

const store = new Store(firstTheme());
followTheme(store);
const runner = new Runner(store);
const panes = new Panes(
  store,
  new Scenery(store, (frame) => runner.wantPotentials(frame)),
  showReading,
  (place, x, y) => nameObserver(store, place, x, y),
);
buildToolbar(store, panes);
const timeline = new Timeline(store);
const charts = new Charts(store);
const side = new Side(store);
showVerdict(store, runner, () => side.show('text'));
const prediction = new Prediction(store);
/** The places beside Compare, in their order: each is loaded when it is first come to. */
const PLACES: readonly Place[] = [
  {
    key: 'ladders',
    name: 'Ladders & walls',
    help: 'Many cases at once: how the error falls with the cells, and what walls send back',
    start: async (host, places) => (await import('./ladders/ladders.ts')).ladders(host, store, places),
  },
  {
    key: 'plan',
    name: 'Plan',
    help: 'The cheapest cells, walls and clearance that meet a tolerance, predicted without a run',
    start: async (host, places) => (await import('./plan/plan.ts')).plan(host, store, places, prediction),
  },
  {
    key: 'judge',
    name: 'Judge',
    help: 'The traces of another solver beside the exact field, and the likeliest cause of their error',
    start: async (host, places) => (await import('./judge/judge.ts')).judge(host, store, places),
  },
];
const places = new Places(PLACES, moved, (step) => void writeAddress(step));
const { choose } = acceptFiles(store, side, places);
buildActions();
const saving = new Saving(store, panes, charts);
printReport(store);
const { help } = listenToKeys({ store, runner, panes, timeline, side, saving, places, choose });

function buildActions(): void {
  const button = (name: string, title: string, run: () => void) =>
    h('button', { type: 'button', title, 'aria-label': title, onclick: run }, name);
  const undo = button('↶', 'Undo (Ctrl Z)', () => store.undo());
  const redo = button('↷', 'Redo (Ctrl Shift Z)', () => store.redo());
  store.on(['scenario'], () => {
    undo.disabled = !store.canUndo;
    redo.disabled = !store.canRedo;
  });
  byId('actions').append(
    h('span', { className: 'group' }, undo, redo),
    h(
      'button',
      {
        type: 'button',
        title: 'Open a scenario or a result (Ctrl O); files can be dropped, too',
        onclick: () => choose(),
      },
      'Open…',
    ),
    button('◐', 'Light or dark (t)', () => switchTheme(store)),
    button('?', 'How to read the page, and its keys (?)', () => help()),
  );
}

function showReading(reading: Reading | undefined): void {
  const line = byId('reading');
  if (!reading) {
    line.textContent = 'Point at a plane to read both fields there; click to add an observer; drag to turn.';
    return;
  }
  const { hit, unit, label, grid, exact, trust } = reading;
  const place = hit.point.map((x, a) => `${'xyz'[a]} ${formatQuantity(x, 'm')}`).join(', ');
  if (trust) {
    const error = (e: number) => (Number.isNaN(e) ? 'not told here' : formatPercent(e));
    const part = trust.largest === undefined ? '' : `; the largest part of E’s error is ${trust.largest}`;
    line.textContent = `At ${place}: error of E ${error(trust.E)}, of H ${error(trust.H)}, relative to the exact field there${part}`;
    return;
  }
  const values = Object.entries({ grid, exact, difference: grid - exact }).flatMap(([name, value]) =>
    Number.isNaN(value) ? [] : [`${name} ${formatQuantity(value, unit)}`],
  );
  const relative = (grid - exact) / exact;
  const share = Number.isFinite(relative) ? ` (${formatNumber(100 * relative, 2)} % of exact)` : '';
  line.textContent = `${label} at ${place}: ${values.join(', ') || 'nothing is known here'}${share}`;
}

const refresh = (now: number) => {
  if (places.current === 'compare') timeline.tick(now);
  requestAnimationFrame(refresh);
};
requestAnimationFrame(refresh);

let pending = 0;
/** whether the scenario has changed since it was last run: it is run where it can be seen */
let due = false;
let address = '';
store.on(['scenario'], () => {
  const { state } = store;
  clearTimeout(pending);
  const example = (Object.keys(EXAMPLES) as ExampleName[]).find((name) => textOf(EXAMPLES[name]) === state.text);
  byId<HTMLSelectElement>('examples').value = example ?? '';
  if (state.problems.length > 0) return;
  void writeAddress(false);
  due = true;
  pending = setTimeout(runWhereSeen, state.run.status === 'idle' ? 0 : SETTLE) as unknown as number;
});

function runWhereSeen(): void {
  if (!due || places.current !== 'compare') return;
  due = false;
  runner.update();
}

function moved(): void {
  clearTimeout(pending);
  if (store.state.problems.length === 0) runWhereSeen();
}

let writes = 0;
let stepWanted = false;

/** Writes the address once for all that changes at a time. @param step whether it is a step of the browser's history */
async function writeAddress(step: boolean): Promise<void> {
  const { text, problems } = store.state;
  if (text === '' || problems.length > 0) return;
  stepWanted ||= step;
  const write = ++writes;
  const hash = withFields(await linkOf(text), await places.fields());
  if (write !== writes) return;
  if (hash !== address) {
    address = hash;
    if (stepWanted) history.pushState(null, '', hash);
    else history.replaceState(null, '', hash);
  }
  stepWanted = false;
}

async function openAddress(): Promise<void> {
  const fallback = textOf(EXAMPLES['bench-cable-pulse']);
  const { hash } = location;
  const fields = fieldsOf(hash);
  places.go(fields.get('at') ?? 'compare', fields);
  try {
    const text = await scenarioOfLink(hash);
    if (text !== null || store.state.text === '') store.setText(text ?? fallback);
  } catch (error) {
    notify((error as Error).message, 'bad');
    if (store.state.text === '') store.setText(fallback);
  }
}
window.addEventListener('hashchange', () => {
  if (location.hash === address) return;
  address = location.hash;
  void openAddress();
});

const examples = byId<HTMLSelectElement>('examples');
examples.append(h('option', { value: '', hidden: true }, 'Your own'));
for (const [name, { title }] of Object.entries(EXAMPLES)) examples.append(h('option', { value: name }, title));
examples.addEventListener('change', () => store.setText(textOf(EXAMPLES[examples.value as ExampleName])));

showReading(undefined);
if (!canShareMemory())
  notify(
    'This page is not cross-origin isolated, so its workers cannot share memory: everything runs on one thread and takes longer. `fieldassay view` serves it isolated.',
    'kept',
  );
void openAddress();

/** What scripts and tests may look at. */
Object.assign(globalThis, { fieldassay: { store, panes, places, prediction } });
