import { z } from 'zod';
import type { Plan } from '../../compare/planResult.ts';
import type { KnownSetup } from '../../run/planSearch.ts';
import { BOUNDARIES, LIMITS } from '../../scenario/schema.ts';

const wall = z.object({ type: z.literal(BOUNDARIES), layers: z.int().min(0).max(LIMITS.layers).optional() });

/** What is wanted of a plan. */
const wantedSchema = z.object({
  /** the scenario's JSON */
  scenario: z.unknown(),
  tolerance: z.number().positive().max(1),
  /** where it must hold: an observer's name, or a distance from the sources, m; all observers where neither is given */
  at: z.string().optional(),
  distance: z.number().positive().optional(),
  /** Hz; the whole signal where there is none */
  band: z.number().positive().optional(),
  walls: z.array(wall).min(1).readonly(),
  /** cell updates a second of the user's own solver */
  ownRate: z.number().positive().optional(),
});
export type Wanted = z.infer<typeof wantedSchema>;

export const requestSchema = z.object({ id: z.int().min(0), wanted: wantedSchema });
export type Request = z.infer<typeof requestSchema>;

export type Report =
  | { readonly kind: 'plan'; readonly id: number; readonly plan: Plan }
  /** every set-up that was predicted by now, whatever for: what the next choice may be taken from at once */
  | { readonly kind: 'known'; readonly about: string; readonly setups: readonly KnownSetup[] }
  | { readonly kind: 'refused'; readonly id: number; readonly message: string };

/** What predictions depend on: while it is the same, set-ups that are known stay so. */
export const aboutOf = ({ scenario, at, distance, band }: Wanted): string =>
  JSON.stringify([scenario, at ?? null, distance ?? null, band ?? null]);
