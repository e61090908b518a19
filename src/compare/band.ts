import { atan2 } from '../elementary/elementary.ts';
import type { FieldHistory } from '../trace/trace.ts';
import { type Field, requireAligned } from './fields.ts';
import { type Spectrum, spectrumOf } from './spectrum.ts';

/** 2^(1/6): a band reaches a sixth of an octave up. */
const SIXTH_OCTAVE = 1.122462048309373;

/** A band holds three lines or more, so bands at the low end are wider than a sixth of an octave. */
const MIN_LINES = 3;

/** The first line used, 2/T: fewer than two periods in the window tell nothing of a frequency. */
const FIRST_LINE = 2;

/** Bands must stand within 40 dB of the strongest and 10 dB above the floor, as amplitudes. */
const OF_PEAK = 0.01;
const ABOVE_FLOOR = Math.sqrt(10);

export interface SpectralBand {
  /** Hz */
  readonly from: number;
  /** Hz */
  readonly to: number;
  /** √(Σ|grid − exact|²) / √(Σ|exact|²) over the band's lines and the field's components */
  readonly error: number;
  /** √(Σ|grid|²) / √(Σ|exact|²) */
  readonly magnitudeRatio: number;
  /** angle of Σ grid·exact*, rad: positive where the grid leads */
  readonly phase: number;
}

export type BandLimit =
  /** `frequency`: lower edge of the first of two consecutive failing bands */
  | { readonly status: 'limit'; readonly frequency: number }
  /** no two consecutive bands fail; `frequency`: upper edge of the last passing band, there is no source energy above */
  | { readonly status: 'noEnergyAbove'; readonly frequency: number }
  /** the lowest two bands fail already, or no band passes */
  | { readonly status: 'none'; readonly best: { readonly error: number; readonly frequency: number } }
  | { readonly status: 'unmeasured'; readonly reason: string };

export interface Band {
  /** 2/T, Hz: below it the window is too short */
  readonly lowEnd: number;
  /** bands that count, ascending */
  readonly bands: readonly SpectralBand[];
  readonly limit: BandLimit;
}

/** Σ over lines k0 ≤ k < k1 and components of |g − x|², |g|², |x|² and g·x*. */
function bandSums(grid: Spectrum, exact: Spectrum, k0: number, k1: number) {
  const sums = { difference: 0, grid: 0, exact: 0, crossRe: 0, crossIm: 0 };
  for (let c = 0; c < 3; c++)
    for (let k = k0; k < k1; k++) {
      const gr = grid.re[c]![k]!;
      const gi = grid.im[c]![k]!;
      const xr = exact.re[c]![k]!;
      const xi = exact.im[c]![k]!;
      sums.difference += (gr - xr) ** 2 + (gi - xi) ** 2;
      sums.grid += gr * gr + gi * gi;
      sums.exact += xr * xr + xi * xi;
      sums.crossRe += gr * xr + gi * xi;
      sums.crossIm += gi * xr - gr * xi;
    }
  return sums;
}

/** First lines of consecutive bands, and one past the last: each a sixth of an octave or three lines, the wider. */
export function bandStarts(lines: number): number[] {
  const starts = [FIRST_LINE];
  for (;;) {
    const last = starts[starts.length - 1]!;
    const next = Math.max(last + MIN_LINES, Math.ceil(last * SIXTH_OCTAVE));
    if (next > lines) return starts;
    starts.push(next);
  }
}

/**
 * How the error of a field at one point spreads over frequency, and up to which frequency it stays within the
 * tolerance. Both signals get the same end taper; the ratio of a band is that of vectors, so that no component that
 * vanishes is divided by.
 * @param floor root mean square over the window of what the vector cannot be told from, V/m or A/m. As noise it gives
 * each line √N·Δt times that
 * @throws Error where the two are not sampled alike
 */
export function bandOf(
  grid: FieldHistory,
  exact: FieldHistory,
  field: Field,
  point: number,
  floor: number,
  tolerance: number,
): Band {
  requireAligned({ grid, exact });
  const g = spectrumOf(grid, field, point);
  const x = spectrumOf(exact, field, point);
  const starts = bandStarts(x.lines);
  const bands = starts.slice(1).map((k1, i) => ({ k0: starts[i]!, k1, sums: bandSums(g, x, starts[i]!, k1) }));
  const density = bands.map(({ k0, k1, sums }) => Math.sqrt(sums.exact / (k1 - k0)));
  const count = grid.instants.count;
  const least = Math.max(OF_PEAK * Math.max(0, ...density), ABOVE_FLOOR * floor * (x.window / Math.sqrt(count)));
  const counted = bands
    .filter((_, i) => density[i]! > 0 && density[i]! >= least)
    .map(({ k0, k1, sums }) => ({
      from: k0 / x.window,
      to: k1 / x.window,
      error: Math.sqrt(sums.difference / sums.exact),
      magnitudeRatio: Math.sqrt(sums.grid / sums.exact),
      phase: atan2(sums.crossIm, sums.crossRe),
    }));
  return { lowEnd: FIRST_LINE / x.window, bands: counted, limit: bandLimit(counted, tolerance) };
}

/**
 * The band limit: going up, the lower edge of the first of two consecutive failing bands. Bands that do not count are
 * passed over, and a lone failing band is forgiven unless it is the last: nothing is claimed above the last that passes.
 */
export function bandLimit(bands: readonly SpectralBand[], tolerance: number): BandLimit {
  if (bands.length === 0)
    return { status: 'unmeasured', reason: 'no band of frequencies stands far enough above the floor' };
  const passes = bands.map(({ error }) => error <= tolerance);
  const best = bands.reduce((a, b) => (b.error < a.error ? b : a));
  const none: BandLimit = { status: 'none', best: { error: best.error, frequency: Math.sqrt(best.from * best.to) } };
  const failing = passes.findIndex((pass, i) => !pass && passes[i + 1] === false);
  if (failing > 0) return { status: 'limit', frequency: bands[failing]!.from };
  const lastPassing = passes.lastIndexOf(true);
  if (failing === 0 || lastPassing < 0) return none;
  return { status: 'noEnergyAbove', frequency: bands[lastPassing]!.to };
}
