import { cos, exp, expm1, log, log1p, sin } from '../elementary/elementary.ts';
import { faddeeva, scaledErfc } from '../elementary/faddeeva.ts';
import { heidler } from './heidler.ts';
import { orderOfJump } from './jump.ts';
import { phasorPulse } from './phasors.ts';
import { rampedSine } from './rampedSine.ts';
import { bisect, doubleUntil, largest } from './search.ts';
import { table } from './table.ts';
import type { Waveform, WaveformSpec } from './waveform.ts';

/**
 * The waveform of a specification in SI units. Everything but a Heidler pulse's charge is in closed form: derivatives by
 * recurrence, charge by the complex error function. Units of what it returns: see `Waveform`. Charge from t = 0 is accurate to rounding relative
 * to the largest charge, w and its derivatives relative to their own peaks.
 * @throws RangeError where the specification has no waveform: amplitude 0, sigma ≤ 0, beta ≤ alpha, a table that does not
 *   rise in time, or a number that is not finite
 */
export function makeWaveform(spec: WaveformSpec): Waveform {
  if (spec.type === 'heidler') return remembered(spec, heidler);
  if (spec.type === 'table') return remembered(spec, table);
  if (spec.type === 'phasors') return remembered(spec, phasorPulse);
  for (const [key, value] of Object.entries(spec))
    if (key !== 'type' && !Number.isFinite(value)) throw new RangeError(`${key} is ${value}; it must be finite.`);
  if (spec.amplitude === 0) throw new RangeError('amplitude is 0; a source needs a current.');
  if (spec.type === 'doubleExponential') return doubleExponential(spec);
  if (spec.type === 'rampedSine') return rampedSine(spec);
  if (!(spec.sigma > 0)) throw new RangeError(`sigma is ${spec.sigma} s; it must be above 0.`);
  if (spec.type === 'modulatedGaussian' && !(spec.frequency > 0))
    throw new RangeError(`frequency is ${spec.frequency} Hz; it must be above 0.`);
  if (spec.type === 'modulatedGaussian') return modulatedGaussian(spec);
  return spec.type === 'gaussian' ? gaussianOfOrder(spec, 0) : gaussianOfOrder(spec, 1);
}

/** Waveforms that cost a search or a system of equations: one scenario is read by many tasks of one worker. */
const known = new Map<string, Waveform>();
const MOST_KNOWN = 64;

function remembered<Spec extends WaveformSpec>(spec: Spec, make: (spec: Spec) => Waveform): Waveform {
  const key = JSON.stringify(spec);
  const old = known.get(key);
  if (old) return old;
  if (known.size === MOST_KNOWN) known.clear();
  const made = make(spec);
  known.set(key, made);
  return made;
}

type GaussianSpec = Extract<WaveformSpec, { type: 'gaussian' | 'gaussianDerivative' }>;
type ModulatedSpec = Extract<WaveformSpec, { type: 'modulatedGaussian' }>;
type DoubleExponentialSpec = Extract<WaveformSpec, { type: 'doubleExponential' }>;

/** Below this fraction of the peak a jump at t = 0 is one rounding of the peak. */
const ROUNDING = Number.EPSILON / 2;

/** Where e^(−u²/2) is 0 in double precision. */
const SPENT = 39;

/** e^(−u²/2) is below one rounding of its peak. */
const SPENT_TO_ROUNDING = 9;

/**
 * w = A (−1)^k √e^k He_k(u) e^(−u²/2), u = (t − delay)/sigma: a Gaussian (k = 0) or its derivative, −A√e u e^(−u²/2)
 * (k = 1). Derivatives: d/du He_n e^(−u²/2) = −He_{n+1} e^(−u²/2), with He_{n+1} = u He_n − n He_{n−1}.
 */
function gaussianOfOrder(spec: GaussianSpec, k: 0 | 1): Waveform {
  const { amplitude, delay, sigma } = spec;
  const rate = 1 / sigma;
  const gain = k === 0 ? amplitude : -amplitude * exp(0.5);
  const u0 = -delay / sigma;
  const bell0 = exp(-0.5 * u0 * u0);

  const charge = (t: number) => {
    if (t < 0) return 0;
    const u = (t - delay) / sigma;
    // k = 1: −∫u e^(−u²/2) du = e^(−u²/2)
    return k === 0 ? gain * sigma * bellIntegral(u0, u) : -gain * sigma * (exp(-0.5 * u * u) - bell0);
  };
  const value = (t: number) => {
    if (t < 0) return 0;
    const u = (t - delay) / sigma;
    const bell = gain * exp(-0.5 * u * u);
    return k === 0 ? bell : u * bell;
  };
  const slope = (t: number) => {
    if (t < 0) return 0;
    const u = (t - delay) / sigma;
    const bell = gain * rate * exp(-0.5 * u * u);
    return k === 0 ? -u * bell : (1 - u * u) * bell;
  };
  const at = (t: number, orders: number, out: Float64Array) => {
    if (t < 0) {
      out.fill(0, 0, orders + 1);
      return;
    }
    const u = (t - delay) / sigma;
    let factor = gain * exp(-0.5 * u * u);
    out[0] = charge(t);
    let he = k === 0 ? 1 : u;
    let below = k === 0 ? 0 : 1;
    for (let n = 0; n < orders; n++) {
      out[n + 1] = factor * he;
      const above = u * he - (n + k) * below;
      below = he;
      he = above;
      factor *= -rate;
    }
  };

  // The extremes of w are at u = 0 (k = 0) and u = ±1 (k = 1), if they come after t = 0.
  const peak = u0 <= k ? Math.abs(amplitude) : Math.abs(value(0));
  refuseSpent(peak);
  const jump = Math.abs(value(0)) / peak;
  return {
    spec,
    peak,
    at,
    charge,
    value,
    slope,
    kinks: u0 > 0 || jump > ROUNDING || bell0 > ROUNDING ? [0] : [],
    seams: [],
    jump,
    expectedOrder: orderOfJump(jump),
    lastActivity: lastSlope(slope, delay, sigma, 1 / 16),
    finalCharge: k === 0 ? gain * sigma * bellIntegral(u0, SPENT) : gain * sigma * bell0,
    // |ω W| ∝ x^(k+1) e^(−x²/2), x = ωσ, largest at x = √(k+1)
    highestFrequency: (level) => {
      const top = Math.sqrt(k + 1);
      return upperCrossing((x) => (k + 1) * log(x) - 0.5 * x * x, top, level) / (2 * Math.PI * sigma);
    },
    timeScale: sigma,
  };
}

/**
 * w = A e^(−u²/2) sin(Ωu), Ω = 2π·frequency·sigma: the imaginary part of A e^(−u²/2 + iΩu), whose n-th derivative in u is
 * A (−1)^n He_n(u − iΩ) e^(−u²/2 + iΩu).
 */
function modulatedGaussian(spec: ModulatedSpec): Waveform {
  const { amplitude, delay, sigma, frequency } = spec;
  const rate = 1 / sigma;
  const omega = 2 * Math.PI * frequency;
  const turns = omega * sigma;
  const u0 = -delay / sigma;
  const tail0 = modulatedTail(u0, turns);

  const charge = (t: number) => (t < 0 ? 0 : amplitude * sigma * (modulatedTail((t - delay) / sigma, turns) - tail0));
  const value = (t: number) => {
    if (t < 0) return 0;
    const u = (t - delay) / sigma;
    return amplitude * exp(-0.5 * u * u) * sin(omega * (t - delay));
  };
  const slope = (t: number) => {
    if (t < 0) return 0;
    const u = (t - delay) / sigma;
    const phase = omega * (t - delay);
    return amplitude * rate * exp(-0.5 * u * u) * (turns * cos(phase) - u * sin(phase));
  };
  const at = (t: number, orders: number, out: Float64Array) => {
    if (t < 0) {
      out.fill(0, 0, orders + 1);
      return;
    }
    const u = (t - delay) / sigma;
    let factor = amplitude * exp(-0.5 * u * u);
    const c = cos(omega * (t - delay));
    const s = sin(omega * (t - delay));
    out[0] = charge(t);
    let re = 1;
    let im = 0;
    let belowRe = 0;
    let belowIm = 0;
    for (let n = 0; n < orders; n++) {
      out[n + 1] = factor * (re * s + im * c);
      const aboveRe = u * re + turns * im - n * belowRe;
      const aboveIm = u * im - turns * re - n * belowIm;
      belowRe = re;
      belowIm = im;
      re = aboveRe;
      im = aboveIm;
      factor *= -rate;
    }
  };

  // |w| has one extreme in each half turn, where Ω cos(Ωu) = u sin(Ωu), and they fall away from the delay.
  const extreme = (half: number) => {
    const sign = half % 2 === 0 ? 1 : -1;
    const rising = (u: number) => sign * (turns * cos(turns * u) - u * sin(turns * u)) > 0;
    return bisect(rising, (half * Math.PI) / turns, ((half + 1) * Math.PI) / turns);
  };
  const half = Math.max(0, Math.floor((u0 * turns) / Math.PI));
  const peak = [u0, extreme(half), extreme(half + 1)]
    .filter((u) => u >= u0)
    .reduce((most, u) => Math.max(most, Math.abs(amplitude * exp(-0.5 * u * u) * sin(turns * u))), 0);
  refuseSpent(peak);
  const jump = Math.abs(value(0)) / peak;
  return {
    spec,
    peak,
    at,
    charge,
    value,
    slope,
    kinks: u0 > 0 || exp(-0.5 * u0 * u0) > ROUNDING ? [0] : [],
    seams: [],
    jump,
    expectedOrder: orderOfJump(jump),
    lastActivity: lastSlope(slope, delay, sigma, Math.min(1, (2 * Math.PI) / turns) / 16),
    finalCharge: -amplitude * sigma * tail0,
    // |ω W| ∝ x e^(−x²/2) sinh(Ωx), x = ωσ, largest where 1/x + Ω coth(Ωx) = x
    highestFrequency: (level) => {
      const logSpectrum = (x: number) => log(x) - 0.5 * (x - turns) * (x - turns) + log(-expm1(-2 * turns * x));
      const rising = (x: number) => 1 / x + (turns / -expm1(-2 * turns * x)) * (1 + exp(-2 * turns * x)) > x;
      const top = bisect(rising, 0, turns + 2);
      return upperCrossing(logSpectrum, top, level) / (2 * Math.PI * sigma);
    },
    timeScale: 1 / (rate + omega),
  };
}

/**
 * w = A k (e^(−αt) − e^(−βt)), k such that the peak, at t = log(β/α)/(β − α), is A. Its n-th derivative is
 * A k (−1)^n e^(−αt) [αⁿ − βⁿ − βⁿ (e^(−(β−α)t) − 1)], a form without cancellation when β is near α.
 */
function doubleExponential(spec: DoubleExponentialSpec): Waveform {
  const { amplitude, alpha, beta } = spec;
  if (!(alpha > 0 && beta > alpha))
    throw new RangeError(`alpha is ${alpha} 1/s and beta ${beta} 1/s; they must satisfy 0 < alpha < beta.`);
  const delta = beta - alpha;
  const peakTime = log1p(delta / alpha) / delta;
  const gain = amplitude / (-exp(-alpha * peakTime) * expm1(-delta * peakTime));

  const value = (t: number) => (t < 0 ? 0 : -gain * exp(-alpha * t) * expm1(-delta * t));
  const slope = (t: number) => (t < 0 ? 0 : gain * exp(-alpha * t) * (delta + beta * expm1(-delta * t)));
  // ∫w = A k [(1 − e^(−αt))/α − (1 − e^(−βt))/β]
  const charge = (t: number) =>
    t < 0 ? 0 : (gain / (alpha * beta)) * (alpha * exp(-alpha * t) * expm1(-delta * t) - delta * expm1(-alpha * t));
  const at = (t: number, orders: number, out: Float64Array) => {
    if (t < 0) {
      out.fill(0, 0, orders + 1);
      return;
    }
    const decay = expm1(-delta * t);
    let factor = gain * exp(-alpha * t);
    let difference = 0; // αⁿ − βⁿ
    let power = 1; // βⁿ
    out[0] = charge(t);
    for (let n = 0; n < orders; n++) {
      out[n + 1] = factor * (difference - power * decay);
      difference = alpha * difference - delta * power;
      power *= beta;
      factor = -factor;
    }
  };
  return {
    spec,
    peak: Math.abs(amplitude),
    at,
    charge,
    value,
    slope,
    kinks: [0],
    seams: [],
    jump: 0,
    expectedOrder: {
      order: 0.34,
      reason: 'the slope of a double exponential jumps at its onset, so its radiated field does',
    },
    // w′ falls from its peak at 0 through 0 at peakTime to its least value at 2 peakTime, then dies out.
    lastActivity: (level) => {
      const limit = level * Math.abs(slope(0));
      const active = (t: number) => Math.abs(slope(t)) >= limit;
      return active(2 * peakTime)
        ? bisect(
            active,
            2 * peakTime,
            doubleUntil((t) => !active(t), 2 * peakTime),
          )
        : bisect(active, 0, peakTime);
    },
    finalCharge: (gain / (alpha * beta)) * delta,
    // |ω W| ∝ ω/√((α² + ω²)(β² + ω²)), largest at ω² = αβ, where it is 1/(α + β); the larger root for `level` of it
    highestFrequency: (level) => {
      const sum = ((alpha + beta) / level) ** 2 - alpha * alpha - beta * beta;
      return Math.sqrt((sum + Math.sqrt(Math.max(0, sum * sum - 4 * (alpha * beta) ** 2))) / 2) / (2 * Math.PI);
    },
    timeScale: 1 / beta,
  };
}

function refuseSpent(peak: number): void {
  if (!(peak > 0)) throw new RangeError('the whole pulse lies before t = 0; raise its delay.');
}

/** ∫ₓ^∞ e^(−v²/2) dv for x ≥ 0. */
function bellTail(x: number): number {
  return x > SPENT ? 0 : Math.sqrt(Math.PI / 2) * exp(-0.5 * x * x) * scaledErfc(x * Math.SQRT1_2);
}

/** ∫ₐᵇ e^(−v²/2) dv for a ≤ b, without cancellation when both lie on the same side of 0. */
function bellIntegral(a: number, b: number): number {
  if (a >= 0) return bellTail(a) - bellTail(b);
  if (b <= 0) return bellTail(-b) - bellTail(-a);
  return Math.sqrt(2 * Math.PI) - bellTail(-a) - bellTail(b);
}

const faddeevaValue = new Float64Array(2);

/**
 * ∫ e^(−v²/2) sin(Ωv) dv from −∞ to u, even in u: √(π/2) e^(−u²/2) Im[e^(−iΩ|u|) w(iz)], z = (|u| + iΩ)/√2.
 */
function modulatedTail(u: number, turns: number): number {
  const x = Math.abs(u);
  if (x > SPENT) return 0;
  faddeeva(-turns * Math.SQRT1_2, x * Math.SQRT1_2, faddeevaValue);
  const imaginary = faddeevaValue[1]! * cos(turns * x) - faddeevaValue[0]! * sin(turns * x);
  return Math.sqrt(Math.PI / 2) * exp(-0.5 * x * x) * imaginary;
}

/**
 * The last instant at which |slope| of a Gaussian pulse is at least `level` of its peak, by steps back from where it is
 * surely spent.
 * @param step in units of sigma, a small part of the shortest oscillation
 */
function lastSlope(
  slope: (t: number) => number,
  delay: number,
  sigma: number,
  step: number,
): (level: number) => number {
  const size = (u: number) => Math.abs(slope(delay + u * sigma));
  const start = Math.max(-delay / sigma, -SPENT_TO_ROUNDING);
  let peak: number | undefined;
  return (level) => {
    peak ??= largest(size, start, Math.max(SPENT_TO_ROUNDING, start + 1), step);
    const limit = level * peak;
    // The factors beside e^(−u²/2) are at most u² times those at the peak: four sigma more make up for them.
    let u = Math.max(start, 0) + Math.sqrt(-2 * log(level)) + 4;
    while (u > start && size(u) < limit) u = Math.max(start, u - step);
    return delay + sigma * bisect((v) => size(v) >= limit, u, u + step);
  };
}

/** The x above `top`, where a falling log-spectrum has its peak, at which it is `level` of that peak. */
function upperCrossing(logSpectrum: (x: number) => number, top: number, level: number): number {
  const limit = logSpectrum(top) + log(level);
  const above = (x: number) => logSpectrum(x) >= limit;
  return bisect(
    above,
    top,
    doubleUntil((x) => !above(x), top),
  );
}
