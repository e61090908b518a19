import { z } from 'zod';
import { traceMapSchema } from '../../files/traceMap.ts';
import type { Judged } from '../../run/judge/judgeTraces.ts';

/** What the page asks the judging worker. */
export const requestSchema = z.object({
  scenario: z.unknown(),
  name: z.string(),
  bytes: z.instanceof(Uint8Array),
  map: traceMapSchema,
  /** of the solver that is judged; undefined: the scenario's */
  cellSize: z.string().optional(),
});
export type JudgeRequest = z.infer<typeof requestSchema>;

/** What the worker tells. */
export type JudgeReport =
  | { readonly kind: 'progress'; readonly stage: string; readonly fraction: number }
  | { readonly kind: 'judged'; readonly judged: Judged }
  | { readonly kind: 'refused'; readonly message: string };
