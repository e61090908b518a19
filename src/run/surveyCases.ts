import { memoryLimit } from '#platform';
import { type CaseResult, type Outcome, outcomeJsonSchema, outcomeSchema } from '../compare/surveyResult.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Scenario } from '../scenario/model.ts';
import { expandSurvey, type Survey } from '../scenario/survey.ts';
import { CELL_RATE, GRID_RATE } from './answers.ts';
import { refuseTooLarge } from './compare.ts';
import { planFreeSpace } from './freeSpace.ts';
import { boxProblem, questionOf } from './question.ts';
import { planReflection } from './reflection.ts';
import { Refusal } from './refusal.ts';
import type { Job } from './schedule.ts';
import { VERSION } from './version.ts';

/** Where finished cases are kept, so that a survey that was ended goes on where it was. */
export interface CaseStore {
  /** the text kept under a hash, or null */
  load(hash: string): string | null;
  /** keeps a text so that nobody ever finds half of it */
  save(hash: string, text: string): void;
}

/** A case that is to be run, or was. */
export interface Entry {
  readonly settings: Readonly<Record<string, unknown>>;
  readonly json: Record<string, unknown>;
  readonly hash: string;
  status: CaseResult['status'] | 'waiting';
  reason: string | null;
}

/** The cases of a survey: all of them in order, and each scenario once. */
export interface SurveyCases {
  readonly survey: Survey;
  readonly entries: readonly Entry[];
  readonly unique: readonly Entry[];
  /** m; null where no case has a grid */
  readonly mask: number | null;
  /** whether walls are varied, so that what they send back is measured */
  readonly reflections: boolean;
}

/** The survey as given, the scenario in it: all that is needed to have it again elsewhere. */
export const wholeSurvey = ({ json, scenario }: Survey): Record<string, unknown> => ({ ...(json as object), scenario });

/** Cases of a survey with one mask for all, and which of them the store holds. */
export async function casesOf(survey: Survey, store: CaseStore): Promise<SurveyCases> {
  const reflections = survey.vary.some(({ key }) => isWallKey(key));
  const cases = expandSurvey(survey);
  const sizes = cases.map(({ scenario }) => {
    const loaded = loadScenario(scenario);
    return 'scenario' in loaded ? Math.max(...loaded.scenario.grid.cellSize) : 0;
  });
  // A mask in cells would move with them, and no norm would converge.
  const mask = 8 * Math.max(0, ...sizes);
  const schema = await resultSchemaHash();
  const entries: Entry[] = [];
  for (const { settings, scenario } of cases) {
    const grid = scenario.grid;
    const json = isRecord(grid) && mask > 0 ? { ...scenario, grid: { mask, ...grid } } : scenario;
    const hash = await hashOf({ version: VERSION, schema, reflections, scenario: { ...json, title: '' } });
    const loaded = loadScenario(json);
    const problems = 'problems' in loaded ? loaded.problems : [];
    const kept = problems.length === 0 && keptOutcome(store.load(hash), hash) !== null;
    const status = problems.length > 0 ? 'refused' : kept ? 'done' : 'waiting';
    const reason = problems.length > 0 ? new Refusal(problems).message : null;
    entries.push({ settings, json, hash, status, reason });
  }
  const unique = [...new Map(entries.map((entry) => [entry.hash, entry])).values()];
  return { survey, entries, unique, mask: mask > 0 ? mask : null, reflections };
}

/** Whether a key moves or changes walls: then reflections are of interest. */
export const isWallKey = (key: string): boolean => key === 'grid.clearance' || key.startsWith('grid.boundary');

const isRecord = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value);

/** Sixteen bytes of SHA-256 over the value with its keys sorted, in hexadecimal. */
export async function hashOf(value: unknown): Promise<string> {
  const sorted = JSON.stringify(value, (_, v: unknown) =>
    isRecord(v) ? Object.fromEntries(Object.entries(v).sort(([a], [b]) => (a < b ? -1 : 1))) : v,
  );
  const digest = await crypto.subtle.digest('SHA-256', new TextEncoder().encode(sorted));
  return [...new Uint8Array(digest.slice(0, 16))].map((byte) => byte.toString(16).padStart(2, '0')).join('');
}

/** Four bytes that tell one form of a case's outcome from another, in hexadecimal. */
export async function resultSchemaHash(): Promise<string> {
  return (await hashOf(outcomeJsonSchema())).slice(0, 8);
}

/**
 * An outcome as it is written and read back, so that a case that was run and one that was kept are the same.
 * @throws Error where it holds something that the schema does not allow, NaN among it
 */
export const asWritten = (outcome: unknown): Outcome => outcomeSchema.parse(JSON.parse(JSON.stringify(outcome)));

/** The text of a case's file. */
export const caseText = (hash: string, scenario: unknown, outcome: unknown): string =>
  `${JSON.stringify({ version: VERSION, hash, scenario, outcome })}\n`;

/** The outcome in a case's file; null where there is none, or it is another version's or broken. */
export function keptOutcome(text: string | null, hash: string): Outcome | null {
  if (text === null) return null;
  try {
    const file = JSON.parse(text) as Record<string, unknown>;
    if (file.version !== VERSION || file.hash !== hash) return null;
    return outcomeSchema.safeParse(file.outcome).data ?? null;
  } catch {
    return null;
  }
}

/** Marks a case as refused or failed, as the error says. */
export function refuseOrFail(entry: Entry, error: unknown): void {
  entry.status = error instanceof Refusal ? 'refused' : 'failed';
  entry.reason = error instanceof Error ? error.message : String(error);
}

/** What a case is guessed to take. A case that is refused here takes nothing. */
export function planned(entry: Entry, reflections: boolean): Job {
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
  const double = reflections ? planReflection({ question, memoryLimit: limit }, corners) : null;
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

/** Keys of a scenario that none of the work depends on that cases may share. */
const UNSHARED = new Set(['title', 'tolerance', 'planes', 'grid.boundary']);

/** Cases of one key ask for the same grid without walls and the same exact fields. */
export function shareKey(json: Record<string, unknown>): string {
  const own = (value: unknown, path: string): unknown =>
    isRecord(value)
      ? Object.fromEntries(
          Object.keys(value)
            .sort()
            .filter((key) => !UNSHARED.has(path + key))
            .map((key) => [key, own(value[key], `${path}${key}.`)]),
        )
      : value;
  return JSON.stringify(own(json, ''));
}
