import { boundaryText } from '../compare/boundaryWords.ts';
import { paretoFront } from '../compare/front.ts';
import { type Plan, type PlannedPlace, type PlannedSetup, planSchema } from '../compare/planResult.ts';
import { formatPercent, formatQuantity, formatScientific } from '../elementary/quantity.ts';
import { jsonText, printable, textOf } from '../scenario/text.ts';
import { type Markup, markup } from './markup.ts';
import { page } from './page.ts';
import { choiceColour } from './surveyCharts.ts';
import { type Chart, chartSvg, type Series } from './svg.ts';
import { columns, countText, percentOr, sectionsText } from './words.ts';

/** The files of a plan's folder: the figures, the scenario with the planned grid, the report. */
export const PLAN_FILES = ['plan.json', 'planned-scenario.json', 'plan.html'] as const;
export type PlanFile = (typeof PLAN_FILES)[number];

/** The text of one file of the folder. @param command what to type to get it again */
export function planFile(file: PlanFile, plan: Plan, command: string): string {
  if (file === 'plan.json') return planJson(plan);
  return file === 'plan.html' ? planHtml(plan, command) : jsonText(plan.scenario);
}

/**
 * The text of `plan.json`. What is written is what the published schema describes.
 * @throws Error where the plan holds something that the schema does not allow, NaN among it
 */
export function planJson(plan: Plan): string {
  return jsonText(planSchema.parse(plan));
}

export const sizeText = ({ cellSize }: PlannedSetup): string =>
  cellSize.every((d) => d === cellSize[0])
    ? formatQuantity(cellSize[0], 'm')
    : cellSize.map((d) => formatQuantity(d, 'm')).join(' × ');

export const SETUP_HEAD = ['cells of', 'boundary', 'clearance', 'cells', 'steps', 'memory', 'predicted'];

export const setupCells = (setup: PlannedSetup): string[] => [
  sizeText(setup),
  boundaryText(setup.boundary),
  `${setup.clearance} cells`,
  countText(setup.cells),
  countText(setup.steps),
  formatQuantity(setup.memoryBytes, 'B'),
  formatPercent(setup.predicted),
];

export const PLACE_HEAD = ['', 'predicted', 'lattice', 'gridding', 'both', 'boundary', 'measured'];

export const placeCells = ({ name, total, lattice, gridding, free, boundary, measured }: PlannedPlace): string[] => [
  name,
  ...[total, lattice, gridding, free, boundary].map((e) => formatPercent(e)),
  percentOr(measured),
];

/** What the chosen set-up costs, in lines. */
export function costLines({ chosen, machine, own, check }: Plan): string[] {
  if (!chosen) return [];
  const { shape, cells, steps, timeStep, memoryBytes } = chosen;
  const rate = (n: number) => formatQuantity(n, 'cells/s');
  return [
    `${shape.join(' × ')} cells, ${countText(cells)} with the absorber; ${countText(steps)} steps of ${formatQuantity(timeStep, 's')}; ${formatQuantity(memoryBytes, 'B')}`,
    `${formatQuantity(machine.seconds!, 's')} a run on this machine at ${rate(machine.cellsPerSecond)}${machine.fits ? '' : ', where it does not fit'}`,
    ...(own ? [`${formatQuantity(own.seconds, 's')} a run at your own solver's ${rate(own.cellsPerSecond)}`] : []),
    ...(check
      ? [
          `Run: measured ${formatPercent(check.measured)}, predicted ${check.ratio.toFixed(2)} times that, in ${formatQuantity(check.seconds, 's')}`,
        ]
      : []),
  ];
}

export interface PlanTextOptions {
  readonly colour?: boolean;
  /** files that were written, as they are to be shown */
  readonly written?: readonly string[];
}

/** What `plan` prints: the set-up, what it costs, its errors by place and part, the trade-off, and the other boundaries. */
export function planText(plan: Plan, { colour = false, written = [] }: PlanTextOptions = {}): string {
  const strong = (text: string): string => (colour ? `\u001b[1m${text}\u001b[0m` : text);
  const right = Array.from({ length: 6 }, () => 'right' as const);
  const setups = (list: readonly PlannedSetup[]) =>
    columns([SETUP_HEAD, ...list.map(setupCells)], ['right', 'left', ...right]);
  const sections = [
    [...(plan.title === '' ? [] : [printable(plan.title)]), strong(printable(plan.sentence)), ...costLines(plan)],
    [
      `Error of E${plan.band === null ? '' : `, worst sixth-octave band up to ${formatQuantity(plan.band, 'Hz')}`}`,
      ...columns([PLACE_HEAD, ...plan.places.map((place) => placeCells(place).map(printable))], ['left', ...right]),
    ],
    ['Trade-off: the same walls with other cells', ...setups(plan.curve)],
    plan.alternatives.length < 2 ? [] : ['Cheapest with each boundary', ...setups(plan.alternatives)],
    plan.notes.map((note) => `Note: ${printable(note)}`),
    written.length === 0 ? [] : [`Written: ${written.map(printable).join(', ')}`],
  ];
  return sectionsText(sections);
}

/** Axes of predicted error against work, wide enough for all points and the tolerance. */
function costAxes(
  points: readonly (readonly [work: number, error: number])[],
  tolerance: number,
  workText: (work: number) => string,
): Pick<Chart, 'x' | 'y'> {
  const works = points.map(([work]) => work);
  const errors = [...points.map(([, error]) => error), tolerance];
  return {
    x: {
      label: 'cells × steps',
      unit: '',
      scale: 'log',
      domain: [Math.min(...works) / 1.3, Math.max(...works) * 1.3],
      format: workText,
    },
    y: {
      label: 'predicted error of E',
      unit: '',
      scale: 'log',
      domain: [Math.min(...errors) / 1.5, Math.max(...errors) * 1.5],
      format: (error) => formatPercent(error),
    },
  };
}

/** Predicted error against work: what finer cells buy. */
export function tradeOffChart({ curve, alternatives, chosen, tolerance }: Plan): Chart | null {
  if (!chosen || curve.length === 0) return null;
  const all = [...curve, ...alternatives];
  const dots = ([, error]: readonly [number, number]): 'within' | 'outside' =>
    error > tolerance ? 'outside' : 'within';
  const point = ({ work, predicted }: PlannedSetup) => [work, predicted] as const;
  const series: Series[] = [
    { name: boundaryText(chosen.boundary), colour: 'ink', points: curve.map(point), dots },
    ...(alternatives.length > 1
      ? [{ name: 'other boundaries', colour: 'muted' as const, thin: true, points: alternatives.map(point), dots }]
      : []),
  ];
  return {
    title: 'What finer cells buy',
    description: 'Predicted error of E, the worst place, against cells times steps; red where outside the tolerance.',
    ...costAxes(all.map(point), tolerance, (work) => formatQuantity(work, '')),
    series,
    marks: [
      { axis: 'y', at: tolerance, label: `tolerance ${formatPercent(tolerance, 3)}` },
      { axis: 'x', at: chosen.work, label: sizeText(chosen) },
    ],
  };
}

/**
 * Predicted error against work over many set-ups: of each boundary those that no other with it beats, the chosen one
 * marked, and the scenario as it stands beside them.
 */
export function frontsChart(
  setups: readonly PlannedSetup[],
  tolerance: number,
  chosen: PlannedSetup | null,
  standing: { readonly work: number; readonly predicted: number } | null,
): Chart | null {
  if (setups.length === 0) return null;
  const groups = new Map<string, PlannedSetup[]>();
  for (const each of setups) {
    const name = boundaryText(each.boundary);
    groups.set(name, [...(groups.get(name) ?? []), each]);
  }
  const series = [...groups].map(([name, group], n): Series => {
    const front = paretoFront(group.map(({ work, predicted }) => ({ cost: work, error: predicted }))).map(
      (i) => group[i]!,
    );
    return {
      name,
      colour: choiceColour(n),
      points: front.map(({ work, predicted }) => [work, predicted] as const),
      dots: ([, error]) => (error > tolerance ? 'outside' : 'within'),
    };
  });
  const marked = [chosen, standing].flatMap((each) => (each ? [[each.work, each.predicted] as const] : []));
  const all = [...series.flatMap(({ points }) => points), ...marked];
  return {
    title: 'What an error costs',
    description:
      'Predicted error of E, the worst place, against cells times steps: of each boundary the set-ups that no other beats; red where outside the tolerance.',
    ...costAxes(all, tolerance, (work) => formatScientific(work, 1)),
    series,
    marks: [
      { axis: 'y', at: tolerance, label: `tolerance ${formatPercent(tolerance, 3)}` },
      ...(chosen
        ? [
            {
              axis: 'x' as const,
              at: chosen.work,
              label: `cheapest: ${sizeText(chosen)}, ${boundaryText(chosen.boundary)}`,
            },
          ]
        : []),
      ...(standing
        ? [{ axis: 'x' as const, at: standing.work, label: `as it stands: ${formatPercent(standing.predicted)}` }]
        : []),
    ],
  };
}

const table = (head: readonly string[], rows: readonly (readonly string[])[]): Markup =>
  markup`<div class="scroll"><table><thead><tr>${head.map((cell) => markup`<th scope="col" class="number">${cell}</th>`)}</tr></thead>
<tbody>${rows.map((row) => markup`<tr>${row.map((cell) => markup`<td class="number"><bdi>${cell}</bdi></td>`)}</tr>`)}</tbody></table></div>`;

/** `plan.html`: one file that needs nothing else; every text of the scenario is escaped. */
export function planHtml(plan: Plan, command: string): string {
  const title = plan.title === '' ? 'Untitled scenario' : plan.title;
  const chart = tradeOffChart(plan);
  return page(
    `Plan: ${title}`,
    markup`<p class="muted">Fieldassay ${plan.version} · plan · <bdi>${title}</bdi></p>
<h1>${plan.sentence}</h1>
${plan.met ? null : markup`<p class="outside">No set-up is predicted to meet ${formatPercent(plan.tolerance, 3)}.</p>`}
${costLines(plan).map((line) => markup`<p>${line}</p>`)}
<h2>Error of E by place and part</h2>
${table(PLACE_HEAD, plan.places.map(placeCells))}
<p class="muted">Lattice and gridding parts are signals that may cancel: “both” is their sum's size. The boundary part is what six perfect walls would send back, times the measured share of this boundary, added to it.</p>
<h2>Trade-off</h2>
${chart && markup`<div class="charts"><figure>${chartSvg(chart)}</figure></div>`}
${table(SETUP_HEAD, plan.curve.map(setupCells))}
${plan.alternatives.length < 2 ? null : markup`<h2>Cheapest with each boundary</h2>${table(SETUP_HEAD, plan.alternatives.map(setupCells))}`}
${plan.notes.map((note) => markup`<p class="muted">${note}</p>`)}
<h2>To repeat it</h2>
<pre>${command}</pre>
<p>The scenario with the planned grid:</p>
<pre class="listing">${textOf(plan.scenario)}</pre>`,
  );
}
