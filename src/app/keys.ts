import { DEFINITIONS, GUIDANCE, JUDGE_DEFINITIONS } from '../report/definitions.ts';
import { QUANTITIES } from '../scene/quantity.ts';
import { h } from './dom.ts';
import type { Panes } from './panes.ts';
import type { Places } from './places.ts';
import type { Runner } from './runner.ts';
import type { Saving } from './save.ts';
import type { Side } from './side.ts';
import type { Store } from './store.ts';
import { switchTheme } from './theme.ts';
import { SPEEDS, type Timeline } from './timeline.ts';

interface Key {
  /** as KeyboardEvent.key has it; with Ctrl+ and Shift+ in front */
  readonly keys: readonly string[];
  readonly help: string;
  readonly run: () => void;
  /** at every place of the page, not at Compare alone */
  readonly everywhere?: true;
}

const GAINS = [0.5, 1, 2, 5, 10, 30, 100];

/** What the page is made of, for its keys. */
interface Parts {
  readonly store: Store;
  readonly runner: Runner;
  readonly panes: Panes;
  readonly timeline: Timeline;
  readonly side: Side;
  readonly saving: Saving;
  readonly places: Places;
  readonly choose: () => void;
}

function table({ store, runner, panes, timeline, side, saving, places, choose }: Parts): Key[] {
  const view = () => store.state.view;
  const turnTo = (list: readonly string[], at: string, by: number) =>
    list[(list.indexOf(at) + by + list.length) % list.length]!;
  const quantity = (by: number) => () =>
    store.setView({
      quantity: turnTo(
        QUANTITIES.map(({ key }) => key),
        view().quantity,
        by,
      ) as never,
    });
  const gain = (by: number) => () =>
    store.setView({ gain: GAINS[Math.min(GAINS.length - 1, Math.max(0, GAINS.indexOf(view().gain) + by))]! });
  const speed = (by: number) => () => {
    const at = SPEEDS.indexOf(view().speed as (typeof SPEEDS)[number]) + by;
    store.setView({ speed: SPEEDS[Math.min(SPEEDS.length - 1, Math.max(0, at))]! });
  };
  return [
    { keys: [' '], help: 'play or pause', run: () => timeline.toggle() },
    { keys: ['ArrowLeft'], help: 'one picture back', run: () => timeline.stepBy(-1) },
    { keys: ['ArrowRight'], help: 'one picture on', run: () => timeline.stepBy(1) },
    { keys: [','], help: 'slower', run: speed(-1) },
    { keys: ['.'], help: 'faster', run: speed(1) },
    { keys: ['Home'], help: 'first picture', run: () => timeline.stepBy(-1e6) },
    { keys: ['End'], help: 'last picture', run: () => timeline.stepBy(1e6) },
    { keys: ['Shift+ArrowLeft'], help: 'turn the camera left', run: () => panes.turn(-10, 0) },
    { keys: ['Shift+ArrowRight'], help: 'turn the camera right', run: () => panes.turn(10, 0) },
    { keys: ['Shift+ArrowUp'], help: 'tip the camera up', run: () => panes.turn(0, 10) },
    { keys: ['Shift+ArrowDown'], help: 'tip the camera down', run: () => panes.turn(0, -10) },
    { keys: ['+', '='], help: 'nearer', run: () => panes.turn(0, 0, 1.2) },
    { keys: ['-'], help: 'farther', run: () => panes.turn(0, 0, 1 / 1.2) },
    { keys: ['h'], help: 'shift the camera left', run: () => panes.shift(-0.1, 0) },
    { keys: ['l'], help: 'shift the camera right', run: () => panes.shift(0.1, 0) },
    { keys: ['j'], help: 'shift the camera down', run: () => panes.shift(0, -0.1) },
    { keys: ['k'], help: 'shift the camera up', run: () => panes.shift(0, 0.1) },
    { keys: ['x'], help: 'look along x', run: () => panes.look('x') },
    { keys: ['y'], help: 'look along y', run: () => panes.look('y') },
    { keys: ['z'], help: 'look along z', run: () => panes.look('z') },
    { keys: ['0'], help: 'look from a corner', run: () => panes.look('corner') },
    {
      keys: ['o'],
      help: 'parallel or perspective view',
      run: () => store.setView({ projection: view().projection === 'perspective' ? 'orthographic' : 'perspective' }),
    },
    { keys: ['1'], help: 'fields side by side', run: () => store.setView({ layout: 'panes' }) },
    { keys: ['2'], help: 'overlay', run: () => store.setView({ layout: 'overlay' }) },
    { keys: ['3'], help: 'trust map', run: () => store.setView({ layout: 'trust' }) },
    { keys: ['q'], help: 'next quantity', run: quantity(1) },
    { keys: ['Q', 'Shift+Q'], help: 'previous quantity', run: quantity(-1) },
    {
      keys: ['d'],
      help: 'difference signed or in dB',
      run: () => store.setView({ difference: view().difference === 'signed' ? 'decibels' : 'signed' }),
    },
    { keys: ['c'], help: 'contours of the exact field', run: () => store.setView({ contours: !view().contours }) },
    { keys: [']'], help: 'stronger colours', run: gain(1) },
    { keys: ['['], help: 'weaker colours', run: gain(-1) },
    {
      keys: ['{'],
      help: 'divider of the overlay to the left',
      run: () => store.setView({ divider: Math.max(0, view().divider - 0.05) }),
    },
    {
      keys: ['}'],
      help: 'divider of the overlay to the right',
      run: () => store.setView({ divider: Math.min(1, view().divider + 0.05) }),
    },
    {
      keys: ['n'],
      help: 'next observer',
      run: () => {
        const names = store.state.scenario?.observers.map(({ name }) => name) ?? [];
        if (names.length > 0) store.setView({ observer: turnTo(names, view().observer, 1) });
      },
    },
    { keys: ['a'], help: 'add an observer', run: () => panes.offerObserver() },
    { keys: ['p'], help: 'next plane, for the two keys below', run: () => panes.nextPlane() },
    { keys: ['<'], help: 'plane back by a cell', run: () => panes.stepPlane(-1) },
    { keys: ['>'], help: 'plane on by a cell', run: () => panes.stepPlane(1) },
    { keys: ['e'], help: 'scenario as text, or panels', run: () => side.toggle() },
    { keys: ['g'], help: 'next place', run: () => places.turn(1), everywhere: true },
    { keys: ['G', 'Shift+G'], help: 'previous place', run: () => places.turn(-1), everywhere: true },
    { keys: ['t'], help: 'light or dark', run: () => switchTheme(store), everywhere: true },
    { keys: ['r'], help: 'run again', run: () => runner.start() },
    { keys: ['Escape'], help: 'cancel the run', run: () => store.state.run.status === 'running' && runner.cancel() },
    { keys: ['Ctrl+z'], help: 'undo', run: () => store.undo(), everywhere: true },
    { keys: ['Ctrl+Shift+Z', 'Ctrl+y'], help: 'redo', run: () => store.redo(), everywhere: true },
    { keys: ['Ctrl+o'], help: 'open a file', run: choose, everywhere: true },
    { keys: ['s'], help: 'what can be saved', run: () => saving.open() },
    { keys: ['Ctrl+s'], help: 'save the scenario', run: () => saving.scenario(), everywhere: true },
  ];
}

const NAMES: Readonly<Record<string, string>> = {
  ' ': 'Space',
  ArrowLeft: '←',
  ArrowRight: '→',
  ArrowUp: '↑',
  ArrowDown: '↓',
  Escape: 'Esc',
};

const shown = (key: string): string =>
  key
    .split(/\+(?=.)/)
    .map((part) => NAMES[part] ?? part)
    .join(' ');

/** Listens to the keyboard, and lists all keys on `?`. */
export function listenToKeys(parts: Parts): { readonly help: () => void } {
  const keys = table(parts);
  const sections = [
    prose(GUIDANCE.text),
    h('h2', {}, 'Reading the panes'),
    h(
      'p',
      {},
      'Drag turns the camera of all panes, the wheel brings it nearer, dragging with the right button shifts it. A plane is moved by the disc at its corner. A click on a plane adds an observer there; a click on an observer selects it. Pointing at a plane or a chart reads the values there, with their units. Printing the page gives the report.',
    ),
    h(
      'p',
      {},
      'Grid and exact field share one symmetric colour scale; the difference has its own. Near a source nothing is drawn where a sample would lie on it. The dotted outline on a plane is the mask, the dotted box the outside of the absorbing layers.',
    ),
    h(
      'p',
      {},
      'The trust map shows e(p) = √(Σ|grid − exact|²)/√(Σ|exact|²) over the instants of the film, each component at its own place and time. The red line is the tolerance; dashed lines are the closest and the farthest trusted distance, the dashed box what the walls leave.',
    ),
    prose(DEFINITIONS.text),
    prose(JUDGE_DEFINITIONS.text),
    h('h2', {}, 'Keys'),
    h(
      'table',
      {},
      ...columnsOf(keys, 3).map((row) =>
        h(
          'tr',
          {},
          ...row.flatMap(({ keys: [first], help }) => [h('td', {}, h('kbd', {}, shown(first!))), h('td', {}, help)]),
        ),
      ),
    ),
  ];
  const contents = h('nav', { className: 'contents', 'aria-label': 'What is explained here' });
  const dialog = h(
    'dialog',
    { 'aria-label': 'How to read the page, and its keys' },
    contents,
    ...sections,
    h('form', { method: 'dialog' }, h('button', {}, 'Close')),
  );
  for (const heading of dialog.querySelectorAll('h2'))
    contents.append(h('button', { type: 'button', onclick: () => heading.scrollIntoView() }, heading.textContent));
  document.body.append(dialog);
  const help = () => {
    if (dialog.open) dialog.close();
    else {
      dialog.showModal();
      dialog.scrollTop = 0;
    }
  };

  window.addEventListener('keydown', (event) => {
    if (event.defaultPrevented || event.altKey || dialog.open) return;
    const target = event.target as HTMLElement;
    const typing = target.matches('input:not([type=checkbox]):not([type=range]), select, textarea, [contenteditable]');
    const control = event.ctrlKey || event.metaKey;
    // In a text field the browser's own undo and arrows hold; only files are ours there.
    if (typing && !(control && /^[os]$/i.test(event.key))) return;
    if (target.matches('input[type=range]') && /^(Arrow|Home|End|Page)/.test(event.key) && !event.shiftKey) return;
    if (event.key === ' ' && target.matches('button, input[type=checkbox], summary, .lil-title')) return;
    if (event.key === '?') {
      help();
      return;
    }
    const plain = `${control ? 'Ctrl+' : ''}${event.shiftKey && event.key.length > 1 ? 'Shift+' : ''}${event.key}`;
    const shifted = control && event.shiftKey ? `Ctrl+Shift+${event.key.toUpperCase()}` : plain;
    const found = keys.find((key) => key.keys.includes(shifted));
    if (!found || !(found.everywhere || parts.places.current === 'compare')) return;
    event.preventDefault();
    found.run();
  });
  return { help };
}

/** The report's own markup, which holds nothing that a user wrote. */
function prose(text: string): HTMLElement {
  const element = h('div', { className: 'definitions' });
  element.innerHTML = text;
  return element;
}

/** A list in columns, read downwards. */
function columnsOf<T>(list: readonly T[], columns: number): T[][] {
  const rows = Math.ceil(list.length / columns);
  return Array.from({ length: rows }, (_, n) => list.filter((_one, k) => k % rows === n));
}
