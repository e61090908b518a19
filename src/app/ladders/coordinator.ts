/** One survey, off the page's own thread: the command's own code, with cases kept by the page. */
import { threadsAvailable } from '#platform';
import { Refusal } from '../../run/refusal.ts';
import { SurveyRun } from '../../run/survey.ts';
import { type CaseStore, casesOf, type SurveyCases } from '../../run/surveyCases.ts';
import { pool } from '../../run/surveyPool.ts';
import { surveySoFar, surveyTable } from '../../run/surveyTable.ts';
import { EXAMPLES } from '../../scenario/examples.ts';
import { loadSurvey, type Survey } from '../../scenario/survey.ts';
import { heed } from '../heed.ts';
import { type Kept, type Report, type Request, requestSchema } from './messages.ts';

const tell = (report: Report) => postMessage(report);

heed(requestSchema, answer, (error) => {
  if (error instanceof Refusal) tell({ kind: 'refused', problems: error.problems });
  else tell({ kind: 'failed', message: error.message });
});

async function answer({ kind, survey: file, kept }: Request): Promise<void> {
  const survey = surveyOf(file);
  if (kind === 'run') return await run(survey, kept);
  const store = memory(kept);
  const cases = await casesOf(survey, store);
  tell({ kind: 'soFar', result: surveySoFar(cases, store, threadsAvailable()), of: cases.entries.length });
}

/** @throws Refusal naming every problem */
function surveyOf(file: unknown): Survey {
  const loaded = loadSurvey(file, (name) => {
    if (Object.hasOwn(EXAMPLES, name)) return structuredClone(EXAMPLES[name as keyof typeof EXAMPLES]);
    throw new Error('the page reads no other files: put the scenario itself there, or the name of a built-in one');
  });
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  return loaded.survey;
}

async function run(survey: Survey, kept: Kept): Promise<void> {
  let cases: SurveyCases | undefined;
  const threads = threadsAvailable();
  const soFar = () =>
    cases && tell({ kind: 'soFar', result: surveySoFar(cases, store, threads), of: cases.entries.length });
  const store = memory(kept, (hash, text) => {
    tell({ kind: 'kept', hash, text });
    // The case counts as done once it is kept.
    queueMicrotask(soFar);
  });
  cases = await casesOf(survey, store);
  soFar();
  const surveyRun = new SurveyRun(cases, store, {
    threads,
    onProgress: (progress) => tell({ kind: 'progress', ...progress } as Report),
  });
  await pool(surveyRun);
  tell({ kind: 'done', result: surveyTable(cases, store, threads) });
}

function memory(kept: Kept, onSave: (hash: string, text: string) => void = () => {}): CaseStore {
  const texts = new Map(kept);
  return {
    load: (hash) => texts.get(hash) ?? null,
    save(hash, text) {
      texts.set(hash, text);
      onSave(hash, text);
    },
  };
}
