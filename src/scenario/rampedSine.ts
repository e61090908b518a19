import { cos, sin } from '../elementary/elementary.ts';
import { bisect, largest } from './search.ts';
import type { Waveform, WaveformSpec } from './waveform.ts';

/** r(x) = 35x⁴ − 84x⁵ + 70x⁶ − 20x⁷ from 0 at x = 0 to 1 at x = 1, with three vanishing derivatives at both (smoothstep). */
const RAMP = [0, 0, 0, 0, 35, -84, 70, -20] as const;

/** Of a ramp, in periods: shorter ones make a pulse, not a sine. */
export const SHORTEST_RAMP = 1;

/**
 * w = A r(t) sin(2πft): a sine whose amplitude rises over `ramp` periods, stays for `hold` and falls over `ramp` again, so
 * that it is a pulse like any other, with a last instant. Charge is in closed form, ∫P e^(jωt) = e^(jωt) Σ (−1)^k
 * P^(k)/(jω)^(k+1).
 * @throws RangeError for a frequency that is not above 0, a ramp below one period, a hold below 0
 */
export function rampedSine(spec: Extract<WaveformSpec, { type: 'rampedSine' }>): Waveform {
  const { amplitude, frequency, ramp, hold } = spec;
  if (!(frequency > 0)) throw new RangeError(`frequency is ${frequency} Hz; it must be above 0.`);
  if (!(ramp >= SHORTEST_RAMP)) throw new RangeError(`ramp is ${ramp} periods; it must be at least ${SHORTEST_RAMP}.`);
  if (!(hold >= 0)) throw new RangeError(`hold is ${hold} periods; it must be 0 or more.`);
  const omega = 2 * Math.PI * frequency;
  const rise = ramp / frequency;
  const fall = (ramp + hold) / frequency;
  const end = (2 * ramp + hold) / frequency;
  const times = [0, rise, fall, end];

  /** Derivatives of r at t, in 1/s^k, the pieces continued beyond their bounds; `piece` 0 up, 1 level, 2 down. */
  const envelope = (piece: number, t: number, out: Float64Array) => {
    if (piece === 1) {
      out.fill(0);
      out[0] = 1;
      return;
    }
    const direction = piece === 0 ? 1 : -1;
    derivatives(piece === 0 ? t / rise : (end - t) / rise, out);
    let scale = 1;
    for (let k = 0; k < out.length; k++) {
      out[k]! *= scale;
      scale *= direction / rise;
    }
  };
  /** Im of e^(jωt) Σ (−1)^k r^(k)/(jω)^(k+1) on one piece */
  const antiderivative = (piece: number, t: number) => {
    envelope(piece, t, shape);
    let re = 0;
    let im = 0;
    let scale = 1 / omega;
    // (−1)^k/j^(k+1) is −j, 1, j, −1, … for k = 0, 1, 2, 3, …
    for (let k = 0; k < shape.length; k++) {
      const term = shape[k]! * scale;
      if (k % 4 === 0) im -= term;
      else if (k % 4 === 1) re += term;
      else if (k % 4 === 2) im += term;
      else re -= term;
      scale /= omega;
    }
    return im * cos(omega * t) + re * sin(omega * t);
  };
  const upTo = [0];
  for (let piece = 0; piece < 3; piece++)
    upTo.push(upTo[piece]! + antiderivative(piece, times[piece + 1]!) - antiderivative(piece, times[piece]!));

  const pieceOf = (t: number) => (t < rise ? 0 : t < fall ? 1 : 2);
  const charge = (t: number) => {
    if (t < 0) return 0;
    if (t >= end) return amplitude * upTo[3]!;
    const piece = pieceOf(t);
    return amplitude * (upTo[piece]! + antiderivative(piece, t) - antiderivative(piece, times[piece]!));
  };
  const at = (t: number, orders: number, out: Float64Array) => {
    out.fill(0, 0, orders + 1);
    if (t < 0) return;
    out[0] = charge(t);
    if (t >= end) return;
    envelope(pieceOf(t), t, shape);
    const [c, s] = [cos(omega * t), sin(omega * t)];
    // Leibniz's rule with (sin)^(m) = ω^m (s, c, −s, −c)
    for (let n = 0; n < orders; n++) {
      let sum = 0;
      let binomial = 1;
      for (let k = 0; k <= n; k++) {
        const m = n - k;
        const turned = m % 4 === 0 ? s : m % 4 === 1 ? c : m % 4 === 2 ? -s : -c;
        sum += binomial * shape[k]! * turned * powerOf(omega, m);
        binomial = (binomial * (n - k)) / (k + 1);
      }
      out[n + 1] = amplitude * sum;
    }
  };
  const two = new Float64Array(3);
  const value = (t: number) => {
    at(t, 1, two);
    return two[1]!;
  };
  const slope = (t: number) => {
    at(t, 2, two);
    return two[2]!;
  };
  const step = 1 / (16 * frequency);
  const peak = largest((t) => Math.abs(value(t)), 0, Math.min(end, fall + 1 / frequency), step);
  let steepest: number | undefined;
  return {
    spec,
    peak,
    at,
    charge,
    value,
    slope,
    kinks: times.filter((t, m) => t !== times[m - 1]),
    seams: [],
    jump: 0,
    expectedOrder: { order: 2, reason: 'smooth to the fourth derivative' },
    lastActivity: (level) => {
      steepest ??= largest((t) => Math.abs(slope(t)), 0, end, step);
      const active = (t: number) => Math.abs(slope(t)) >= level * steepest!;
      let t = end;
      while (t > 0 && !active(t)) t -= step / 8;
      return bisect(active, t, t + step / 8);
    },
    finalCharge: amplitude * upTo[3]!,
    highestFrequency: (level) => highest(ramp, hold, level) * frequency,
    timeScale: 1 / omega,
  };
}

const shape = new Float64Array(RAMP.length);

/** x^m, m a small whole number */
function powerOf(x: number, m: number): number {
  let power = 1;
  for (let k = 0; k < m; k++) power *= x;
  return power;
}

/** r and its derivatives at x, by Horner's rule for each; beyond ½ from r(x) = 1 − r(1 − x), where nothing cancels. */
function derivatives(x: number, out: Float64Array): void {
  const beyond = x > 0.5;
  const y = beyond ? 1 - x : x;
  for (let k = 0; k < out.length; k++) {
    let sum = 0;
    for (let n = RAMP.length - 1; n >= k; n--) {
      let falling = 1;
      for (let j = 0; j < k; j++) falling *= n - j;
      sum = sum * y + falling * RAMP[n]!;
    }
    out[k] = beyond ? (k === 0 ? 1 : 0) + (k % 2 === 0 ? -sum : sum) : sum;
  }
}

/**
 * The last frequency, in units of the carrier's, at which |ωW| is `level` of its peak. W is the sum of the envelope's lines
 * beside ±1, its derivative's transform being two bells of one ramp each; steps of a sixth of its narrowest line.
 */
function highest(ramp: number, hold: number, level: number): number {
  const size = (f: number) => {
    // W ∝ R(f − 1) − conj-like R(f + 1); both relative to the middle of the pulse, where r is even.
    const odd = (2 * ramp + hold) * Math.PI;
    const below = bells(f - 1, ramp, hold);
    const above = bells(f + 1, ramp, hold);
    // sin has the phase odd at the middle: W = (R(f − 1) e^(j odd) − R(f + 1) e^(−j odd))/2j
    const re = cos(odd) * (below - above);
    const im = sin(odd) * (below + above);
    return f * Math.sqrt(re * re + im * im);
  };
  const step = 1 / (6 * (2 * ramp + hold));
  // The peak is within a line of the carrier. Beyond, lines fall with the fifth power of their distance in ramps.
  const limit = level * largest(size, Math.max(step, 1 - 1 / ramp), 1 + 1 / ramp, step);
  let last = 1;
  for (let f = 1; f - last < 8 / ramp; f += step) if (size(f) >= limit) last = f;
  return bisect((f) => size(f) >= limit, last, last + step);
}

/** ∫ r e^(−2πjfx) dx about the middle of the pulse, in periods of the carrier: real, r being even. */
function bells(f: number, ramp: number, hold: number): number {
  const half = hold / 2;
  // Gauss's rule on pieces of at most a quarter of a turn.
  let sum = f === 0 ? half : sin(2 * Math.PI * f * half) / (2 * Math.PI * f);
  const pieces = Math.max(2, Math.ceil(4 * Math.abs(f) * ramp));
  for (let m = 0; m < pieces; m++)
    for (let g = 0; g < 3; g++) {
      const x = (m + NODES[g]!) / pieces;
      derivatives(1 - x, one);
      sum += (ramp / pieces) * WEIGHTS[g]! * one[0]! * cos(2 * Math.PI * f * (half + x * ramp));
    }
  return 2 * sum;
}

const one = new Float64Array(1);
/** Gauss's 3-point rule on [0, 1] */
const NODES = [(1 - Math.sqrt(0.6)) / 2, 0.5, (1 + Math.sqrt(0.6)) / 2];
const WEIGHTS = [5 / 18, 8 / 18, 5 / 18];
