import { type Result, withinTolerance } from '../compare/result.ts';
import { formatPercent } from '../elementary/quantity.ts';
import type { Foresight } from '../run/foresee.ts';
import { byId, h } from './dom.ts';
import type { Foretell, Foretold } from './predictor.ts';
import type { Store } from './store.ts';
import { type PageWorker, startWorker } from './workers.ts';

/** The first prediction waits so long, ms: pictures come first. */
const FIRST = 1200;

/** A prediction that takes longer is given up when the scenario has changed meanwhile, ms. */
const PATIENCE = 400;

/**
 * The predicted error, beside the verdict: there while one types, before any run, and the measured one beside it once
 * there is one.
 */
export class Prediction {
  private readonly line = byId('predicted');
  private worker: PageWorker<Foretell> | undefined;
  /** when the worker was last asked, and for what */
  private asked: { readonly text: string; readonly at: number } | undefined;
  private foretold: { readonly text: string; readonly what: Foretold } | undefined;
  private timer = 0;

  constructor(private readonly store: Store) {
    store.on(['scenario'], () => this.follow(this.foretold ? 0 : FIRST));
    store.on(['result'], () => this.show());
  }

  /** What was foretold of the present scenario, once it is known. */
  get foresight(): Foresight | undefined {
    const { foretold } = this;
    return foretold && foretold.text === this.store.state.text && !('failed' in foretold.what)
      ? foretold.what
      : undefined;
  }

  private follow(after: number): void {
    clearTimeout(this.timer);
    this.show();
    if (this.store.state.problems.length > 0) return;
    this.timer = setTimeout(() => this.ask(), after) as unknown as number;
  }

  private ask(): void {
    const { text, json } = this.store.state;
    if (this.foretold?.text === text || this.asked?.text === text) return;
    if (this.asked) {
      // What is under way is soon done, and the next one is asked then; or it never will be.
      const left = this.asked.at + PATIENCE - performance.now();
      if (left > 0) {
        this.timer = setTimeout(() => this.ask(), left) as unknown as number;
        return;
      }
      this.worker?.end();
      this.worker = undefined;
    }
    this.asked = { text, at: performance.now() };
    this.worker ??= this.begin();
    this.worker.ask({ scenario: json });
  }

  private begin(): PageWorker<Foretell> {
    return startWorker<Foretell, Foretold>(
      './predictor.js',
      (what) => this.take(what),
      (failed) => this.take({ failed }),
    );
  }

  private take(what: Foretold): void {
    if (!this.asked) return;
    this.foretold = { text: this.asked.text, what };
    this.asked = undefined;
    this.show();
    if (this.foretold.text !== this.store.state.text) this.ask();
  }

  private show(): void {
    const { line } = this;
    const { state } = this.store;
    const what = this.foretold?.text === state.text ? this.foretold.what : undefined;
    // The last figure stays, faintly, until the next is there.
    line.classList.toggle('stale', what === undefined);
    if (what === undefined) return;
    line.replaceChildren(...foresightText(what, state.scenario?.tolerance ?? 0, state.result));
    line.title =
      'failed' in what || 'reason' in what
        ? ''
        : `Predicted without a run: what the lattice and the gridding will add at each observer, in closed form, and what the walls will send back, by the source’s images. ${what.notes.join(' ')}`;
  }
}

/** "Predicted 0.28 % at A ✓: lattice 0.32 %, gridding 0.11 %, boundary 0.0019 %; measured 0.28 %". */
function foresightText(what: Foretold, tolerance: number, result: Result | null): (Node | string)[] {
  if ('failed' in what) return [`Not predicted: ${what.failed}`];
  if ('reason' in what) return [`Not predicted: ${what.reason}.`];
  const { worst, notes } = what;
  const outside = worst.total > tolerance;
  // Without the walls' part nothing is known to be within the tolerance.
  const mark = outside
    ? `✗ outside ${formatPercent(tolerance, 3)}`
    : worst.boundary === null
      ? 'without the walls'
      : '✓';
  const parts = [
    `lattice ${formatPercent(worst.lattice)}`,
    `gridding ${formatPercent(worst.gridding)}`,
    worst.boundary === null ? 'boundary not predicted' : `boundary ${formatPercent(worst.boundary)}`,
  ];
  const measured = result?.observers.find(({ name }) => name === worst.name)?.E?.relativeL2 ?? null;
  return [
    h('strong', { className: outside ? 'outside' : '' }, `Predicted ${formatPercent(worst.total)} ${mark}`),
    ` at ${worst.name}: ${parts.join(', ')}${what.places.length > 1 ? `; worst of ${what.places.length} observers` : ''}`,
    ...(measured === null || !result
      ? []
      : [
          h(
            'strong',
            { className: withinTolerance(result) ? '' : 'outside' },
            ` · measured ${formatPercent(measured)}`,
          ),
        ]),
    ...(notes.length > 0 ? [` · ${notes.join(' ')}`] : []),
  ];
}
