import { tracesWithinTolerance } from '../../compare/judgeResult.ts';
import type { TraceMap } from '../../files/traceMap.ts';
import { judgeCauses, judgeCharts, judgeFigures, judgeHtml, judgeJson } from '../../report/judge.ts';
import { quoted } from '../../report/words.ts';
import type { Judged } from '../../run/judge/judgeTraces.ts';
import { LiveChart } from '../charts.ts';
import { h } from '../dom.ts';
import { asked, halves } from '../halves.ts';
import { notify } from '../notice.ts';
import type { Places, Started } from '../places.ts';
import { download, textBlob } from '../save.ts';
import type { Store } from '../store.ts';
import { table } from '../table.ts';
import { type PageWorker, startWorker } from '../workers.ts';
import { nameOf } from '../written.ts';
import type { JudgeReport, JudgeRequest } from './messages.ts';

/** Larger files are no traces that a page should try to show. */
const MOST_BYTES = 64 * 1024 * 1024;

/** The place of other solvers' traces: a file is dropped, and stands beside the exact field. */
export function judge(host: HTMLElement, store: Store, places: Places): Started {
  const place = new JudgePlace(host, store, () => places.changed());
  return {
    fields: () => place.fields(),
    open: (fields) => place.open(fields),
    shown: () => place.shown(),
    take(name, _json, file) {
      if (name.toLowerCase().endsWith('.json')) return false;
      void place.take(file);
      return true;
    },
  };
}

/** A file as it is judged. */
interface Given {
  readonly name: string;
  readonly bytes: Uint8Array<ArrayBuffer>;
}

class JudgePlace {
  private worker: PageWorker<JudgeRequest> | null = null;
  private given: Given | null = null;
  private judged: Judged | null = null;
  private due = false;

  /** What is typed of how the file is read, by what the address calls it. */
  private readonly texts = {
    cell: field('Cell size', '4 mm', 'Of the solver that is judged. Empty: the scenario’s.'),
    unit: field('Unit of times', 'ns', 'Where the header of the column tells none. Empty: seconds.'),
    observer: field('Observer', 'A', 'Whose traces these are, where the file does not say.'),
    columns: field(
      'Columns',
      'time=T; A.Ez=Probe 1',
      'What is read from which column, where headers do not tell: what=header, semicolons between.',
    ),
  };
  private readonly staggered = h('input', { type: 'checkbox' });
  private readonly stage = h('span', { className: 'muted', role: 'status' });
  private readonly bar = h('progress', { max: 1, hidden: true, 'aria-label': 'Progress of the judgement' });
  private readonly again = h('button', { type: 'button', disabled: true, onclick: () => this.run() }, 'Judge again');
  private readonly saves: readonly HTMLButtonElement[];
  private readonly results = h('div', { className: 'results' });

  constructor(
    host: HTMLElement,
    private readonly store: Store,
    changed: () => void,
  ) {
    const input = h('input', { type: 'file', hidden: true, 'aria-label': 'A file of traces', tabIndex: -1 });
    input.addEventListener('change', () => {
      const [file] = input.files ?? [];
      if (file) void this.take(file);
      input.value = '';
    });
    const choose = h('button', { type: 'button', className: 'primary', onclick: () => input.click() }, 'Open traces…');
    const command = () =>
      `npx fieldassay judge ${nameOf(store)}.json --traces ${quoted(this.given?.name ?? 'traces.csv')}`;
    const save = (name: string, title: string, file: string, make: (judged: Judged) => Blob) => {
      const take = () => download(`${nameOf(store)}-${file}`, make(this.judged!));
      return h('button', { type: 'button', title, disabled: true, onclick: take }, name);
    };
    this.saves = [
      save('Report', 'Sentences, charts and tables in one HTML file', 'judged.html', (judged) =>
        textBlob(judgeHtml(judged, command()), 'text/html'),
      ),
      save('Result', 'All figures, result.json', 'judged.json', ({ result }) =>
        textBlob(judgeJson(result), 'application/json'),
      ),
    ];
    const element = h(
      'div',
      {
        onchange: () => {
          changed();
          this.run();
        },
      },
      ...Object.values(this.texts).map(({ element }) => element),
      asked(
        h('label', {}, this.staggered, ' Components at their own places'),
        'In the Yee cell of the observer’s nearest node, not at the observer itself.',
      ),
      h(
        'p',
        { className: 'muted' },
        'The address bar holds these and the scenario with its tolerance, not the file: who opens the link drops the file and sees the same.',
      ),
    );
    const bar = h(
      'div',
      { className: 'bar' },
      choose,
      this.again,
      this.bar,
      this.stage,
      h('span', { className: 'spacer' }),
      h('span', { className: 'muted' }, 'Save'),
      h('span', { className: 'group', role: 'group', 'aria-label': 'Save' }, ...this.saves),
      input,
    );
    host.append(
      halves({ name: 'How the file is read', element }, { name: 'What is found', elements: [bar, this.results] }),
    );
    this.results.append(
      h(
        'p',
        { className: 'nothing' },
        'Drop the traces of any solver here: CSV with named columns, such as “t [ns], A.Ez (kV/m)”, NumPy’s .npy and .npz, or our own ' +
          'traces.csv, which “Save” in Compare gives for a first try. They are held against the exact field of the scenario at their own ' +
          'places and instants.',
      ),
    );
    // Another scenario is another question; it is put where it can be seen.
    store.on(['scenario'], () => {
      this.due = this.given !== null;
      if (host.offsetParent) this.shown();
    });
  }

  shown(): void {
    if (this.due) this.run();
  }

  /** How the file is read, for the address; nothing of what is in it. */
  fields(): ReadonlyMap<string, string> {
    const typed = Object.entries(this.texts).flatMap(([key, { value }]) => (value ? [[key, value] as const] : []));
    return new Map([...typed, ...(this.staggered.checked ? [['positions', 'staggered'] as const] : [])]);
  }

  open(fields: ReadonlyMap<string, string>): void {
    for (const [key, text] of Object.entries(this.texts)) text.value = fields.get(key) ?? '';
    this.staggered.checked = fields.get('positions') === 'staggered';
    this.run();
  }

  async take(file: File): Promise<void> {
    if (file.size > MOST_BYTES) {
      const size = `${Math.round(file.size / 1e6)} MB`;
      notify(`${file.name} was not opened: it has ${size}; traces of up to 64 MB are read.`, 'bad');
      return;
    }
    this.given = { name: file.name, bytes: new Uint8Array(await file.arrayBuffer()) };
    this.run();
  }

  /** What the options say of the file. */
  private map(): TraceMap {
    const { unit, observer, columns: given } = this.texts;
    const columns = given.value
      .split(';')
      .map((part) => part.split('=').map((word) => word.trim()))
      .filter(([what, header]) => what && header);
    return {
      ...(unit.value ? { units: { time: unit.value } } : {}),
      ...(observer.value ? { observer: observer.value } : {}),
      ...(columns.length > 0 ? { columns: Object.fromEntries(columns) } : {}),
      ...(this.staggered.checked ? { positions: 'staggered' as const } : {}),
    };
  }

  private run(): void {
    const { given, store } = this;
    if (!given || store.state.problems.length > 0) return;
    this.due = false;
    this.worker?.end();
    this.worker = startWorker<JudgeRequest, JudgeReport>(
      './judge.js',
      (report) => this.hear(given, report),
      (message) => this.refuse(message),
    );
    this.worker.ask({
      scenario: store.state.json,
      ...given,
      map: this.map(),
      cellSize: this.texts.cell.value || undefined,
    });
    this.bar.hidden = false;
    this.again.disabled = true;
  }

  private hear(given: Given, report: JudgeReport): void {
    if (report.kind === 'progress') {
      this.bar.value = report.fraction;
      this.stage.textContent = report.stage;
    } else if (report.kind === 'refused') this.refuse(`${given.name}: ${report.message}`);
    else this.show(given, report.judged);
  }

  private end(judged: Judged | null, stage: string): void {
    this.worker?.end();
    this.worker = null;
    this.judged = judged;
    this.bar.hidden = true;
    this.again.disabled = false;
    this.stage.textContent = stage;
    for (const button of this.saves) button.disabled = judged === null;
  }

  private refuse(message: string): void {
    this.end(null, '');
    this.results.replaceChildren(h('p', { className: 'nothing', role: 'alert' }, message));
  }

  private show(given: Given, judged: Judged): void {
    this.end(judged, given.name);
    const { result } = judged;
    const [figuresHead, ...figures] = judgeFigures(result);
    const [causesHead, ...causes] = judgeCauses(result);
    const drawn: (() => void)[] = [];
    const charts = result.observers.map((observer) => {
      const drawings = judgeCharts(observer, judged).map((chart) => {
        const live = new LiveChart(() => '');
        drawn.push(() => live.draw(chart));
        return live.figure;
      });
      return [h('h2', {}, `Observer ${observer.name}`), h('div', { className: 'charts grid' }, ...drawings)];
    });
    this.results.replaceChildren(
      h('h1', { className: tracesWithinTolerance(result) ? '' : 'outside', 'aria-live': 'polite' }, result.sentence),
      ...result.details.map((detail) => h('p', {}, detail)),
      table('Errors against the exact field', figuresHead!, figures),
      ...(causes.length === 0
        ? []
        : [table('Likely causes, each tried by refitting', causesHead!, causes.map(explained))]),
      ...charts.flat(),
      ...result.notes.map((note) => h('p', { className: 'muted' }, `Note: ${note}`)),
    );
    for (const draw of drawn) draw();
  }
}

/** A cause in a table: its words may take several lines. */
const explained = ([share, ...words]: readonly string[]): (HTMLElement | string)[] => [
  share!,
  ...words.map((text) => h('span', { className: 'reason' }, text)),
];

/** A line of text with its name and what helps to fill it. */
function field(name: string, placeholder: string, help: string) {
  const input = h('input', { type: 'text', placeholder, spellcheck: false, 'aria-label': name });
  return {
    element: asked(name, help, input),
    get value() {
      return input.value.trim();
    },
    set value(text: string) {
      input.value = text;
    },
  };
}
