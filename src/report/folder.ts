import { type Histories, partSignals } from '../compare/budget.ts';
import type { Result } from '../compare/result.ts';
import { type ObserverTrace, observerTraces, writeTraces } from '../files/traces.ts';
import { fileWords } from '../files/words.ts';
import type { FieldHistory } from '../trace/trace.ts';
import { boxCharts, observerCharts } from './charts.ts';
import { reportHtml } from './html.ts';
import { resultJson } from './json.ts';
import type { ObserverSpectra, Report } from './report.ts';
import { chartFile } from './svg.ts';

/** What a comparison left: its result and the signals behind it. */
export interface Findings {
  readonly result: Result;
  /** at observers inside the box, in their order; null without any */
  readonly signals: Histories | null;
  /** exact fields of observers outside the box, in their order */
  readonly outside: FieldHistory;
  readonly spectra: readonly ObserverSpectra[];
}

/** The files of a result folder. */
export const RESULT_FILES = ['result.json', 'traces.csv', 'report.html'] as const;
export type ResultFile = (typeof RESULT_FILES)[number];

/** The traces of all observers, those inside the box first. */
export function tracesOf({ result, signals, outside }: Findings): ObserverTrace[] {
  const inside = result.observers.filter((o) => o.inside).map(({ name }) => name);
  const beyond = result.observers.filter((o) => !o.inside).map(({ name }) => name);
  const parts = signals && partSignals(signals);
  return [
    ...(signals && parts
      ? inside.flatMap((name, p) => observerTraces(name, { grid: signals.grid, exact: signals.exact, ...parts }, p))
      : []),
    ...beyond.flatMap((name, p) => observerTraces(name, { exact: outside }, p)),
  ];
}

/**
 * The text of one file of the result folder.
 * @param command what to type to get it again
 */
export function resultFile(file: ResultFile, findings: Findings, command: string): string {
  const { result, spectra } = findings;
  return fileText(file, { result, traces: file === 'result.json' ? [] : tracesOf(findings), spectra, command });
}

/** The same, where the traces are there already. */
export function fileText(file: ResultFile, report: Report): string {
  switch (file) {
    case 'result.json':
      return resultJson(report.result);
    case 'traces.csv':
      return writeTraces(report.traces);
    case 'report.html':
      return reportHtml(report);
  }
}

/** The charts of the report as files of their own: `error-by-distance.svg`, and after each observer's name its own. */
export function chartFiles({ result, traces, spectra }: Omit<Report, 'command'>): Record<string, string> {
  const words = fileWords(
    result.observers.map(({ name }) => name),
    'observer',
  );
  return Object.fromEntries([
    ...boxCharts(result).map(({ file, chart }) => [`${file}.svg`, chartFile(chart)]),
    ...result.observers.flatMap((observer, n) =>
      observerCharts(observer, traces, spectra).map(({ file, chart }) => [`${words[n]}-${file}.svg`, chartFile(chart)]),
    ),
  ]);
}
