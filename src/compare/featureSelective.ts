import { z } from 'zod';
import { cos, exp, sin } from '../elementary/elementary.ts';

/**
 * Feature selective validation of two curves: amplitude, feature and global difference measures (ADM, FDM, GDM), graded as
 * people would grade them by eye. IEEE Std 1597.1-2008; A. P. Duffy, A. J. M. Martin, A. Orlandi, G. Antonini,
 * T. M. Benson, M. S. Woolfson, IEEE Trans. EMC 48 (2006) 449, parts I and II; both from memory.
 */
export const GRADES = ['excellent', 'very good', 'good', 'fair', 'poor', 'very poor'] as const;
export type Grade = (typeof GRADES)[number];

/** Upper bounds of the grades but the last. */
const BOUNDS = [0.1, 0.2, 0.4, 0.8, 1.6];

const measure = z.object({
  total: z.number().describe('mean over the points'),
  grade: z.enum(GRADES).describe('of the total'),
  histogram: z
    .array(z.number())
    .readonly()
    .describe(`share of the points that are ${GRADES.join(', ')}: the confidence histogram`),
  gradeCount: z.int().describe('GRADE: from excellent on, how many grades hold 85 % of the points'),
  spread: z.int().describe('SPREAD: from the fullest on, how many neighbouring grades hold 85 % of the points'),
});

export const fsvSchema = z.object({
  component: z.string(),
  ADM: measure.describe('amplitude difference measure'),
  FDM: measure.describe('feature difference measure'),
  GDM: measure.describe('global difference measure, √(ADM² + FDM²)'),
});
export type FeatureSelective = z.infer<typeof fsvSchema>;
export type Measure = z.infer<typeof measure>;

/** The grade of a value. */
export function gradeOf(value: number): Grade {
  const n = BOUNDS.findIndex((bound) => value < bound);
  return GRADES[n < 0 ? GRADES.length - 1 : n]!;
}

/** Lines 0 to 3 are the trend ("DC"); what follows is split where 40 % of its sum are reached, and five lines further. */
const TREND_LINES = 4;
const BREAK_SHARE = 0.4;
const BREAK_BEYOND = 5;

/** From three lines before the break to three after it the low part fades into the high one. */
const FADE = 3;

interface Parts {
  readonly trend: Float64Array;
  readonly low: Float64Array;
  readonly high: Float64Array;
}

/** The discrete Fourier lines 0 … N/2 of a real signal, by the defining sum. */
function linesOf(signal: Float64Array): { re: Float64Array; im: Float64Array } {
  const N = signal.length;
  const count = Math.floor(N / 2) + 1;
  const re = new Float64Array(count);
  const im = new Float64Array(count);
  const { cosine, sine } = turns(N);
  for (let k = 0; k < count; k++)
    for (let n = 0, m = 0; n < N; n++) {
      re[k]! += signal[n]! * cosine[m]!;
      im[k]! -= signal[n]! * sine[m]!;
      m += k;
      if (m >= N) m -= N;
    }
  return { re, im };
}

function turns(N: number): { cosine: Float64Array; sine: Float64Array } {
  const angle = (n: number) => (2 * Math.PI * n) / N;
  return {
    cosine: Float64Array.from({ length: N }, (_, n) => cos(angle(n))),
    sine: Float64Array.from({ length: N }, (_, n) => sin(angle(n))),
  };
}

/** The line at which the low part ends: where 40 % of the magnitudes beyond the trend are reached, and five further. */
export function breakLine(signal: Float64Array): number {
  const { re, im } = linesOf(signal);
  const magnitude = re.map((x, k) => (k < TREND_LINES ? 0 : Math.sqrt(x * x + im[k]! * im[k]!)));
  const total = magnitude.reduce((sum, x) => sum + x, 0);
  let sum = 0;
  const at = magnitude.findIndex((x) => {
    sum += x;
    return sum >= BREAK_SHARE * total && sum > 0;
  });
  return (at < 0 ? TREND_LINES : at) + BREAK_BEYOND;
}

/** Trend, low and high part of a signal; their sum is the signal. */
export function partsOf(signal: Float64Array, breakAt: number): Parts {
  const N = signal.length;
  const { re, im } = linesOf(signal);
  const { cosine, sine } = turns(N);
  const back = (share: (k: number) => number): Float64Array => {
    const out = new Float64Array(N);
    for (let k = 0; k < re.length; k++) {
      const weight = share(k) * (k === 0 || 2 * k === N ? 1 / N : 2 / N);
      if (weight === 0) continue;
      for (let n = 0, m = 0; n < N; n++) {
        out[n]! += weight * (re[k]! * cosine[m]! - im[k]! * sine[m]!);
        m += k;
        if (m >= N) m -= N;
      }
    }
    return out;
  };
  const low = (k: number) => (k < TREND_LINES ? 0 : Math.min(1, Math.max(0, (breakAt + FADE - k) / (2 * FADE))));
  return {
    trend: back((k) => (k < TREND_LINES ? 1 : 0)),
    low: back(low),
    high: back((k) => (k < TREND_LINES ? 0 : 1 - low(k))),
  };
}

/** (|a| − |b|)/mean(|a| + |b|) at every point; 0 where both vanish throughout. */
function relativeDifference(a: Float64Array, b: Float64Array, factor: number): Float64Array {
  const mean = a.reduce((sum, x, n) => sum + Math.abs(x) + Math.abs(b[n]!), 0) / a.length;
  // What is left of a part by rounding alone is no part.
  return a.map((x, n) => (mean > 0 ? (Math.abs(x) - Math.abs(b[n]!)) / (factor * mean) : 0));
}

/** x[n + 1] − x[n − 1], one-sided at the ends: the measure divides by its mean, so that the step does not matter. */
function derivative(x: Float64Array): Float64Array {
  const last = x.length - 1;
  return x.map((_, n) => (x[Math.min(n + 1, last)]! - x[Math.max(n - 1, 0)]!) / (n === 0 || n === last ? 1 : 2));
}

/** Parts below this share of the signal's peak are rounding. */
const ROUNDING = 1e-9;

/**
 * ADM, FDM and GDM of two signals at the same instants, evenly spaced.
 *
 *     ADM = |α/β| + |χ/δ| e^{|χ/δ|},   α = |Lo₁| − |Lo₂|, β = mean(|Lo₁| + |Lo₂|), χ and δ the same of the trend
 *     FDM = 2 |F₁ + F₂ + F₃|,   F₁ = (|Lo₁′| − |Lo₂′|)/(2 mean), F₂ = (|Hi₁′| − |Hi₂′|)/(6 mean), F₃ = (|Hi₁″| − |Hi₂″|)/(7.2 mean)
 *     GDM = √(ADM² + FDM²)
 *
 * The break between low and high is the lower of the two signals' own.
 * @throws RangeError for fewer than 16 points or lists of different length
 */
export function featureSelective(a: Float64Array, b: Float64Array, component: string): FeatureSelective {
  if (a.length !== b.length || a.length < 16)
    throw new RangeError(
      `signals of ${a.length} and ${b.length} points; feature selective validation needs equally many, at least 16`,
    );
  const breakAt = Math.min(breakLine(a), breakLine(b));
  const peak = [a, b].reduce((most, x) => x.reduce((m, v) => Math.max(m, Math.abs(v)), most), 0);
  const clean = (part: Float64Array) => part.map((v) => (Math.abs(v) <= ROUNDING * peak ? 0 : v));
  const [one, two] = [a, b].map((signal) => {
    const { trend, low, high } = partsOf(signal, breakAt);
    return { trend: clean(trend), low: clean(low), high: clean(high) };
  }) as [Parts, Parts];
  const amplitude = relativeDifference(one.low, two.low, 1);
  const trend = relativeDifference(one.trend, two.trend, 1);
  const ADM = amplitude.map((x, n) => Math.abs(x) + Math.abs(trend[n]!) * exp(Math.abs(trend[n]!)));
  const F1 = relativeDifference(derivative(one.low), derivative(two.low), 2);
  const F2 = relativeDifference(derivative(one.high), derivative(two.high), 6);
  const F3 = relativeDifference(derivative(derivative(one.high)), derivative(derivative(two.high)), 7.2);
  const FDM = F1.map((x, n) => 2 * Math.abs(x + F2[n]! + F3[n]!));
  const GDM = ADM.map((x, n) => Math.sqrt(x * x + FDM[n]! * FDM[n]!));
  return { component, ADM: measureOf(ADM), FDM: measureOf(FDM), GDM: measureOf(GDM) };
}

/** GRADE and SPREAD count the grades that hold this share of the points. */
const HELD = 0.85;

/** Mean, grade and histogram of a measure's points. */
export function measureOf(points: Float64Array): Measure {
  const total = points.reduce((sum, x) => sum + x, 0) / points.length;
  const histogram = GRADES.map((grade) => points.filter((x) => gradeOf(x) === grade).length / points.length);
  let held = 0;
  const gradeCount = histogram.findIndex((share) => {
    held += share;
    return held >= HELD - 1e-12;
  });
  let low = histogram.indexOf(Math.max(...histogram));
  let high = low;
  let inside = histogram[low]!;
  while (inside < HELD - 1e-12) {
    const below = low > 0 ? histogram[low - 1]! : -1;
    const above = high < histogram.length - 1 ? histogram[high + 1]! : -1;
    inside += Math.max(below, above);
    if (below >= above) low--;
    else high++;
  }
  return { total, grade: gradeOf(total), histogram, gradeCount: gradeCount + 1, spread: high - low + 1 };
}
