import { bare, type ErrorBin, type ErrorSamples, errorBins } from './bins.ts';
import { type Threshold, threshold } from './closest.ts';

/** Bins of distance to the nearest wall of the working box. */
export const WALL_BINS_PER_DECADE = 6;

export type WallClearance = Threshold & { readonly bins: readonly ErrorBin[] };

/**
 * The wall clearance: the distance from the wall inside which the 95th percentile of the total point error exceeds the
 * tolerance. 'closestSampled' means it never does: trusted right up to the walls.
 * @param wall total point errors against distance to the nearest wall
 * @param sourceDistance of the same samples, m: those nearer than `closest` are the source's affair and left out
 * @param closest the closest trusted distance, m; 0 where it is below every sample
 */
export function wallClearance(
  wall: ErrorSamples,
  sourceDistance: Float64Array,
  closest: number,
  tolerance: number,
): WallClearance {
  const error = wall.error.map((e, i) => (sourceDistance[i]! < closest ? Number.NaN : e));
  const bins = errorBins({ ...wall, error }, WALL_BINS_PER_DECADE).map(bare);
  return { ...threshold(bins, tolerance, wall), bins };
}
