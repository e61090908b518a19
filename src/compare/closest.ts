import { uniformInt } from 'pure-rand/distribution/uniformInt';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import {
  bare,
  bestBin,
  type ErrorBin,
  type ErrorSamples,
  errorBins,
  type FilledBin,
  logCrossing,
  PERCENTILE,
  percentile,
  whyUnmeasured,
} from './bins.ts';

/** Bins of distance to the nearest source filament. */
export const BINS_PER_DECADE = 12;

const REPLICATES = 200;

/** The lowest 95th percentile found, and where: what to say where nothing meets the tolerance. */
export interface Best {
  /** a fraction */
  readonly error: number;
  /** m */
  readonly distance: number;
}

/** From where on the point error stays within the tolerance. */
export type Threshold =
  /** it first exceeds it, going inward, at `distance` */
  | { readonly status: 'crossing'; readonly distance: number; readonly best: Best }
  /** it never does: trusted from the closest sample on, perhaps nearer */
  | { readonly status: 'closestSampled'; readonly distance: number; readonly best: Best }
  /** not even the best bin is within it */
  | { readonly status: 'none'; readonly best: Best }
  /** no bin had samples enough that count */
  | { readonly status: 'unmeasured'; readonly reason: string };

export type ClosestOutcome = Threshold & {
  /** bootstrap interval (5th to 95th percentile) of a crossing, m; an end is null where replicates there have no crossing */
  readonly interval?: readonly [number | null, number | null];
};

export type Closest = ClosestOutcome & { readonly bins: readonly ErrorBin[] };

/**
 * Walks inward from the best bin while the 95th percentile stays within the tolerance: the threshold is the smallest
 * distance from which every counted bin outward to the best one is within it, log-interpolated between the last bin
 * that is and the first that is not.
 * @param samples what the bins were made of, to say why where there are none
 */
export function threshold(bins: readonly ErrorBin[], tolerance: number, samples: ErrorSamples): Threshold {
  if (bins.length === 0) return { status: 'unmeasured', reason: whyUnmeasured(samples) };
  let k = bestBin(bins);
  const best = { error: bins[k]!.percentile95, distance: bins[k]!.centre };
  if (!(best.error <= tolerance)) return { status: 'none', best };
  while (k > 0 && bins[k - 1]!.percentile95 <= tolerance) k--;
  if (k === 0) return { status: 'closestSampled', distance: bins[0]!.nearest, best };
  return { status: 'crossing', distance: logCrossing(bins[k - 1]!, bins[k]!, tolerance), best };
}

/**
 * The closest trusted distance: distances to the nearest source filament in logarithmic bins, 12 a decade, 30 samples
 * or more each, 95th percentile of the point error of FDTD(free) − exact.
 * @param seed of the bootstrap that gives a crossing its interval (Efron 1979: samples redrawn with replacement in each
 * bin, 200 times)
 */
export function closestDistance(samples: ErrorSamples, tolerance: number, seed: number): Closest {
  const bins = errorBins(samples, BINS_PER_DECADE);
  const found = threshold(bins, tolerance, samples);
  const described = { ...found, bins: bins.map(bare) };
  if (found.status !== 'crossing') return described;
  return { ...described, interval: bootstrap(samples, bins, tolerance, seed) };
}

function bootstrap(
  samples: ErrorSamples,
  bins: readonly FilledBin[],
  tolerance: number,
  seed: number,
): [number | null, number | null] {
  const random = xoroshiro128plus(seed);
  const distances: number[] = [];
  for (let r = 0; r < REPLICATES; r++) {
    const redrawn = bins.map((bin) => {
      const weights = bin.weights.map(() => 0);
      for (let i = 0; i < bin.samples; i++) {
        const drawn = uniformInt(random, 0, bin.samples - 1);
        weights[drawn]! += bin.weights[drawn]!;
      }
      return { ...bin, percentile95: percentile(bin.errors, weights, PERCENTILE) };
    });
    const found = threshold(redrawn, tolerance, samples);
    // No crossing lies beyond every distance when nothing is within the tolerance, below every one when all is.
    distances.push(
      found.status === 'crossing' ? found.distance : found.status === 'none' ? Infinity : Number.NEGATIVE_INFINITY,
    );
  }
  distances.sort((a, b) => a - b);
  const equal = distances.map(() => 1);
  const end = (share: number): number | null => {
    const distance = percentile(distances, equal, share);
    return Number.isFinite(distance) ? distance : null;
  };
  return [end(0.05), end(0.95)];
}
