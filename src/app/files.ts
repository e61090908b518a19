import { loadScenario } from '../scenario/load.ts';
import { textOf } from '../scenario/text.ts';
import { h } from './dom.ts';
import { notify } from './notice.ts';
import type { Places } from './places.ts';
import type { Side } from './side.ts';
import type { Store } from './store.ts';

/** Larger files are no scenarios that a page should try to show. */
const MOST_BYTES = 8 * 1024 * 1024;

/** Endings of another solver's traces: wherever they are dropped, they go to the place that judges them. */
const TRACES = /\.(csv|npy|npz|dat)$/i;

/**
 * Opens a file's text: a scenario, or a result whose scenario it then is. What is no JSON is refused and changes nothing;
 * an unsound scenario is opened as text, with what is wrong at its lines.
 */
export function openText(store: Store, side: Side, name: string, text: string): void {
  let json: unknown;
  try {
    json = JSON.parse(text);
  } catch {
    const loaded = loadScenario(text);
    const why = 'problems' in loaded ? loaded.problems[0]!.message : 'It is no JSON.';
    notify(`${name} was not opened. ${why} Scenario files and result.json can be opened.`, 'bad');
    return;
  }
  const isResult = typeof json === 'object' && json !== null && 'verdict' in json && 'scenario' in json;
  const scenario = isResult ? (json as { scenario: unknown }).scenario : json;
  const loaded = loadScenario(scenario);
  if (
    'problems' in loaded &&
    (typeof scenario !== 'object' || scenario === null || !('sources' in scenario || 'grid' in scenario))
  ) {
    notify(`${name} was not opened: it holds no scenario. ${loaded.problems[0]!.message}`, 'bad');
    return;
  }
  store.setText(isResult ? textOf(scenario) : text);
  if ('problems' in loaded) {
    side.show('text');
    notify(
      `${name} was opened but cannot be run: ${loaded.problems.length === 1 ? 'something is' : `${loaded.problems.length} things are`} wrong in it, shown at the lines.`,
      'bad',
    );
  }
}

async function openFile(store: Store, side: Side, places: Places, file: File): Promise<void> {
  if (TRACES.test(file.name)) {
    places.go('judge');
    await places.take(file.name, undefined, file);
    return;
  }
  if (file.size > MOST_BYTES) {
    notify(
      `${file.name} was not opened: it has ${Math.round(file.size / 1e6)} MB, a scenario at most ${MOST_BYTES / 1024 / 1024}.`,
      'bad',
    );
    return;
  }
  const text = await file.text();
  if (await places.take(file.name, jsonOrNothing(text), file)) return;
  openText(store, side, file.name, text);
}

function jsonOrNothing(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined;
  }
}

/** Opens files by a dialog and by dropping them anywhere on the page. */
export function acceptFiles(store: Store, side: Side, places: Places): { readonly choose: () => void } {
  const input = h('input', {
    type: 'file',
    accept: '.json,.csv,.npy,.npz,.dat,application/json',
    hidden: true,
    'aria-label': 'Open a scenario or traces',
    tabIndex: -1,
  });
  input.addEventListener('change', () => {
    const [file] = input.files ?? [];
    if (file) void openFile(store, side, places, file);
    input.value = '';
  });
  document.body.append(input);
  const holdsFiles = (event: DragEvent) => event.dataTransfer?.types.includes('Files') ?? false;
  window.addEventListener('dragover', (event) => {
    if (!holdsFiles(event)) return;
    event.preventDefault();
    document.body.classList.add('dropping');
  });
  window.addEventListener('dragleave', (event) => {
    if (event.relatedTarget === null) document.body.classList.remove('dropping');
  });
  window.addEventListener('drop', (event) => {
    if (!holdsFiles(event)) return;
    event.preventDefault();
    document.body.classList.remove('dropping');
    const [file] = event.dataTransfer?.files ?? [];
    if (file) void openFile(store, side, places, file);
  });
  return { choose: () => input.click() };
}
