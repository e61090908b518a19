import { atan2, cos, exp, log, pow, sin } from '../elementary/elementary.ts';
import { ChargeTable } from './chargeTable.ts';
import { bisect, doubleUntil, largest } from './search.ts';
import type { HeidlerTerm, Waveform, WaveformSpec } from './waveform.ts';

/**
 * Published pulses, for nominal peaks that `amplitude` scales. IEC 61000-4-2:2008 (contact discharge at 4 kV, first peak
 * 15 A) and IEC 62305-1:2010 (10/350 µs first positive stroke, protection level I, 200 kA), constants from memory; η of
 * the latter, which the standard rounds to 0.93, follows from the others.
 */
export const HEIDLER_PRESETS = {
  'iec61000-4-2': {
    amplitude: 15,
    terms: [
      { amplitude: 16.6, tau1: 1.1e-9, tau2: 2e-9, n: 1.8 },
      { amplitude: 9.3, tau1: 12e-9, tau2: 37e-9, n: 1.8 },
    ],
  },
  'iec62305-first': { amplitude: 200e3, terms: [{ amplitude: 200e3, tau1: 19e-6, tau2: 485e-6, n: 10 }] },
} as const satisfies Record<string, { amplitude: number; terms: readonly HeidlerTerm[] }>;

/** Range of n: below 1 the slope is infinite at t = 0, above 100 the front is a step. */
export const HEIDLER_EXPONENTS = { least: 1, most: 100 } as const;

/** e^(−t/tau2) is below one rounding of its start. */
const SPENT = 42;

/** Where charge starts to be counted, in units of the least tau1: before it there is less than a rounding of it. */
const START = 2 ** -30;

const ORDERS = 5;

/** Bounds of tau1/tau2 and tau2/tau1: beyond them a pulse has no peak to speak of, or a scale that no window spans. */
const MOST_RISE = 30;
const MOST_TAIL = 1e6;

/**
 * A sum of terms (amplitude/η) xⁿ/(1 + xⁿ) e^(−t/tau2), x = t/tau1, η = exp(−(tau1/tau2)(n tau2/tau1)^(1/n)), which makes
 * the peak of a slow term its amplitude. F. Heidler, "Analytische Blitzstromfunktion zur LEMP-Berechnung", 18th ICLP,
 * 1985 (from memory). Charge has no closed form: it is a table of Chebyshev polynomials, right to rounding.
 * @throws RangeError for a term with amplitude 0 or that is not finite, tau1 or tau2 not above 0, n out of range
 */
export function heidler(spec: Extract<WaveformSpec, { type: 'heidler' }>): Waveform {
  const { terms } = spec;
  if (terms.length === 0) throw new RangeError('terms is empty; a pulse needs at least one.');
  for (const { amplitude, tau1, tau2, n } of terms) {
    const { least, most } = HEIDLER_EXPONENTS;
    if (!(Number.isFinite(amplitude) && amplitude !== 0))
      throw new RangeError(`amplitude is ${amplitude} A; it must be finite and not 0.`);
    if (!(tau1 > 0 && tau2 > 0 && Number.isFinite(tau1 + tau2)))
      throw new RangeError(`tau1 is ${tau1} s and tau2 ${tau2} s; both must be above 0.`);
    if (!(tau1 <= MOST_RISE * tau2 && tau2 <= MOST_TAIL * tau1))
      throw new RangeError(
        `tau1 is ${tau1} s and tau2 ${tau2} s; tau1 must be at most ${MOST_RISE} tau2, and tau2 at most ${MOST_TAIL} tau1.`,
      );
    if (!(n >= least && n <= most)) throw new RangeError(`n is ${n}; it must be from ${least} to ${most}.`);
  }
  const fastest = Math.min(...terms.map(({ tau1 }) => tau1));
  const slowest = Math.max(...terms.map(({ tau2 }) => tau2));
  const end = SPENT * slowest;
  const gains = terms.map(({ amplitude, tau1, tau2, n }) => amplitude / normal(tau1, tau2, n));

  const series = new Float64Array(ORDERS);
  const sum = new Float64Array(ORDERS);
  /** Taylor coefficients of w at t > 0, up to t^(count−1), in `sum` */
  const expand = (t: number, count: number) => {
    sum.fill(0, 0, count);
    terms.forEach((term, m) => {
      termSeries(term, t, count, series);
      for (let k = 0; k < count; k++) sum[k]! += gains[m]! * series[k]!;
    });
  };
  const value = (t: number) => {
    if (!(t > 0)) return 0;
    expand(t, 1);
    return sum[0]!;
  };
  const slope = (t: number) => {
    if (!(t > 0)) return atOnset(t, 2);
    expand(t, 2);
    return sum[1]!;
  };
  /** The limits at t = 0: t^n has a slope there for n = 1 alone, and its higher derivatives are left out. */
  const atOnset = (t: number, order: number) =>
    t === 0 && order === 2 ? terms.reduce((s, { tau1, n }, m) => s + (n === 1 ? gains[m]! / tau1 : 0), 0) : 0;

  const table = new ChargeTable(value, START * fastest, end);
  const charge = (t: number) => (t > 0 ? table.at(t) : 0);

  // Peaks are searched for in log t, where every term is as wide as its exponents make it.
  const steps = 0.02;
  const from = log(fastest) - 8;
  const peak = largest((y) => Math.abs(value(exp(y))), from, log(end), steps);
  const steepest = Math.max(
    Math.abs(slope(0)),
    largest((y) => Math.abs(slope(exp(y))), from, log(end), steps),
  );
  const least = Math.min(...terms.map(({ n }) => n));
  const frequencies = new Map<number, number>();

  return {
    spec,
    peak,
    charge,
    value,
    slope,
    at(t, orders, out) {
      out.fill(0, 0, orders + 1);
      if (t < 0) return;
      out[0] = charge(t);
      if (t === 0) {
        if (orders > 1) out[2] = slope(0);
        return;
      }
      expand(t, orders);
      let factorial = 1;
      for (let k = 0; k < orders; k++) {
        out[k + 1] = factorial * sum[k]!;
        factorial *= k + 1;
      }
    },
    kinks: [0],
    seams: [],
    jump: 0,
    expectedOrder: orderOfOnset(least),
    lastActivity: (level) => {
      const active = (t: number) => Math.abs(slope(t)) >= level * steepest;
      let t = doubleUntil((x) => !active(x), end);
      while (!active(t)) t /= 1.01;
      return bisect(active, t, 1.01 * t);
    },
    finalCharge: table.total,
    highestFrequency: (level) => {
      const found = frequencies.get(level) ?? highest(terms, gains, 1 / slowest, level);
      frequencies.set(level, found);
      return found;
    },
    timeScale: peak / steepest,
  };
}

/** η */
const normal = (tau1: number, tau2: number, n: number) => exp(-(tau1 / tau2) * pow((n * tau2) / tau1, 1 / n));

/** w rises as tⁿ: its radiated field, t^(n−1), has smoothness n − ½ in L2, and a second-order grid the order 2k/3 of it. */
function orderOfOnset(n: number): Waveform['expectedOrder'] {
  const order = Math.min(2, Number(((2 * (n - 0.5)) / 3).toFixed(2)));
  return order === 2
    ? { order, reason: 'smooth enough' }
    : { order, reason: `the current starts as t^${n}, so its radiated field starts with a kink` };
}

/** Taylor coefficients of xⁿ/(1 + xⁿ) e^(−t/tau2) at t > 0, by the rules for powers, quotients and products of series. */
function termSeries({ tau1, tau2, n }: HeidlerTerm, t: number, count: number, out: Float64Array): void {
  const x = t / tau1;
  const late = x > 1;
  // Late, 1/(1 + x^(−n)): neither form overflows.
  power[0] = pow(x, late ? -n : n);
  for (let k = 1; k < count; k++) power[k] = (power[k - 1]! * ((late ? -n : n) - k + 1)) / (k * t);
  const below = 1 + power[0]!;
  for (let k = 0; k < count; k++) {
    let numerator = late ? (k === 0 ? 1 : 0) : power[k]!;
    for (let j = 1; j <= k; j++) numerator -= power[j]! * front[k - j]!;
    front[k] = numerator / below;
  }
  decay[0] = exp(-t / tau2);
  for (let k = 1; k < count; k++) decay[k] = -decay[k - 1]! / (k * tau2);
  for (let k = 0; k < count; k++) {
    let product = 0;
    for (let j = 0; j <= k; j++) product += front[j]! * decay[k - j]!;
    out[k] = product;
  }
}

const power = new Float64Array(ORDERS);
const front = new Float64Array(ORDERS);
const decay = new Float64Array(ORDERS);

/** Steps upwards in frequency, as a ratio; and how far below the level the search ends. */
const RATIO = 1.2;
const BELOW = 0.1;

/** The last frequency, Hz, at which |ωW| is `level` of its peak, by steps from below every corner upwards. */
function highest(terms: readonly HeidlerTerm[], gains: readonly number[], lowest: number, level: number): number {
  const size = (omega: number) => {
    let re = 0;
    let im = 0;
    terms.forEach((term, m) => {
      transform(term, omega, spectrum);
      re += gains[m]! * spectrum[0]!;
      im += gains[m]! * spectrum[1]!;
    });
    return omega * Math.sqrt(re * re + im * im);
  };
  let most = 0;
  let last = lowest;
  for (let omega = lowest; ; omega *= RATIO) {
    const here = size(omega);
    most = Math.max(most, here);
    if (here >= level * most) last = omega;
    if (here < BELOW * level * most) break;
  }
  return bisectCoarsely((omega) => size(omega) >= level * most, last, RATIO * last) / (2 * Math.PI);
}

/** As `bisect`, to a relative 1e-9: |ωW| is not known better. */
function bisectCoarsely(holds: (x: number) => boolean, yes: number, no: number): number {
  let [inside, outside] = [yes, no];
  while (outside - inside > 1e-9 * inside) {
    const middle = (inside + outside) / 2;
    if (holds(middle)) inside = middle;
    else outside = middle;
  }
  return inside;
}

/** Gauss's 8-point rule on [0, 1] (Abramowitz & Stegun 25.4.29, from memory; the tests compare spectra). */
const GAUSS_NODES = [
  0.01985507175123188, 0.10166676129318664, 0.2372337950418355, 0.40828267875217511, 0.5917173212478249,
  0.7627662049581645, 0.89833323870681336, 0.9801449282487682,
];
const GAUSS_WEIGHTS = [
  0.05061426814518813, 0.11119051722668724, 0.1568533229389436, 0.181341891689181, 0.181341891689181,
  0.1568533229389436, 0.11119051722668724, 0.05061426814518813,
];

/** Beyond this x all poles of xⁿ/(1 + xⁿ), which lie on |x| = 1, are passed. */
const PASSED = 2.5;

/**
 * ∫₀^∞ xⁿ/(1 + xⁿ) e^(−pt) dt, p = 1/tau2 + jω, for gain 1: along the real axis past the poles, then along the direction
 * in which e^(−pt) falls without oscillating.
 */
function transform({ tau1, tau2, n }: HeidlerTerm, omega: number, out: Float64Array): void {
  const rate = 1 / tau2;
  const turn = PASSED * tau1;
  out.fill(0);
  let a = 0;
  let b = turn * 2 ** -12;
  while (a < turn) {
    for (let m = 0; m < GAUSS_NODES.length; m++) {
      const t = a + (b - a) * GAUSS_NODES[m]!;
      const x = pow(t / tau1, n);
      const f = ((b - a) * GAUSS_WEIGHTS[m]! * exp(-rate * t) * x) / (1 + x);
      out[0]! += f * cos(omega * t);
      out[1]! -= f * sin(omega * t);
    }
    // Panels double from the onset, where tⁿ is not smooth, up to a part of a turn and of the width of the front.
    [a, b] = [b, Math.min(turn, b + Math.min(b, 2 / omega, turn / (8 + n)))];
  }
  // t = turn + u/p: e^(−p turn)/p ∫ e^(−u) f du
  const square = rate * rate + omega * omega;
  const start = exp(-rate * turn) / square;
  const [cosine, sine] = [cos(omega * turn), sin(omega * turn)];
  const gainRe = start * (rate * cosine - omega * sine);
  const gainIm = -start * (rate * sine + omega * cosine);
  const step = Math.min(1, Math.sqrt(square) * turn);
  a = 0;
  b = step / (8 + n);
  let re = 0;
  let im = 0;
  while (a < SPENT) {
    for (let m = 0; m < GAUSS_NODES.length; m++) {
      const u = a + (b - a) * GAUSS_NODES[m]!;
      const x = (turn + (u * rate) / square) / tau1;
      const y = (-u * omega) / square / tau1;
      // 1/(1 + z), z = (x + jy)^(−n)
      const size = exp(-0.5 * n * log(x * x + y * y));
      const angle = -n * atan2(y, x);
      const below = 1 + size * cos(angle);
      const across = size * sin(angle);
      const f = ((b - a) * GAUSS_WEIGHTS[m]! * exp(-u)) / (below * below + across * across);
      re += f * below;
      im -= f * across;
    }
    [a, b] = [b, Math.min(SPENT, b + Math.min(Math.max(b, step / (8 + n)), 2))];
  }
  out[0]! += gainRe * re - gainIm * im;
  out[1]! += gainRe * im + gainIm * re;
}

const spectrum = new Float64Array(2);
