import { z } from 'zod';
import type { Result } from '../compare/result.ts';
import type { ObserverTrace } from '../files/traces.ts';
import type { ObserverSpectra } from '../report/report.ts';
import type { GridFrames } from '../run/planes.ts';
import type { Progress } from '../run/progress.ts';
import type { Plane } from '../scenario/model.ts';
import type { Problem } from '../scenario/reading.ts';
import { LIMITS } from '../scenario/schema.ts';
import type { ExactCells, FilmOf, PotentialFrame, TrustMap } from '../scene/film.ts';

const index = z.int().min(0);
const planes: z.ZodType<readonly Plane[]> = z
  .array(z.object({ name: z.string(), normal: z.literal([0, 1, 2]), at: z.number() }))
  .max(LIMITS.planes);

/** What the page asks of the worker that coordinates one run. Stopping it is ending the worker. */
export const requestSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('run'), scenario: z.unknown(), planes }),
  /** other planes for a run that has ended: films alone, the comparison stands */
  z.object({ kind: z.literal('planes'), planes }),
  /** φ and A at one picture of the film */
  z.object({ kind: z.literal('potentials'), slice: index, frame: index }),
]);
export type Request = z.infer<typeof requestSchema>;

/** What the worker tells, as it comes to know it. */
export type Report =
  | ({ readonly kind: 'progress' } & Progress)
  | ({ readonly kind: 'film' } & FilmOf)
  | ({ readonly kind: 'grid' } & GridFrames)
  | ({ readonly kind: 'exact' } & ExactCells)
  | { readonly kind: 'exactKnown' }
  | { readonly kind: 'traces'; readonly traces: readonly ObserverTrace[] }
  | {
      readonly kind: 'result';
      readonly result: Result;
      readonly traces: readonly ObserverTrace[];
      readonly spectra: readonly ObserverSpectra[];
    }
  | { readonly kind: 'trust'; readonly slice: number; readonly map: TrustMap }
  | ({ readonly kind: 'potentials' } & PotentialFrame)
  | { readonly kind: 'refused'; readonly problems: readonly Problem[] }
  | { readonly kind: 'failed'; readonly message: string }
  | { readonly kind: 'done' };
