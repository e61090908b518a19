import { fileWords } from '../files/words.ts';
import type { ResultFile } from '../report/folder.ts';
import type { Store } from './store.ts';
import { answerOf } from './workers.ts';
import type { WriterRequest } from './writer.ts';

/** A file's name from the scenario's title. */
export function nameOf(store: Store): string {
  const title = (store.state.json as { title?: unknown } | undefined)?.title;
  return fileWords([String(title ?? '').toLowerCase()], 'scenario')[0]!;
}

/**
 * A file of the present result, written by a worker of its own: also where the run has been cancelled since.
 * @throws Error where there is no result yet, or the worker failed
 */
export async function written(store: Store, file: ResultFile): Promise<string> {
  const { result, traces, spectra } = store.state;
  if (!result) throw new Error('there is no result yet; wait for the verdict.');
  const command = `npx fieldassay compare ${nameOf(store)}.json --out out`;
  return await answerOf<WriterRequest, string>('./writer.js', {
    file,
    report: { result, traces, spectra, command },
  });
}
