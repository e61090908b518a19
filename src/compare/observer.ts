import { COMPONENTS, type Component, type FieldHistory } from '../trace/trace.ts';
import { FIRST_COMPONENT, type Field, requireAligned, samplesOf } from './fields.ts';
import { pointError } from './pointError.ts';

/** How one field of the grid solver differs from the exact one at an observer. */
export interface ObserverErrors {
  /** √(Σ_t Σ_c |grid − exact|²) / √(Σ_t Σ_c |exact|²) */
  readonly relativeL2: number;
  /** the same over the instants up to the last retarded arrival only; NaN for none */
  readonly transient: number;
  /** |⟨grid⟩ − ⟨exact⟩| / |⟨exact⟩|, averages over the instants after the last arrival; NaN where no field is left */
  readonly staticResidue: number;
  /** the component with the largest exact L2, which peak and rise time are read from */
  readonly component: Component;
  /** V/m or A/m, that component */
  readonly exactPeak: number;
  /** (peak of grid − peak of exact) / peak of exact, peaks of |component| */
  readonly peakError: number;
  /** (rise time of grid − of exact) / of exact, 10–90 % of the peak; NaN where either does not rise from below 10 % */
  readonly riseTimeError: number;
  /** s, positive where the grid comes late */
  readonly timeShift: number;
  /** amplitude of the grid's signal, shifted into place, against the exact one */
  readonly amplitudeRatio: number;
}

/** A field's static remainder counts only where it is at least this share of the exact peak: −60 dB. */
const STATIC_SHARE = 1e-3;

/**
 * All figures of one field at one observer.
 * @param lastArrival instant at which the last of the source's activity reaches the point, s
 * @throws Error where the two are not sampled alike
 */
export function observerErrors(
  grid: FieldHistory,
  exact: FieldHistory,
  field: Field,
  point: number,
  lastArrival: number,
): ObserverErrors {
  requireAligned({ grid, exact });
  const component = dominantComponent(exact, field, point);
  const g = samplesOf(grid, point, component);
  const x = samplesOf(exact, point, component);
  const timeStep = exact.instants[field][1]! - exact.instants[field][0]!;
  const exactPeak = peakOf(x).height;
  const exactRise = riseTime(x) * timeStep;
  const { lag, amplitudeRatio } = shiftOf(grid, exact, field, point);
  return {
    relativeL2: pointError(grid, exact, exact, field, point),
    ...splitAtArrival(grid, exact, field, point, lastArrival),
    component: COMPONENTS[component]!,
    exactPeak,
    peakError: (peakOf(g).height - exactPeak) / exactPeak,
    riseTimeError: (riseTime(g) * timeStep - exactRise) / exactRise,
    timeShift: lag * timeStep,
    amplitudeRatio,
  };
}

/** The component of a field with the largest Σ_t exact² at a point: one that vanishes tells nothing. */
export function dominantComponent(exact: FieldHistory, field: Field, point: number): number {
  const square = (c: number) => samplesOf(exact, point, c).reduce((sum, v) => sum + v * v, 0);
  const first = FIRST_COMPONENT[field];
  return [first + 1, first + 2].reduce((best, c) => (square(c) > square(best) ? c : best), first);
}

/** Largest |sample| and where it is. */
function peakOf(samples: Float64Array): { height: number; index: number } {
  let index = 0;
  samples.forEach((v, n) => {
    if (Math.abs(v) > Math.abs(samples[index]!)) index = n;
  });
  return { height: Math.abs(samples[index]!), index };
}

/**
 * 10–90 % rise time in samples: from the last crossing of 10 % of the peak before it to the first of 90 % after that,
 * straight between samples. NaN where the signal is above 10 % from the start.
 */
export function riseTime(samples: Float64Array): number {
  const { index } = peakOf(samples);
  const peak = samples[index]!;
  const at = (n: number) => samples[n]! / peak;
  let low = index;
  while (low >= 0 && at(low) > 0.1) low--;
  if (low < 0) return Number.NaN;
  let high = low;
  while (at(high) < 0.9) high++;
  const start = low + (0.1 - at(low)) / (at(low + 1) - at(low));
  const end = high - 1 + (0.9 - at(high - 1)) / (at(high) - at(high - 1));
  return end - start;
}

/** R(lag) = Σ_c Σ_n a_c[n + lag] b_c[n], the sum taken where both exist. */
function correlation(a: readonly Float64Array[], b: readonly Float64Array[], lag: number): number {
  let sum = 0;
  a.forEach((ac, c) => {
    const bc = b[c]!;
    const end = Math.min(bc.length, ac.length - lag);
    for (let n = Math.max(0, -lag); n < end; n++) sum += ac[n + lag]! * bc[n]!;
  });
  return sum;
}

/**
 * Time shift and amplitude ratio of a grid signal against the exact one, by cross-correlation of their increments
 * x[n + 1] − x[n]: a static tail has none, so it cannot pin the shift. The peak lies on a parabola through the largest
 * value and its neighbours; at a pulse width of σ instants its vertex is off by less than 1/(10 σ²) of an instant.
 * The ratio is that of the peak to the exact signal's own, its parabola's too, so that both are read alike.
 */
export function shiftOf(
  grid: FieldHistory,
  exact: FieldHistory,
  field: Field,
  point: number,
): { lag: number; amplitudeRatio: number } {
  const increments = (history: FieldHistory) =>
    [0, 1, 2].map((c) => {
      const samples = samplesOf(history, point, FIRST_COMPONENT[field] + c);
      return Float64Array.from({ length: Math.max(0, samples.length - 1) }, (_, n) => samples[n + 1]! - samples[n]!);
    });
  const g = increments(grid);
  const x = increments(exact);
  const reach = Math.floor(x[0]!.length / 2);
  let best = 0;
  let height = correlation(g, x, 0);
  for (let lag = -reach; lag <= reach; lag++) {
    const value = correlation(g, x, lag);
    if (value > height) {
      height = value;
      best = lag;
    }
  }
  const before = correlation(g, x, best - 1);
  const after = correlation(g, x, best + 1);
  const bend = before - 2 * height + after;
  const offset = bend < 0 ? (0.5 * (before - after)) / bend : 0;
  const peak = height - 0.25 * (before - after) * offset;
  return { lag: best + offset, amplitudeRatio: peak / correlation(x, x, 0) };
}

/** The relative error up to the last arrival, and that of the static field that is left after it. */
function splitAtArrival(grid: FieldHistory, exact: FieldHistory, field: Field, point: number, lastArrival: number) {
  const instants = exact.instants[field];
  const found = instants.findIndex((t) => t > lastArrival);
  const end = found < 0 ? instants.length : found;
  let difference = 0;
  let reference = 0;
  let residue = 0;
  let remainder = 0;
  let peak = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
    const g = samplesOf(grid, point, c);
    const x = samplesOf(exact, point, c);
    for (let n = 0; n < end; n++) {
      difference += (g[n]! - x[n]!) ** 2;
      reference += x[n]! * x[n]!;
    }
    const mean = (of: Float64Array) => of.subarray(end).reduce((sum, v) => sum + v, 0) / (of.length - end);
    residue += (mean(g) - mean(x)) ** 2;
    remainder += mean(x) ** 2;
    peak = Math.max(peak, peakOf(x).height);
  }
  const isStatic = Math.sqrt(remainder) >= STATIC_SHARE * peak;
  return {
    transient: Math.sqrt(difference / reference),
    staticResidue: isStatic ? Math.sqrt(residue / remainder) : Number.NaN,
  };
}
