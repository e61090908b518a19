import { hostName } from '#platform';
import { representativeSize } from '../compare/convergence.ts';
import { paretoFront } from '../compare/front.ts';
import { ladderOf } from '../compare/ladder.ts';
import {
  type BoundaryResult,
  type CaseResult,
  isDone,
  type LadderResult,
  ladderResult,
  type Outcome,
  outcomeSchema,
  type SurveyResult,
} from '../compare/surveyResult.ts';
import type { Problem } from '../scenario/reading.ts';
import type { Survey } from '../scenario/survey.ts';
import { Refusal } from './refusal.ts';
import { type CaseStore, type Entry, isWallKey, keptOutcome, type SurveyCases, wholeSurvey } from './surveyCases.ts';
import { VERSION } from './version.ts';

/**
 * What the cases of a survey say together: outcomes are read from the store.
 * @throws Refusal where every case is refused
 */
export function surveyTable(
  { survey, entries, unique, mask }: SurveyCases,
  store: CaseStore,
  threads: number,
): SurveyResult {
  const found = new Map(unique.map((entry) => [entry.hash, entry]));
  const cases = entries.map(({ settings, hash }) => caseResult(settings, found.get(hash)!, store));
  if (cases.every(({ status }) => status === 'refused')) throw new Refusal(problemsOf(cases));
  return resultOf(survey, cases, mask, threads);
}

/** The same of those cases that something is known of by now; others are left out. */
export function surveySoFar(
  { survey, entries, unique, mask }: SurveyCases,
  store: CaseStore,
  threads: number,
): SurveyResult {
  const known = new Map(unique.filter(({ status }) => status !== 'waiting').map((entry) => [entry.hash, entry]));
  const cases = entries.flatMap(({ settings, hash }) => {
    const entry = known.get(hash);
    return entry ? [caseResult(settings, entry, store)] : [];
  });
  return resultOf(survey, cases, mask, threads);
}

const NOTHING = Object.fromEntries(Object.keys(outcomeSchema.shape).map((key) => [key, null])) as {
  readonly [Key in keyof Outcome]: null;
};

function caseResult(settings: CaseResult['settings'], { status, reason, hash }: Entry, store: CaseStore): CaseResult {
  if (status === 'waiting') throw new Error(`the case ${hash} was never run; this is a defect of Fieldassay`);
  if (status !== 'done') return { settings, status, reason, hash, ...NOTHING };
  const outcome = keptOutcome(store.load(hash), hash);
  return outcome
    ? { settings, status, reason, hash, ...outcome }
    : { settings, status: 'failed', reason: 'what it came to is no longer where it was kept', hash, ...NOTHING };
}

/** Why everything was refused: the first case's reasons stand for all. */
function problemsOf(cases: readonly CaseResult[]): Problem[] {
  const [first] = cases;
  const settings = JSON.stringify(first!.settings);
  const of = cases.length > 1 ? `All ${cases.length} cases are refused; the first, ${settings}:\n` : '';
  return [{ path: '', value: undefined, message: `${of}${first!.reason}` }];
}

function resultOf(survey: Survey, cases: readonly CaseResult[], mask: number | null, threads: number): SurveyResult {
  const vary = survey.vary.map(({ key }) => key);
  const ladders = vary.includes('grid.cellSize') ? laddersOf(survey, cases) : [];
  return {
    title: survey.title,
    version: VERSION,
    combine: survey.combine,
    vary,
    mask,
    cases,
    ladder: ladders[0] ?? null,
    ladders,
    boundaries: vary.some(isWallKey) ? boundariesOf(cases) : [],
    environment: { host: hostName(), threads },
    survey: wholeSurvey(survey),
  };
}

/**
 * The ladders of a survey: its cases over cell sizes, for each combination of the other settings. Paired settings that
 * change with every cell size make one ladder.
 */
function laddersOf({ combine }: Survey, cases: readonly CaseResult[]): LadderResult[] {
  const groups = new Map<string, number[]>();
  const sizesDiffer = new Set(cases.map(({ settings }) => JSON.stringify(settings['grid.cellSize']))).size;
  const one = combine === 'paired' && sizesDiffer === cases.length;
  cases.forEach((each, n) => {
    if (!isDone(each)) return;
    const { 'grid.cellSize': _, ...others } = each.settings;
    const key = one ? '' : JSON.stringify(others);
    groups.set(key, [...(groups.get(key) ?? []), n]);
  });
  return [...groups.values()].flatMap((indices) => {
    const size = (n: number) => representativeSize(cases[n]!.cellSize as Outcome['cellSize']);
    const order = [...indices].sort((a, b) => size(b) - size(a));
    const rungs = order.map((n) => cases[n] as CaseResult & Outcome);
    if (order.length < 2 || new Set(order.map(size)).size < order.length) return [];
    const { 'grid.cellSize': _, ...others } = rungs[0]!.settings;
    const ladder = ladderOf(rungs.map(({ cellSize, budget, walls }) => ({ cellSize, budget, ...walls })));
    const expectedOrder = Math.min(...rungs.map((rung) => rung.expectedOrder));
    return [ladderResult(ladder, { settings: one ? {} : others, cases: order, expectedOrder })];
  });
}

function boundariesOf(cases: readonly CaseResult[]): BoundaryResult[] {
  const done = cases.flatMap((each, index) => (isDone(each) ? [{ each, index }] : []));
  const front = new Set(
    paretoFront(
      done.map(({ each }) => ({ cost: each.cost.cellUpdates, error: each.budget.total.relativeL2 ?? Number.NaN })),
    ),
  );
  return done.map(({ each, index }, n) => {
    const seen = each.reflection?.observers ?? [];
    const worstOf = (key: 'peak' | 'transient' | 'late' | 'static') =>
      seen.reduce<number | null>((worst, o) => (worst === null || (o[key] ?? worst) > worst ? o[key] : worst), null);
    const peak = worstOf('peak');
    return {
      settings: each.settings,
      case: index,
      description: each.walls.description,
      reflection: peak,
      floor: each.reflection?.floor ?? null,
      observer: seen.find((o) => o.peak === peak)?.observer ?? null,
      transient: worstOf('transient'),
      late: worstOf('late'),
      static: worstOf('static'),
      totalError: each.budget.total.relativeL2,
      front: front.has(n),
    };
  });
}
