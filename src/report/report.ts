import type { Field } from '../compare/fields.ts';
import type { Result } from '../compare/result.ts';
import type { Spectra } from '../compare/spectrum.ts';
import type { ObserverTrace } from '../files/traces.ts';

/** What a report is written from: the result, and the signals behind it. */
export interface Report {
  readonly result: Result;
  readonly traces: readonly ObserverTrace[];
  readonly spectra: readonly ObserverSpectra[];
  /** what to type to get it again: "npx fieldassay compare scenario.json --out out" */
  readonly command: string;
}

/** The spectra of one field at one observer. */
export interface ObserverSpectra {
  readonly observer: string;
  readonly field: Field;
  readonly spectra: Spectra;
}
