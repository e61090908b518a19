import type { SurveyResult } from '../../compare/surveyResult.ts';
import type { Problem } from '../../scenario/reading.ts';

/** Texts of finished cases by their hash: what a survey that goes on need not run again. */
export type Kept = readonly (readonly [hash: string, text: string])[];

/** What the page asks of the worker that coordinates one survey. Stopping it is ending the worker. */
export type Request =
  | { readonly kind: 'run'; readonly survey: unknown; readonly kept: Kept }
  /** only what the kept cases say together: a survey that runs elsewhere */
  | { readonly kind: 'collect'; readonly survey: unknown; readonly kept: Kept };

export type Report =
  | { readonly kind: 'progress'; readonly stage: string; readonly fraction: number; readonly secondsLeft?: number }
  | { readonly kind: 'kept'; readonly hash: string; readonly text: string }
  /** what the cases known by now say together, and how many there are in all */
  | { readonly kind: 'soFar'; readonly result: SurveyResult; readonly of: number }
  | { readonly kind: 'done'; readonly result: SurveyResult }
  | { readonly kind: 'refused'; readonly problems: readonly Problem[] }
  | { readonly kind: 'failed'; readonly message: string };
