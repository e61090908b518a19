import { hostName, memoryLimit, threadsAvailable } from '#platform';
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
import { memoryNeeded } from '../fdtd/layout.ts';
import { loadScenario, type Problem } from '../scenario/load.ts';
import type { Scenario } from '../scenario/model.ts';
import { expandSurvey, type Survey } from '../scenario/survey.ts';
import { CELL_RATE, GRID_RATE, type Means } from './answers.ts';
import { type CompareOptions, refuseTooLarge, withTeam } from './compare.ts';
import { planFreeSpace } from './freeSpace.ts';
import { boxProblem, questionOf } from './question.ts';
import { planReflection } from './reflection.ts';
import { Refusal } from './refusal.ts';
import { type Job, runBeside, scheduleOf } from './schedule.ts';
import { Shared } from './share.ts';
import { runCase } from './surveyCase.ts';
import { VERSION } from './version.ts';

/** Where finished cases are kept, so that a survey that was ended goes on where it was. */
export interface CaseStore {
  /** the text kept under a hash, or null */
  load(hash: string): string | null;
  /** keeps a text so that nobody ever finds half of it */
  save(hash: string, text: string): void;
}

export interface SurveyOptions extends CompareOptions {
  readonly store?: CaseStore;
}

/** A case that is to be run, or was. */
interface Entry {
  readonly settings: Readonly<Record<string, unknown>>;
  readonly json: Record<string, unknown>;
  readonly hash: string;
  status: CaseResult['status'] | 'waiting';
  reason: string | null;
  outcome: Outcome | null;
}

/**
 * Runs every case of a survey that the store does not hold yet, and tells what they say together. Cases are independent:
 * one that is refused or fails leaves the others alone.
 * @throws Refusal where every case is refused; the signal's reason when aborted (what was finished is kept)
 */
export async function runSurvey(survey: Survey, options: SurveyOptions = {}): Promise<SurveyResult> {
  const { store, signal, onProgress = () => {}, threads = threadsAvailable() } = options;
  const reflections = survey.vary.some(({ key }) => isWallKey(key));
  const { entries, mask } = await entriesOf(survey, reflections, store);
  const unique = [...new Map(entries.map((entry) => [entry.hash, entry])).values()];
  const waiting = unique.filter(({ status }) => status === 'waiting');
  const shared = new Shared();
  const jobs: Job[] = [];
  for (const entry of waiting) {
    await breathe(signal);
    jobs.push(planned(entry, reflections));
  }
  for (const { json, status } of waiting)
    if (status === 'waiting') for (const work of SHARED) shared.expect(shareKey(work, json));

  const meter = new SurveyMeter(onProgress, unique.length, jobs);
  const run = async (index: number, means: Pick<Means, 'team' | 'gridThreads'>) => {
    const entry = waiting[index]!;
    await breathe(signal);
    if (entry.status === 'waiting')
      try {
        const outcome = await runCase(
          entry.json,
          {
            ...means,
            share: (work, make) => shared.take(shareKey(work, entry.json), make),
            onProgress: ({ fraction }) => meter.at(index, fraction),
          },
          reflections,
        );
        const text = JSON.stringify({ version: VERSION, hash: entry.hash, scenario: entry.json, outcome });
        // Read back, so that a case that was run and one that was kept are the same to the last bit.
        entry.outcome = outcomeSchema.parse(JSON.parse(text).outcome);
        entry.status = 'done';
        store?.save(entry.hash, `${text}\n`);
      } catch (error) {
        if (signal?.aborted) throw error;
        refuseOrFail(entry, error);
      }
    meter.done(index);
  };
  const memory = memoryLimit();
  const schedule = scheduleOf(jobs, threads, memory);
  meter.start();
  if (waiting.length > 0)
    await withTeam(threads, signal, async (team) => {
      for (const index of schedule.alone) await run(index, { team, gridThreads: threads });
      // One more than threads: while one is concluded, no thread is idle.
      await runBeside(schedule.beside, jobs, threads + 1, memory, (index) => run(index, { team, gridThreads: 1 }));
    });

  const found = new Map(unique.map((entry) => [entry.hash, entry]));
  const cases = entries.map(({ settings, hash }) => caseResult(settings, found.get(hash)!));
  if (cases.every(({ status }) => status === 'refused')) throw new Refusal(problemsOf(cases));
  return resultOf(survey, cases, mask, threads);
}

/** Lets an interruption be heard: preparing a case is long and unbroken. */
async function breathe(signal: AbortSignal | undefined): Promise<void> {
  await new Promise((next) => setTimeout(next));
  signal?.throwIfAborted();
}

const SHARED = ['free', 'reflectionFree', 'guide', 'integrals', 'lattice'] as const;

/** Keys of a scenario that none of the shared work depends on. */
const UNSHARED = new Set(['title', 'tolerance', 'planes', 'grid.boundary']);

/** Cases of one key ask for the same grid without walls and the same exact fields. */
function shareKey(work: (typeof SHARED)[number], json: Record<string, unknown>): string {
  const own = (value: unknown, path: string): unknown =>
    isRecord(value)
      ? Object.fromEntries(
          Object.keys(value)
            .sort()
            .filter((key) => !UNSHARED.has(path + key))
            .map((key) => [key, own(value[key], `${path}${key}.`)]),
        )
      : value;
  return `${work} ${JSON.stringify(own(json, ''))}`;
}

const isRecord = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value);

/** Whether a key moves or changes walls: then reflections are of interest. */
const isWallKey = (key: string): boolean => key === 'grid.clearance' || key.startsWith('grid.boundary');

/** The cases of a survey with one mask for all, and what the store holds of them. */
async function entriesOf(
  survey: Survey,
  reflections: boolean,
  store: CaseStore | undefined,
): Promise<{ entries: Entry[]; mask: number | null }> {
  const cases = expandSurvey(survey);
  const sizes = cases.map(({ scenario }) => {
    const loaded = loadScenario(scenario);
    return 'scenario' in loaded ? Math.max(...loaded.scenario.grid.cellSize) : 0;
  });
  // A mask in cells would move with them, and no norm would converge.
  const mask = 8 * Math.max(0, ...sizes);
  const entries = await Promise.all(
    cases.map(async ({ settings, scenario }): Promise<Entry> => {
      const grid = scenario.grid;
      const json = isRecord(grid) && mask > 0 ? { ...scenario, grid: { mask, ...grid } } : scenario;
      const hash = await hashOf({ version: VERSION, reflections, scenario: { ...json, title: '' } });
      const kept = keptOutcome(store?.load(hash) ?? null, hash);
      const loaded = loadScenario(json);
      const problems = 'problems' in loaded ? loaded.problems : [];
      const status = problems.length > 0 ? 'refused' : kept ? 'done' : 'waiting';
      const reason = problems.length > 0 ? new Refusal(problems).message : null;
      return { settings, json, hash, status, reason, outcome: kept };
    }),
  );
  return { entries, mask: mask > 0 ? mask : null };
}

/** The outcome in a case's file; null where there is none, or it is another version's or broken. */
function keptOutcome(text: string | null, hash: string): Outcome | null {
  if (text === null) return null;
  try {
    const file = JSON.parse(text) as Record<string, unknown>;
    if (file.version !== VERSION || file.hash !== hash) return null;
    return outcomeSchema.safeParse(file.outcome).data ?? null;
  } catch {
    return null;
  }
}

/** Sixteen bytes of SHA-256 over the value with its keys sorted, in hexadecimal. */
async function hashOf(value: unknown): Promise<string> {
  const sorted = JSON.stringify(value, (_, v: unknown) =>
    isRecord(v) ? Object.fromEntries(Object.entries(v).sort(([a], [b]) => (a < b ? -1 : 1))) : v,
  );
  const digest = await crypto.subtle.digest('SHA-256', new TextEncoder().encode(sorted));
  return [...new Uint8Array(digest.slice(0, 16))].map((byte) => byte.toString(16).padStart(2, '0')).join('');
}

function refuseOrFail(entry: Entry, error: unknown): void {
  entry.status = error instanceof Refusal ? 'refused' : 'failed';
  entry.reason = error instanceof Error ? error.message : String(error);
}

/** What a case is guessed to take. A case that is refused here takes nothing. */
function planned(entry: Entry, reflections: boolean): Job {
  try {
    const loaded = loadScenario(entry.json);
    if ('problems' in loaded) throw new Refusal(loaded.problems);
    return jobOf(loaded.scenario, reflections);
  } catch (error) {
    refuseOrFail(entry, error);
    return { cost: 0, bytes: 0 };
  }
}

/** Volume samples and budget points, roughly, for a guess of the integrals' cost. */
const CELLS_GUESSED = 800;

function jobOf(scenario: Scenario, reflections: boolean): Job {
  const question = questionOf(scenario);
  const { grid } = scenario;
  const corners = Int32Array.from([0, 0, 0, ...grid.cells.map((n) => n - 1)]);
  const box = boxProblem(question, [{ cell: corners, every: 1 }]);
  const limit = memoryLimit();
  refuseTooLarge(box, limit);
  const free = planFreeSpace(box, limit);
  const double = reflections ? planReflection({ question }, corners) : null;
  const { cells, bytes } = memoryNeeded(box);
  const updates =
    2 * cells * question.steps +
    (free?.cellUpdates ?? 0) +
    // Twice the bytes take twice the time.
    (double ? 2 * (cells * question.steps + double.free.cellUpdates) : 0);
  const samples = CELLS_GUESSED * 6 * question.steps * 8;
  return {
    cost: updates / GRID_RATE + CELLS_GUESSED / CELL_RATE,
    bytes: samples + Math.max(bytes, free?.memoryBytes ?? 0, 2 * bytes, double?.free.memoryBytes ?? 0),
  };
}

/** Progress of the whole: cases weighted by what they are guessed to take. */
class SurveyMeter {
  readonly #fractions: Float64Array;
  readonly #total: number;
  readonly #started = performance.now();
  #finished: number;

  constructor(
    readonly onProgress: NonNullable<CompareOptions['onProgress']>,
    readonly count: number,
    readonly jobs: readonly Job[],
  ) {
    this.#fractions = new Float64Array(jobs.length);
    this.#total = jobs.reduce((sum, { cost }) => sum + cost, 0);
    this.#finished = count - jobs.length;
  }

  start(): void {
    this.#report();
  }

  at(index: number, fraction: number): void {
    this.#fractions[index] = Math.max(this.#fractions[index]!, 0.99 * fraction);
    this.#report();
  }

  done(index: number): void {
    this.#fractions[index] = 1;
    this.#finished++;
    this.#report();
  }

  #report(): void {
    const done = this.jobs.reduce((sum, { cost }, j) => sum + cost * this.#fractions[j]!, 0);
    const fraction = this.#total > 0 ? done / this.#total : 1;
    const elapsed = (performance.now() - this.#started) / 1000;
    this.onProgress({
      stage: `${this.#finished} of ${this.count} cases`,
      fraction,
      ...(fraction > 0.02 && elapsed > 0.5 ? { secondsLeft: (elapsed / fraction) * (1 - fraction) } : {}),
    });
  }
}

const NOTHING = Object.fromEntries(Object.keys(outcomeSchema.shape).map((key) => [key, null])) as {
  readonly [Key in keyof Outcome]: null;
};

function caseResult(settings: CaseResult['settings'], { status, reason, hash, outcome }: Entry): CaseResult {
  if (status === 'waiting') throw new Error(`the case ${hash} was never run; this is a defect of Fieldassay`);
  return { settings, status, reason, hash, ...(status === 'done' && outcome ? outcome : NOTHING) };
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
    survey: { ...(survey.json as object), scenario: survey.scenario },
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
