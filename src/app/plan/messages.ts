import type { Plan } from '../../compare/planResult.ts';
import type { KnownSetup } from '../../run/planSearch.ts';
import type { Wall } from '../../run/predict.ts';

/** What is wanted of a plan. */
export interface Wanted {
  /** the scenario's JSON */
  readonly scenario: unknown;
  readonly tolerance: number;
  /** where it must hold: an observer's name, or a distance from the sources, m; all observers where neither is given */
  readonly at?: string | undefined;
  readonly distance?: number | undefined;
  /** Hz; the whole signal where there is none */
  readonly band?: number | undefined;
  readonly walls: readonly Wall[];
  /** cell updates a second of the user's own solver */
  readonly ownRate?: number | undefined;
}

export interface Request {
  readonly id: number;
  readonly wanted: Wanted;
}

export type Report =
  | { readonly kind: 'plan'; readonly id: number; readonly plan: Plan }
  /** every set-up that was predicted by now, whatever for: what the next choice may be taken from at once */
  | { readonly kind: 'known'; readonly about: string; readonly setups: readonly KnownSetup[] }
  | { readonly kind: 'refused'; readonly id: number; readonly message: string };

/** What predictions depend on: while it is the same, set-ups that are known stay so. */
export const aboutOf = ({ scenario, at, distance, band }: Wanted): string =>
  JSON.stringify([scenario, at ?? null, distance ?? null, band ?? null]);
