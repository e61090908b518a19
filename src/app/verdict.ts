import { type Result, withinTolerance } from '../compare/result.ts';
import { formatPercent, formatQuantity } from '../elementary/quantity.ts';
import { type BudgetRow, budgetRows } from '../report/budgetRows.ts';
import { markup } from '../report/markup.ts';
import { byId, h } from './dom.ts';
import type { Runner } from './runner.ts';
import type { Store } from './store.ts';

/** The headline: the verdict in one sentence, what supports it, the budget, and how the run stands. */
export function showVerdict(store: Store, runner: Runner, toText: () => void): void {
  const sentence = byId('sentence');
  const details = byId('details');
  const checks = byId('checks');
  const budget = byId('budget');
  const run = byId('run');
  const bar = h('progress', { max: 1, 'aria-label': 'Progress of the run' });
  const stage = h('span', { className: 'muted' });
  const button = h('button', { type: 'button' });
  button.addEventListener('click', () => {
    if (store.state.run.status === 'running') runner.cancel();
    else runner.start();
  });
  const mend = h('button', { type: 'button' }, 'Show where in the text');
  mend.addEventListener('click', toText);
  run.append(bar, stage, button, mend);

  const showResult = () => {
    const { result } = store.state;
    budget.replaceChildren();
    details.replaceChildren();
    checks.replaceChildren();
    if (!result) return showRun();
    sentence.textContent = result.verdict.sentence;
    const outside =
      withinTolerance(result) || !isMeasured(result)
        ? null
        : h('span', { className: 'outside' }, `Outside the tolerance of ${formatPercent(result.tolerance, 3)}. `);
    const remedy = result.verdict.remedy ? [result.verdict.remedy.sentence] : [];
    details.append(
      ...[outside, [...remedy, ...result.verdict.details, ...result.notes].join(' ')].filter((part) => part !== null),
    );
    details.title = details.textContent ?? '';
    for (const { status, sentence: said } of result.checks)
      checks.append(h('span', { className: status === 'differs' ? 'outside' : 'muted' }, said), ' ');
    checks.title = checks.textContent ?? '';
    budget.append(budgetTable(result));
    showRun();
  };

  const showRun = () => {
    const { result, run: state, problems, film } = store.state;
    const running = state.status === 'running';
    bar.hidden = !running;
    bar.value = state.fraction;
    button.hidden = state.status === 'done' || state.status === 'idle' || state.status === 'refused';
    button.textContent = running ? 'Cancel' : 'Run again';
    const left = state.secondsLeft === undefined ? '' : `, ${Math.max(1, Math.ceil(state.secondsLeft))} s left`;
    stage.textContent = running
      ? `${state.stage[0]?.toUpperCase() ?? ''}${state.stage.slice(1)}: ${Math.round(100 * state.fraction)} %${left}`
      : state.status === 'cancelled'
        ? 'Cancelled. What was known by then is shown.'
        : result && state.status === 'failed'
          ? state.message
          : '';
    mend.hidden = problems.length === 0;
    run.hidden = stage.textContent === '' && button.hidden && mend.hidden;
    if (result) return;
    if (state.status === 'refused' || state.status === 'failed') sentence.textContent = state.message;
    else if (problems.length > 0 && !film) sentence.textContent = problems[0]!.message;
    else
      sentence.textContent = running
        ? 'No verdict yet: both solvers are at work.'
        : 'No verdict: the run was cancelled.';
  };
  store.on(['result'], showResult);
  store.on(['run', 'scenario'], showRun);
}

/** Whether anything was found that is within the tolerance or outside it. */
const isMeasured = ({ observers, verdict }: Result): boolean =>
  observers.some(({ E }) => E !== null && E.relativeL2 !== null) || 'best' in verdict.closest;

/** The parts of the error with their signed shares as bars, and the floors below which nothing is told. */
function budgetTable(result: Result): HTMLElement {
  const rows = budgetRows(result.budget);
  const shares = rows.filter(({ name }) => name !== 'total').map(({ share }) => share ?? 0);
  const [low, high] = [Math.min(0, ...shares), Math.max(0.01, ...shares)];
  const line = (name: string, help: string, cell: (row: BudgetRow) => Node | string) =>
    h('tr', { title: help }, h('th', { scope: 'row' }, name), ...rows.map((row) => h('td', {}, cell(row))));
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
        ({ error }) => error,
      ),
      line('share', '⟨part, total⟩/⟨total, total⟩: signed, the shares of the parts sum to 100 %', (row) =>
        row.name === 'total' ? '' : shareBar(row, low, high),
      ),
      line(
        'floor',
        'what a part cannot be told from: rounding, the free-space run’s leftover, the quadrature’s bound',
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
