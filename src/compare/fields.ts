import type { FieldHistory } from '../trace/trace.ts';

/** The two vector fields that are compared. */
export type Field = 'E' | 'H';
export const FIELDS: readonly Field[] = ['E', 'H'];

/** Index of a field's first component in `COMPONENTS`; its three components follow each other. */
export const FIRST_COMPONENT: Readonly<Record<Field, number>> = { E: 0, H: 3 };

export const FIELD_UNIT = { E: 'V/m', H: 'A/m' } as const satisfies Record<Field, string>;

/**
 * An amplitude that errors of a known kind do not exceed, root mean square over the window of the vector at a point,
 * V/m or A/m: rounding of the run, leftover reflection of the free-space run, bound of a quadrature.
 */
export type Level = (field: Field, point: number) => number;

/**
 * Refuses fields that were not sampled at the same places and instants: a comparison never interpolates.
 * @throws Error naming the two and how they differ
 */
export function requireAligned(fields: Readonly<Record<string, FieldHistory>>): void {
  const [[firstName, first], ...others] = Object.entries(fields) as [
    [string, FieldHistory],
    ...[string, FieldHistory][],
  ];
  for (const [name, other] of others) {
    if (other.points.count !== first.points.count || other.instants.count !== first.instants.count)
      throw new Error(
        `${name} has ${other.points.count} points at ${other.instants.count} instants, ${firstName} has ` +
          `${first.points.count} at ${first.instants.count}; both must be sampled at the same places and instants`,
      );
  }
}

/** Samples of one component at one point, one for each instant. */
export function samplesOf(history: FieldHistory, point: number, component: number): Float64Array {
  const n = history.instants.count;
  const start = (point * 6 + component) * n;
  return history.values.subarray(start, start + n);
}
