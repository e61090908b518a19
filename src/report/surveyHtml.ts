import {
  type BoundaryResult,
  type CaseResult,
  isDone,
  type LadderResult,
  type Outcome,
  type SurveyResult,
} from '../compare/surveyResult.ts';
import { formatNumber, formatQuantity } from '../elementary/quantity.ts';
import { textOf } from '../scenario/text.ts';
import { budgetRows } from './budgetRows.ts';
import { type Markup, markup } from './markup.ts';
import { page } from './page.ts';
import {
  clearanceChart,
  costChart,
  ladderChart,
  laddersChart,
  PART_NAMES,
  reflectionAngleChart,
  reflectionFrequencyChart,
  reflectionTimeChart,
} from './surveyCharts.ts';
import {
  caseName,
  cautions,
  countsText,
  frontCases,
  headline,
  keyWord,
  ladderSentences,
  levelText,
  settingWord,
  toleranceOf,
  wallsSentences,
} from './surveyWords.ts';
import { type Chart, chartSvg } from './svg.ts';
import { countText, percentOr } from './words.ts';

/** `survey.html`: which walls, which step, at what cost; then the evidence. */
export function surveyHtml(result: SurveyResult, command: string): string {
  const title = result.title === '' ? 'Untitled survey' : result.title;
  return page(
    title,
    markup`<p class="muted">Fieldassay ${result.version} · survey · <bdi>${title}</bdi></p>
<h1>${headline(result)}</h1>
${wallsSentences(result).map((sentence) => markup`<p>${sentence}</p>`)}
${cautions(result).map((sentence) => markup`<p class="outside">${sentence}</p>`)}
<p>${countsText(result)}.</p>
${choiceSection(result)}
${ladderSection(result)}
${boundarySection(result)}
${casesSection(result)}
${trouble(result)}
${definitions(result)}
${repeatSection(result, command)}`,
  );
}

const figures = (charts: readonly (Chart | null)[]): Markup | null => {
  const shown = charts.filter((chart) => chart !== null);
  return shown.length === 0
    ? null
    : markup`<div class="charts">${shown.map((chart) => markup`<figure>${chartSvg(chart)}</figure>`)}</div>`;
};

function choiceSection(result: SurveyResult): Markup | null {
  const tolerance = toleranceOf(result);
  const front = frontCases(result);
  if (front.length === 0) return null;
  return markup`<h2>What an error costs</h2>
${figures([costChart(result, tolerance), clearanceChart(result)])}
<div class="scroll"><table>
<thead><tr><th scope="col">no other is better and cheaper</th>${['total error', 'cells', 'steps', 'memory', 'time'].map((c) => markup`<th scope="col" class="number">${c}</th>`)}</tr></thead>
<tbody>${front.map((each) => {
    const error = each.budget.total.relativeL2!;
    const outside = tolerance !== null && error > tolerance;
    return markup`<tr><th scope="row">${caseName(each.settings)}</th><td class="number${outside ? ' outside' : ''}">${percentOr(error)}</td>${costCells(each).map((c) => markup`<td class="number">${c}</td>`)}</tr>`;
  })}</tbody></table></div>`;
}

/** Cells, steps, memory, time. */
const costCells = ({ cost, grid, timings }: Outcome): string[] => [
  countText(cost.cells),
  countText(grid.steps),
  formatQuantity(cost.memoryBytes, 'B'),
  formatQuantity(timings.box.seconds, 's'),
];

/** One ladder in full; several in a table, each in full below it. */
function ladderSection(result: SurveyResult): Markup | null {
  const { ladders } = result;
  if (ladders.length === 0) return null;
  if (ladders.length === 1) return markup`<h2>Convergence</h2>${ladderDetails(ladders[0]!, result)}`;
  return markup`<h2>Convergence</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">ladder</th>${['coarsest', 'finest', 'orders', 'index', 'covers the truth', 'left as h → 0'].map((c) => markup`<th scope="col" class="number">${c}</th>`)}</tr></thead>
<tbody>${ladders.map((ladder) => ladderRow(ladder, toleranceOf(result)))}</tbody></table></div>
<p class="muted">Total error of the coarsest and the finest grid, the orders between consecutive grids, and the grid convergence index of the finest: whether it covers the true error beside it. Red: outside the tolerance, or not covered.</p>
${figures([laddersChart(result, toleranceOf(result))])}
${ladders.map((ladder) => markup`<details><summary>${caseName(ladder.settings)}</summary>${ladderDetails(ladder, result)}</details>`)}`;
}

function ladderRow(ladder: LadderResult, tolerance: number | null): Markup {
  const { settings, sizes, errors, orders, gci, richardson } = ladder;
  const error = (n: number) => {
    const value = errors[n] ?? null;
    const outside = tolerance !== null && value !== null && value > tolerance;
    return markup`<td class="number${outside ? ' outside' : ''}">${percentOr(value)} at ${formatQuantity(sizes[n]!, 'm')}</td>`;
  };
  const list = orders.map((order) => (order === null ? '—' : formatNumber(order, 2))).join(', ');
  const index = gci.value === null ? '—' : percentOr(gci.value);
  const covered = gci.value === null ? '—' : gci.covered ? 'yes' : 'no';
  const left = richardson.limit === null ? '—' : percentOr(Math.abs(richardson.limit));
  return markup`<tr><th scope="row">${caseName(settings)}</th>${error(0)}${error(sizes.length - 1)}<td class="number">${list}</td><td class="number">${index}</td><td class="number${covered === 'no' ? ' outside' : ''}">${covered}</td><td class="number muted">${left}</td></tr>`;
}

function ladderDetails(ladder: LadderResult, result: SurveyResult): Markup {
  const parts = [
    { part: 'total', errors: ladder.errors, floors: ladder.errors.map(() => 0), orders: ladder.orders },
    ...ladder.parts,
  ];
  const columns = parts.map(
    ({ part }) =>
      markup`<th scope="col" class="number">${PART_NAMES[part] ?? part}</th><th scope="col" class="number">order</th>`,
  );
  const tolerance = toleranceOf(result);
  return markup`${ladderSentences(ladder).map((sentence) => markup`<p>${sentence}</p>`)}
<div class="scroll"><table>
<thead><tr><th scope="col">cell size</th>${columns}</tr></thead>
<tbody>${ladder.sizes.map(
    (size, n) =>
      markup`<tr><th scope="row">${formatQuantity(size, 'm')}</th>${parts.map(({ part, errors, floors, orders }) => {
        const error = errors[n] ?? null;
        const below = error !== null && error < (floors[n] ?? 0);
        const outside = part === 'total' && tolerance !== null && error !== null && error > tolerance;
        return markup`<td class="number${outside ? ' outside' : ''}">${below ? '< floor' : percentOr(error)}</td><td class="number muted">${orderText(orders, n)}</td>`;
      })}</tr>`,
  )}</tbody></table></div>
${figures([ladderChart(ladder, tolerance)])}`;
}

/** The order that led to a grid stands in its row. */
const orderText = (orders: readonly (number | null)[], n: number): string => {
  const order = n === 0 ? null : (orders[n - 1] ?? null);
  return order === null ? '' : formatNumber(order, 3);
};

function boundarySection(result: SurveyResult): Markup | null {
  if (result.boundaries.length === 0) return null;
  const others = result.vary.filter((key) => !key.startsWith('grid.boundary'));
  const rows = [...result.boundaries].sort((a, b) => (a.reflection ?? 0) - (b.reflection ?? 0));
  return markup`<h2>Walls</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">walls</th>${others.map((key) => markup`<th scope="col">${keyWord(key)}</th>`)}${[
    'reflection',
    'late',
    'static rest',
    'total error',
    'cells',
    'memory',
    'time',
  ].map((c) => markup`<th scope="col" class="number">${c}</th>`)}<th scope="col"></th></tr></thead>
<tbody>${rows.map((row) => boundaryRow(row, others, result))}
<tr class="total"><th scope="row">exact field</th>${others.map(() => markup`<td></td>`)}<td class="number">none</td><td class="number">none</td><td class="number">none</td><td class="number">0 %</td><td class="number muted" colspan="3">integrals, ${exactSeconds(result)}</td><td></td></tr>
</tbody></table></div>
<p class="muted">Reflection: largest component of what came back over the peak of the exact field, at the worst observer, in double precision against the same lattice without walls. Late: the same after every wall’s first echo has passed. Static rest: of the field that charge leaves behind. Cells, memory and stepping time of the grid in its box, absorber included.</p>
${figures([reflectionTimeChart(result), reflectionFrequencyChart(result), reflectionAngleChart(result)])}`;
}

function boundaryRow(row: BoundaryResult, others: readonly string[], result: SurveyResult): Markup | null {
  const each = result.cases[row.case]!;
  if (!isDone(each)) return null;
  const tolerance = toleranceOf(result);
  const outside = tolerance !== null && (row.totalError ?? 0) > tolerance;
  return markup`<tr><th scope="row">${row.description}</th>${others.map((key) => markup`<td>${settingWord(row.settings[key])}</td>`)}
<td class="number">${levelText(row.reflection, row.floor)}</td><td class="number">${levelText(row.late, row.floor)}</td><td class="number">${levelText(row.static, row.floor)}</td>
<td class="number${outside ? ' outside' : ''}">${percentOr(row.totalError)}</td><td class="number">${countText(each.cost.cells)}</td><td class="number">${formatQuantity(each.cost.memoryBytes, 'B')}</td><td class="number">${formatQuantity(each.timings.box.seconds, 's')}</td><td class="muted">${row.front ? 'on the front' : ''}</td></tr>`;
}

function exactSeconds({ cases }: SurveyResult): string {
  const seconds = cases.filter(isDone).map(({ timings }) => timings.exact.seconds);
  return formatQuantity(Math.max(...seconds), 's');
}

function casesSection(result: SurveyResult): Markup {
  const tolerance = toleranceOf(result);
  const head = ['total error', 'boundary', 'lattice', 'gridding', 'box, E', 'cells', 'steps', 'memory', 'time'];
  return markup`<h2>All cases</h2>
<div class="scroll"><table>
<thead><tr>${result.vary.map((key) => markup`<th scope="col">${keyWord(key)}</th>`)}${head.map((c) => markup`<th scope="col" class="number">${c}</th>`)}</tr></thead>
<tbody>${result.cases.map((each) => caseRow(each, result.vary, tolerance, head.length))}</tbody></table></div>`;
}

function caseRow(each: CaseResult, vary: readonly string[], tolerance: number | null, columns: number): Markup {
  const names = vary.map((key) => markup`<td>${settingWord(each.settings[key])}</td>`);
  if (!isDone(each)) return markup`<tr>${names}<td colspan="${columns}" class="outside">${each.status}</td></tr>`;
  const rows = budgetRows(each.budget);
  const part = (name: string) => rows.find((row) => row.name === name)?.error ?? '—';
  const total = each.budget.total.relativeL2;
  const cells = [part('boundary'), part('lattice'), part('gridding'), percentOr(each.norms.E.relativeL2)];
  const outside = total !== null && tolerance !== null && total > tolerance;
  return markup`<tr>${names}<td class="number${outside ? ' outside' : ''}">${percentOr(total)}</td>${[...cells, ...costCells(each)].map((c) => markup`<td class="number">${c}</td>`)}</tr>`;
}

/** What was refused, which the survey's author can mend, apart from what failed, which he cannot. */
function trouble({ cases }: SurveyResult): Markup[] {
  return (['refused', 'failed'] as const).flatMap((status) => {
    const some = cases.filter((each) => each.status === status);
    if (some.length === 0) return [];
    return [
      markup`<h2>${status === 'refused' ? 'Refused' : 'Failed'}</h2>
<dl>${some.map((each) => markup`<dt>${caseName(each.settings)}</dt><dd>${each.reason}</dd>`)}</dl>`,
    ];
  });
}

function definitions({ mask, ladders, boundaries }: SurveyResult): Markup {
  const entries: (readonly [string, string])[] = [
    [
      'total error',
      '√(Σ |grid − exact|²) / √(Σ |exact|²) of E, pooled over the observers (over the box outside the mask where there are none), instants and components.',
    ],
    [
      'boundary, lattice, gridding',
      'What the walls sent back; what the Yee lattice does to the currents it was given; what putting the source on edges changed. Nothing below its floor is shown as a number.',
    ],
    [
      'box, E',
      `The same over samples of the whole box${mask === null ? '' : `, those nearer to a source than ${formatQuantity(mask, 'm')} (eight of the coarsest cells, unless the scenario says otherwise) left out in every case`}.`,
    ],
    ...(ladders.length === 0
      ? []
      : ([
          ['order', 'ln(e₁/e₂)/ln(h₁/h₂) between a grid and the next coarser one, h = ∛(dx dy dz).'],
          [
            'grid convergence index',
            'F |e₂ − e₁|/(r^p − 1), F = 1.25 with three grids or more and the observed p, F = 3 with two and p = 2 (Roache 1994; ASME V&V 20): what somebody without an exact answer would state. It sees only what changes with the cells; what the walls send back stays.',
          ],
        ] as const)),
    ...(boundaries.length === 0
      ? []
      : ([
          [
            'reflection',
            'Grid in its box minus the same lattice without walls, both in double precision. Its floor is what the lattice without walls leaves of reflections itself.',
          ],
          [
            'on the front',
            'No other case is as cheap and better, or as good and cheaper (cell updates against total error).',
          ],
        ] as const)),
  ];
  return markup`<h2>What the figures are</h2>
<dl>${entries.map(([term, text]) => markup`<dt>${term}</dt><dd>${text}</dd>`)}</dl>`;
}

function repeatSection({ survey, environment, version }: SurveyResult, command: string): Markup {
  return markup`<h2>To repeat it</h2>
<p>Save the survey below and run</p>
<pre>${command}</pre>
<pre class="listing">${textOf(survey)}</pre>
<p class="muted">Fieldassay ${version}${Object.entries(environment).map(([name, value]) => markup` · ${name} ${String(value)}`)}</p>`;
}
