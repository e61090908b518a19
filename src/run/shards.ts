import { threadsAvailable } from '#platform';
import type { SurveyResult } from '../compare/surveyResult.ts';
import { loadScenario } from '../scenario/load.ts';
import { loadSurvey, type Survey } from '../scenario/survey.ts';
import { questionOf } from './question.ts';
import { Refusal } from './refusal.ts';
import { memoryStore, type SurveyOptions, SurveyRun } from './survey.ts';
import { type CaseStore, casesOf, type Entry, hashOf, wholeSurvey } from './surveyCases.ts';
import { pool } from './surveyPool.ts';
import { surveyTable } from './surveyTable.ts';
import { VERSION } from './version.ts';

/** One of `count` shares of a survey, from 1. */
export interface Shard {
  readonly index: number;
  readonly count: number;
}

/** What one share came to: its done cases are in the store, the others are told here. */
export interface Part {
  readonly version: string;
  readonly shard: Shard;
  /** the survey as given, the scenario in it */
  readonly survey: unknown;
  /** hashes of the share's cases, with what became of them */
  readonly cases: Readonly<Record<string, Pick<Entry, 'status' | 'reason'>>>;
}

/**
 * Runs a fixed share of a survey's cases. Which they are does not depend on the machine, nor on what is done already.
 * @throws the signal's reason when aborted (what was finished is kept)
 */
export async function runShard(survey: Survey, shard: Shard, options: SurveyOptions = {}): Promise<Part> {
  const { store = memoryStore(), engine = pool } = options;
  const cases = await casesOf(survey, store);
  const shares = sharesOf(cases.unique, shard.count);
  const unique = cases.unique.filter((_, n) => shares[n] === shard.index);
  await engine(new SurveyRun({ ...cases, unique }, store, options));
  return {
    version: VERSION,
    shard,
    survey: wholeSurvey(survey),
    cases: Object.fromEntries(unique.map(({ hash, status, reason }) => [hash, { status, reason }])),
  };
}

/** What is not there of a survey that was run in parts. */
export interface Missing {
  readonly shard: Shard;
  readonly cases: number;
  /** whether the part itself was written */
  readonly part: boolean;
}

/**
 * Joins parts. Cases that are nowhere stand in the result as failed, with the part they are missing from.
 * @throws Refusal where the parts are of different surveys, versions or counts, or none of it could be run
 */
export async function mergeParts(
  parts: readonly Part[],
  store: CaseStore,
): Promise<{ readonly result: SurveyResult; readonly missing: readonly Missing[] }> {
  const refuse = (message: string) => new Refusal([{ path: '', value: undefined, message }]);
  const [first] = parts;
  if (!first) throw refuse('There is no part of a survey here; run `fieldassay survey SURVEY.json --shard 1/2` first.');
  for (const { version, shard, survey } of parts) {
    if (version !== VERSION)
      throw refuse(
        `Part ${shard.index} of ${shard.count} is by Fieldassay ${version}; this is ${VERSION}. Join it with that version.`,
      );
    if (shard.count !== first.shard.count)
      throw refuse(
        `Part ${first.shard.index} is of ${first.shard.count}, part ${shard.index} of ${shard.count}; keep one kind here.`,
      );
    if ((await hashOf(survey)) !== (await hashOf(first.survey)))
      throw refuse(
        `Parts ${first.shard.index} and ${shard.index} are of different surveys; keep those of one survey here.`,
      );
  }
  const loaded = loadSurvey(first.survey, () => undefined);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const cases = await casesOf(loaded.survey, store);
  const shares = sharesOf(cases.unique, first.shard.count);
  const missing = new Map<number, Missing>();
  for (const [n, entry] of cases.unique.entries()) {
    if (entry.status !== 'waiting') continue;
    const shard = { index: shares[n]!, count: first.shard.count };
    const part = parts.find((each) => each.shard.index === shard.index);
    const told = part?.cases[entry.hash];
    if (told?.status === 'refused' || told?.status === 'failed') {
      Object.assign(entry, { status: told.status, reason: told.reason });
      continue;
    }
    entry.status = 'failed';
    entry.reason = `missing: part ${shard.index} of ${shard.count} ${part ? 'is here without this case' : 'is not here'}`;
    const before = missing.get(shard.index)?.cases ?? 0;
    missing.set(shard.index, { shard, cases: before + 1, part: part !== undefined });
  }
  return {
    result: surveyTable(cases, store, threadsAvailable()),
    missing: [...missing.values()].sort((a, b) => a.shard.index - b.shard.index),
  };
}

/**
 * To which share each case belongs, from 1: longest first to whoever has least so far (R. L. Graham, SIAM J. Appl. Math. 17
 * (1969) 416), by cells and steps alone, which are the same on every machine.
 */
export function sharesOf(entries: readonly Pick<Entry, 'json'>[], count: number): number[] {
  const costs = entries.map(({ json }) => {
    const loaded = loadScenario(json);
    if ('problems' in loaded) return 0;
    const { grid } = loaded.scenario;
    return grid.cells[0] * grid.cells[1] * grid.cells[2] * questionOf(loaded.scenario).steps;
  });
  const loads = new Float64Array(count);
  const shares = new Array<number>(entries.length);
  for (const n of [...costs.keys()].sort((a, b) => costs[b]! - costs[a]! || a - b)) {
    const least = loads.indexOf(Math.min(...loads));
    // A case that costs nothing still has to be told of by somebody.
    loads[least]! += costs[n]! || 1;
    shares[n] = least + 1;
  }
  return shares;
}
