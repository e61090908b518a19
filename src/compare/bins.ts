import { exp, log } from '../elementary/elementary.ts';
import type { PointStatus } from './pointError.ts';

/** A bin counts with this many samples. */
export const MIN_SAMPLES = 30;

/** The percentile of the point error that must stay within the tolerance. */
export const PERCENTILE = 0.95;

/** Samples of point errors against a distance. */
export interface ErrorSamples {
  /** m, positive, one a sample */
  readonly distance: Float64Array;
  /** a fraction; NaN: the sample does not count */
  readonly error: Float64Array;
  /** cells that each sample stands for; absent: all alike */
  readonly weight?: Float64Array;
  /** why each sample counts or not, to say so where too few do */
  readonly status?: readonly PointStatus[];
}

/** One logarithmic bin of distance. */
export interface ErrorBin {
  /** m */
  readonly from: number;
  /** m */
  readonly to: number;
  /** geometric middle, m */
  readonly centre: number;
  /** the least distance among its counted samples, m */
  readonly nearest: number;
  readonly samples: number;
  /** 95th percentile of the point error, a fraction */
  readonly percentile95: number;
}

/** A bin with the samples it holds, in order of their errors, for resampling. */
export interface FilledBin extends ErrorBin {
  readonly errors: readonly number[];
  readonly weights: readonly number[];
}

/** Index of the logarithmic bin of a distance: ⌊binsPerDecade · log₁₀(distance / 1 m)⌋. */
export function binOf(distance: number, binsPerDecade: number): number {
  return Math.floor((binsPerDecade * log(distance)) / Math.LN10);
}

/** Lower edge of a logarithmic bin, m. */
export function binEdge(index: number, binsPerDecade: number): number {
  return exp((index / binsPerDecade) * Math.LN10);
}

/**
 * The weighted percentile of ascending values: the least one such that values up to it hold at least that share of the
 * weight. NaN for no values.
 */
export function percentile(ascending: readonly number[], weights: readonly number[], share: number): number {
  // A share such as 0.95 · 100 is not exact in binary: forgive rounding, far below one sample's weight.
  const wanted = share * weights.reduce((sum, w) => sum + w, 0) * (1 - 1e-12);
  let held = 0;
  for (let i = 0; i < ascending.length; i++) {
    held += weights[i]!;
    if (held >= wanted) return ascending[i]!;
  }
  return Number.NaN;
}

/**
 * Logarithmic bins of distance, ascending, with the 95th percentile of the point error in each. Bins of fewer than
 * `MIN_SAMPLES` counted samples are left out: they are no evidence.
 */
export function errorBins(samples: ErrorSamples, binsPerDecade: number): FilledBin[] {
  const members = new Map<number, number[]>();
  samples.error.forEach((error, i) => {
    if (Number.isNaN(error)) return;
    const index = binOf(samples.distance[i]!, binsPerDecade);
    const bin = members.get(index);
    if (bin) bin.push(i);
    else members.set(index, [i]);
  });
  return [...members]
    .filter(([, inside]) => inside.length >= MIN_SAMPLES)
    .sort(([a], [b]) => a - b)
    .map(([index, inside]) => {
      inside.sort((i, j) => samples.error[i]! - samples.error[j]!);
      const errors = inside.map((i) => samples.error[i]!);
      const weights = inside.map((i) => samples.weight?.[i] ?? 1);
      return {
        from: binEdge(index, binsPerDecade),
        to: binEdge(index + 1, binsPerDecade),
        centre: binEdge(index + 0.5, binsPerDecade),
        nearest: Math.min(...inside.map((i) => samples.distance[i]!)),
        samples: inside.length,
        percentile95: percentile(errors, weights, PERCENTILE),
        errors,
        weights,
      };
    });
}

/** A bin without its samples. */
export function bare({ errors: _, weights: __, ...bin }: FilledBin): ErrorBin {
  return bin;
}

/** Index of the bin with the lowest 95th percentile; the nearer of equals. */
export function bestBin(bins: readonly ErrorBin[]): number {
  let best = 0;
  bins.forEach((bin, i) => {
    if (bin.percentile95 < bins[best]!.percentile95) best = i;
  });
  return best;
}

/** The distance between two bins where log error against log distance, taken straight, meets the tolerance, m. */
export function logCrossing(a: ErrorBin, b: ErrorBin, tolerance: number): number {
  const ea = log(Math.max(a.percentile95, Number.MIN_VALUE));
  const eb = log(Math.max(b.percentile95, Number.MIN_VALUE));
  const share = (log(tolerance) - ea) / (eb - ea);
  return exp(log(a.centre) + share * (log(b.centre) - log(a.centre)));
}

/** Why no bin has samples enough, and what would help. */
export function whyUnmeasured({ error, status = [] }: ErrorSamples): string {
  const short = status.filter((s) => s === 'window too short').length;
  const below = status.filter((s) => s === 'below floor').length;
  if (short > 0 && short >= below)
    return `the window ends before the last arrival at ${short} of ${error.length} samples; lengthen \`duration\``;
  if (below > 0)
    return `the field is within 20 dB of the floor at ${below} of ${error.length} samples; use \`grid.precision\` "double"`;
  return `no range of distances has the ${MIN_SAMPLES} samples it needs; enlarge \`grid.box\``;
}
