/** Writes one file of a result off the page's own thread; the worker is asked once. */
import { fileText, type ResultFile } from '../report/folder.ts';
import type { Report } from '../report/report.ts';

export interface WriterRequest {
  readonly file: ResultFile;
  readonly report: Report;
}

addEventListener('message', ({ data: { file, report } }: MessageEvent<WriterRequest>) => {
  postMessage(fileText(file, report));
});
