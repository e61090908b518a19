import type { FieldHistory } from '../trace/trace.ts';
import { energy, floorAmplitudes, type Levels } from './budget.ts';
import { FIRST_COMPONENT, type Field, requireAligned, samplesOf } from './fields.ts';

/** The exact field must stand this far above every floor for a point error to be trusted: 20 dB. */
const ABOVE_FLOOR = 10;

/** Why a point counts or not. */
export type PointStatus = 'counted' | 'window too short' | 'below floor';

export interface PointErrors {
  readonly field: Field;
  /** e_F(p), one a point; NaN where the point does not count */
  readonly error: Float64Array;
  readonly status: readonly PointStatus[];
}

/**
 * e_F(p) = √(Σ_t Σ_c |a_c − b_c|²) / √(Σ_t Σ_c |exact_c|²), F the field, c its three components of one Yee cell, each
 * at its own place and instants.
 */
export function pointError(a: FieldHistory, b: FieldHistory, exact: FieldHistory, field: Field, point: number): number {
  let difference = 0;
  for (let k = FIRST_COMPONENT[field]; k < FIRST_COMPONENT[field] + 3; k++) {
    const as = samplesOf(a, point, k);
    const bs = samplesOf(b, point, k);
    for (let n = 0; n < as.length; n++) difference += (as[n]! - bs[n]!) ** 2;
  }
  return Math.sqrt(difference / energy(exact, field, point));
}

/**
 * Whether a point's error may be counted: the window covers the last retarded arrival, and the exact field's root mean
 * square stands 20 dB above every floor there.
 * @param lastArrival instant at which the last of the source's activity reaches the point, s
 */
export function pointStatus(
  exact: FieldHistory,
  field: Field,
  point: number,
  lastArrival: number,
  levels: Levels,
): PointStatus {
  const instants = exact.instants[field];
  if (!(instants[instants.length - 1]! >= lastArrival)) return 'window too short';
  const amplitude = Math.sqrt(energy(exact, field, point) / instants.length);
  const highest = Math.max(...Object.values(floorAmplitudes(levels, field, point)));
  return amplitude > 0 && amplitude >= ABOVE_FLOOR * highest ? 'counted' : 'below floor';
}

/**
 * Point errors of a − b against the exact field at every point: a, b = grid, exact for the total, free, exact for what
 * the walls have no part in.
 * @param lastArrival one a point, s
 * @throws Error where the fields are not sampled alike
 */
export function pointErrors(
  a: FieldHistory,
  b: FieldHistory,
  exact: FieldHistory,
  field: Field,
  lastArrival: Float64Array,
  levels: Levels,
): PointErrors {
  requireAligned({ minuend: a, subtrahend: b, exact });
  const status = Array.from({ length: exact.points.count }, (_, p) =>
    pointStatus(exact, field, p, lastArrival[p]!, levels),
  );
  const error = Float64Array.from(status, (s, p) => (s === 'counted' ? pointError(a, b, exact, field, p) : Number.NaN));
  return { field, error, status };
}
