import type { TraceMap } from '../../files/traceMap.ts';
import type { Judged } from '../../run/judge/judgeTraces.ts';

/** What the page asks the judging worker. */
export interface JudgeRequest {
  readonly scenario: unknown;
  readonly name: string;
  readonly bytes: Uint8Array;
  readonly map: TraceMap;
  /** of the solver that is judged; undefined: the scenario's */
  readonly cellSize: string | undefined;
}

/** What the worker tells. */
export type JudgeReport =
  | { readonly kind: 'progress'; readonly stage: string; readonly fraction: number }
  | { readonly kind: 'judged'; readonly judged: Judged }
  | { readonly kind: 'refused'; readonly message: string };
