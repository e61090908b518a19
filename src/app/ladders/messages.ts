import { z } from 'zod';
import type { SurveyResult } from '../../compare/surveyResult.ts';
import type { Problem } from '../../scenario/reading.ts';

/** Texts of finished cases by their hash: what a survey that goes on need not run again. */
export type Kept = readonly (readonly [hash: string, text: string])[];

const kept: z.ZodType<Kept> = z.array(z.tuple([z.string(), z.string()]));

/** What the page asks of the worker that coordinates one survey. Stopping it is ending the worker. */
export const requestSchema = z.object({
  /** `collect`: only what the kept cases say together, of a survey that runs elsewhere */
  kind: z.literal(['run', 'collect']),
  survey: z.unknown(),
  kept,
});
export type Request = z.infer<typeof requestSchema>;

export type Report =
  | { readonly kind: 'progress'; readonly stage: string; readonly fraction: number; readonly secondsLeft?: number }
  | { readonly kind: 'kept'; readonly hash: string; readonly text: string }
  /** what the cases known by now say together, and how many there are in all */
  | { readonly kind: 'soFar'; readonly result: SurveyResult; readonly of: number }
  | { readonly kind: 'done'; readonly result: SurveyResult }
  | { readonly kind: 'refused'; readonly problems: readonly Problem[] }
  | { readonly kind: 'failed'; readonly message: string };
