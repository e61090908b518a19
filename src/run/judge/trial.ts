import type { Vec3 } from '../../scenario/model.ts';
import { type Refit, type Signals, times } from './refit.ts';

/**
 * Likely faults of a solver or of the way from it to the file, each tested by making the exact field suffer it and looking
 * at what is left of the difference. Where the error of a sound Yee grid is predicted, each is tested on top of that too,
 * which tells a slip of half a step from dispersion.
 */
export const CAUSES = [
  'halfTimeStep',
  'timeOffset',
  'timeUnit',
  'timeScale',
  'halfCell',
  'stagger',
  'lengthUnit',
  'sign',
  'axesSwapped',
  'powerOfTen',
  'decibels',
  'fluxForField',
  'impedance',
  'amplitude',
  'wall',
  'staticLost',
  'medium',
] as const;
export type CauseName = (typeof CAUSES)[number];

/** A fault as it was tried. */
export interface Trial {
  readonly cause: CauseName;
  /** "E comes half a time step (4.8 ps) late" */
  readonly words: string;
  /** what to do about it */
  readonly remedy: string;
  /** numbers that were fitted for it, not known beforehand */
  readonly parameters: number;
  readonly model: Signals;
}

/** Traces of one field, or of both. */
export type Scope = 'all' | 'E' | 'H';

/** Traces that a fault may be in: all, or those of one field where there are both. */
export interface Scoped {
  readonly scope: Scope;
  /** "E and H", "E" */
  readonly who: string;
  readonly are: 'are' | 'is';
  readonly over: (trace: number) => boolean;
}

export function scopesOf({ given, own }: Refit): readonly Scoped[] {
  const hasE = given.some((_, k) => own(k) < 3);
  const hasH = given.some((_, k) => own(k) >= 3);
  if (!hasE || !hasH) {
    const scope = hasE ? 'E' : 'H';
    return [{ scope, who: scope, are: 'is', over: () => true }];
  }
  return [
    { scope: 'all', who: 'E and H', are: 'are', over: () => true },
    { scope: 'E', who: 'E', are: 'is', over: (k) => own(k) < 3 },
    { scope: 'H', who: 'H', are: 'is', over: (k) => own(k) >= 3 },
  ];
}

/** A trial at other places; none where one of them lies on a source. */
export function* elsewhere(
  refit: Refit,
  places: readonly Vec3[],
  trial: Omit<Trial, 'model'>,
  component: (k: number) => number = refit.own,
  factor?: (k: number) => number,
): Generator<Trial> {
  let arrangement: ReturnType<Refit['arrangement']>;
  try {
    arrangement = refit.arrangement(places);
  } catch (error) {
    if (error instanceof RangeError) return;
    throw error;
  }
  for (const withSound of refit.bases.map((_, n) => n === 1)) {
    const model = arrangement.signals((t) => t, component, withSound);
    yield { ...trial, model: factor ? times(model, factor) : model };
  }
}
