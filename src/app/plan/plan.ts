import { boundaryText } from '../../compare/boundaryWords.ts';
import type { Plan } from '../../compare/planResult.ts';
import { formatPercent, formatQuantity } from '../../elementary/quantity.ts';
import {
  costLines,
  frontsChart,
  PLACE_HEAD,
  PLAN_FILES,
  type PlanFile,
  placeCells,
  planFile,
  SETUP_HEAD,
  setupCells,
} from '../../report/plan.ts';
import type { KnownSetup } from '../../run/planSearch.ts';
import { textOf } from '../../scenario/text.ts';
import { LiveChart } from '../charts.ts';
import { h } from '../dom.ts';
import { halves } from '../halves.ts';
import { notify } from '../notice.ts';
import type { Places, Started } from '../places.ts';
import type { Prediction } from '../prediction.ts';
import { download, textBlob } from '../save.ts';
import type { Store } from '../store.ts';
import { table } from '../table.ts';
import { type PageWorker, startWorker } from '../workers.ts';
import { nameOf } from '../written.ts';
import { aboutOf, type Report, type Request, type Wanted } from './messages.ts';
import { type Wish, Wishes } from './wishes.ts';

/** The place of plans: what is wished on the left, the cheapest that meets it on the right. */
export function plan(host: HTMLElement, store: Store, places: Places, prediction: Prediction): Started {
  const wishes = new Wishes(store);
  const found = new Found(store, wishes, places, prediction);
  host.append(
    halves({ name: 'What is wished', element: wishes.element }, { name: 'What meets it', elements: [found.element] }),
  );
  wishes.onChange(() => places.changed());
  return {
    fields: () => wishes.fields(),
    open: (fields) => wishes.open(fields),
    shown: () => found.seen(true),
    left: () => found.seen(false),
  };
}

/** The plan for what is wished, asked of a worker; meanwhile the cheapest of what is known already. */
class Found {
  readonly element: HTMLElement;
  private readonly sentence = h('h1', { 'aria-live': 'polite' });
  private readonly apply = h('button', { type: 'button', className: 'primary' }, 'Apply and run in Compare');
  private readonly status = h('span', { className: 'muted', role: 'status' });
  private readonly lines = h('div', {});
  private readonly chart: LiveChart;
  private readonly figures = h('div', { className: 'charts grid wide' });
  private readonly tables = h('div', {});
  private readonly saves: readonly HTMLButtonElement[];
  private worker: PageWorker<Request> | undefined;
  private asked = 0;
  private answered = 0;
  private plan: Plan | null = null;
  private known: { readonly about: string; readonly setups: readonly KnownSetup[] } | undefined;
  private refused = '';
  /** the scenario that was applied, and what it was promised */
  private applied: { readonly text: string; readonly plan: Plan } | undefined;
  private visible = true;
  private drawn = false;

  constructor(
    private readonly store: Store,
    private readonly wishes: Wishes,
    private readonly places: Places,
    private readonly prediction: Prediction,
  ) {
    this.chart = new LiveChart(() => 'Error against cost: set-ups are being predicted.');
    this.figures.append(this.chart.figure);
    this.apply.addEventListener('click', () => this.applyPlan());
    const labels: Readonly<Record<PlanFile, readonly [string, string]>> = {
      'plan.html': ['Report', 'Sentence, chart and tables in one HTML file'],
      'plan.json': ['Plan', 'All figures, plan.json'],
      'planned-scenario.json': ['Scenario', 'The scenario with the planned grid'],
    };
    this.saves = [...PLAN_FILES].reverse().map((file) => {
      const [name, help] = labels[file];
      return h('button', { type: 'button', title: help, onclick: () => this.save(file) }, name);
    });
    this.element = h(
      'div',
      { className: 'results' },
      h(
        'div',
        { className: 'bar' },
        this.apply,
        this.status,
        h('span', { className: 'spacer' }),
        h('span', { className: 'muted' }, 'Save'),
        h('span', { className: 'group', role: 'group', 'aria-label': 'Save' }, ...this.saves),
      ),
      this.sentence,
      this.lines,
      this.figures,
      this.tables,
    );
    wishes.onChange(() => this.ask());
    store.on(['scenario'], () => this.ask());
    store.on(['result', 'theme'], () => this.show());
    new ResizeObserver(() => this.show()).observe(this.figures);
    this.ask();
  }

  /** While nobody looks nothing is planned. */
  seen(visible: boolean): void {
    this.visible = visible;
    if (visible) this.ask();
  }

  private wanted(): Wanted | null {
    const { json, problems, scenario } = this.store.state;
    return problems.length > 0 || !scenario ? null : { scenario: json, ...this.wishes.wish };
  }

  private askedFor = '';

  private ask(): void {
    const wanted = this.wanted();
    if (!this.visible) return;
    const key = JSON.stringify(wanted);
    if (wanted && key !== this.askedFor) {
      this.askedFor = key;
      this.refused = '';
      this.worker ??= this.begin();
      this.worker.ask({ id: ++this.asked, wanted });
    }
    this.show();
  }

  private begin(): PageWorker<Request> {
    return startWorker<Request, Report>(
      './planner.js',
      (report) => this.take(report),
      (message) => this.take({ kind: 'refused', id: this.asked, message }),
    );
  }

  private take(report: Report): void {
    if (report.kind === 'known') this.known = report;
    else if (report.id === this.asked) {
      this.answered = report.id;
      this.plan = report.kind === 'plan' ? report.plan : null;
      this.refused = report.kind === 'refused' ? report.message : '';
    }
    this.show();
  }

  /** Draws at the next screen refresh, once for all that has changed. */
  private show(): void {
    if (this.drawn) return;
    this.drawn = true;
    requestAnimationFrame(() => {
      this.drawn = false;
      this.draw();
    });
  }

  private draw(): void {
    const wanted = this.wanted();
    const settled = this.answered === this.asked;
    const known = wanted && this.known?.about === aboutOf(wanted) ? this.known.setups : [];
    const plan = settled ? this.plan : null;
    const { problems } = this.store.state;
    const hasPlan = plan?.chosen != null;
    this.apply.disabled = !hasPlan || !plan.met;
    for (const save of this.saves) save.disabled = !hasPlan;
    this.status.textContent = wanted && !settled ? 'Searching; what is known already is shown…' : '';
    if (!wanted || (settled && this.refused !== '')) {
      this.sentence.textContent = wanted ? this.refused : (problems[0]?.message ?? 'No scenario to plan for.');
      this.lines.replaceChildren();
      this.tables.replaceChildren();
      this.chart.draw(null);
      return;
    }
    // Until the search has answered: the cheapest that is known to meet what is wished.
    const walls = new Set(wanted.walls.map((wall) => JSON.stringify(wall)));
    const allowed = known.filter(({ setup }) => walls.has(JSON.stringify(setup.boundary)));
    const meeting = allowed.filter(({ meets }) => meets <= wanted.tolerance);
    const cheapest = meeting.reduce<KnownSetup | null>((a, b) => (a && a.setup.work <= b.setup.work ? a : b), null);
    const chosen = plan ? plan.chosen : (cheapest?.setup ?? null);
    const rows = plan ? plan.places : (cheapest?.places ?? []);
    this.sentence.textContent = plan ? plan.sentence : provisional(wanted.tolerance, cheapest);
    this.lines.replaceChildren(...(plan ? [...costLines(plan), ...plan.notes] : []).map((line) => h('p', {}, line)));
    const measured = this.measured();
    if (measured)
      this.lines.prepend(
        h(
          'p',
          {},
          h(
            'strong',
            {},
            `Run in Compare: predicted ${formatPercent(measured.predicted)}, measured ${formatPercent(measured.worst)}`,
          ),
          measured.worst <= wanted.tolerance ? ' ✓' : h('span', { className: 'outside' }, ' ✗ outside the tolerance'),
        ),
      );
    this.chart.draw(
      frontsChart(
        allowed.map(({ setup }) => setup),
        wanted.tolerance,
        chosen,
        this.standing(wanted),
      ),
    );
    const head = PLACE_HEAD.map((name, n) => (n === 0 ? 'observer' : name));
    this.tables.replaceChildren(
      table(
        `Error of E${wanted.band === undefined ? '' : `, worst sixth-octave band up to ${formatQuantity(wanted.band, 'Hz')}`}; “both” is lattice and gridding together, which may cancel`,
        head,
        rows.map((place) => placeCells({ ...place, measured: measured?.at.get(place.name) ?? null })),
      ),
      ...(plan && plan.alternatives.length > 1
        ? [table('Cheapest with each boundary', SETUP_HEAD, plan.alternatives.map(setupCells))]
        : []),
    );
  }

  /** The scenario as it stands, where its error is predicted for the same thing. */
  private standing({ band, at, distance }: Wanted): { work: number; predicted: number } | null {
    const { foresight } = this.prediction;
    if (!foresight || 'reason' in foresight || band !== undefined || at !== undefined || distance !== undefined)
      return null;
    const { worst, work } = foresight;
    return worst.boundary === null ? null : { work, predicted: worst.total };
  }

  /** What the run of the applied plan has shown, where Compare still holds it. */
  private measured(): { predicted: number; worst: number; at: ReadonlyMap<string, number> } | null {
    const { result, text } = this.store.state;
    const { applied } = this;
    if (!applied || !result || applied.text !== text || !applied.plan.chosen) return null;
    const wished = new Set(applied.plan.places.map(({ name }) => name));
    const at = new Map(
      result.observers.flatMap(({ name, E }) =>
        wished.has(name) && E?.relativeL2 != null ? [[name, E.relativeL2] as const] : [],
      ),
    );
    return at.size === 0 ? null : { predicted: applied.plan.chosen.predicted, worst: Math.max(...at.values()), at };
  }

  private applyPlan(): void {
    const { plan } = this;
    if (!plan?.scenario) return;
    const text = textOf(plan.scenario);
    this.applied = { text, plan };
    this.store.setText(text);
    this.places.go('compare');
  }

  private save(file: PlanFile): void {
    const { plan } = this;
    if (!plan) return;
    try {
      const name = nameOf(this.store);
      const type = file === 'plan.html' ? 'text/html' : 'application/json';
      download(`${name}-${file}`, textBlob(planFile(file, plan, commandOf(name, this.wishes.wish)), type));
    } catch (error) {
      notify(`Nothing was saved: ${(error as Error).message}`, 'bad');
    }
  }
}

function provisional(tolerance: number, cheapest: KnownSetup | null): string {
  const within = `Within ${formatPercent(tolerance, 3)}:`;
  if (!cheapest) return `${within} searching for the cheapest set-up…`;
  const { cellSize, boundary, clearance, predicted } = cheapest.setup;
  return `${within} cells of ${formatQuantity(Math.max(...cellSize), 'm')}, ${boundaryText(boundary)}, ${clearance} cells of clearance; predicted ${formatPercent(predicted)} (cheapest known so far).`;
}

/** What to type to plan the same. */
function commandOf(name: string, { tolerance, at, distance, band, ownRate }: Wish): string {
  const option = (flag: string, value: number | string | undefined) =>
    value === undefined ? '' : ` --${flag} '${value}'`;
  return `npx fieldassay plan ${name}.json${option('tolerance', tolerance)}${option('at', at)}${option('distance', distance)}${option('band', band)}${option('rate', ownRate)}`;
}
