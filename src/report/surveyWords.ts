import { boundarySchema, boundaryText } from '../compare/boundaryWords.ts';
import { paretoFront } from '../compare/front.ts';
import type { CaseResult, LadderResult, Outcome, SurveyResult } from '../compare/surveyResult.ts';
import { isDone } from '../compare/surveyResult.ts';
import { formatDecibels, formatNumber, formatPercent, formatQuantity } from '../elementary/quantity.ts';
import { countText } from './words.ts';

/** Phrases that the terminal and the HTML report of a survey share. */

/** Keys as people call them. */
const KEY_WORDS: Readonly<Record<string, string>> = {
  'grid.cellSize': 'cells',
  'grid.courant': 'Courant number',
  'grid.boundary': '',
  'grid.boundary.layers': 'layers',
  'grid.clearance': 'clearance',
  'grid.gridding': 'gridding',
  'grid.precision': 'precision',
  duration: 'duration',
};

/** A value of a survey file in few words: walls as reports call them, other objects by their `type`, or else as JSON. */
function valueWord(value: unknown): string {
  if (typeof value === 'string') return value;
  if (Array.isArray(value)) return value.map(valueWord).join(' × ');
  if (typeof value !== 'object' || value === null) return String(value);
  const wall = boundarySchema.safeParse(value);
  const { type, ...others } = value as Record<string, unknown>;
  if (wall.success) return wordsOf(boundaryText(wall.data), { ...others, layers: undefined });
  return typeof type === 'string' ? wordsOf(type, others) : JSON.stringify(value);
}

const wordsOf = (first: string, others: object): string =>
  [
    first,
    ...Object.entries(others).flatMap(([key, each]) => (each === undefined ? [] : `${key} ${valueWord(each)}`)),
  ].join(', ');

/** "cells 5 mm, CPML, 8 layers": what tells a case from the others. */
export function caseName(settings: CaseResult['settings']): string {
  return Object.entries(settings)
    .map(([key, value]) => `${KEY_WORDS[key] ?? key} ${valueWord(value)}`.trim())
    .join(', ');
}

export const keyWord = (key: string): string => KEY_WORDS[key] || (key === 'grid.boundary' ? 'walls' : key);
export const settingWord = (value: unknown): string => valueWord(value);

/** Cases gathered by all settings but one, in the order they come. */
export function choicesOf<C extends CaseResult>(cases: readonly C[], except: string): { name: string; cases: C[] }[] {
  const groups = new Map<string, C[]>();
  for (const each of cases) {
    const { [except]: _, ...others } = each.settings;
    const name = caseName(others);
    groups.set(name, [...(groups.get(name) ?? []), each]);
  }
  return [...groups].map(([name, group]) => ({ name, cases: group }));
}

/** Decibels, or that they lie below the floor. */
export function levelText(level: number | null, floor: number | null): string {
  if (level === null) return '—';
  return floor !== null && level < floor ? `< ${formatDecibels(floor)} (floor)` : formatDecibels(level);
}

const HELD: Readonly<Record<LadderResult['held'], string>> = {
  layers:
    'the number of absorbing layers is held, so that the absorber gets thinner with the cells and its part of the error need not fall',
  thickness: 'the thickness of the absorber is held, its layers grow in number',
  'layers and thickness': 'layers and thickness of the absorber are held',
  neither: 'neither the number of absorbing layers nor their thickness is held',
  'no layers': 'the walls have no layers',
};

/** What a ladder says: how errors fall, what the index would have said, what is held. */
export function ladderSentences({
  sizes,
  errors,
  orders,
  richardson,
  gci,
  held,
  expectedOrder,
}: LadderResult): string[] {
  const last = sizes.length - 1;
  const error = (n: number) => `${formatPercent(errors[n] ?? Number.NaN)} at ${formatQuantity(sizes[n]!, 'm')}`;
  const list = orders.map((order) => (order === null ? '—' : formatNumber(order, 3))).join(', ');
  const first = `The error goes from ${error(0)} to ${error(last)}: order ${list}, coarse to fine (${formatNumber(expectedOrder)} expected).`;
  const limit =
    richardson.limit === null
      ? `Richardson’s extrapolation gives nothing: ${richardson.reason}.`
      : `With vanishing cells, by Richardson’s extrapolation (order ${formatNumber(richardson.order, 3)} from ${richardson.orderFrom === 'three grids' ? 'the three finest grids' : 'the scheme, two grids tell none'}) the error would be ${formatPercent(Math.abs(richardson.limit))}.`;
  const index =
    gci.value === null
      ? `There is no grid convergence index: ${gci.reason}.`
      : `The grid convergence index of the finest grid is ${formatPercent(gci.value)} (factor ${gci.safetyFactor}); its true error is ${formatPercent(gci.trueError)}: the index ${gci.covered ? 'covers it' : 'would not have covered it'}.`;
  return [first, index, limit, `On this ladder ${HELD[held]}.`];
}

/** The scenario's tolerance; null where the survey varies it. */
export function toleranceOf({ survey, vary }: SurveyResult): number | null {
  if (vary.includes('tolerance')) return null;
  const given = (survey as { scenario?: { tolerance?: unknown } }).scenario?.tolerance;
  if (typeof given === 'number') return given;
  const percent = typeof given === 'string' ? /^\s*([\d.eE+-]+)\s*%\s*$/.exec(given)?.[1] : undefined;
  return percent === undefined ? 0.05 : Number(percent) / 100;
}

/** "12 cases: 10 done, 1 refused, 1 failed". */
export function countsText({ cases }: SurveyResult): string {
  const count = (status: CaseResult['status']) => cases.filter((each) => each.status === status).length;
  const parts = (['done', 'refused', 'failed'] as const).flatMap((status) =>
    count(status) > 0 ? [`${count(status)} ${status}`] : [],
  );
  return `${cases.length} ${cases.length === 1 ? 'case' : 'cases'}: ${parts.join(', ')}`;
}

/** The cheapest case within the tolerance, or the best there is: which walls, which step, at what cost. */
export function headline(result: SurveyResult): string {
  const tolerance = toleranceOf(result);
  const done = result.cases.filter(isDone).filter(({ budget }) => budget.total.relativeL2 !== null);
  if (done.length === 0) return 'No case gives an error to choose by.';
  const error = (each: Outcome) => each.budget.total.relativeL2!;
  const best = done.reduce((a, b) => (error(b) < error(a) ? b : a));
  const told = (each: CaseResult & Outcome) =>
    `${caseName(each.settings)}: total error ${formatPercent(error(each))}, ${costText(each)}`;
  if (tolerance === null) return `Least error: ${told(best)}.`;
  const within = `Within ${formatPercent(tolerance, 3)}`;
  const good = done.filter((each) => error(each) <= tolerance);
  if (good.length === 0) return `${within}: no case; best is ${told(best)}.`;
  const cheapest = good.reduce((a, b) => (b.cost.cellUpdates < a.cost.cellUpdates ? b : a));
  return `${within} at least cost: ${told(cheapest)}.`;
}

/** Where errors are not over the same places, which makes them poor to compare. */
export function cautions({ cases }: SurveyResult): string[] {
  const inside = (each: Outcome) => each.observers.filter((o) => o.inside).map(({ name }) => name);
  const pooled = new Set(cases.filter(isDone).map((each) => JSON.stringify(inside(each))));
  return pooled.size > 1
    ? [
        'Not all boxes hold the same observers, so that total errors are pooled over different places (over the box where none is inside): compare them with care, or put the observers inside the smallest box.',
      ]
    : [];
}

/** The cases that no other beats in both cell updates and total error, the cheapest first. */
export function frontCases({ cases }: SurveyResult): (CaseResult & Outcome)[] {
  const done = cases.filter(isDone);
  const choices = done.map(({ cost, budget }) => ({
    cost: cost.cellUpdates,
    error: budget.total.relativeL2 ?? Number.NaN,
  }));
  return paretoFront(choices).map((n) => done[n]!);
}

/** Which walls: the cheapest whose own part of the error does not matter, and those that send back least. */
export function wallsSentences(result: SurveyResult): string[] {
  const rows = result.boundaries.flatMap((row) => {
    const each = result.cases[row.case]!;
    return isDone(each) && each.budget.boundary?.relativeL2 != null
      ? [{ row, each, part: each.budget.boundary.relativeL2 }]
      : [];
  });
  if (rows.length < 2) return [];
  const limit = SMALL_SHARE * (toleranceOf(result) ?? 0.05);
  const good = rows.filter(({ part }) => part <= limit);
  const cost = ({ each }: (typeof rows)[number]) => each.cost.cellUpdates;
  const least = rows.reduce((a, b) => ((b.row.reflection ?? 0) < (a.row.reflection ?? 0) ? b : a));
  const cheapest = good.length > 0 ? good.reduce((a, b) => (cost(b) < cost(a) ? b : a)) : null;
  return [
    cheapest
      ? `Walls that do not matter (their own part of the error ≤ ${formatPercent(limit, 2)}, a tenth of the tolerance), the cheapest: ${caseName(cheapest.row.settings)}, ${formatPercent(cheapest.part)}.`
      : `All walls matter: none keeps its own part of the error to a tenth of the tolerance, ${formatPercent(limit, 2)}.`,
    `Least comes back from ${caseName(least.row.settings)}: ${levelText(least.row.reflection, least.row.floor)} of the exact peak.`,
  ];
}

/** A part this small beside the tolerance is no reason to change anything. */
const SMALL_SHARE = 0.1;

/** "21 600 cells, 4.1 MB, 80 ms". */
export function costText({ cost, timings }: Outcome): string {
  return `${countText(cost.cells)} cells, ${formatQuantity(cost.memoryBytes, 'B')}, ${formatQuantity(timings.box.seconds, 's')}`;
}
