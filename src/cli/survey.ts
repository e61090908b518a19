import { dirname, join, resolve } from 'node:path';
import type { SurveyResult } from '../compare/surveyResult.ts';
import { runSurvey } from '../run/survey.ts';
import { EXAMPLES } from '../scenario/examples.ts';
import { describeProblem } from '../scenario/load.ts';
import { loadSurvey } from '../scenario/survey.ts';
import { folderStore, sweepStore } from './caseStore.ts';
import { InputError, readInput, readScenario } from './input.ts';
import { progressLine } from './progress.ts';

export interface SurveyFlags {
  readonly out: string;
  readonly json?: boolean;
  readonly threads?: number;
}

/**
 * Runs a survey file; finished cases are kept in DIR/cases.
 * @throws InputError or Refusal for a survey with problems; the signal's reason when aborted
 */
export async function surveyCommand(
  file: string,
  { out, threads }: SurveyFlags,
  signal: AbortSignal,
): Promise<SurveyResult> {
  const loaded = loadSurvey(readInput(file, 'the survey'), (name) => scenarioNamed(name, dirname(resolve(file))));
  if ('problems' in loaded) throw new InputError(loaded.problems.map(describeProblem).join('\n'));
  const folder = join(out, 'cases');
  const line = progressLine(false);
  try {
    const result = await runSurvey(loaded.survey, {
      ...(threads ? { threads } : {}),
      signal,
      onProgress: line.show,
      store: folderStore(folder),
    });
    sweepStore(folder);
    return result;
  } finally {
    line.end();
  }
}

/** A scenario beside the survey, or a built-in one. */
function scenarioNamed(name: string, folder: string): unknown {
  return structuredClone(readScenario(Object.hasOwn(EXAMPLES, name) ? name : resolve(folder, name)));
}
