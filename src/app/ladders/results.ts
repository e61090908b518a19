import { isDone, type SurveyResult } from '../../compare/surveyResult.ts';
import { formatNumber, formatQuantity } from '../../elementary/quantity.ts';
import {
  clearanceChart,
  costChart,
  ladderChart,
  laddersChart,
  reflectionAngleChart,
  reflectionFrequencyChart,
  reflectionTimeChart,
} from '../../report/surveyCharts.ts';
import {
  caseName,
  cautions,
  countsText,
  headline,
  keyWord,
  ladderSentences,
  levelText,
  settingWord,
  toleranceOf,
  wallsSentences,
} from '../../report/surveyWords.ts';
import type { Chart } from '../../report/svg.ts';
import { countText, percentOr } from '../../report/words.ts';
import { LiveChart } from '../charts.ts';
import { h } from '../dom.ts';
import { table } from '../table.ts';
import type { SurveyModel } from './model.ts';

/** One chart of the place: what it shows of a result, and what stands there until there is something. */
interface Shown {
  readonly live: LiveChart;
  readonly chart: (result: SurveyResult) => Chart | null;
}

/** What the survey has found by now: sentences, charts, tables. Charts are drawn one a screen refresh. */
export class Results {
  readonly element: HTMLElement;
  private readonly sentence = h('h1', { 'aria-live': 'polite' });
  private readonly lines = h('div', { className: 'lines' });
  private readonly ladder = h('select', { 'aria-label': 'Which ladder' });
  private readonly ladderLine = h('label', { className: 'which' }, 'Ladder ', this.ladder);
  private readonly charts: readonly Shown[];
  private readonly figures = h('div', { className: 'charts grid' });
  private readonly tables = h('div', { className: 'tables' });
  private next = 0;

  /** @param toCompare is told of a case that is to be looked at */
  constructor(
    private readonly model: SurveyModel,
    private readonly toCompare: (index: number) => void,
  ) {
    const onKey = (key: string) => toCompare(Number(key));
    const shown = (empty: string, chart: Shown['chart'], clickable = true): Shown => ({
      live: new LiveChart(() => empty, undefined, clickable ? onKey : undefined),
      chart,
    });
    this.charts = [
      shown('Error against cell size: known from the second cell size on.', (result) => {
        const ladder = result.ladders[this.ladder.selectedIndex] ?? result.ladders[0];
        return ladder ? ladderChart(ladder, toleranceOf(result)) : null;
      }),
      shown('All ladders in one: known with two ladders.', (result) => laddersChart(result, toleranceOf(result))),
      shown('Error against cost: known from the second case on.', (result) => costChart(result, toleranceOf(result))),
      shown('The walls’ part against their clearance: known with two clearances.', clearanceChart),
      shown('Reflections in time: measured where walls or clearances are varied.', reflectionTimeChart, false),
      shown('Reflections by frequency: measured where walls are varied.', reflectionFrequencyChart, false),
      shown('Reflections by angle: measured where walls are varied.', reflectionAngleChart, false),
    ];
    this.ladder.addEventListener('change', () => this.redraw());
    this.element = h(
      'div',
      { className: 'results' },
      this.sentence,
      this.lines,
      this.ladderLine,
      this.figures,
      this.tables,
    );
    model.on(['result', 'run', 'survey'], () => this.show());
    model.store.on(['theme'], () => this.redraw());
    new ResizeObserver(() => this.redraw()).observe(this.figures);
    this.show();
  }

  private stamp = '';

  private show(): void {
    const { result, status, message, problems } = this.model.state;
    this.sentence.textContent = this.headline();
    const stamp = `${status} ${message} ${problems.length} ${result?.cases.length} ${result?.cases.at(-1)?.hash}`;
    if (stamp === this.stamp) return;
    this.stamp = stamp;
    const some = result !== null && result.cases.length > 0;
    this.lines.replaceChildren(...(some ? linesOf(result, status === 'running' || status === 'following') : []));
    const names = result?.ladders.map(({ settings }) => caseName(settings)) ?? [];
    this.ladderLine.hidden = names.length < 2;
    const before = this.ladder.selectedIndex;
    this.ladder.replaceChildren(...names.map((name) => h('option', {}, name)));
    this.ladder.selectedIndex = Math.max(0, Math.min(before, names.length - 1));
    this.tables.replaceChildren(
      ...(some ? [this.boundaryTable(result), this.caseTable(result)] : []).filter(isElement),
    );
    this.redraw();
  }

  private headline(): string {
    const { result, status, message, problems, of } = this.model.state;
    if (status === 'refused' || status === 'failed') return message;
    if (result?.cases.some(isDone)) return headline(result);
    if (status === 'running' || status === 'following') return 'Nothing known yet: the first cases are at work.';
    if (status === 'cancelled') return 'Cancelled before any case was done.';
    if (problems.length > 0) return problems[0]!.message;
    return `Nothing run yet: ${of} ${of === 1 ? 'case' : 'cases'} of the scenario in Compare, as chosen on the left. A ladder tells how fast the error falls with the cells, walls what each sends back and costs.`;
  }

  /** Draws one chart a screen refresh, so that none of them holds the page up. */
  redraw(): void {
    const idle = this.next === 0;
    this.next = this.charts.length;
    if (idle) requestAnimationFrame(() => this.drawNext());
  }

  private drawNext(): void {
    const { result } = this.model.state;
    if (this.next === this.charts.length) {
      // What this survey can never show takes no room.
      const wanted = this.charts.filter((each, n) => this.isWanted(n) || (result && each.chart(result)));
      const present = [...this.figures.children];
      const figures = wanted.map(({ live }) => live.figure);
      if (figures.length !== present.length || figures.some((figure, n) => figure !== present[n]))
        this.figures.replaceChildren(...figures);
    }
    const { live, chart } = this.charts[this.charts.length - this.next]!;
    if (live.figure.isConnected) live.draw(result && result.cases.length > 0 ? chart(result) : null);
    this.next--;
    if (this.next > 0) requestAnimationFrame(() => this.drawNext());
  }

  /** Whether what is varied will give a chart, so that its place is kept. */
  private isWanted(n: number): boolean {
    const keys = this.model.state.result?.vary ?? Object.keys(this.model.state.vary);
    const sizes = keys.includes('grid.cellSize');
    const walls = keys.some((key) => key.startsWith('grid.boundary'));
    const clearance = keys.includes('grid.clearance');
    return [sizes, sizes && keys.length > 1, true, clearance, walls || clearance, walls, walls][n]!;
  }

  private boundaryTable(result: SurveyResult): HTMLElement | null {
    if (result.boundaries.length === 0) return null;
    const head = ['walls', 'reflection', 'late', 'total error', 'grid', 'memory', 'time', ''];
    const tolerance = toleranceOf(result);
    return table(
      'Walls: reflection at the worst observer, in dB of the exact peak',
      head,
      result.boundaries.map((row) => {
        const each = result.cases[row.case]!;
        const outside = tolerance !== null && row.totalError !== null && row.totalError > tolerance;
        return [
          this.toCase(row.case, caseName(row.settings)),
          levelText(row.reflection, row.floor),
          levelText(row.late, row.floor),
          h('span', { className: outside ? 'outside' : '' }, percentOr(row.totalError)),
          each.cost ? `${countText(each.cost.cells)} cells` : '',
          each.cost ? formatQuantity(each.cost.memoryBytes, 'B') : '',
          each.timings ? formatQuantity(each.timings.box.seconds, 's') : '',
          row.front ? 'no other is better and cheaper' : '',
        ];
      }),
    );
  }

  private caseTable(result: SurveyResult): HTMLElement {
    const tolerance = toleranceOf(result);
    const head = [
      ...result.vary.map(keyWord),
      'total error',
      'boundary',
      'lattice',
      'gridding',
      'grid',
      'steps',
      'time',
      '',
    ];
    const part = (value: { relativeL2: number | null; floor: number | null } | null) =>
      value?.relativeL2 == null ? '—' : percentOr(value.relativeL2 < (value.floor ?? 0) ? null : value.relativeL2);
    return table(
      'All cases; the parts of E’s error pooled over the observers',
      head,
      result.cases.map((each, n) => {
        const settings = result.vary.map((key) => settingWord(each.settings[key]));
        if (!isDone(each))
          return [
            ...settings,
            h('span', { className: 'outside' }, each.status),
            h('span', { className: 'reason' }, each.reason ?? ''),
          ];
        const { total, boundary, lattice, gridding } = each.budget;
        const outside = tolerance !== null && (total.relativeL2 ?? 0) > tolerance;
        return [
          ...settings,
          h('span', { className: outside ? 'outside' : '' }, percentOr(total.relativeL2)),
          part(boundary),
          part(lattice),
          part(gridding),
          `${countText(each.cost.cells)} cells`,
          countText(each.grid.steps),
          formatQuantity(each.timings.box.seconds, 's'),
          this.toCase(n, 'Compare'),
        ];
      }),
    );
  }

  private toCase(index: number, text: string): HTMLElement {
    return h(
      'button',
      { type: 'button', title: 'Load this case into Compare', onclick: () => this.toCompare(index) },
      text,
    );
  }
}

const isElement = (element: HTMLElement | null): element is HTMLElement => element !== null;

function linesOf(result: SurveyResult, growing: boolean): HTMLElement[] {
  const done = result.cases.some(isDone);
  const said = done
    ? [
        ...wallsSentences(result),
        ...(result.ladders.length === 1 ? ladderSentences(result.ladders[0]!) : ordersOf(result)),
      ]
    : [];
  return [
    ...said.map((sentence) => h('p', {}, sentence)),
    ...cautions(result).map((sentence) => h('p', { className: 'outside' }, sentence)),
    h(
      'p',
      { className: 'muted' },
      `${countsText(result)}${growing ? ' by now' : ''}. A click on a point loads its case into Compare.`,
    ),
  ];
}

/** Of several ladders a line each: orders, and whether the index covers the true error. */
function ordersOf({ ladders }: SurveyResult): string[] {
  return ladders.map(({ settings, orders, gci }) => {
    const list = orders.map((order) => (order === null ? '—' : formatNumber(order, 3))).join(', ');
    const index =
      gci.value === null
        ? ''
        : `; index of the finest grid ${percentOr(gci.value)}, true error ${percentOr(gci.trueError)}: ${gci.covered ? 'covered' : 'not covered'}`;
    return `${caseName(settings)}: order ${list}${index}.`;
  });
}
