import { PARTS } from '../compare/budget.ts';
import { type BudgetResult, type Result, withinTolerance } from '../compare/result.ts';
import { formatPercent, formatQuantity } from '../elementary/quantity.ts';
import { type BudgetRow, budgetRows } from '../report/budgetRows.ts';
import { markup } from '../report/markup.ts';
import { gridText } from '../report/words.ts';
import type { Scenario } from '../scenario/model.ts';
import { timeStepOf } from '../scenario/sites.ts';
import { byId, h } from './dom.ts';
import type { Runner } from './runner.ts';
import type { RunState, Store } from './store.ts';

/** The headline: the verdict in one sentence, what supports it, the budget, and how the run stands. */
export function showVerdict(store: Store, runner: Runner, toText: () => void): void {
  const sentence = byId('sentence');
  const details = byId('details');
  const checks = byId('checks');
  const budget = byId('budget');
  const run = byId('run');
  const more = foldable(byId('support'));
  const bar = h('progress', { max: 1, 'aria-label': 'Progress of the run' });
  const stage = h('span', { className: 'muted' });
  const button = h('button', { type: 'button' });
  button.addEventListener('click', () => {
    if (store.state.run.status === 'running') runner.cancel();
    else runner.start();
  });
  const mend = h('button', { type: 'button' }, 'Show where');
  mend.addEventListener('click', toText);
  const takeBack = h('button', { type: 'button', title: 'Undo (Ctrl Z)' }, 'Undo the edit');
  takeBack.addEventListener('click', () => store.undo());
  run.append(bar, stage, button, takeBack, mend);

  const showResult = () => {
    const { result } = store.state;
    budget.replaceChildren();
    details.replaceChildren();
    checks.replaceChildren();
    if (!result) {
      budget.append(budgetTable(UNKNOWN));
      const { scenario } = store.state;
      if (scenario) details.append(whatRuns(scenario));
      more();
      return showRun();
    }
    sentence.textContent = result.verdict.sentence;
    const outside =
      withinTolerance(result) || !isMeasured(result)
        ? null
        : h('span', { className: 'outside' }, `Outside the tolerance of ${formatPercent(result.tolerance, 3)}. `);
    const remedy = result.verdict.remedy ? [result.verdict.remedy.sentence] : [];
    details.append(
      ...[outside, [...remedy, ...result.verdict.details, ...result.notes].join(' ')].filter((part) => part !== null),
    );
    for (const { status, sentence: said } of result.checks)
      checks.append(h('span', { className: status === 'differs' ? 'outside' : 'muted' }, said), ' ');
    budget.append(budgetTable(budgetRows(result.budget), result.budget));
    more();
    showRun();
  };

  const showRun = () => {
    const { result, run: state, problems, film } = store.state;
    const running = state.status === 'running';
    bar.hidden = !running;
    bar.value = state.fraction;
    const wrong = problems.length > 0;
    button.hidden = state.status === 'idle' || (wrong && !running);
    button.textContent = running ? 'Cancel' : 'Run again';
    button.title = running ? 'Ends the run at once; what is known stays (Esc)' : 'Runs both solvers anew (r)';
    stage.textContent = wrong
      ? `Not run: ${problems.length === 1 ? 'something is' : `${problems.length} things are`} wrong in the scenario.`
      : statusText(state, result);
    stage.title = wrong && film ? 'What is shown is the last sound scenario’s.' : stage.textContent;
    mend.hidden = !wrong;
    takeBack.hidden = !wrong || !store.canUndo;
    if (result) return;
    if (!running) details.replaceChildren();
    if (state.status === 'refused' || state.status === 'failed') sentence.textContent = state.message;
    else if (problems.length > 0 && !film) sentence.textContent = problems[0]!.message;
    else
      sentence.textContent = running
        ? 'No verdict yet: both solvers are at work.'
        : 'No verdict: the run was cancelled.';
  };
  store.on(['result'], showResult);
  store.on(['run', 'scenario'], showRun);
  budget.append(budgetTable(UNKNOWN));
}

/** What is compared, while nothing is known yet. */
function whatRuns({ grid, medium, duration }: Scenario): string {
  const step = timeStepOf(grid, medium);
  return (
    `The same currents run through both solvers: a Yee grid of ${grid.cells.join(' × ')} cells over ` +
    `${Math.ceil(duration / step)} steps of ${formatQuantity(step, 's')}, and retarded integrals, which are exact for them. ` +
    'The panes fill in as both advance.'
  );
}

/** What is being done and for how long yet; or how it ended. */
function statusText({ status, stage, fraction, secondsLeft, message }: RunState, result: Result | null): string {
  switch (status) {
    case 'idle':
    case 'refused':
      return '';
    case 'running': {
      const left = secondsLeft === undefined ? '' : `, ${Math.max(1, Math.ceil(secondsLeft))} s left`;
      return `${stage[0]?.toUpperCase() ?? ''}${stage.slice(1)}: ${Math.round(100 * fraction)} %${left}`;
    }
    case 'cancelled':
      return 'Cancelled. What was known by then is shown.';
    case 'failed':
      return result ? message : '';
    case 'done':
      return result ? `Done. ${gridText(result)}.` : '';
  }
}

/**
 * Keeps a text as low as the page's style has it, with a button that unfolds it where there is more than is seen.
 * @returns to be called when the text has changed
 */
function foldable(host: HTMLElement): () => void {
  const text = host.firstElementChild as HTMLElement;
  const button = h('button', { type: 'button', className: 'more', 'aria-expanded': 'false', hidden: true }, 'more');
  host.append(button);
  const show = () => {
    const open = host.classList.contains('open');
    button.hidden = !open && text.scrollHeight <= text.clientHeight + 1;
    button.textContent = open ? 'less' : 'more';
    button.setAttribute('aria-expanded', String(open));
  };
  button.addEventListener('click', () => {
    host.classList.toggle('open');
    show();
  });
  new ResizeObserver(show).observe(text);
  return show;
}

/** Whether anything was found that is within the tolerance or outside it. */
const isMeasured = ({ observers, verdict }: Result): boolean =>
  observers.some(({ E }) => E !== null && E.relativeL2 !== null) || 'best' in verdict.closest;

/** A budget before there is one: it takes the room that it will need. */
const UNKNOWN: readonly BudgetRow[] = [...PARTS, 'total' as const].map((name) => ({
  name,
  colour: name === 'total' ? 'ink' : name,
  error: '…',
  share: null,
  shareText: '…',
  floor: '…',
}));

/**
 * The parts of the error with their signed shares as bars, and the floors below which nothing is told.
 * @param budget the same in full, for those who point at a figure
 */
function budgetTable(rows: readonly BudgetRow[], budget?: BudgetResult): HTMLElement {
  const shares = rows.filter(({ name }) => name !== 'total').map(({ share }) => share ?? 0);
  const [low, high] = [Math.min(0, ...shares), Math.max(0.01, ...shares)];
  const full = ({ name }: BudgetRow, figure: 'relativeL2' | 'share' | 'floor') => {
    const key = name === 'boundary and lattice' ? 'boundaryAndLattice' : (name as keyof BudgetResult);
    return budget?.[key]?.[figure] ?? null;
  };
  const line = (
    name: string,
    help: string,
    figure: 'relativeL2' | 'share' | 'floor',
    cell: (row: BudgetRow) => Node | string,
  ) =>
    h(
      'tr',
      { title: help },
      h('th', { scope: 'row' }, name),
      ...rows.map((row) => {
        const value = full(row, figure);
        const title = value === null ? help : `${row.name}, ${name}: ${value}\n${help}`;
        return h('td', { title }, cell(row));
      }),
    );
  return h(
    'table',
    { className: 'budget' },
    h(
      'thead',
      {},
      h('tr', {}, h('th', { scope: 'col' }, 'Error of E'), ...rows.map(({ name }) => h('th', { scope: 'col' }, name))),
    ),
    h(
      'tbody',
      {},
      line(
        'relative L2',
        '√(Σ part²)/√(Σ exact²) over the observers’ traces; nothing is told below its floor',
        'relativeL2',
        ({ error }) => error,
      ),
      line('share', '⟨part, total⟩/⟨total, total⟩: signed, the shares of the parts sum to 100 %', 'share', (row) =>
        row.name === 'total' ? '' : shareBar(row, low, high),
      ),
      line(
        'floor',
        'what a part cannot be told from: rounding, the free-space run’s leftover, the quadrature’s bound',
        'floor',
        ({ floor }) => floor,
      ),
    ),
  );
}

const BAR = 84;

/** A bar from zero to the share, all parts on one scale, with its figure. */
function shareBar({ share, shareText, colour }: BudgetRow, low: number, high: number): HTMLElement {
  const pixel = (s: number) => Math.round(((s - low) / (high - low)) * (BAR - 2) * 10) / 10 + 1;
  const [from, to] = [Math.min(0, share ?? 0), Math.max(0, share ?? 0)].map(pixel) as [number, number];
  const cell = h('span', { className: 'share' });
  cell.innerHTML =
    markup`<svg viewBox="0 0 ${BAR} 10" width="${BAR}" height="10" aria-hidden="true"><rect x="${from}" y="1" width="${Math.round((to - from) * 10) / 10}" height="8" fill="var(--${colour})"/><line x1="${pixel(0)}" x2="${pixel(0)}" y1="0" y2="10" stroke="var(--muted)"/></svg>`.text;
  cell.append(shareText);
  return cell;
}

/** "1.84 ns · step 193", of the picture shown. */
export function instantText(time: number, step: number): string {
  return `${formatQuantity(time, 's')} · step ${step}`;
}
