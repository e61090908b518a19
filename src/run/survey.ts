import { threadsAvailable } from '#platform';
import type { SurveyResult } from '../compare/surveyResult.ts';
import type { Survey } from '../scenario/survey.ts';
import type { CompareOptions } from './compare.ts';
import type { Job } from './schedule.ts';
import {
  asWritten,
  type CaseStore,
  casesOf,
  caseText,
  type Entry,
  planned,
  refuseOrFail,
  type SurveyCases,
} from './surveyCases.ts';
import { SurveyMeter } from './surveyMeter.ts';
import { pool } from './surveyPool.ts';
import { surveyTable } from './surveyTable.ts';

export type { CaseStore } from './surveyCases.ts';

export interface SurveyOptions extends CompareOptions {
  readonly store?: CaseStore;
  /** who runs the cases; the threads of this process by default */
  readonly engine?: Engine;
}

/**
 * Runs the waiting cases of a survey and tells of each that it is kept, refused or failed.
 * @throws the signal's reason when aborted; Error where it can no longer go on
 */
export type Engine = (run: SurveyRun) => Promise<void>;

/**
 * Runs every case of a survey that the store does not hold yet, and tells what they say together. Cases are independent:
 * one that is refused or fails leaves the others alone.
 * @throws Refusal where every case is refused; the signal's reason when aborted (what was finished is kept)
 */
export async function runSurvey(survey: Survey, options: SurveyOptions = {}): Promise<SurveyResult> {
  const { store = memoryStore(), engine = pool } = options;
  const cases = await casesOf(survey, store);
  const run = new SurveyRun(cases, store, options);
  await engine(run);
  return surveyTable(cases, store, run.threads);
}

/** A survey while it is run: its cases, and what an engine tells of them. */
export class SurveyRun {
  readonly survey: Survey;
  readonly unique: readonly Entry[];
  readonly reflections: boolean;
  readonly meter: SurveyMeter;
  readonly signal: AbortSignal | undefined;
  readonly threads: number;

  constructor(
    readonly cases: SurveyCases,
    readonly store: CaseStore,
    { onProgress = () => {}, signal, threads = threadsAvailable() }: CompareOptions,
  ) {
    this.survey = cases.survey;
    this.unique = cases.unique;
    this.reflections = cases.reflections;
    this.signal = signal;
    this.threads = threads;
    this.meter = new SurveyMeter(onProgress, this.unique.length, this.unique.length - this.waiting().length);
  }

  /** Cases that nothing has been told of yet. */
  waiting(): Entry[] {
    return this.unique.filter(({ status }) => status === 'waiting');
  }

  /** What a case is guessed to take; one that is refused here is waiting no longer. */
  async plan(entry: Entry): Promise<Job> {
    await this.breathe();
    return planned(entry, this.reflections);
  }

  /** Keeps what a case came to. Where it cannot be kept, or is no outcome of a case, the case has failed. */
  keep(entry: Entry, outcome: unknown): void {
    try {
      this.store.save(entry.hash, caseText(entry.hash, entry.json, asWritten(outcome)));
      entry.status = 'done';
    } catch (error) {
      refuseOrFail(entry, error);
    }
  }

  fail(entry: Entry, error: unknown): void {
    refuseOrFail(entry, error);
  }

  /** Lets an interruption be heard: preparing a case is long and unbroken. */
  async breathe(): Promise<void> {
    await new Promise((next) => setTimeout(next));
    this.signal?.throwIfAborted();
  }
}

/** Keeps texts for as long as the process lasts. */
export function memoryStore(): CaseStore {
  const texts = new Map<string, string>();
  return { load: (hash) => texts.get(hash) ?? null, save: (hash, text) => texts.set(hash, text) };
}
